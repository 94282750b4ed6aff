"""Kill a plan at random moments with SIGKILL, run it again, and look for what was lost, doubled or redone.

python tests/hard_use/kill_plans.py --count 20
"""

import argparse
import csv
import os
import random
import signal
import sqlite3
import subprocess
import sys
import tempfile
import time
from collections import Counter
from pathlib import Path

HERE = Path(__file__).parent
ROOT = HERE.parents[1]
CASES = 80
SECONDS = 0.01
"""How long a case takes; two workers take at least CASES * SECONDS / 2."""

JOB = f"""
import sys
import vary_functions
from cupfem.vary import FunctionModel, Plan, vary, write_csv
if __name__ == "__main__":
    plan = Plan.from_data({{"vary": [{{"key": "x", "list": list(range({CASES}))}}]}})
    model = FunctionModel(vary_functions.logged, ("x",))
    outcome = vary(plan, model=model, workers=2, store=sys.argv[1])
    write_csv(outcome, sys.argv[2])
"""


class Attempt:
    """A plan of CASES cases in a folder of its own, killed and run again."""

    def __init__(self, folder: Path) -> None:
        self.log, self.store, self.table = folder / "log", folder / "cases.sqlite", folder / "cases.csv"
        self.script = folder / "job.py"
        self.script.write_text(JOB, encoding="utf-8")
        self.stored: list[set[str]] = []
        self.called: list[int] = []

    def start(self) -> subprocess.Popen:
        """Start the plan in a process group of its own."""
        path = os.pathsep.join([str(ROOT), str(HERE.parent)])
        surroundings = os.environ | {
            "PYTHONPATH": path, "VARY_LOG": str(self.log), "VARY_SECONDS": str(SECONDS),
        }  # fmt: skip
        command = [sys.executable, str(self.script), str(self.store), str(self.table)]
        return subprocess.Popen(command, env=surroundings, start_new_session=True, stderr=subprocess.DEVNULL)

    def kill_after(self, seconds: float) -> None:
        """Start it, and kill the starting process some time after the first case ran."""
        process = self.start()
        self.wait_for_calls(1 + len(self.calls()))
        time.sleep(seconds)
        process.send_signal(signal.SIGKILL)
        process.wait()
        self.wait_for_no_process()
        self.stored.append(set(self.keys()))
        self.called.append(len(self.calls()))

    def finish(self) -> None:
        """Run it to its end."""
        assert self.start().wait(timeout=120) == 0

    def faults(self) -> list[str]:
        """What went wrong, one line each."""
        rows, calls = self.rows(), Counter(self.calls())
        told = []
        if [row["case"] for row in rows] != [str(number) for number in range(1, CASES + 1)]:
            told.append(f"{len(rows)} rows, or not in order")
        told += [f"wrong row {row}" for row in rows if float(row["square"]) != float(row["x"]) ** 2]
        told += [f"case {x} never ran" for x in map(str, range(CASES)) if not calls[x]]
        for number, keys in enumerate(self.stored):
            later = Counter(self.calls()[self.called[number] :])
            told += [f"x = {x} was stored, yet ran again" for x in later if x in keys]
        return told

    def rows(self) -> list[dict[str, str]]:
        """Rows of the table."""
        with self.table.open(encoding="utf-8", newline="") as file:
            return list(csv.DictReader(file))

    def calls(self) -> list[str]:
        """x of each call that was begun, in order."""
        return self.log.read_text().split() if self.log.exists() else []

    def keys(self) -> list[str]:
        """x of each case in the store."""
        if not self.store.exists():
            return []
        with sqlite3.connect(self.store) as file:
            figures = [row[0] for row in file.execute("select figures from results")]
        file.close()
        return [str(round(float(text.split(":")[1].rstrip("} ")) ** 0.5)) for text in figures]

    def wait_for_calls(self, count: int) -> None:
        """Wait until so many calls were begun."""
        end = time.monotonic() + 60.0
        while len(self.calls()) < min(count, CASES) and time.monotonic() < end:
            time.sleep(0.002)

    def wait_for_no_process(self) -> None:
        """Wait until the workers have noticed that their starter is gone."""
        end = time.monotonic() + 10.0
        while self.processes_left() and time.monotonic() < end:
            time.sleep(0.01)
        if self.processes_left():
            raise RuntimeError(f"still there: {self.processes_left()}")

    def processes_left(self) -> list[str]:
        """Processes of this attempt that still run: those whose environment names its log."""
        mark = f"VARY_LOG={self.log}".encode()
        found = []
        for folder in Path("/proc").glob("[0-9]*"):
            if folder.name == str(os.getpid()):
                continue
            try:
                named = mark in (folder / "environ").read_bytes()
            except OSError:  # it has ended, or is another user's
                continue
            if named:
                found.append(folder.name)
        return found


def main() -> int:
    """Kill and resume as often as asked, at moments drawn from a seed."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--count", type=int, default=20)
    parser.add_argument("--seed", type=int, default=1)
    given = parser.parse_args()
    moments = random.Random(given.seed)
    bad = 0
    for number in range(given.count):
        with tempfile.TemporaryDirectory() as folder:
            attempt = Attempt(Path(folder))
            moment = moments.uniform(0.0, 0.4)
            attempt.kill_after(moment)
            attempt.finish()
            faults = attempt.faults()
            twice = len(attempt.calls()) - CASES
            kept = len(attempt.stored[0])
            print(f"{number + 1:3} killed {moment:.3f} s after the first case: {kept} of {CASES} kept, "
                  f"{twice} under way were run again, {len(faults)} faults", flush=True)  # fmt: skip
            for fault in faults:
                print("    ", fault)
            bad += bool(faults)
    print(f"{given.count - bad} of {given.count} without fault")
    return 1 if bad else 0


if __name__ == "__main__":
    sys.exit(main())
