"""The wall at chosen heights as columns of nodes: layers, gaps, and how warm they are at the pick-up.

Every column has the same nodes, whatever its layers: an absent layer keeps its nodes, without heat capacity
and joined by `TIGHT`. Array shapes: h heights, c columns, n nodes, p pick-ups, t times.
"""

from __future__ import annotations

from dataclasses import dataclass, field, replace
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from cupfem.conduction import GasLayer, Solid
from cupfem.cup import Cup, Layer
from cupfem.fluids import air_density, air_specific_heat
from cupfem.meridian import MINIMUM_THICKNESS
from cupfem.problem import properties
from cupfem.run import Run
from cupfem.touch.columns import GAMMA, Columns, cells
from cupfem.unit_cell import cavity_conductivity, cell_of, stack_at

Floats = NDArray[np.float64]
Ints = NDArray[np.int_]
Stack = list[tuple[float, float, float]]

CELLS = 14
"""Cells across a solid layer, finest at its faces."""
TIGHT = 1e7
"""Conductance [W/(m2 K)] that stands for perfect contact: 1 kW/m2 make 0.1 mK."""
TYPICAL = 60.0
"""Temperature [degC] at which a conductivity that depends on temperature is taken."""
SUBSTEPS = 2
"""Steps of the free wall between two times of the run's series."""


@dataclass(eq=False)
class GapLinks:
    """A gap in some of the columns: where it stands, and its conductance from the faces' temperatures."""

    layer: GasLayer
    columns: Ints
    inner: int
    outer: int
    inner_radius: Floats
    outer_radius: Floats

    def update(self, link: Floats, temperature: Floats) -> None:
        """Write the links `[c, n - 1]` for temperatures `[c, n]` (in place)."""
        faces = temperature[self.columns, self.inner], temperature[self.columns, self.outer]
        radii = self.inner_radius, self.outer_radius
        conductivity = self.layer.gap.through_conductivity(*faces, *radii, self.layer.height)
        whole = conductivity / np.log(self.outer_radius / self.inner_radius)
        links = slice(self.inner, self.outer)
        link[self.columns, links] = (whole * (self.outer - self.inner))[:, None]


@dataclass(eq=False)
class Wall:
    """Nodes of the wall, inside to outside, per radian and metre along the wall.

    Attributes
    ----------
    inner_radius, outer_radius:
        `[c]` [m].
    offset:
        `[c, n]` distance of the nodes from the inside face [m].
    capacity, link:
        `[c, n]`, `[c, n - 1]`; the links of gaps are written by `gaps`.
    """

    inner_radius: Floats
    outer_radius: Floats
    offset: Floats
    capacity: Floats
    link: Floats
    gaps: list[GapLinks] = field(default_factory=list)

    @classmethod
    def at(cls, run: Run, heights: Floats, gap_resistance: float = 1.0, crest: bool = False) -> Wall:
        """Wall of a run at heights on the inside face [m].

        `gap_resistance` is the share of a gap's resistance that is left under a grip. With `crest` layers of
        flutes and struts are what lies under a crest (in a strut), not the even layer that stands for them.
        """
        return _Builder(run, heights, gap_resistance, crest).wall()

    def repeated(self, times: int) -> Wall:
        """Each column several times, in blocks: column = block x heights + height."""

        def tiled(values: Floats) -> Floats:
            return np.tile(values, (times, *[1] * (values.ndim - 1)))

        count = len(self.inner_radius)
        gaps = [
            GapLinks(
                gap.layer,
                np.concatenate([gap.columns + block * count for block in range(times)]),
                gap.inner,
                gap.outer,
                tiled(gap.inner_radius),
                tiled(gap.outer_radius),
            )
            for gap in self.gaps
        ]
        radii = tiled(self.inner_radius), tiled(self.outer_radius)
        return Wall(*radii, tiled(self.offset), tiled(self.capacity), tiled(self.link), gaps)


class _Builder:
    def __init__(self, run: Run, heights: Floats, gap_resistance: float, crest: bool):
        self.run, self.z, self.left, self.crest = run, heights, gap_resistance, crest
        self.given = properties(run.cup, run.mesh, run.serving.room.pressure)
        self.radius = np.asarray(run.meridian.profile.radius_at(heights))
        self.gaps: list[GapLinks] = []
        self.first = 0

    def wall(self) -> Wall:
        offset = np.zeros(len(self.z))
        offsets, capacities, links = [], [], []
        for index in range(len(self.run.meridian.layers)):
            nodes, capacity, link = self._layer(index, offset)
            if index:
                links.append((self._contact(index) * (self.radius + offset))[:, None])
            offsets.append(nodes)
            capacities.append(capacity)
            links.append(link)
            offset = nodes[:, -1]
            self.first += nodes.shape[1]
        nodes, capacity, link = (np.concatenate(part, axis=1) for part in (offsets, capacities, links))
        return Wall(self.radius, self.radius + offset, nodes, capacity, link, self.gaps)

    def _layer(self, index: int, offset: Floats) -> tuple[Floats, Floats, Floats]:
        layer = self.run.meridian.layers[index]
        thickness = np.asarray(layer.thickness_at(self.z))
        present = thickness > MINIMUM_THICKNESS
        fractions = _fractions(1 if layer.material.kind == "gas" else CELLS)
        nodes = offset[:, None] + np.where(present, thickness, 0.0)[:, None] * fractions
        capacity = np.zeros_like(nodes)
        link = np.full((len(self.z), len(fractions) - 1), TIGHT) * self.radius[:, None]
        body = (self.z >= layer.low - 1e-9) & (self.z <= layer.high + 1e-9)
        body |= layer.material.kind == "gas"
        for name, where in ((layer.name, present & body), (f"{layer.name} pocket", present & ~body)):
            if not where.any():
                continue
            found = self.given[name]
            if isinstance(found, Solid):
                local = self.crest and name == layer.name and _repeats(self.run.cup.layer[index])
                stack = local_stack(self.run.cup, self.run.cup.layer[index]) if local else None
                capacity[where], link[where] = self._solid(found, nodes[where], where, stack)
            else:
                self._gap(found, nodes, where)
        return nodes, capacity, link

    def _solid(
        self, solid: Solid, nodes: Floats, where: NDArray[np.bool_], stack: Stack | None
    ) -> tuple[Floats, Floats]:
        shape = (len(nodes), nodes.shape[1] - 1)
        if stack is not None:
            conductivity, capacity = (np.broadcast_to(each, shape) for each in _in_cells(stack, shape[1]))
            return cells(nodes, conductivity, capacity, self.radius[where])
        through = solid.through(np.full(shape, TYPICAL)) if callable(solid.through) else solid.through
        conductivity = np.broadcast_to(np.asarray(through, dtype=float), shape)
        return cells(nodes, conductivity, np.full(shape, solid.heat_capacity), self.radius[where])

    def _gap(self, layer: GasLayer, nodes: Floats, where: NDArray[np.bool_]) -> None:
        columns = np.flatnonzero(where)
        last = self.first + nodes.shape[1] - 1
        radii = self.radius[where] + nodes[where, 0], self.radius[where] + nodes[where, -1]
        self.gaps.append(GapLinks(pressed(layer, self.left), columns, self.first, last, *radii))

    def _contact(self, index: int) -> Floats:
        """Conductance between a layer and what is inside it [W/(m2 K)]."""
        layers = self.run.meridian.layers
        layer, before = layers[index], layers[index - 1]
        out = np.full(len(self.z), TIGHT)
        if np.isfinite(before.closing_conductance):
            closed = np.asarray(before.thickness_at(self.z)) <= MINIMUM_THICKNESS
            out = np.where(closed, before.closing_conductance, out)
        if layer.loose:
            there = np.asarray(layer.thickness_at(self.z)) > MINIMUM_THICKNESS
            out = np.where(there, np.minimum(layer.inner_conductance_at(self.z), TIGHT), out)
        return np.asarray(out)


def _repeats(layer: Layer) -> bool:
    """Whether a layer is of flutes or struts."""
    return layer.flute is not None or layer.strut is not None


def repeating(cup: Cup) -> bool:
    """Whether a cup has layers of flutes or struts."""
    return any(_repeats(layer) for layer in cup.layer)


def local_stack(cup: Cup, layer: Layer) -> Stack:
    """What lies across a layer of flutes under a crest, or of struts in a strut: thickness [m], conductivity
    [W/(m K)] and heat capacity [J/(m3 K)] of each part, inside to outside."""
    _, plies = cell_of(cup, layer)
    emissivity = cup.material(layer.material).emissivity.value
    out = []
    for name, thickness in stack_at(cup, layer, 0.0):
        if name in plies:
            out.append((thickness, plies[name].through, plies[name].heat_capacity))
        else:
            across = float(cavity_conductivity(thickness, TYPICAL, emissivity))
            out.append((thickness, across, float(air_density(TYPICAL) * air_specific_heat(TYPICAL))))
    return out


def _in_cells(stack: Stack, count: int) -> tuple[Floats, Floats]:
    """Conductivity and heat capacity of cells `[cell]` across a stack: parts in series."""
    thickness, conductivity, capacity = np.array(stack).T
    ends = np.concatenate([[0.0], np.cumsum(thickness)])
    faces = ends[-1] * _fractions(count)
    low, high = np.maximum(faces[:-1, None], ends[:-1]), np.minimum(faces[1:, None], ends[1:])
    overlap = np.maximum(high - low, 0.0)
    width = np.diff(faces)
    return width / (overlap @ (1.0 / conductivity)), (overlap @ capacity) / width


def pressed(layer: GasLayer, share: float) -> GasLayer:
    """A gap under a grip that leaves a share of its resistance."""
    return replace(layer, gap=layer.gap.pressed(share))


def _fractions(count: int) -> Floats:
    return np.asarray(0.5 * (1.0 - np.cos(np.pi * np.arange(count + 1) / count)))


def free_profiles(run: Run, wall: Wall, heights: Floats, pick_ups: Floats) -> Floats:
    """Temperatures `[p, h, n]` [degC] of the free wall at pick-up times [s].

    Both faces follow the run's series; what is in between is conducted in the column.
    """
    series = run.series
    inner = _at_heights(run.faces.inner_height, series.inner_temperature, heights)
    outer = _at_heights(run.faces.outer_height, series.outer_temperature, heights)
    times = _free_times(series.time, pick_ups)
    columns = Columns(wall.capacity, wall.link.copy(), np.zeros_like(wall.capacity), 0.0)
    held = TIGHT * wall.inner_radius, TIGHT * wall.outer_radius
    field_ = np.full(wall.offset.shape, run.serving.start_temperature)
    kept = np.empty((len(pick_ups), *wall.offset.shape))
    kept[pick_ups <= 0.0] = field_

    def faces(time: float) -> tuple[Floats, Floats]:
        return _interpolated(series.time, inner, time), _interpolated(series.time, outer, time)

    for start, end in pairwise(times):
        for gap in wall.gaps:
            gap.update(columns.link, field_)
        early, late = faces(start + GAMMA * (end - start)), faces(end)
        field_ = columns.advance(
            field_, end - start, (held[0], early[0], late[0]), (held[1], early[1], late[1])
        )
        kept[np.abs(pick_ups - end) < 1e-9] = field_
    return kept


def _free_times(series: Floats, pick_ups: Floats) -> Floats:
    last = float(pick_ups.max())
    marks = np.unique(np.concatenate([series[series < last], pick_ups, [0.0]]))
    pieces = [np.linspace(a, b, SUBSTEPS + 1)[1:] for a, b in pairwise(marks)]
    return np.concatenate([marks[:1], *pieces])


def _at_heights(known: Floats, values: Floats, heights: Floats) -> Floats:
    """`[t, h]` from `[t, p]` at rising heights."""
    place = np.clip(np.searchsorted(known, heights) - 1, 0, len(known) - 2)
    share = np.clip((heights - known[place]) / (known[place + 1] - known[place]), 0.0, 1.0)
    return np.asarray((1.0 - share) * values[:, place] + share * values[:, place + 1])


def _interpolated(times: Floats, values: Floats, time: float) -> Floats:
    """Row of `[t, h]` at a time."""
    place = int(np.clip(np.searchsorted(times, time) - 1, 0, len(times) - 2))
    share = (time - times[place]) / (times[place + 1] - times[place])
    return np.asarray((1.0 - share) * values[place] + share * values[place + 1])


def free_outer(run: Run, heights: Floats, times: Floats) -> Floats:
    """Free outer wall `[t, h]` [degC] at heights and times; after the end of the run as at its end."""
    outer = _at_heights(run.faces.outer_height, run.series.outer_temperature, heights)
    return np.array([np.interp(times, run.series.time, column) for column in outer.T]).T
