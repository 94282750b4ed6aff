"""Exchange of heat over a named edge, wholly or between two heights."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np
from numpy.typing import NDArray

from cupfem.axisymmetry import (
    EdgePoints,
    EdgeQuadrature,
    Measure,
)
from cupfem.conduction.conditions import Exchange
from cupfem.linear import Pattern
from cupfem.mesh import SectionMesh

Floats = NDArray[np.float64]
Ints = NDArray[np.int_]

SAME_HEIGHT = 1e-11
"""Bounds nearer than this [m] to the last ones use the same integration points."""
SLOPE_STEP = 1e-3
"""Temperature step [K] of the difference quotient that gives a film's slope; the slope only steers the
iteration."""


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
        add_to_load(out, points, -points.weight * _total(fluxes))

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


def add_to_load(out: Floats, points: EdgePoints, values: Floats) -> None:
    np.add.at(out, points.dofs, points.shape * values[:, None])


def _total(fluxes: Mapping[str, Floats]) -> Floats:
    return np.asarray(sum(fluxes.values()))
