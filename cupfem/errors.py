"""Errors in one line: what, its value with the unit, why it cannot be used, what to write instead."""

from __future__ import annotations

import difflib
import json
from collections.abc import Iterable

LONGEST_VALUE = 60  # characters of a value that are shown; a longer one is cut


class CupfemError(Exception):
    """Base of every error that cupfem raises on purpose; its text is one line."""

    def __init__(self, text: str) -> None:
        super().__init__(" ".join(text.split()))


class InputError(CupfemError):
    """Input that cannot be used (exit status 2).

    The text is ``what: value: why; instead``. `instead` is a clause with its own verb (``use "pour"``);
    one that starts with a quotation mark gets "write" before it.
    """

    def __init__(self, what: str, value: object = None, why: str = "", instead: str = "") -> None:
        self.what, self.value, self.why, self.instead = what, value, why.strip(), instead.strip()
        if self.instead.startswith('"'):
            self.instead = f"write {self.instead}"
        shown = "" if value is None else _shown(value)
        body = "; ".join(part for part in (self.why, self.instead) if part)
        super().__init__(": ".join(part for part in (what, shown, body) if part))


class ConvergenceError(CupfemError):
    """The march cannot go on (exit status 3); the text says where: time, step and worst place."""


def nearest(name: str, choices: Iterable[str]) -> str:
    """Return ``' Did you mean "x"?'`` for the choice most like `name`, or an empty string."""
    by_lower_case = {choice.lower(): choice for choice in choices}
    close = difflib.get_close_matches(name.lower(), by_lower_case, n=1)
    return f' Did you mean "{by_lower_case[close[0]]}"?' if close else ""


def _shown(value: object) -> str:
    text = json.dumps(value, ensure_ascii=False) if isinstance(value, str) else str(value)
    return text if len(text) <= LONGEST_VALUE else text[: LONGEST_VALUE - 3] + "..."
