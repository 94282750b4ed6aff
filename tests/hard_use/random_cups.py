"""Mesh many random cups and read many broken ones: `python tests/hard_use/random_cups.py --count 2000`.

Prints how often each key was drawn, the ranges, and every cup that fails with its seed.
"""

from __future__ import annotations

import argparse
import sys
from collections import Counter
from importlib import import_module
from pathlib import Path

import numpy as np

from cupfem.cup import Cup
from cupfem.errors import InputError
from cupfem.inputs import toml
from cupfem.meridian import build as build_meridian
from cupfem.mesh import build

sys.path.insert(0, str(Path(__file__).parents[1]))
cups, tests = import_module("drawn_cups"), import_module("test_geometry_random")


def meshed(count: int) -> tuple[Counter[str], dict[str, list[float]], list[str]]:
    """Keys drawn, values drawn, and what failed."""
    keys: Counter[str] = Counter()
    values: dict[str, list[float]] = {}
    failed = []
    for seed in range(count):
        drawing = cups.valid(seed)
        keys.update(drawing.keys)
        for key, drawn in drawing.drawn.items():
            values.setdefault(key, []).extend(drawn)
        try:
            cup = Cup.from_text(toml.write(drawing.data))
            tests.check_mesh(cup, build(build_meridian(cup)), np.random.default_rng(seed))
        except (AssertionError, InputError, ValueError, IndexError) as error:
            failed.append(
                f"seed {seed}: {type(error).__name__} {str(error).splitlines()[0] if str(error) else ''}"
            )
    return keys, values, failed


def refused(count: int) -> list[str]:
    """Broken cups that were not refused in one line."""
    failed = []
    for seed in range(count):
        fault, data = cups.broken(seed)
        try:
            Cup.from_text(toml.write(data))
            failed.append(f"seed {seed}: {fault} was accepted")
        except InputError as error:
            if "\n" in str(error) or len(str(error)) >= 400:
                failed.append(f"seed {seed}: {fault}: {error}")
        except (AssertionError, ValueError, IndexError, KeyError, TypeError, AttributeError) as error:
            failed.append(f"seed {seed}: {fault}: {type(error).__name__} {error}")
    return failed


def main() -> int:
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--count", type=int, default=2000)
    count = parser.parse_args().count
    keys, values, failed = meshed(count)
    for key, number in sorted(keys.items()):
        print(f"{number:6d}  {key}")
    for key, drawn in sorted(values.items()):
        print(f"{key:28s} {min(drawn):10.4g} to {max(drawn):10.4g}")
    wrong = refused(count)
    print(f"{count} valid cups, {len(failed)} failed")
    print(f"{count} broken ones of {len(cups.FAULTS)} kinds, {len(wrong)} not refused")
    print("\n".join([*failed, *wrong]))
    return bool(failed or wrong)


if __name__ == "__main__":
    sys.exit(main())
