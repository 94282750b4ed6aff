"""Heat conduction in one section: mass and stiffness on a fixed pattern, gaps whose conductivity follows the
field, and exchange of heat over named edges, wholly or between two heights.

rho c dT/dt = div(k grad T) + q, weak form over the half section with the measure of `axisymmetry` (any
textbook, e.g. Lewis,
Nithiarasu, Seetharamu, Fundamentals of the Finite Element Method for Heat and Fluid Flow, 2004, ch. 3 and 6).
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from typing import Any, Protocol

import numpy as np
from numpy.typing import NDArray

from cupfem.axisymmetry import (
    AXISYMMETRIC,
    EdgePoints,
    EdgeQuadrature,
    Measure,
    capacity_matrices,
    conduction_matrices,
    source_load,
)
from cupfem.films import Film
from cupfem.gaps import Gap
from cupfem.linear import Pattern
from cupfem.mesh import Contact, SectionMesh

Floats = NDArray[np.float64]
Ints = NDArray[np.int_]
Conductivity = float | Callable[[Floats], Floats]
Surroundings = float | Callable[[Floats, float, Any], Any]
"""A temperature [degC], or a function of height `[point]`, time and the lumped state."""
Feeds = Callable[[Mapping[str, Floats], Floats, Any], Floats]
"""Rates per area `[unknown, point]` that drink and headspace receive over an edge, in the order of their
unknowns, from the fluxes by film, the surface temperatures and the lumped state."""
Window = Callable[[Any, float], tuple[float, float]]
"""Lower and upper height [m] of the part of an edge that counts, from the lumped state and the time."""

SAME_HEIGHT = 1e-11
"""Bounds nearer than this [m] to the last ones use the same integration points."""
SLOPE_STEP = 1e-3
"""Temperature step [K] of the difference quotient that gives a film's slope; the slope only steers the
iteration."""


@dataclass(frozen=True)
class Solid:
    """Properties of a region: conductivities [W/(m K)] through and along the wall, heat capacity [J/(m3
    K)]."""

    through: Conductivity
    along: Conductivity
    heat_capacity: float


@dataclass(frozen=True)
class GasLayer:
    """Properties of a gap: its conductance model, the heat capacity of the gas [J/(m3 K)] and its height
    [m]."""

    gap: Gap
    heat_capacity: float
    height: float = np.inf


@dataclass(frozen=True, eq=False)
class Exchange:
    """Heat exchange on an edge: films by ledger name, all to the same surroundings, over the part that
    `window` gives.

    The films may depend on the lumped state (the wetted height sets the length of the drink's film). With
    `to_drink` all the heat goes to the drink's enthalpy, the second of its unknowns; `feeds` tells anything
    else that drink and headspace receive.
    """

    edge: str
    films: Mapping[str, Film] | Callable[[Any], Mapping[str, Film]]
    surroundings: Surroundings
    window: Window | None = None
    to_drink: bool = False
    feeds: Feeds | None = None

    @property
    def follows_drink(self) -> bool:
        """Whether it changes with the drink's state."""
        return self.to_drink or self.window is not None or self.feeds is not None or callable(self.films)


@dataclass(frozen=True, eq=False)
class FixedTemperature:
    """Prescribed temperature [degC] on an edge: a number or a function of r, z and time."""

    edge: str
    value: float | Callable[[Floats, Floats, float], Floats]


@dataclass(frozen=True, eq=False)
class FixedFlux:
    """Prescribed heat flux into the body [W/m2] on an edge, optionally between two heights [m]."""

    edge: str
    value: float | Callable[[Floats, float], Floats]
    low: float = -np.inf
    high: float = np.inf
    label: str = "prescribed flux"


@dataclass(frozen=True, eq=False)
class Conditions:
    """All that acts on a section."""

    exchanges: tuple[Exchange, ...] = ()
    temperatures: tuple[FixedTemperature, ...] = ()
    fluxes: tuple[FixedFlux, ...] = ()
    sources: Mapping[str, Any] = field(default_factory=dict)


NOTHING = Conditions()


class _Varying(Protocol):
    """Cells whose conductivity follows the field."""

    dofs: Ints

    def heat(self, temperature: Floats) -> Floats: ...

    def matrices(self, temperature: Floats) -> Floats: ...


class _GapCells:
    """Cells of a gap: through the gap the whole conductance (gas, radiation, contact), along it the gas
    only."""

    def __init__(self, mesh: SectionMesh, name: str, layer: GasLayer, measure: Measure):
        faces = mesh.gaps[name]
        self.dofs = mesh.element_dofs[:, faces.elements]
        self._layer, self._inner, self._outer = layer, faces.inner, faces.outer
        self._r_inner = mesh.points[0, faces.inner].mean(axis=0)
        self._r_outer = mesh.points[0, faces.outer].mean(axis=0)
        self._through, self._along = _unit_matrices(mesh, faces.elements, measure)

    def _conductivities(self, temperature: Floats) -> tuple[Floats, Floats]:
        inner, outer = temperature[self._inner].mean(axis=0), temperature[self._outer].mean(axis=0)
        gap, height = self._layer.gap, self._layer.height
        through = gap.through_conductivity(inner, outer, self._r_inner, self._r_outer, height)
        return np.asarray(through), np.asarray(gap.along_conductivity(0.5 * (inner + outer)))

    def heat(self, temperature: Floats) -> Floats:
        """K(T) T, `[element, local]`."""
        through, along = self._conductivities(temperature)
        local = temperature[self.dofs.T]
        out = through[:, None] * np.matmul(self._through, local[:, :, None])[:, :, 0]
        return np.asarray(out + along[:, None] * np.matmul(self._along, local[:, :, None])[:, :, 0])

    def matrices(self, temperature: Floats) -> Floats:
        """Element matrices at the field."""
        through, along = self._conductivities(temperature)
        return np.asarray(through[:, None, None] * self._through + along[:, None, None] * self._along)


class _TemperatureDependentCells:
    """Cells of a solid whose conductivity depends on temperature (taken at the mean of the cell)."""

    def __init__(self, mesh: SectionMesh, elements: Ints, solid: Solid, measure: Measure):
        self.dofs = mesh.element_dofs[:, elements]
        self._solid = solid
        self._through, self._along = _unit_matrices(mesh, elements, measure)
        self._mean = _mean_weights(len(self.dofs))

    def matrices(self, temperature: Floats) -> Floats:
        """Element matrices at the field."""
        mean = self._mean @ temperature[self.dofs]
        through, along = (_value(k, mean) for k in (self._solid.through, self._solid.along))
        return np.asarray(through[:, None, None] * self._through + along[:, None, None] * self._along)

    def heat(self, temperature: Floats) -> Floats:
        """K(T) T, `[element, local]`."""
        return np.asarray(
            np.matmul(self.matrices(temperature), temperature[self.dofs.T][:, :, None])[:, :, 0]
        )


class Conduction:
    """Operators of one section.

    Parameters
    ----------
    properties:
        Region name -> `Solid` or `GasLayer`; every region of the mesh must be there.
    """

    def __init__(
        self,
        mesh: SectionMesh,
        properties: Mapping[str, Solid | GasLayer],
        conditions: Conditions = NOTHING,
        measure: Measure = AXISYMMETRIC,
    ):
        self.mesh, self.measure, self.conditions = mesh, measure, conditions
        contacts = [np.concatenate([c.inner, c.outer]) for c in mesh.contacts]
        self.pattern = Pattern([mesh.element_dofs, *contacts], mesh.size)
        self._assemble(properties)
        self.exchanges = [EdgeExchange(mesh, each, measure, self.pattern) for each in conditions.exchanges]
        self.fixed, self._fixed_parts = self._fixed_unknowns()
        self._fluxes = [
            (flux, EdgeQuadrature(mesh, mesh.edge(flux.edge), measure)) for flux in conditions.fluxes
        ]
        self.source = np.zeros(mesh.size)
        for region, density in conditions.sources.items():
            self.source += source_load(mesh, mesh.regions[region], density, measure)

    # -- assembly --------------------------------------------------------------------------------------------

    def _assemble(self, properties: Mapping[str, Solid | GasLayer]) -> None:
        mesh, pattern = self.mesh, self.pattern
        mass, stiffness = np.zeros(pattern.entries), np.zeros(pattern.entries)
        self._varying: list[_Varying] = []
        self._capacities: dict[str, Floats] = {}
        for name, elements in mesh.regions.items():
            given = properties[name]
            dofs = mesh.element_dofs[:, elements]
            capacity = capacity_matrices(
                mesh, elements, np.full(len(elements), given.heat_capacity), self.measure
            )
            mass += pattern.gather(dofs, capacity)
            shares = np.bincount(dofs.T.ravel(), weights=capacity.sum(axis=1).ravel(), minlength=mesh.size)
            self._capacities[name] = np.asarray(shares, dtype=float)
            if isinstance(given, GasLayer):
                self._varying.append(_GapCells(mesh, name, given, self.measure))
            elif callable(given.through) or callable(given.along):
                self._varying.append(_TemperatureDependentCells(mesh, elements, given, self.measure))
            else:
                tensor = _tensor(mesh.along[:, elements], given.through, given.along)
                stiffness += pattern.gather(dofs, conduction_matrices(mesh, elements, tensor, self.measure))
        for contact in mesh.contacts:
            dofs, matrices = _contact_matrices(mesh, contact, self.measure)
            stiffness += pattern.gather(dofs, matrices)
        self.mass, self.stiffness = pattern.operator(mass), pattern.operator(stiffness)
        self._places = [pattern.positions(cells.dofs) for cells in self._varying]

    def _fixed_unknowns(self) -> tuple[Ints, list[tuple[Ints, FixedTemperature]]]:
        parts = [(np.unique(self.mesh.edge(c.edge)), c) for c in self.conditions.temperatures]
        fixed = np.unique(np.concatenate([dofs for dofs, _ in parts])) if parts else np.zeros(0, dtype=int)
        return fixed, parts

    # -- the field's own terms -------------------------------------------------------------------------------

    def fixed_values(self, time: float) -> Floats:
        """Prescribed temperatures of the `fixed` unknowns; where edges meet the later condition holds."""
        values = np.zeros(self.mesh.size)
        for dofs, condition in self._fixed_parts:
            r, z = self.mesh.points[:, dofs]
            given = condition.value
            values[dofs] = given(r, z, time) if callable(given) else given
        return values[self.fixed]

    def fixed_slopes(self, time: float) -> Floats:
        """Rates [K/s] of the prescribed temperatures, `[dof]`, zero elsewhere; by difference quotient."""
        slopes = np.zeros(self.mesh.size)
        if len(self.fixed):
            step = 1e-6
            slopes[self.fixed] = (self.fixed_values(time + step) - self.fixed_values(time)) / step
        return slopes

    def subtract_varying(self, load: Floats, temperature: Floats) -> None:
        """Subtract K(T) T of the cells whose conductivity follows the field from a load (in place) [W]."""
        for cells in self._varying:
            np.subtract.at(load, cells.dofs.T, cells.heat(temperature))

    def supplied(self, time: float) -> Floats:
        """Loads of sources and prescribed fluxes, `[dof]` [W]; a new array."""
        out = self.source.copy()
        for flux, quadrature in self._fluxes:
            points = quadrature.between(flux.low, flux.high)
            density = flux.value(points.height, time) if callable(flux.value) else flux.value
            _add(out, points, np.broadcast_to(density, points.weight.shape) * points.weight)
        return out

    def supplied_power(self, time: float) -> dict[str, float]:
        """Heat that sources and prescribed fluxes bring in [W], by name."""
        terms: dict[str, float] = {}
        if self.conditions.sources:
            terms["source"] = float(self.source.sum())
        for flux, quadrature in self._fluxes:
            points = quadrature.between(flux.low, flux.high)
            density = flux.value(points.height, time) if callable(flux.value) else flux.value
            power = float((points.weight * density).sum())
            terms[flux.label] = terms.get(flux.label, 0.0) + power
        return terms

    def varying_data(self, temperature: Floats) -> Floats:
        """Stored entries of K(T) of the varying cells; the slope of K itself is left out: the matrix stays
        symmetric."""
        data = np.zeros(self.pattern.entries)
        for cells, (taken, entry) in zip(self._varying, self._places, strict=True):
            data += np.bincount(
                entry, weights=cells.matrices(temperature).ravel()[taken], minlength=len(data)
            )
        return data

    def stored_heat(self, temperature: Floats) -> dict[str, float]:
        """Heat stored above 0 degC [J], by region."""
        return {name: float(weights @ temperature) for name, weights in self._capacities.items()}

    def capacity_weights(self) -> Floats:
        """Heat capacity that each unknown stands for [J/K]."""
        return np.asarray(sum(self._capacities.values()))


class EdgeExchange:
    """An `Exchange` on a mesh: loads, powers and slopes on the part of the edge that counts now."""

    def __init__(self, mesh: SectionMesh, exchange: Exchange, measure: Measure, pattern: Pattern):
        self.exchange = exchange
        self._pattern = pattern
        self._quadrature = EdgeQuadrature(mesh, mesh.edge(exchange.edge), measure)
        self._points = self._quadrature.whole()
        self._low, self._high = np.nan, np.nan

    def points(self, lumped: Any, time: float) -> EdgePoints:
        """Integration points of the part that counts now."""
        if self.exchange.window is not None:
            low, high = self.exchange.window(lumped, time)
            if not (_same(low, self._low) and _same(high, self._high)):
                self._points = self._quadrature.between(low, high)
                self._low, self._high = low, high
        return self._points

    def points_within(self, span: tuple[float, float], lumped: Any, time: float) -> EdgePoints:
        """Integration points of the part that counts now and lies within a span of heights [m]."""
        low, high = self.exchange.window(lumped, time) if self.exchange.window else (-np.inf, np.inf)
        return self._quadrature.between(max(low, span[0]), min(high, span[1]))

    def moved_bounds(self, lumped: tuple[Any, Any], times: tuple[float, float]) -> list[tuple[float, float]]:
        """Ranges of height [m] that a bound of the part passes between two states."""
        if self.exchange.window is None:
            return []
        first, last = (self.exchange.window(at, time) for at, time in zip(lumped, times, strict=True))
        pairs = [tuple(sorted(pair)) for pair in zip(first, last, strict=True)]
        return [(low, high) for low, high in pairs if np.isfinite(low) and np.isfinite(high) and high > low]

    def facets_between(self, low: float, high: float) -> tuple[Ints, tuple[float, float]]:
        """Unknowns of the facets that a range of heights touches, and the span of heights they cover [m]."""
        return self._quadrature.facets_between(low, high)

    def fluxes(self, points: EdgePoints, surface: Floats, lumped: Any, time: float) -> dict[str, Floats]:
        """Heat flux leaving the surface [W/m2] at the points, by film."""
        given = self.exchange.surroundings
        around = given(points.height, time, lumped) if callable(given) else given
        films = self.exchange.films
        if callable(films):
            films = films(lumped)
        return {
            name: np.asarray(film.heat_flux(surface, around, points.height, time))
            for name, film in films.items()
        }

    def add_load(self, out: Floats, points: EdgePoints, fluxes: Mapping[str, Floats]) -> None:
        """Subtract what leaves over the edge from a load vector."""
        _add(out, points, -points.weight * _total(fluxes))

    def powers(self, points: EdgePoints, fluxes: Mapping[str, Floats]) -> dict[str, float]:
        """Heat leaving over the edge [W], by film."""
        return {name: float(points.weight @ flux) for name, flux in fluxes.items()}

    def add_slope(self, data: Floats, points: EdgePoints, slope: Floats) -> None:
        """Add the edge matrix of film slopes, times the weights of the points [W/K], to stored entries."""
        matrices = points.shape[:, :, None] * points.shape[:, None, :] * slope[:, None, None]
        taken, entry = self._pattern.positions(points.dofs.T)
        np.add.at(data, entry, matrices.ravel()[taken])

    def fed(self, fluxes: Mapping[str, Floats], surface: Floats, lumped: Any) -> Floats | None:
        """What drink and headspace receive per area `[unknown, point]`; None where they receive nothing."""
        if self.exchange.feeds is not None:
            return self.exchange.feeds(fluxes, surface, lumped)
        if self.exchange.to_drink:
            heat = _total(fluxes)
            return np.array([np.zeros(len(heat)), heat])
        return None

    def slopes(
        self, points: EdgePoints, surface: Floats, lumped: Any, time: float
    ) -> tuple[Floats, Floats | None]:
        """Slopes over surface temperature: of the whole heat flux [W/(m2 K)], at least zero, and of `fed`."""
        above = self.fluxes(points, surface + SLOPE_STEP, lumped, time)
        below = self.fluxes(points, surface - SLOPE_STEP, lumped, time)
        slope = np.maximum((_total(above) - _total(below)) / (2.0 * SLOPE_STEP), 0.0)
        more = self.fed(above, surface + SLOPE_STEP, lumped)
        less = self.fed(below, surface - SLOPE_STEP, lumped)
        fed = None if more is None or less is None else (more - less) / (2.0 * SLOPE_STEP)
        return slope, fed


def _same(one: float, other: float) -> bool:
    return one == other or abs(one - other) <= SAME_HEIGHT


def _add(out: Floats, points: EdgePoints, values: Floats) -> None:
    np.add.at(out, points.dofs, points.shape * values[:, None])


def _total(fluxes: Mapping[str, Floats]) -> Floats:
    return np.asarray(sum(fluxes.values()))


def _tensor(along: Floats, k_through: float, k_along: float) -> Floats:
    """Conductivity tensor `[2, 2, element]` in r, z from the values across and along each cell's own axis."""
    through = np.array([along[1], -along[0]])
    return np.asarray(k_along * along[:, None] * along[None] + k_through * through[:, None] * through[None])


def _unit_matrices(mesh: SectionMesh, elements: Ints, measure: Measure) -> tuple[Floats, Floats]:
    along = mesh.along[:, elements]
    through = conduction_matrices(mesh, elements, _tensor(along, 1.0, 0.0), measure)
    return through, conduction_matrices(mesh, elements, _tensor(along, 0.0, 1.0), measure)


def _mean_weights(local: int) -> Floats:
    """Weights of the mean over a cell: Simpson's rule in both directions for nine nodes."""
    if local == 9:
        return np.array([1, 1, 1, 1, 4, 4, 4, 4, 16]) / 36.0
    return np.full(local, 1.0 / local)


def _value(conductivity: Conductivity, temperature: Floats) -> Floats:
    if callable(conductivity):
        return np.asarray(conductivity(temperature))
    return np.full(temperature.shape, conductivity)


def _contact_matrices(mesh: SectionMesh, contact: Contact, measure: Measure) -> tuple[Ints, Floats]:
    points = EdgeQuadrature(mesh, contact.inner, measure).whole()
    jump = np.concatenate([points.shape, -points.shape], axis=1)
    facets = contact.inner.shape[1]
    conductance = np.repeat(np.broadcast_to(contact.conductance, facets), len(points.weight) // facets)
    matrices = (jump[:, :, None] * jump[:, None, :]) * (points.weight * conductance)[:, None, None]
    matrices = matrices.reshape(facets, -1, *matrices.shape[1:]).sum(axis=1)
    return np.concatenate([contact.inner, contact.outer]), matrices
