"""What a plan costs beside its cases: parallel efficiency, and the overhead of a case over a lone pour.

    python tests/benchmarks/plan_efficiency.py --cases 400

A grid over pitch, height and crest of rings under a shell (cup invented here), each poured for two minutes on
a coarse mesh. Reported are

- the parallel efficiency: wall time of one worker over workers times wall time of all, start included;
- the busy share: time that the workers spent in cases, over workers times wall time. Others who use the same
  cores lengthen both alike, so it says what the engine wastes even on a machine that is shared;
- the overhead of a case in processor time, which others do not change: that of the starting process per case,
  and that of a case in a worker beyond a lone `cupfem.pour()` of the same cup, warm.
"""

import argparse
import os

os.environ["OPENBLAS_NUM_THREADS"] = "1"  # as in the workers, before numpy is imported

import statistics
import tempfile
import time
from pathlib import Path

import cupfem
from cupfem.vary import Plan, vary
from cupfem.vary.cases import cup_model
from cupfem.vary.recorded import pour_case
from cupfem.vary.store import Store

CUP = """
title = "Single-wall board cup with a shell over rings"
[cup]
height = "95 mm"
inner_top_diameter = "78 mm"
inner_foot_diameter = "55 mm"
[[layer]]
name = "board"
material = "cupstock board"
thickness = "0.33 mm"
[[layer]]
name = "hollow"
material = "air"
[layer.ridge]
height = "1 mm"
crest_width = "1.5 mm"
flank_angle = "30 deg"
first = "40 mm"
pitch = "8 mm"
count = 5
[[layer]]
name = "shell"
material = "cupstock board"
thickness = "0.25 mm"
[base]
material = "cupstock board"
thickness = "0.35 mm"
recess = "8 mm"
"""
RIDGE = "layer.hollow.ridge"


def plan_of(cases: int) -> Plan:
    """About so many cases: pitch by height by crest."""
    heights = max(cases // 40, 1)
    steps = [("pitch", "6 mm", "9 mm", 8), ("crest_width", "1 mm", "2 mm", 5)]
    varied = [
        {"key": f"{RIDGE}.{key}", "from": low, "to": high, "count": count} for key, low, high, count in steps
    ]
    listed = [f"{0.5 + 0.1 * number:.1f} mm" for number in range(heights)]
    return Plan.from_data(
        {
            "cup": "cup.toml",
            "serving": "serving.toml",
            "fineness": 0.5,
            "record": ["outer_max_degC", "drink_end_degC", "board_mass_g"],
            "vary": [*varied, {"key": f"{RIDGE}.height", "list": listed}],
        }
    )


def timed(plan: Plan, folder: Path, workers: int) -> tuple[float, float, float, int]:
    """Wall time, time in cases, processor time of the starter, and the number of cases that failed."""
    store = folder / f"{workers}.sqlite"
    spent, start = time.process_time(), time.perf_counter()
    outcome = vary(plan, folder=folder, workers=workers, store=store)
    wall, spent = time.perf_counter() - start, time.process_time() - spent
    with Store(store) as kept:
        in_cases = sum(kept[row.key].seconds for row in outcome.rows if row.key in kept)
    return wall, in_cases, spent, len(outcome.errors)


def beyond_a_pour(plan: Plan, folder: Path, count: int) -> tuple[float, float]:
    """Processor time of a lone pour of the base case, and how much more a case takes in a worker [s]."""
    job = cup_model(plan, folder, pour_case).case({}).payload
    cup, serving = cupfem.Cup.from_data(job.cup), cupfem.Serving.from_data(job.serving)
    cupfem.pour(cup, serving, fineness=job.fineness, companion=False)
    pours, cases = [], []
    for _ in range(count):
        start = time.process_time()
        cupfem.pour(cup, serving, fineness=job.fineness, companion=False)
        middle = time.process_time()
        pour_case(job)
        pours.append(middle - start)
        cases.append(time.process_time() - middle)
    return statistics.median(pours), statistics.median(cases) - statistics.median(pours)


def main() -> None:
    """Measure and print."""
    parser = argparse.ArgumentParser(description=__doc__.partition("\n")[0])
    parser.add_argument("--cases", type=int, default=400)
    parser.add_argument("--workers", type=int, default=2)
    given = parser.parse_args()
    plan = plan_of(given.cases)
    with tempfile.TemporaryDirectory() as place:
        folder = Path(place)
        (folder / "cup.toml").write_text(CUP, encoding="utf-8")
        (folder / "serving.toml").write_text('duration = "2 min"\n', encoding="utf-8")
        alone, more = beyond_a_pour(plan, folder, 10)
        print(f"load before: {os.getloadavg()[0]:.2f}")
        many, in_cases, spent, failed = timed(plan, folder, given.workers)
        print(f"{given.workers} workers: {many:.1f} s, {failed} cases failed; load {os.getloadavg()[0]:.2f}")
        print(f"busy share {in_cases / (given.workers * many):.3f}")
        starter = spent / given.cases
        print(f"lone pour {1e3 * alone:.0f} ms; beyond it {1e3 * more:.1f} ms in the worker")
        print(f"and {1e3 * starter:.1f} ms in the starter: {(more + starter) / alone:.1%}", flush=True)
        one, *_ = timed(plan, folder, 1)
        print(f"1 worker: {one:.1f} s; load {os.getloadavg()[0]:.2f}")
        print(f"parallel efficiency {one / (given.workers * many):.3f}")


if __name__ == "__main__":
    main()
