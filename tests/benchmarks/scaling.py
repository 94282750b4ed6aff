"""Cost per step and memory against the number of unknowns, on the tube job refined along the wall.

python tests/benchmarks/scaling.py --most 100000     cost per step, its exponent, and peak memory per unknown
python tests/benchmarks/scaling.py --solver          the march against its own factor and solve calls

The nodes across the wall stay as they are; only the cells along it grow. Each size runs in a process of its
own, so that the peak of its memory is its own. One thread.
"""

from __future__ import annotations

import os

os.environ["OPENBLAS_NUM_THREADS"] = "1"
os.environ["OMP_NUM_THREADS"] = "1"
os.environ["MKL_NUM_THREADS"] = "1"

import argparse
import json
import resource
import subprocess
import sys
import time
from pathlib import Path

sys.path[:0] = [str(Path(__file__).parents[1]), str(Path(__file__).parent)]

import numpy as np  # noqa: E402
from tube_job import CUP, SERVING, outside  # noqa: E402

import cupfem  # noqa: E402
from cupfem import problem as problems  # noqa: E402
from cupfem.films import FluxFunction  # noqa: E402
from cupfem.march import March  # noqa: E402
from cupfem.mesh import build as build_mesh  # noqa: E402

TIME = 20.0
"""Marched time [s]: start-up and a few longer steps."""
SIZES = (2_400, 10_000, 30_000, 100_000, 300_000, 1_000_000)


def refined(unknowns: int) -> problems.Problem:
    """The tube job with about so many unknowns, all refinement along the wall."""
    cup, serving = cupfem.Cup.from_text(CUP), cupfem.Serving.from_text(SERVING)
    plain = build_mesh

    def along(meridian: object, fineness: float) -> object:
        across = len(np.unique(np.round(plain(meridian, fineness).wall_coordinates[1], 9)))
        cells = max(2, round((unknowns / across - 1) / 2))
        return plain(meridian, fineness, stations=np.linspace(0.0, cup.height, cells + 1))

    problems.build_mesh = along
    return problems.build(cup, serving, 1.0, {"outside": FluxFunction(outside)})


def measured(unknowns: int) -> dict[str, float]:
    """Seconds and calls of a short march, and bytes per unknown beyond what an empty process holds."""
    before = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss
    problem = refined(unknowns)
    problem.enter(0.0)
    march = March(problem.system)
    begun = time.process_time()
    for _ in march.run(problem.start, 0.0, TIME):
        pass
    seconds = time.process_time() - begun
    peak = 1024.0 * (resource.getrusage(resource.RUSAGE_SELF).ru_maxrss - before)
    steps = march.counters.steps + march.counters.rejected
    solver = solver_seconds(problem, march)
    size = problem.mesh.size
    return {
        "unknowns": size, "step_s": seconds / steps, "steps": steps,
        "bytes_per_unknown": peak / size, "march_over_solver": seconds / solver,
    }  # fmt: skip


def solver_seconds(problem: problems.Problem, march: March) -> float:
    """Time of the march's factor and solve calls by themselves [s]."""
    conduction = problem.system.sections[0].conduction
    data, right = conduction.mass.data + conduction.stiffness.data, np.ones(problem.mesh.size)
    begun = time.process_time()
    for _ in range(march.counters.factorisations):
        factor = conduction.pattern.factor(data)
        factor.solve(np.ones((problem.mesh.size, 2)))
    for _ in range(march.counters.iterations + march.counters.steps):
        factor.solve(right)
    return time.process_time() - begun


def main() -> None:
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("--most", type=int, default=100_000)
    parser.add_argument("--solver", action="store_true")
    parser.add_argument("--one", type=int)
    given = parser.parse_args()
    if given.one is not None:
        print(json.dumps(measured(given.one)))
        return
    sizes = (2_400, 50_000) if given.solver else [size for size in SIZES if size <= given.most]
    rows = []
    for size in sizes:
        command = [sys.executable, __file__, "--one", str(size)]
        rows.append(json.loads(subprocess.run(command, check=True, capture_output=True, text=True).stdout))
        row = rows[-1]
        step, memory = 1e3 * row["step_s"], row["bytes_per_unknown"]
        print(f"{row['unknowns']:9.0f} unknowns: {step:9.2f} ms a step, {memory:6.0f} bytes each at peak, "
              f"march {row['march_over_solver']:.2f} times its factor and solve calls",
              flush=True)  # fmt: skip
    large = [row for row in rows if row["unknowns"] > 5_000]
    if len(large) > 1:
        logs = np.log([[row["unknowns"], row["step_s"]] for row in large])
        print(f"exponent of the cost of a step above 5,000 unknowns: {np.polyfit(*logs.T, 1)[0]:.2f}")


if __name__ == "__main__":
    main()
