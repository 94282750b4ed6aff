"""The tube job: a hot drink in an invented three-layer tube, against a separate program with fourth-order
elements.

The case and the reference figures, good to about .003 K, stand in `tests/benchmarks/plain_tube.py`.
"""

import numpy as np
import pytest
from benchmarks import plain_tube as given
from verification.compare import within
from verification.tube import steps, tube


@pytest.fixture(scope="module")
def found():
    """Time -> outer face at the three heights, drink [degC]; by dense output."""
    job, start = tube()
    mesh = job.sections[0].conduction.mesh
    outer = np.unique(mesh.edge("outside"))
    outer = outer[np.argsort(mesh.points[1, outer])]
    times, out = list(given.REFERENCE), {}
    for step in steps(job, start):
        while times and times[0] <= step.end + 1e-9:
            time = times.pop(0)
            state = step.at(time)
            wall = np.interp(given.PROBE_HEIGHTS, mesh.points[1, outer], job.wall(state)[outer])
            out[time] = [*wall, job.lumped(state).temperature]
    return out


@pytest.mark.parametrize("time", list(given.REFERENCE))
def test_temperatures(found, time):
    """Allowed .03 K; .05 K in the first ten seconds, while the outer face warms by kelvins per second."""
    within(f"tube at {time:g} s", found[time], given.REFERENCE[time], 0.05 if time <= 10.0 else 0.03)
