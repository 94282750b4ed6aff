"""The tube job by cupfem against the plain scikit-fem + SuperLU script, both in this process on one thread.

python tests/benchmarks/tube_ratio.py            the ratio, and the shares of cupfem's march
python tests/benchmarks/tube_ratio.py --profile  cupfem's march by function
"""

from __future__ import annotations

import argparse
import cProfile
import os
import pstats
import statistics
import sys
import time
from pathlib import Path

for name in ("OPENBLAS_NUM_THREADS", "OMP_NUM_THREADS", "MKL_NUM_THREADS"):
    os.environ[name] = "1"
sys.path[:0] = [str(Path(__file__).parents[1]), str(Path(__file__).parent)]

import numpy as np  # noqa: E402
import plain_tube  # noqa: E402
from tube_job import CUP, SERVING, errors, outside, tube_run  # noqa: E402

import cupfem  # noqa: E402
from cupfem.films import FluxFunction  # noqa: E402
from cupfem.linear import Pattern  # noqa: E402
from cupfem.march import March  # noqa: E402
from cupfem.problem import build  # noqa: E402


def march_seconds(fineness: float = 1.0, tolerance: float = 5e-3) -> tuple[float, March, Pattern]:
    """Wall time of the march alone, the march, and its matrix pattern."""
    cup, serving = cupfem.Cup.from_text(CUP), cupfem.Serving.from_text(SERVING)
    problem = build(cup, serving, fineness, {"outside": FluxFunction(outside)})
    problem.enter(0.0)
    march = March(problem.system, tolerance)
    start = time.perf_counter()
    for _ in march.run(problem.start, 0.0, serving.duration):
        pass
    return time.perf_counter() - start, march, problem.system.sections[0].conduction.pattern


def solver_seconds(march: March, pattern: Pattern) -> float:
    """Time that the march's factor and solve calls take by themselves."""
    operator = march.system.sections[0].conduction
    data = operator.mass.data + operator.stiffness.data
    right = np.ones(pattern.size)
    start = time.perf_counter()
    for _ in range(march.counters.factorisations):
        factor = pattern.factor(data)
        factor.solve(np.ones((pattern.size, 7)))
    for _ in range(march.counters.iterations + march.counters.steps):
        factor.solve(right)
    return time.perf_counter() - start


def main() -> None:
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--profile", action="store_true")
    if parser.parse_args().profile:
        profile = cProfile.Profile()
        profile.runcall(march_seconds)
        pstats.Stats(profile).sort_stats("tottime").print_stats(25)
        return
    worst = np.abs(errors(tube_run())).max()
    runs = [march_seconds() for _ in range(5)]
    ours = statistics.median(seconds for seconds, _, _ in runs)
    _, march, pattern = runs[-1]
    solver = statistics.median(solver_seconds(march, pattern) for _ in range(5))
    plain = plain_tube.run()
    print(f"cupfem: {pattern.size} unknowns, {march.counters}, largest error {worst:.4f} K")
    share = ours / solver
    print(f"march {ours:.3f} s (median of 5), its factor and solve calls alone {solver:.3f} s: {share:.1f}x")
    seconds, error = plain["total_s"], plain["largest_error_K"]
    print(f"plain script: {plain['unknowns']} unknowns, {seconds:.2f} s, error {error:.3f} K")
    print(f"ratio plain / cupfem: {seconds / ours:.0f}")


if __name__ == "__main__":
    main()
