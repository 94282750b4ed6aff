"""Count how often a much finer run lies within the stated error of a headline figure, and how large that is.

    python tests/hard_use/error_bars.py --count 40 --seed 1

Cases are shipped and random cups and servings (random_files.py), each poured as a user does and again with
twice the fineness and a tenth of the tolerance. Wanted: 95 % within, and a stated error at most 5 times the
true one in the median.
"""

from __future__ import annotations

import argparse
import random
import sys
import warnings
from collections.abc import Iterator
from pathlib import Path
from statistics import median

HERE = Path(__file__).parent
sys.path[:0] = [str(HERE), str(HERE.parent)]

import random_files  # noqa: E402

import cupfem  # noqa: E402
from cupfem.pour.job import TOLERANCE  # noqa: E402

FINER, TIGHTER = 2.0, 0.1


def cases(seed: int) -> Iterator[tuple[int, cupfem.Run, cupfem.Run]]:
    """Number of a case, its run, and the much finer one; a case that is refused is passed over."""
    number = 0
    while True:
        number += 1
        cup, serving = random_files.draw_whole(random.Random(f"bars/{seed}/{number}"))
        try:
            given = cupfem.Cup.from_text(cup), cupfem.Serving.from_text(serving)
            run = cupfem.pour(*given, hold=False)
            options = {"fineness": FINER, "tolerance": TIGHTER * TOLERANCE}
            yield number, run, cupfem.pour(*given, companion=False, hold=False, **options)
        except cupfem.CupfemError:
            continue


def compared(run: cupfem.Run, finer: cupfem.Run) -> dict[str, tuple[float, float]]:
    """Stated and true error of each figure that both runs have [K or s]."""
    told, reference = run.figures(), finer.figures()
    return {
        key: (bar, abs(told[key] - reference[key]))
        for key, bar in run.error_bars().items()
        if reference[key] is not None
    }


def main() -> int:
    """1 where one of the two bounds is not met."""
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("--count", type=int, default=40)
    parser.add_argument("--seed", type=int, default=1)
    given = parser.parse_args()
    within, ratios, total = 0, [], 0
    for done, (number, run, finer) in enumerate(cases(given.seed), 1):
        for key, (bar, true) in compared(run, finer).items():
            total += 1
            within += true <= bar
            ratios.append(bar / true if true > 0.0 else (1.0 if bar == 0.0 else float("inf")))
            if true > bar:
                print(f"case {number}: {key} = {run.figures()[key]:.6g} +- {bar:.2g}, off by {true:.2g}")
        print(
            f"{done} cases, {within} of {total} figures within, median ratio {median(ratios):.1f}", flush=True
        )
        if done == given.count:
            break
    return int(within < 0.95 * total or median(ratios) > 5.0)


if __name__ == "__main__":
    warnings.simplefilter("ignore")
    sys.exit(main())
