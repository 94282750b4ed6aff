"""Debian's Chromium, driven through two pipes: no driver, no port, no network.

Chromium speaks its debugging protocol over the file descriptors 3 and 4, one JSON text for each message,
ended by a zero byte (option ``--remote-debugging-pipe``; https://chromedevtools.github.io/devtools-protocol/).
"""

from __future__ import annotations

import base64
import json
import os
import select
import shutil
import subprocess
import sys
import time
from pathlib import Path
from typing import Any

NAMES = ("chromium", "chromium-browser", "google-chrome")
OPTIONS = (
    "--headless=new",
    "--no-sandbox",
    "--disable-gpu",
    "--disable-dev-shm-usage",
    "--disable-background-networking",
    "--disable-component-update",
    "--disable-sync",
    "--no-first-run",
    "--hide-scrollbars",
    "--remote-debugging-pipe",
)
PIPES = """
import fcntl, os, sys
high = [fcntl.fcntl(int(pipe), fcntl.F_DUPFD, 10) for pipe in sys.argv[1:3]]
os.dup2(high[0], 3)
os.dup2(high[1], 4)
os.execv(sys.argv[3], sys.argv[3:])
"""
"""Puts the two pipes at 3 and 4, whatever their numbers were, and becomes the browser."""
PATIENCE = 60.0
"""Longest wait for an answer [s]: a loaded machine starts a browser slowly."""


def chromium() -> str | None:
    """Path of the browser, if there is one."""
    return next((path for name in NAMES if (path := shutil.which(name))), None)


class Browser:
    """One page in a browser of its own; use it in a ``with`` statement."""

    def __init__(self, profile: Path):
        self.profile = profile
        self.events: list[dict[str, Any]] = []
        self.number = 0
        self.session: str | None = None
        self.rest = b""

    def __enter__(self) -> Browser:
        path = chromium()
        assert path is not None
        there, self.write = os.pipe()
        self.read, back = os.pipe()
        start = [sys.executable, "-c", PIPES, str(there), str(back), path]
        options = [*OPTIONS, f"--user-data-dir={self.profile}", "about:blank"]
        self.process = subprocess.Popen([*start, *options], pass_fds=(there, back), stderr=subprocess.DEVNULL)
        os.close(there)
        os.close(back)
        target = self.ask("Target.createTarget", url="about:blank")["targetId"]
        self.session = self.ask("Target.attachToTarget", targetId=target, flatten=True)["sessionId"]
        for domain in ("Page", "Runtime", "Network", "Log"):
            self.ask(f"{domain}.enable")
        return self

    def __exit__(self, *_: object) -> None:
        self.process.terminate()
        self.process.wait(PATIENCE)
        os.close(self.read)
        os.close(self.write)

    def ask(self, method: str, **given: Any) -> dict[str, Any]:
        """Call a method of the protocol; events that arrive meanwhile are kept."""
        self.number += 1
        message = {"id": self.number, "method": method, "params": given}
        if self.session is not None:
            message["sessionId"] = self.session
        os.write(self.write, json.dumps(message).encode() + b"\0")
        while True:
            answer = self._next()
            if answer.get("id") == self.number:
                assert "error" not in answer, answer
                result: dict[str, Any] = answer["result"]
                return result
            self.events.append(answer)

    def wait_for(self, method: str) -> None:
        """Until an event has arrived."""
        while all(event.get("method") != method for event in self.events):
            self.events.append(self._next())

    def _next(self) -> dict[str, Any]:
        ends = time.monotonic() + PATIENCE
        while b"\0" not in self.rest:
            ready, _, _ = select.select([self.read], [], [], max(0.0, ends - time.monotonic()))
            assert ready, "the browser does not answer"
            part = os.read(self.read, 1 << 20)
            assert part, "the browser has ended"
            self.rest += part
        text, _, self.rest = self.rest.partition(b"\0")
        message: dict[str, Any] = json.loads(text)
        return message

    def size(self, width: int, height: int, scale: float = 1.0) -> None:
        """Set the size of the page [CSS pixels]."""
        mobile = width < 600
        self.ask(
            "Emulation.setDeviceMetricsOverride",
            width=width,
            height=height,
            deviceScaleFactor=scale,
            mobile=mobile,
        )

    def open(self, path: Path) -> None:
        """Load a file and wait until all of it is there."""
        self.events.clear()
        self.ask("Page.navigate", url=path.resolve().as_uri())
        self.wait_for("Page.loadEventFired")

    def value(self, script: str) -> Any:
        """What a script gives."""
        answer = self.ask("Runtime.evaluate", expression=script, returnByValue=True)
        assert "exceptionDetails" not in answer, answer
        return answer["result"].get("value")

    def press(self, key: str, code: int) -> None:
        """Press a key, as a person does."""
        for kind in ("rawKeyDown", "keyUp"):
            self.ask("Input.dispatchKeyEvent", type=kind, key=key, code=key, windowsVirtualKeyCode=code)

    def picture(self, whole: bool = False) -> bytes:
        """The page as PNG: what is seen, or the whole of it."""
        answer = self.ask("Page.captureScreenshot", format="png", captureBeyondViewport=whole)
        return base64.b64decode(answer["data"])

    def pdf(self, width: float, height: float) -> bytes:
        """The page as it prints on paper of a size [inches]."""
        answer = self.ask("Page.printToPDF", paperWidth=width, paperHeight=height, printBackground=True)
        return base64.b64decode(answer["data"])

    def requests(self) -> list[str]:
        """Addresses that the page asked for, without those inside it."""
        sent = [
            event["params"] for event in self.events if event.get("method") == "Network.requestWillBeSent"
        ]
        return [each["request"]["url"] for each in sent if not each["request"]["url"].startswith("data:")]

    def complaints(self) -> list[str]:
        """Errors and warnings of the page and of its scripts."""
        told = [
            event
            for event in self.events
            if event.get("method") in ("Log.entryAdded", "Runtime.exceptionThrown")
        ]
        said = [
            event
            for event in self.events
            if event.get("method") == "Runtime.consoleAPICalled"
            and event["params"]["type"] in ("error", "warning")
        ]
        return [json.dumps(event["params"]) for event in told + said]
