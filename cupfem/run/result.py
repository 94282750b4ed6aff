"""The immutable result of a run: time series, field snapshots, ledger.

Array shapes: t times of the series, p points of the outer (or inner) face, k snapshots, n unknowns of the
mesh.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, replace

import numpy as np
from numpy.typing import NDArray

from cupfem.cup import Cup
from cupfem.errors import InputError
from cupfem.films import Film
from cupfem.meridian import Meridian
from cupfem.mesh import SectionMesh
from cupfem.quantities import Units
from cupfem.run import headline, shown
from cupfem.run.error_bars import error_bars
from cupfem.run.pads import PadField
from cupfem.run.touched import HoldFigures
from cupfem.serving import Serving

Floats = NDArray[np.float64]


@dataclass(frozen=True, eq=False)
class Ledger:
    """Where the heat went over the whole run [J].

    Attributes
    ----------
    out:
        Heat that left to the outside, by term (negative: it came in).
    stored:
        Change of the heat stored, by region of the wall.
    drink:
        Change of the drink's enthalpy.
    to_drink:
        Heat that the wall passed to the drink (internal; negative: the drink warmed the wall).
    """

    out: Mapping[str, float]
    stored: Mapping[str, float]
    drink: float
    to_drink: float

    @property
    def residual(self) -> float:
        """What the terms do not account for [J]. Closing is bookkeeping, not accuracy."""
        return sum(self.out.values()) + sum(self.stored.values()) + self.drink

    @property
    def relative_residual(self) -> float:
        """Residual over the heat that the drink lost, or over the largest term without a drink."""
        largest = max((abs(value) for value in [*self.out.values(), *self.stored.values()]), default=0.0)
        return self.residual / max(abs(self.drink), largest, 1e-300)


@dataclass(frozen=True, eq=False)
class Series:
    """What was kept at each time of the series `[t]`.

    Attributes
    ----------
    time:
        `[t]` [s].
    drink_temperature, drink_level, drink_mass:
        `[t]` [degC, m, kg]; NaN once the drink is gone.
    outer_temperature, inner_temperature:
        `[t, p]` free outer and inside face of the wall [degC].
    powers:
        Ledger term -> `[t]` [W], leaving to the outside (and "wall to drink").
    """

    time: Floats
    drink_temperature: Floats
    drink_level: Floats
    drink_mass: Floats
    outer_temperature: Floats
    inner_temperature: Floats
    powers: Mapping[str, Floats]


@dataclass(frozen=True, eq=False)
class Faces:
    """Unknowns of the free outer and the inside face, from the table up.

    `outer_height`, `inner_height` are heights z on the wall's inside face [m], as in the files.
    """

    outer: NDArray[np.int_]
    outer_height: Floats
    inner: NDArray[np.int_]
    inner_height: Floats


@dataclass(frozen=True, eq=False)
class Run:
    """A cup, a serving and what came of them."""

    cup: Cup
    serving: Serving
    fineness: float
    tolerance: float
    meridian: Meridian
    mesh: SectionMesh
    faces: Faces
    series: Series
    snapshot_times: Floats
    snapshots: Floats
    ledger: Ledger
    final_state: Floats
    drink_states: Floats
    """`[t, unknown]` mass [kg] and enthalpy [J] of the drink, and what a headspace has, for a restart."""
    counters: Mapping[str, int]
    time_error: float
    space_errors: Mapping[str, float] = field(default_factory=dict)
    defaults: tuple[str, ...] = ()
    ranges: tuple[str, ...] = ()
    films: Mapping[str, Film] = field(default_factory=dict)
    """Films that Python gave instead of the serving's, by edge."""
    pads: tuple[PadField, ...] = ()
    """What the serving's pads felt."""
    touch: HoldFigures | None = None
    """How long the cup can be held, where that was asked for."""
    accuracy: float | None = None
    """Numerical error of the temperatures [K] that was asked for."""

    @property
    def time(self) -> Floats:
        """Times of the series `[t]` [s]."""
        return self.series.time

    def outer_temperature_at(self, height: float) -> Floats:
        """Free outer face at a height on the inside face [m], `[t]` [degC]."""
        return _along(self.faces.outer_height, self.series.outer_temperature, height)

    def inner_temperature_at(self, height: float) -> Floats:
        """Inside face at a height [m], `[t]` [degC]."""
        return _along(self.faces.inner_height, self.series.inner_temperature, height)

    def snapshot(self, time: float) -> Floats:
        """Field `[n]` [degC] of the stored snapshot nearest to a time [s]."""
        return np.asarray(self.snapshots[int(np.argmin(np.abs(self.snapshot_times - time)))])

    def with_space_errors(self, errors: Mapping[str, float]) -> Run:
        """The same run with its space errors told, by key of `figures` [K or s]."""
        return replace(self, space_errors=dict(errors))

    def figures(self) -> dict[str, float | None]:
        """Headline figures, unit in the key."""
        return headline.figures(self)

    def error_bars(self) -> dict[str, float]:
        """Numerical errors of the figures, by key of `figures` [K or s]; empty without a companion."""
        return error_bars(self)

    def summary(self, units: Units = "si") -> str:
        """Headline figures, verdict and cautions as text."""
        return headline.text(self, units)

    def _repr_html_(self) -> str:
        return shown.html(self)


def _along(heights: Floats, values: Floats, height: float) -> Floats:
    if not heights[0] - 1e-9 <= height <= heights[-1] + 1e-9:
        raise InputError(
            "height",
            f"{height * 1e3:g} mm",
            "not on the wall",
            f"write a height from {heights[0] * 1e3:g} to {heights[-1] * 1e3:g} mm, on the inside face",
        )
    place = int(np.clip(np.searchsorted(heights, height) - 1, 0, len(heights) - 2))
    share = (height - heights[place]) / (heights[place + 1] - heights[place])
    return np.asarray((1.0 - share) * values[:, place] + share * values[:, place + 1])


def faces_of(mesh: SectionMesh, meridian: Meridian) -> Faces:
    """Outer face (the outermost unknown at each place along the wall) and inside face, sorted by height."""
    outside = np.unique(mesh.edge("outside"))
    s, n = mesh.wall_coordinates[:, outside]
    order = np.lexsort((-n, np.round(s, 9)))
    first = np.concatenate([[True], np.diff(np.round(s[order], 9)) > 0])
    outer = outside[order][first]
    inner = np.unique(mesh.edge("inside"))
    inner = inner[np.argsort(mesh.points[1, inner])]
    return Faces(outer, _heights(meridian, mesh.wall_coordinates[0, outer]), inner, mesh.points[1, inner])


def _heights(meridian: Meridian, arc: Floats) -> Floats:
    """Heights on the inside face of lengths along it."""
    z = meridian.profile.height
    return np.interp(arc, meridian.profile.arc_length_at(z), z)
