"""Half a pitch of a fluted or strutted layer as a grid of columns around the cup and rows across the
layer."""

from __future__ import annotations

from dataclasses import dataclass, field
from functools import cached_property
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray
from skfem import Basis, ElementQuad2, MeshQuad

from cupfem.cup.cells import Flute, Strut
from cupfem.mesh import SectionMesh

Floats = NDArray[np.float64]
Ints = NDArray[np.int_]
Words = NDArray[np.str_]

AIR = "air"
COLUMNS = 24
ROWS = 4
LEAST_AIR = 1e-3
"""Least height of an air cell at a crest, as a share of the flute's height; it is taken as bond there."""


@dataclass(frozen=True, eq=False)
class Cell:
    """A grid over half a pitch: `x[column]`, `y[column, row]` [m], and what each cell is made of.

    `parts` is `[column, row]`: "air" or the name of a ply. `along` is `[2, column, row]`, the unit vector in
    the plane of each cell's board; only the shape of the medium turns it. `core` are the rows of the layer
    itself, without the liners on both sides.
    """

    x: Floats
    y: Floats
    parts: Words
    along: Floats
    core: slice = field(default_factory=lambda: slice(None))

    @property
    def height(self) -> float:
        """Across the layer [m]."""
        return float(self.y[0, -1] - self.y[0, 0])

    @property
    def width(self) -> float:
        """Half the pitch [m]."""
        return float(self.x[-1] - self.x[0])

    @cached_property
    def areas(self) -> Floats:
        """Of the cells, `[column, row]` [m2]."""
        rise = np.diff(self.y, axis=1)
        return np.asarray(np.diff(self.x)[:, None] * 0.5 * (rise[:-1] + rise[1:]))

    def shares(self) -> dict[str, float]:
        """Share of the core's area that each part takes."""
        areas, parts = self.areas[:, self.core], self.parts[:, self.core]
        return {str(name): float(areas[parts == name].sum() / areas.sum()) for name in np.unique(parts)}

    def cavity_heights(self) -> Floats:
        """For each cell of air the height across of the cavity it lies in [m], zero elsewhere."""
        air = self.parts == AIR
        rise = np.diff(self.y, axis=1)
        rise = 0.5 * (rise[:-1] + rise[1:]) * air
        cavity = np.cumsum(np.diff(air.astype(int), axis=1, prepend=0) == 1, axis=1) * air
        found = np.zeros_like(rise)
        for number in range(1, int(cavity.max(initial=0)) + 1):
            inside = cavity == number
            found += inside * (rise * inside).sum(axis=1, keepdims=True)
        return np.asarray(found)

    def mesh(self) -> SectionMesh:
        """The cell as a section in the plane: x for r, y for z; edges `inside` (below) and `outside`
        (above)."""
        columns, rows = len(self.x), self.y.shape[1]
        points = np.array([np.repeat(self.x, rows), self.y.ravel()])
        vertex = np.arange(columns * rows).reshape(columns, rows)
        quads = np.array([vertex[:-1, :-1], vertex[1:, :-1], vertex[1:, 1:], vertex[:-1, 1:]]).reshape(4, -1)
        grid = MeshQuad(points, quads, sort_t=False, validate=False)
        basis = Basis(grid, ElementQuad2(), intorder=2)
        order = np.lexsort((basis.doflocs[1], np.round(basis.doflocs[0], 12)))
        rank = np.empty_like(order)
        rank[order] = np.arange(len(order))
        words = self.parts.ravel()
        return SectionMesh(
            grid=grid,
            order=2,
            element_dofs=rank[basis.element_dofs],
            points=basis.doflocs[:, order],
            regions={str(name): np.flatnonzero(words == name) for name in np.unique(words)},
            edges={
                "inside": _facets(grid, basis, rank, vertex[:, 0]),
                "outside": _facets(grid, basis, rank, vertex[:, -1]),
            },
            along=self.along.reshape(2, -1),
            wall_coordinates=np.full(basis.doflocs.shape, np.nan),
            nodes_across=2 * rows - 1,
        )


def _facets(grid: MeshQuad, basis: Basis, rank: Ints, line: Ints) -> Ints:
    ends = np.array([line[:-1], line[1:]])
    codes = np.sort(grid.facets, axis=0)
    number = {(int(a), int(b)): place for place, (a, b) in enumerate(codes.T)}
    middle = [number[tuple(sorted((int(a), int(b))))] for a, b in ends.T]  # type: ignore[index]
    return np.array([rank[ends[0]], rank[ends[1]], rank[basis.facet_dofs[0, middle]]])


def fluted(flute: Flute, inner: float, outer: float, fineness: float = 1.0) -> Cell:
    """From a crest at the outer liner to the next at the inner one; thicknesses of both liners in metres.

    The medium's middle is a sinusoid. Where the medium touches a liner it is bonded over a width of its own
    thickness (common practice, no source).
    """
    half, thickness = 0.5 * flute.wave_length, flute.medium_thickness
    between = max(4, round(COLUMNS * fineness))
    x = np.concatenate([[0.0], np.linspace(0.5 * thickness, half - 0.5 * thickness, between + 1), [half]])
    top, least = inner + flute.wave_height, LEAST_AIR * flute.wave_height
    middle = inner + 0.5 * flute.wave_height + flute.amplitude * np.cos(np.pi * x / half)
    slope = flute.amplitude * np.pi / half * np.sin(np.pi * x / half)
    upright = 0.5 * thickness * np.hypot(1.0, slope)
    faces = [np.maximum(middle - upright, inner + least), np.minimum(middle + upright, top - least)]
    ends = [0.0 * x, inner + 0.0 * x, *faces, top + 0.0 * x, top + outer + 0.0 * x]
    y, words = _rows(ends, ["inner liner", AIR, "medium", AIR, "outer liner"], fineness)
    parts = np.broadcast_to(words, (len(x) - 1, len(words))).copy()
    _bond(parts)
    rows = len(words) // 5
    return Cell(x, y, parts, _along(parts, np.diff(middle) / np.diff(x)), slice(rows, 4 * rows))


def _along(parts: Words, slope: Floats) -> Floats:
    """Direction of the board in each cell: the medium follows its waves."""
    lean = np.where(parts == "medium", np.arctan(slope)[:, None], 0.0)
    return np.array([np.cos(lean), np.sin(lean)])


def _bond(parts: Words) -> None:
    """The thin air at both crests, in the first and the last column, is bond."""
    rows = np.flatnonzero(parts[1] == "medium")
    parts[0, rows[-1] + 1 :][parts[0, rows[-1] + 1 :] == AIR] = "medium"
    parts[-1, : rows[0]][parts[-1, : rows[0]] == AIR] = "medium"


def strutted(strut: Strut, inner: float = 0.0, outer: float = 0.0, fineness: float = 1.0) -> Cell:
    """From the middle of a strut to the middle between two; thicknesses of the boards on both sides in
    metres."""
    half, wood = 0.5 * strut.pitch, 0.5 * strut.thickness
    within, between = max(2, round(4 * fineness)), max(4, round(COLUMNS * fineness))
    apart = wood + (half - wood) * np.linspace(0.0, 1.0, between + 1)[1:] ** 1.5
    x = np.concatenate([np.linspace(0.0, wood, within + 1), apart])
    faces = np.cumsum([0.0, inner, strut.height, outer])
    names = ["inner liner", AIR, "outer liner"]
    kept = [place for place in range(3) if faces[place + 1] > faces[place]]
    ends = [np.full_like(x, faces[place]) for place in (*kept, kept[-1] + 1)]
    y, words = _rows(ends, [names[place] for place in kept], fineness)
    parts = np.broadcast_to(words, (len(x) - 1, len(words))).copy()
    parts[:within][parts[:within] == AIR] = "strut"
    along = np.zeros((2, *parts.shape))
    along[0], along[1] = parts != "strut", parts == "strut"
    inside = np.flatnonzero(words == AIR)
    return Cell(x, y, parts, along, slice(int(inside[0]), int(inside[-1]) + 1))


def _rows(ends: list[Floats], names: list[str], fineness: float) -> tuple[Floats, Words]:
    count = max(2, round(ROWS * fineness))
    fraction = np.linspace(0.0, 1.0, count + 1)[1:]
    rows = [ends[0][:, None]]
    for low, high in pairwise(ends):
        rows.append(low[:, None] + (high - low)[:, None] * fraction)
    return np.concatenate(rows, axis=1), np.repeat(np.array(names, dtype="U12"), count)
