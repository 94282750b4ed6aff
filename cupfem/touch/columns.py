"""Many one-dimensional columns of conduction at once, from the drink to the core of the hand.

Finite volumes around the nodes (Patankar, Numerical Heat Transfer and Fluid Flow, 1980, ch. 4): half of each
cell's heat capacity goes to each of its nodes, and links between nodes are exact for steady conduction. All
columns together are one symmetric tridiagonal matrix with zeros where a column ends, which LAPACK eliminates
in one call (`dpttrf`, `dpttrs`).

In time the two-stage L-stable SDIRK method of order two (R. Alexander, SIAM J. Numer. Anal. 14 (1977)
1006-1021, Theorem 5) with fixed steps that grow with the time since touching.

Array shapes: c columns, n nodes, t times.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.linalg import lapack

Floats = NDArray[np.float64]

GAMMA = 1.0 - np.sqrt(0.5)
FIRST_STEP = 1e-3
"""First step after touching [s]."""
STEP_SHARE = 0.06
"""Length of a step as a share of the time since touching; a tenth of the error of an order-one scheme is then
0.01 K."""
LONGEST_STEP = 10.0
"""Longest step [s]: drink and room change little meanwhile."""


@dataclass(eq=False)
class Columns:
    """Columns of nodes with films at both ends, per area of a reference face or per radian and metre.

    Attributes
    ----------
    capacity:
        `[c, n]` heat capacity of the nodes.
    link:
        `[c, n - 1]` conductance between neighbours.
    sink:
        `[c, n]` conductance from the nodes to `core` (perfusion).
    core:
        Temperature that the sinks lead to [degC].
    """

    capacity: Floats
    link: Floats
    sink: Floats
    core: float

    def steady(self, first: tuple[Floats, Floats], last: tuple[Floats, Floats]) -> Floats:
        """Steady temperatures `[c, n]` [degC] between films (conductance `[c]`, surroundings `[c]`)."""
        step = _Step(self, np.zeros_like(self.capacity), 1.0, first[0], last[0])
        return step.solve(self.load(first, last))

    def load(self, first: tuple[Floats, Floats], last: tuple[Floats, Floats]) -> Floats:
        """What films and sinks bring in `[c, n]` at zero temperature."""
        out = self.sink * self.core
        out[:, 0] += first[0] * first[1]
        out[:, -1] += last[0] * last[1]
        return out

    def advance(
        self,
        temperature: Floats,
        step: float,
        first: tuple[Floats, Floats, Floats],
        last: tuple[Floats, Floats, Floats],
    ) -> Floats:
        """Temperatures `[c, n]` after a step [s].

        Films are (conductance, surroundings at gamma x step, surroundings at its end), each `[c]`.
        """
        weight = GAMMA * step
        matrix = _Step(self, self.capacity, weight, first[0], last[0])
        early = self.load((first[0], first[1]), (last[0], last[1]))
        late = self.load((first[0], first[2]), (last[0], last[2]))
        stage = matrix.solve(self.capacity * temperature + weight * early)
        base = temperature + (1.0 - GAMMA) / GAMMA * (stage - temperature)
        return matrix.solve(self.capacity * base + weight * late)


class _Step:
    """C + w K, factorised for all columns."""

    def __init__(self, columns: Columns, capacity: Floats, weight: float, first: Floats, last: Floats):
        diagonal = capacity + weight * columns.sink
        diagonal[:, :-1] += weight * columns.link
        diagonal[:, 1:] += weight * columns.link
        diagonal[:, 0] += weight * first
        diagonal[:, -1] += weight * last
        beside = np.zeros_like(diagonal)
        beside[:, :-1] = -weight * columns.link
        self._diagonal, self._beside, _ = lapack.dpttrf(diagonal.ravel(), beside.ravel()[:-1])

    def solve(self, right: Floats) -> Floats:
        solution, _ = lapack.dpttrs(self._diagonal, self._beside, right.ravel())
        return np.asarray(solution).reshape(right.shape)


def step_times(longest: float, first: float = FIRST_STEP, share: float = STEP_SHARE) -> Floats:
    """Times [s] since touching, from 0 to `longest`: steps grow with time."""
    times = [0.0]
    while times[-1] < longest * (1.0 - 1e-12):
        step = min(max(first, share * times[-1]), LONGEST_STEP)
        times.append(min(times[-1] + step, longest))
    return np.array(times)


def cells(
    nodes: Floats, conductivity: Floats, heat_capacity: Floats, radius: Floats
) -> tuple[Floats, Floats]:
    """Capacities `[c, n]` and links `[c, n - 1]` of a run of cells, per radian and metre along the wall.

    `nodes` `[c, n]` are depths from the face at `radius` `[c]` [m]; properties `[c, n - 1]` are the cells'.
    """
    width = np.diff(nodes, axis=1)
    inner = radius[:, None] + nodes
    quarter = heat_capacity * 0.5 * width
    capacity = np.zeros_like(nodes)
    capacity[:, :-1] += quarter * (inner[:, :-1] + 0.25 * width)
    capacity[:, 1:] += quarter * (inner[:, 1:] - 0.25 * width)
    link = conductivity / np.log1p(width / inner[:, :-1])
    return capacity, link


def join(parts: list[tuple[Floats, Floats]], between: list[Floats]) -> tuple[Floats, Floats]:
    """Capacities and links of several runs of cells in line, with conductances `[c]` between them."""
    capacity = np.concatenate([part[0] for part in parts], axis=1)
    links = [parts[0][1]]
    for conductance, part in zip(between, parts[1:], strict=True):
        links += [conductance[:, None], part[1]]
    return capacity, np.concatenate(links, axis=1)
