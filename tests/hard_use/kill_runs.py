"""Kill processes at random moments while they write run folders; what is left must be whole or absent.

    python tests/hard_use/kill_runs.py --count 200

Every child writes one folder after the other, new ones and, with force, one that exists; the parent sends it
SIGKILL. Then every folder under its own name is read through, and must be whole. The folder that is replaced
may be absent only while the old one stands whole beside it under its hidden name.
"""

from __future__ import annotations

import argparse
import json
import os
import random
import signal
import tempfile
import time
import xml.etree.ElementTree as ET
import zipfile
from pathlib import Path

import numpy as np

import cupfem
from cupfem.exchange import write_run

ROOT = Path(__file__).parents[2]
FILES = {
    "cup.toml",
    "serving.toml",
    "run.npz",
    "series.csv",
    "summary.json",
    "timings.json",
    "versions.json",
    "fields.pvd",
    "fields",
}
LONGEST = 0.4
"""Longest time [s] before a child is killed: a few folders."""


def small_run():
    cup = cupfem.load_cup(ROOT / "geometries" / "double_wall.toml")
    return cupfem.pour(cup, cupfem.Serving(duration="30 s"), fineness=0.5, companion=False)


def flaws(folder):
    """What is not whole in a run folder, line by line."""
    missing = FILES - {file.name for file in folder.iterdir()}
    if missing:
        return [f"{folder.name}: no {name}" for name in sorted(missing)]
    try:
        for name in ("summary.json", "timings.json", "versions.json"):
            json.loads((folder / name).read_text(encoding="utf-8"))
        listed = [entry.attrib["file"] for entry in ET.parse(folder / "fields.pvd").iter("DataSet")]
        for name in listed:
            ET.parse(folder / name)
        if not zipfile.is_zipfile(folder / "run.npz"):
            return [f"{folder.name}: run.npz cut short"]
        run = cupfem.load_run(folder)
    except (OSError, ValueError, ET.ParseError, cupfem.InputError) as error:
        return [f"{folder.name}: {type(error).__name__}: {error}"]
    rows = (folder / "series.csv").read_text(encoding="utf-8").splitlines()
    if len(rows) != len(run.time) + 1 or len(listed) != len(run.snapshots):
        return [f"{folder.name}: series or fields cut short"]
    return [] if np.isfinite(run.snapshots).all() else [f"{folder.name}: field with holes"]


def write_on(run, parent):
    """What a child does until it is killed."""
    os.chdir(parent)
    while True:
        write_run(run, name="pour-cup")
        write_run(run, "again", force=True)


def kill_one(run, parent, delay):
    child = os.fork()
    if child == 0:
        try:
            write_on(run, parent)
        finally:
            os._exit(1)
    time.sleep(delay)
    if os.waitpid(child, os.WNOHANG) != (0, 0):
        raise SystemExit("a child ended by itself")
    os.kill(child, signal.SIGKILL)
    os.waitpid(child, 0)


def check(parent):
    """Flaws of what stands under its own name; the folder to be replaced may stand aside, whole."""
    found = [line for folder in sorted(parent.glob("[!.]*")) for line in flaws(folder)]
    old = [folder for folder in parent.glob(".again-old-*") if any(folder.iterdir())]
    if not (parent / "again").exists():
        found += [line for folder in old for line in flaws(folder)] if old else ["again: lost"]
    return found


def main(count, seed):
    run, choose = small_run(), random.Random(seed)
    whole = hidden = gone = 0
    for _ in range(count):
        with tempfile.TemporaryDirectory() as name:
            parent = Path(name)
            write_run(run, parent / "again")
            kill_one(run, parent, choose.uniform(0.0, LONGEST))
            found = check(parent)
            if found:
                raise SystemExit("\n".join(found))
            whole += len(list(parent.glob("[!.]*")))
            hidden += len(list(parent.glob(".*")))
            gone += not (parent / "again").exists()
    print(f"{count} kills: {whole} folders, all whole; {hidden} hidden ones left; {gone} times put aside")


if __name__ == "__main__":
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("--count", type=int, default=200)
    parser.add_argument("--seed", type=int, default=1)
    given = parser.parse_args()
    main(given.count, given.seed)
