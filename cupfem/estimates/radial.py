"""The layered transient radial estimate: conduction through the stack of one station, in time.

Quadratic elements on the radius (three nodes, Gauss points of order five), nodes shared between solids that
touch; a contact is a link between two nodes with its own conductance, a gap one element in which that
conductance is spread evenly, with the heat capacity of its gas. Films and gaps follow the temperatures as
they do in the field; nothing runs along the wall. The elements are standard: O. C. Zienkiewicz and R. L.
Taylor, The Finite Element Method.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.optimize import brentq

from cupfem.estimates.drink import LumpedDrink
from cupfem.estimates.rosenbrock import Path, integrate
from cupfem.estimates.station import Station

Floats = NDArray[np.float64]
DrinkInput = float | Callable[[float], ArrayLike] | LumpedDrink

ELEMENTS = 10
"""Per solid layer."""
GRADING = 0.9
"""Length of an element over that of its outer neighbour, in the innermost layer, which meets the drink."""
TOLERANCE = 5e-4
"""Local error of a step [K]."""
STEP = 1e-3  # K and s, of the difference quotients
BAND = 2

_POINTS = np.array([-math.sqrt(0.6), 0.0, math.sqrt(0.6)])
_WEIGHTS = np.array([5.0, 8.0, 5.0]) / 9.0
_SHAPE = np.array([0.5 * _POINTS * (_POINTS - 1.0), 1.0 - _POINTS**2, 0.5 * _POINTS * (_POINTS + 1.0)])
_SLOPE = np.array([_POINTS - 0.5, -2.0 * _POINTS, _POINTS + 0.5])
_EVEN = (_SLOPE * _WEIGHTS) @ _SLOPE.T * 2.0
"""Conductance between three nodes that lies evenly between the outer two, in shares of the whole [3, 3]."""
_PAIR = np.array([[1.0, -1.0], [-1.0, 1.0]])
_STORED = 0.5 * (_SHAPE * _WEIGHTS) @ _SHAPE.T


@dataclass(frozen=True)
class Transient:
    """A station in time.

    `path` is the state as a function of time, `faces[i]` the numbers of its interfaces from inside to
    outside, one per entry of `Station.radii`; `drink` is what the inner film led to [degC], as a function of
    time.
    """

    station: Station
    path: Path
    faces: NDArray[np.int_]
    drink: Callable[[ArrayLike], Floats]

    @property
    def times(self) -> Floats:
        """Ends of the steps that were taken [s]."""
        return self.path.nodes

    def interfaces(self, times: ArrayLike) -> Floats:
        """Temperature [..., i] of each interface at times [s], from inside to outside [degC]."""
        return np.asarray(self.path(times)[..., self.faces])

    def outside(self, times: ArrayLike) -> Floats:
        """Temperature of the outer face at times [s] [degC]."""
        return np.asarray(self.path(times)[..., self.faces[-1]])

    def time_to(self, target: float) -> float:
        """First time [s] at which the outer face passes a target [degC]; infinite if it does not."""
        nodes = self.path.nodes
        grid = np.unique(np.concatenate([nodes, 0.5 * (nodes[1:] + nodes[:-1])]))
        excess = self.outside(grid) - target
        passed = np.flatnonzero(excess[1:] * excess[:-1] <= 0.0)
        if not len(passed):
            return math.inf
        low, high = grid[passed[0]], grid[passed[0] + 1]
        return float(brentq(lambda time: float(self.outside(time)) - target, low, high, xtol=1e-9))


def transient(
    station: Station,
    end: float,
    drink: DrinkInput | None = None,
    elements: int = ELEMENTS,
    tolerance: float = TOLERANCE,
) -> Transient:
    """The station from the pour to `end` [s].

    `drink`: a temperature [degC] that holds, left out: that of the pour; or a function of the time [s]; or a
    `LumpedDrink`, which the station's wall cools as if all of the wetted wall were like it. Where the station
    is dry its own surroundings hold.
    """
    wall = RadialWall(station, station.drink_temperature if drink is None else drink, elements)
    path = integrate(wall, wall.start(), 0.0, end, tolerance)
    return Transient(station, path, wall.faces, wall.drink_of(path))


class RadialWall:
    """The semi-discrete station: M y' = f(t, y), per radian and per length along the wall.

    The state is the drink, if lumped, then the nodes from inside to outside.
    """

    band = BAND

    def __init__(self, station: Station, drink: DrinkInput, elements: int = ELEMENTS):
        self.station = station
        given = station.inner.surroundings
        course: DrinkInput = drink if given is None else given
        self.lumped = course if isinstance(course, LumpedDrink) else None
        self._course = course if callable(course) else None
        self._held = course if isinstance(course, float | int) else math.nan
        self._first = int(self.lumped is not None)
        self._assemble(elements)

    def _assemble(self, elements: int) -> None:
        nodes, faces = [self.station.radii[0]], [0]
        cells: list[tuple[int, int]] = []
        links: list[tuple[int, int]] = []
        for n, layer in enumerate(self.station.layers):
            start, end = len(nodes) - 1, self.station.radii[n + 1]
            if layer.gap is not None or layer.thickness == 0.0:
                nodes.extend([end] if layer.gap is None else [0.5 * (nodes[-1] + end), end])
                links.append((start + self._first, n))
            else:
                nodes.extend(_graded(nodes[-1], end, elements, GRADING if n == 0 else 1.0))
                cells.extend((start + 2 * k, n) for k in range(elements))
            faces.append(len(nodes) - 1)
        self._links, self.faces = links, np.array(faces) + self._first
        self._fill(np.array(nodes), cells)

    def _fill(self, radii: Floats, cells: list[tuple[int, int]]) -> None:
        size = len(radii) + self._first
        self._conduction, self.mass = np.zeros((size, size)), np.zeros((size, size))
        for start, n in cells:
            self._add_cell(start, n, radii[start], radii[start + 2])
        for start, n in self._links:
            self._add_gas(start, n)
        if self._first:
            self.mass[0, 0] = 1.0
        self.banded_mass, self._banded_conduction = _banded(self.mass), _banded(self._conduction)

    def _add_cell(self, start: int, n: int, low: float, high: float) -> None:
        layer, half = self.station.layers[n], 0.5 * (high - low)
        weights = _WEIGHTS * (0.5 * (low + high) + half * _POINTS)
        place = slice(start + self._first, start + self._first + 3)
        self._conduction[place, place] += layer.conductivity / half * (_SLOPE * weights) @ _SLOPE.T
        self.mass[place, place] += layer.heat_capacity * half * (_SHAPE * weights) @ _SHAPE.T

    def _add_gas(self, start: int, n: int) -> None:
        inner, outer = self.station.radii[n], self.station.radii[n + 1]
        gas = self.station.layers[n].heat_capacity * 0.5 * (outer * outer - inner * inner)
        if gas:
            self.mass[start : start + 3, start : start + 3] += gas * _STORED

    def start(self) -> Floats:
        """State at the pour."""
        state = np.full(len(self.mass), float(self.station.start_temperature))
        if self.lumped is not None:
            state[0] = self.station.drink_temperature
        return state

    def around(self, time: float, state: Floats) -> float:
        """What the inner film leads to [degC]."""
        if self.lumped is not None:
            return float(state[0])
        return self._held if self._course is None else float(np.asarray(self._course(time)))

    def rates(self, time: float, state: Floats) -> Floats:
        """Heat arriving at each node [W/m per radian]; of the drink its change [K/s]."""
        out = np.asarray(-(self._conduction @ state))
        inner = self._inner_flux(time, float(state[self._first]), self.around(time, state))
        out[self._first] -= self.station.radii[0] * inner
        out[-1] -= self.station.radii[-1] * self._outer_flux(time, float(state[-1]))
        for start, n in self._links:
            shares, end = self._shares(start, n)
            conductance = self._conductance(n, float(state[start]), float(state[end - 1]))
            out[start:end] -= conductance * (shares @ state[start:end])
        if self.lumped is not None:
            out[0] = self.lumped.rate(time, float(state[0]), inner)
        return out

    def slopes(self, time: float, state: Floats) -> Floats:
        """df/dy, banded; films, gaps and drink by difference quotients."""
        out = np.asarray(-self._banded_conduction)
        last = float(state[-1])
        by_last = (self._outer_flux(time, last + STEP) - self._outer_flux(time, last)) / STEP
        out[BAND, -1] -= self.station.radii[-1] * by_last
        for start, n in self._links:
            self._add_link_slopes(out, start, n, state)
        self._add_inner_slopes(out, time, float(state[self._first]), self.around(time, state))
        return out

    def time_slopes(self, time: float, state: Floats) -> Floats | None:
        """df/dt by a difference quotient; None for a drink that holds."""
        if self.lumped is None and self._course is None:
            return None
        later = self.rates(time + STEP, state) - self.rates(time, state)
        return np.asarray(later / STEP)

    def drink_of(self, path: Path) -> Callable[[ArrayLike], Floats]:
        """What the inner film led to, as a function of time."""
        if self.lumped is not None:
            return lambda times: np.asarray(path(times)[..., 0])
        course, held = self._course, self._held
        if course is None:
            return lambda times: np.full(np.shape(times), held)
        return np.vectorize(course, otypes=[float])

    def _inner_flux(self, time: float, surface: float, around: float) -> float:
        return float(self.station.inner.heat_flux(surface, around, self.station.height, time))

    def _outer_flux(self, time: float, surface: float) -> float:
        return float(self.station.outer.heat_flux(surface, self.station.outside, self.station.height, time))

    def _shares(self, start: int, n: int) -> tuple[Floats, int]:
        """How a link's conductance lies between its nodes, and the node after the last."""
        return (_PAIR, start + 2) if self.station.layers[n].gap is None else (_EVEN, start + 3)

    def _conductance(self, n: int, inner: float, outer: float) -> float:
        """Of a gap or contact, from the temperatures of its faces [W/(m K) per radian]."""
        radius = self.station.radii[n]
        return radius * float(self.station.layers[n].conductance(inner, outer, radius))

    def _add_inner_slopes(self, out: Floats, time: float, face: float, around: float) -> None:
        radius, first = self.station.radii[0], self._first
        flux = self._inner_flux(time, face, around)
        by_face = (self._inner_flux(time, face + STEP, around) - flux) / STEP
        out[BAND, first] -= radius * by_face
        if self.lumped is None:
            return
        by_drink = (self._inner_flux(time, face, around + STEP) - flux) / STEP
        here = self.lumped.rate(time, around, flux)
        out[BAND + 1, 0] -= radius * by_drink
        out[BAND - 1, 1] += (self.lumped.rate(time, around, flux + STEP * by_face) - here) / STEP
        out[BAND, 0] += (self.lumped.rate(time, around + STEP, flux + STEP * by_drink) - here) / STEP

    def _add_link_slopes(self, out: Floats, start: int, n: int, state: Floats) -> None:
        shares, end = self._shares(start, n)
        inner, outer = float(state[start]), float(state[end - 1])
        here = self._conductance(n, inner, outer)
        slopes = here * shares
        drive = shares @ state[start:end]
        slopes[:, 0] += (self._conductance(n, inner + STEP, outer) - here) / STEP * drive
        slopes[:, -1] += (self._conductance(n, inner, outer + STEP) - here) / STEP * drive
        for row in range(end - start):
            for column in range(end - start):
                out[BAND + row - column, start + column] -= slopes[row, column]


def _graded(start: float, end: float, elements: int, ratio: float) -> list[float]:
    """Nodes of elements that grow by 1/ratio from start to end, each with its middle; without the first."""
    lengths = ratio ** -np.arange(elements, dtype=float)
    ends = start + (end - start) * np.concatenate([[0.0], np.cumsum(lengths) / lengths.sum()])
    ends[-1] = end
    middles = 0.5 * (ends[1:] + ends[:-1])
    return [float(x) for pair in zip(middles, ends[1:], strict=True) for x in pair]


def _banded(matrix: Floats) -> Floats:
    """LAPACK's layout: entry (i, j) in row BAND + i - j of column j."""
    size = len(matrix)
    out = np.zeros((2 * BAND + 1, size))
    for offset in range(-BAND, BAND + 1):
        out[BAND + offset, max(0, -offset) : size - max(0, offset)] = np.diagonal(matrix, -offset)
    return out
