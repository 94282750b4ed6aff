"""Stations and lines of the wall's grid: where they stand, and which lines stand at which station."""

from __future__ import annotations

from collections.abc import Mapping
from functools import cached_property
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from cupfem.meridian import MINIMUM_THICKNESS, LayerBand, Meridian

Floats = NDArray[np.float64]
Ints = NDArray[np.int_]

STATION_SPACING = 1.25e-3
"""Length of a cell along the wall at fineness 1 [m]; the fin length of a board wall is about 2 mm."""
BLEND_CELLS = 6
BASE_CELLS = 2
RING_CELLS = 4
LEAST_CELLS_ACROSS = 6
"""Cells across the thinnest wall at fineness 1: below this, base and wall together would widen the band past
3 x nodes across."""
THIN_COATING = 60e-6
"""A layer thinner than this [m] carries no transient worth resolving: one quadratic cell at fineness 1."""


def default_stations(meridian: Meridian, fineness: float = 1.0) -> Floats:
    """Heights [m] of the columns: each end of a layer, blend or base is one; in between at most the target
    spacing."""
    fixed, wanted = [meridian.breaks()], [np.zeros(0)]
    cells = max(3, round(BLEND_CELLS * fineness))
    graded = 1.0 - (1.0 - np.arange(cells + 1) / cells) ** 2
    for layer in meridian.layers:
        for low, high in layer.parts:
            if layer.blend_high:
                wanted.append(high + layer.blend_high * graded)
            if layer.blend_low:
                wanted.append(low - layer.blend_low * graded)
        fixed += _ring_stations(layer, fineness)
    heights = np.sort(np.concatenate([*fixed, _off_the_base(meridian, np.concatenate(wanted))]))
    heights = heights[np.concatenate([[True], np.diff(heights) > 1e-7])]
    return _subdivide(meridian, heights, fineness)


def _ring_stations(layer: LayerBand, fineness: float) -> list[Floats]:
    """Heights [m] across the feet of ridges."""
    if layer.rings is None:
        return []
    places = layer.rings.places(max(2, round(RING_CELLS * fineness)))
    pairs = zip(layer.rings.low, layer.rings.high, strict=True)
    return [0.5 * (low + high) + 0.5 * (high - low) * places for low, high in pairs]


def default_fractions(meridian: Meridian, fineness: float = 1.0) -> dict[str, Floats]:
    """Lines across each layer: at least two cells (one in a coating), more in the layers that take longest
    to warm."""
    counts = {layer.name: 1 if layer.thickness < THIN_COATING else 2 for layer in meridian.layers}
    even = [layer for layer in meridian.layers if layer.rings is None]
    while sum(counts[layer.name] for layer in even) < LEAST_CELLS_ACROSS:
        slowest = max(even, key=lambda layer: _warming_time(layer) / counts[layer.name] ** 2)
        counts[slowest.name] += 1
    return {
        name: np.linspace(0.0, 1.0, max(1, round(count * fineness)) + 1) for name, count in counts.items()
    }


def _warming_time(layer: LayerBand) -> float:
    material = layer.material
    if material.kind == "gas":
        return 0.0
    diffusivity = material.conductivity_through.value / (
        material.density.value * material.specific_heat.value
    )
    return layer.thickness**2 / diffusivity


def _off_the_base(meridian: Meridian, heights: Floats) -> Floats:
    """The heights that do not lie within the base, whose rows they would become."""
    if meridian.base is None:
        return heights
    return heights[(heights < meridian.base.recess) | (heights > meridian.base.top)]


def _subdivide(meridian: Meridian, heights: Floats, fineness: float) -> Floats:
    spacing = STATION_SPACING / fineness
    pieces = [heights[:1]]
    for low, high in pairwise(heights):
        count = int(np.ceil((high - low) / spacing - 1e-9))
        if meridian.base and low >= meridian.base.recess - 1e-9 and high <= meridian.base.top + 1e-9:
            share = (high - low) / meridian.base.thickness
            count = round(base_cells(fineness) * share)
        pieces.append(np.linspace(low, high, max(1, count) + 1)[1:])
    return np.concatenate(pieces)


def base_cells(fineness: float) -> int:
    """Cells through the base: above fineness 2 more of them, but fewer than across the wall, for the band."""
    return max(1, round(min(BASE_CELLS * fineness, max(BASE_CELLS, fineness))))


class Wall:
    """Stations and lines of the wall: which lines stand at which station, and where."""

    def __init__(
        self, meridian: Meridian, fineness: float, stations: Floats | None, fractions: Mapping[str, Floats]
    ):
        self.meridian = meridian
        self.z = (
            default_stations(meridian, fineness) if stations is None else np.asarray(stations, dtype=float)
        )
        default = default_fractions(meridian, fineness)
        self.fractions = [np.asarray(fractions.get(la.name, default[la.name])) for la in meridian.layers]
        self.first_line, self.last_line = self._line_ranges()
        at_stations = np.array([layer.thickness_at(self.z) for layer in meridian.layers])
        self.thickness = np.where(at_stations > MINIMUM_THICKNESS, at_stations, 0.0)
        middle = 0.5 * (self.z[:-1] + self.z[1:])
        between = np.array([layer.thickness_at(middle) for layer in meridian.layers]) > MINIMUM_THICKNESS
        self.present = (np.minimum(self.thickness[:, :-1], self.thickness[:, 1:]) > 0.0) & between
        self.standing = np.zeros(self.thickness.shape, dtype=bool)
        self.standing[:, :-1] |= self.present
        self.standing[:, 1:] |= self.present
        self.offsets = self._offsets()
        self.shifts = self._shifts()
        self.line = self._lines()

    @property
    def lines(self) -> int:
        return int(self.last_line[-1]) + 1

    def _line_ranges(self) -> tuple[Ints, Ints]:
        """First and last line of each layer: neighbours share one, but for a layer that lies loosely."""
        cells = np.array([len(f) - 1 for f in self.fractions])
        extra = np.cumsum([index > 0 and layer.loose for index, layer in enumerate(self.meridian.layers)])
        first = np.concatenate([[0], np.cumsum(cells)[:-1]]) + extra
        return first, first + cells

    def line_inside(self, index: int) -> int:
        """Line on which a layer lies: the last of the layer inside it."""
        return int(self.last_line[index - 1]) if index else 0

    @cached_property
    def nodes_across(self) -> tuple[int, int]:
        """Most cells across at any station, and most lines that stand there twice for a contact."""
        counts = [len(f) - 1 for f in self.fractions]
        cells = (self.standing * np.array(counts)[:, None]).sum(axis=0)
        lines = np.array([len(np.unique(row)) for row in self.line])
        return int(cells.max()), int((lines - 1 - cells).max())

    def _offsets(self) -> Floats:
        """Distance of each line from the inside face along the normal, `[station, line]`."""
        offsets = np.zeros((len(self.z), self.lines))
        arc = self.meridian.profile.arc_length_at(self.z)
        for index, fractions in enumerate(self.fractions):
            start = self.first_line[index]
            inner = offsets[:, self.line_inside(index)]
            # A layer that runs at an angle to the wall keeps its own thickness: the column cuts it obliquely.
            oblique = np.sqrt(1.0 + self._inner_slope(index, arc) ** 2)
            thickness = self.thickness[index] * oblique * self.standing[index]
            offsets[:, start : start + len(fractions)] = inner[:, None] + thickness[:, None] * fractions
        return offsets

    def _shifts(self) -> Floats:
        """How far along the wall each line is moved from its station, `[station, line]`: cells lean with the
        flanks of ridges."""
        shifts = np.zeros((len(self.z), self.lines))
        for index, (layer, fractions) in enumerate(zip(self.meridian.layers, self.fractions, strict=True)):
            if layer.rings is not None:
                along = layer.shift_at(self.z) * self.standing[index]
                shifts[:, self.first_line[index] : self.last_line[index] + 1] += along[:, None] * fractions
        return shifts

    def _inner_slope(self, index: int, arc: Floats) -> Floats:
        """Slope of a layer's inner face against the inside face: only where the layers within it blend or
        vary along the wall."""
        slope = np.zeros(len(arc))
        for layer in self.meridian.layers[:index]:
            if layer.blend_low or layer.blend_high or layer.along:
                step = 1e-4 * max(layer.blend_low, layer.blend_high, 1e-4)
                low, high = (np.clip(self.z + side, *layer.reach) for side in (-step, step))
                rise = layer.thickness_at(high) - layer.thickness_at(low)
                run = self.meridian.profile.arc_length_at(high) - self.meridian.profile.arc_length_at(low)
                slope += np.where(run > 0.5 * step, rise / np.maximum(run, 0.5 * step), 0.0)
        return slope

    def _lines(self) -> Ints:
        """For each station and line, the line that stands for it (`[station, line]`): absent layers
        collapse."""
        line = np.broadcast_to(np.arange(self.lines), (len(self.z), self.lines)).copy()
        for index in range(len(self.fractions)):
            start, stop = self.first_line[index], self.last_line[index]
            absent = ~self.standing[index]
            inside = line[absent, self.line_inside(index)]
            line[absent, start:stop] = inside[:, None]
            line[absent, stop] = np.where(self.keeps_apart(index)[absent], stop, inside)
        return line

    def keeps_apart(self, index: int) -> NDArray[np.bool_]:
        """Stations where the layers outside an absent layer touch what is inside through a contact of their
        own."""
        apart = np.zeros(len(self.z), dtype=bool)
        if np.isfinite(self.meridian.layers[index].closing_conductance):
            apart |= self.standing[index + 1 :].any(axis=0) & ~self.standing[index]
        return apart

    def points(self) -> Floats:
        """`[2, station, line]`."""
        profile = self.meridian.profile
        normal, angle = profile.normal_at(self.z), profile.angle_at(self.z)
        along = np.array([np.sin(angle), np.cos(angle)])
        inner = np.array([profile.radius_at(self.z), self.z])
        fan = profile.fan_at(self.z, float(self.offsets.max()))
        shifts = self.shifts + fan[:, None] * self.offsets
        moved = normal[:, :, None] * self.offsets + along[:, :, None] * shifts
        return np.asarray(inner[:, :, None] + moved)
