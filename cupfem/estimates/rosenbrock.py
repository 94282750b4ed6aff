"""Time integration of a small stiff system M y' = f(t, y) with banded matrices.

RODAS: six stages, order 4(3), stiffly accurate, L-stable, linearly implicit (one factorisation per step, no
iteration), with a continuous extension of order 3. E. Hairer and G. Wanner, Solving Ordinary Differential
Equations II, 2nd ed. 1996, sec. IV.7, and their code RODAS, method 1.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property
from typing import NamedTuple, Protocol

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.linalg import lapack

from cupfem.errors import ConvergenceError

Floats = NDArray[np.float64]

GAMMA = 0.25
STAGE_TIMES = (0.0, 0.386, 0.21, 0.63, 1.0, 1.0)
TIME_SLOPES = (0.25, -0.1043, 0.1035, -0.0362, 0.0, 0.0)
A = (
    (),
    (1.544,),
    (0.9466785280815826, 0.2557011698983284),
    (3.314825187068521, 2.896124015972201, 0.9986419139977817),
    (1.221224509226641, 6.019134481288629, 12.53708332932087, -0.6878860361058950),
    (1.221224509226641, 6.019134481288629, 12.53708332932087, -0.6878860361058950, 1.0),
)
C = (
    (),
    (-5.6688,),
    (-2.430093356833875, -0.2063599157091915),
    (-0.1073529058151375, -9.594562251023355, -20.47028614809616),
    (7.496443313967647, -10.24680431464352, -33.99990352819905, 11.70890893206160),
    (8.083246795921522, -7.981132988064893, -31.52159432874371, 16.31930543123136, -6.058818238834054),
)
DENSE = (
    (10.12623508344586, -7.487995877610167, -34.80091861555747, -7.992771707568823, 1.025137723295662, 0.0),
    (-0.6762803392301253, 6.087714651680015, 16.43084320892478, 24.76722511418386, -6.594389125716872, 0.0),
)
_A = [np.array(row) for row in A]
_C = [np.array(row) for row in C]
_DENSE = np.array(DENSE)

SAFETY, SHRINK, GROW = 0.9, 0.2, 6.0
FIRST_SHARE = 1e-6  # of the interval, the first step
SHORTEST_SHARE = 1e-13  # of the interval, a step that cannot go on


class System(Protocol):
    """M y' = f(t, y); matrices of half-bandwidth `band` in LAPACK's layout [2 band + 1, n]."""

    band: int
    mass: Floats  # [n, n]
    banded_mass: Floats  # [2 band + 1, n]

    def rates(self, time: float, state: Floats) -> Floats:
        """f(t, y)."""
        ...

    def slopes(self, time: float, state: Floats) -> Floats:
        """df/dy, banded."""
        ...

    def time_slopes(self, time: float, state: Floats) -> Floats | None:
        """df/dt; None where f does not depend on the time."""
        ...


class Step(NamedTuple):
    """An accepted step: its start and length [s], and four coefficients of its polynomial [4, n]."""

    start: float
    length: float
    coefficients: Floats


@dataclass(frozen=True)
class Path:
    """The state as a function of time, piecewise cubic over the steps."""

    steps: tuple[Step, ...]

    @property
    def end(self) -> float:
        """Last time [s]."""
        return self.steps[-1].start + self.steps[-1].length

    @property
    def last(self) -> Floats:
        """State at the end [n]."""
        return np.asarray(self.steps[-1].coefficients[1])

    @property
    def nodes(self) -> Floats:
        """Ends of the steps [s]."""
        return np.array([*(step.start for step in self.steps), self.end])

    def __call__(self, times: ArrayLike) -> Floats:
        """State [..., n] at times [s] within the steps."""
        given = np.asarray(times, dtype=float)
        starts, lengths, coefficients = self._table
        place = np.clip(np.searchsorted(starts, given, side="right") - 1, 0, len(starts) - 1)
        share = ((given - starts[place]) / lengths[place])[..., None]
        y, end, second, third = np.moveaxis(coefficients[place], -2, 0)
        rest = 1.0 - share
        return np.asarray(rest * y + share * (end + rest * (second + share * third)))

    @cached_property
    def _table(self) -> tuple[Floats, Floats, Floats]:
        """Starts, lengths and coefficients [step, 4, n] of all steps."""
        starts, lengths, coefficients = zip(*self.steps, strict=True)
        return np.array(starts), np.array(lengths), np.array(coefficients)


def joined(paths: Sequence[Path]) -> Path:
    """One path after the other."""
    return Path(tuple(step for path in paths for step in path.steps))


def integrate(system: System, state: Floats, start: float, end: float, tolerance: float) -> Path:
    """Integrate from a state at `start` [s] to `end` [s], local error of any entry below the tolerance.

    Raises ConvergenceError where the step length vanishes.
    """
    time, length = start, FIRST_SHARE * (end - start)
    steps: list[Step] = []
    while time < end:
        left = end - time
        if left < 2.0 * length:
            length = left if left <= length else 0.5 * left  # so that no sliver remains
        coefficients, reached, error = step(system, time, state, length)
        size = float(np.max(np.abs(error))) / tolerance
        if size <= 1.0:
            steps.append(Step(time, length, coefficients))
            time, state = (end if length == left else time + length), reached
        factor = SAFETY * max(size, 1e-8) ** -0.25 if np.isfinite(size) else SHRINK
        length *= min(GROW, max(SHRINK, factor))
        if length < SHORTEST_SHARE * (end - start):
            raise ConvergenceError(f"the estimate cannot go on at {time:.4g} s")
    return Path(tuple(steps))


def step(system: System, time: float, state: Floats, length: float) -> tuple[Floats, Floats, Floats]:
    """One step: coefficients of its polynomial [4, n], the state at its end, and the error estimate."""
    factor = _factorised(system, time, state, length)
    time_slope = system.time_slopes(time, state)
    stages = np.zeros((6, len(state)))
    at = state
    for n in range(6):
        if n:
            at = state + _A[n] @ stages[:n]
        right = system.rates(time + STAGE_TIMES[n] * length, at)
        if n:
            right = right + system.mass @ (_C[n] @ stages[:n]) / length
        if time_slope is not None and TIME_SLOPES[n]:
            right = right + (TIME_SLOPES[n] * length) * time_slope
        stages[n] = lapack.dgbtrs(factor[0], system.band, system.band, right, factor[1])[0]
    reached = at + stages[5]
    return np.stack([state, reached, *(_DENSE @ stages)]), reached, stages[5]


def _factorised(system: System, time: float, state: Floats, length: float) -> tuple[Floats, NDArray[np.int_]]:
    """LU of M / (gamma h) - df/dy."""
    band = system.band
    matrix = np.zeros((3 * band + 1, len(state)))
    matrix[band:] = system.banded_mass / (GAMMA * length) - system.slopes(time, state)
    factor, pivots, info = lapack.dgbtrf(matrix, band, band)
    if info:
        raise ConvergenceError(f"the matrix of the estimate is singular at {time:.4g} s")
    return factor, pivots
