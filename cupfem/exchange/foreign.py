"""Half sections meshed by other programs; the only place that reads with meshio.

Gmsh's `.msh` files (versions 2.2 and 4.1) are read, with physical groups as names: Geuzaine and Remacle,
Gmsh: a 3-D finite element mesh generator, Int. J. Numer. Meth. Eng. 79 (2009) 1309; format: Gmsh's reference
manual.
"""

from __future__ import annotations

import struct
from collections.abc import Iterable
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from cupfem.errors import InputError, nearest
from cupfem.exchange.files import explained, shown

Floats = NDArray[np.float64]
Ints = NDArray[np.int_]

CORNERS = {"triangle": 3, "triangle6": 3, "quad": 4, "quad8": 4, "quad9": 4}
NODES = {"line": 2, "line3": 3, "triangle": 3, "triangle6": 6, "quad": 4, "quad8": 8, "quad9": 9}
LINES = ("line", "line3")
IDLE = ("vertex",)
LARGEST = 1e9
"""Coordinates from here on are none of a cup, in any unit."""
STRAIGHT = 1e-3
"""Farthest that a middle node may lie from the middle of its side, over the side's length."""


@dataclass(frozen=True, eq=False)
class ForeignMesh:
    """What a file of another program holds.

    Attributes
    ----------
    points:
        `[2, vertex]`, r and z [m]; corners of cells only.
    cells:
        `[corner, cell]`, counter-clockwise.
    regions:
        Name -> cells.
    edges:
        Name -> vertices of its facets, `[2, facet]`.
    """

    points: Floats
    cells: Ints
    regions: dict[str, Ints]
    edges: dict[str, Ints]


def read_mesh(path: str | Path, scale: float, needed: Iterable[str] = ()) -> ForeignMesh:
    """Read a file whose lengths are `scale` metres; one line for whatever cannot be used."""
    path = Path(path)
    if path.suffix != ".msh":
        raise _refused(path, "only Gmsh's .msh files are read", "save it as .msh, version 4.1 or 2.2")
    with explained(path, "mesh file"):
        path.open("rb").close()
        raw = _parsed(path)
    names = _names(path, raw)
    cells, cell_names = _blocks(path, raw, names[2], CORNERS)
    lines, line_names = _blocks(path, raw, names[1], dict.fromkeys(LINES, 2))
    _check_names(path, {*cell_names, *line_names}, needed)
    points = _flat_points(path, raw.points) * scale
    used, corners = np.unique(cells, return_inverse=True)
    points, cells = points[:, used], corners.reshape(cells.shape)
    _check_joined(path, points, cells)
    _check_once(path, cells)
    return ForeignMesh(
        points,
        _counter_clockwise(path, points, cells),
        {name: np.flatnonzero(cell_names == name) for name in dict.fromkeys(cell_names)},
        {
            name: _renumbered(path, name, lines[:, line_names == name], used)
            for name in dict.fromkeys(line_names)
        },
    )


def _refused(path: Path, why: str, instead: str) -> InputError:
    return InputError("mesh file", shown(path), why, instead)


def _parsed(path: Path) -> Any:
    """What meshio reads; it refuses a damaged file in many ways."""
    from meshio import ReadError, gmsh

    damage = (ReadError, ValueError, LookupError, TypeError, AssertionError, EOFError, struct.error)
    try:
        with np.errstate(all="ignore"):
            raw = gmsh.read(path)
            if not _consistent(raw):
                raise ReadError("names and cells do not match")
    except (*damage, MemoryError, OverflowError) as error:
        raise _refused(
            path, "not a whole .msh file of version 2.2 or 4.1", "write it again, best in binary form"
        ) from error
    if not (np.abs(raw.points) < LARGEST).all():
        raise _refused(path, "a coordinate is no number, or far too large", "write it again")
    return raw


def _consistent(raw: Any) -> bool:
    """Whether each cell has its number of nodes, and a tag if any has."""
    tags = raw.cell_data.get("gmsh:physical", [])
    shapes = [block.data.shape for block in raw.cells]
    nodes = [NODES.get(block.type, block.data.shape[-1]) for block in raw.cells]
    whole = shapes == [(len(block.data), count) for block, count in zip(raw.cells, nodes, strict=True)]
    return whole and [len(of_block) for of_block in tags] in ([], [shape[0] for shape in shapes])


def _names(path: Path, raw: Any) -> dict[int, dict[int, str]]:
    """Dimension -> tag -> name of the physical groups."""
    names: dict[int, dict[int, str]] = {1: {}, 2: {}}
    for name, (tag, dimension) in raw.field_data.items():
        names.setdefault(int(dimension), {})[int(tag)] = name
    if not names[1] or not names[2] or "gmsh:physical" not in raw.cell_data:
        missing = "cells" if not names[2] else "edges"
        raise _refused(path, f"no names of {missing}", "name them as physical groups of surfaces and curves")
    return names


def _blocks(path: Path, raw: Any, names: dict[int, str], kinds: dict[str, int]) -> tuple[Ints, Any]:
    """Corners `[corner, cell]` and name `[cell]` of all blocks of some kinds of cells."""
    known = {*CORNERS, *LINES, *IDLE}
    found = [(b.type, b.data, t) for b, t in zip(raw.cells, raw.cell_data["gmsh:physical"], strict=True)]
    strange = {kind for kind, _, _ in found} - known
    if strange:
        why = f"holds cells of the kind {min(strange)}"
        raise _refused(path, why, "mesh the flat half section with triangles or quadrilaterals, order 1 or 2")
    chosen = [(kind, data, tags) for kind, data, tags in found if kind in kinds and len(data)]
    counts = {kinds[kind] for kind, _, _ in chosen}
    if len(counts) != 1:
        why = "holds triangles and quadrilaterals" if counts else "holds no cells or no edges"
        raise _refused(path, why, "mesh the half section with one kind of cells and named edges")
    for kind, data, _ in chosen:
        _check_straight(path, kind, raw.points[data])
    tags = np.concatenate([tags for _, _, tags in chosen])
    if not np.isin(tags, list(names)).all():
        raise _refused(path, "some cells or edges have no name", "put each into one physical group")
    corners = np.concatenate([data[:, : kinds[kind]] for kind, data, _ in chosen])
    return corners.T, np.array([names[tag] for tag in tags], dtype=object)


def _check_straight(path: Path, kind: str, places: Floats) -> None:
    """Refuse curved sides: integrals over edges take them as straight. `places[cell, node, 3]`."""
    corners = CORNERS.get(kind, 2)
    sides = places.shape[1] - corners - (kind == "quad9")
    if sides <= 0:
        return
    start, middle = places[:, :sides], places[:, corners : corners + sides]
    end = np.roll(places[:, :corners], -1, axis=1)[:, :sides]
    off = np.linalg.norm(middle - 0.5 * (start + end), axis=2) / np.linalg.norm(end - start, axis=2)
    if off.max() > STRAIGHT:
        why = f"a side is curved: its middle is off by {100 * off.max():.2g} % of its length"
        raise _refused(path, why, "mesh with more and straight sides (order 1)")


def _check_names(path: Path, known: set[str], needed: Iterable[str]) -> None:
    for name in needed:
        if name not in known:
            listed = ", ".join(sorted(known))
            raise _refused(
                path, f'no physical group "{name}"{nearest(name, known)}', f"the file has: {listed}"
            )


def _flat_points(path: Path, points: Floats) -> Floats:
    """r and z `[2, point]`; the file's x is r, its y is z."""
    size = float(np.abs(points).max())
    if np.abs(points[:, 2:]).max(initial=0.0) > 1e-9 * size:
        raise _refused(path, "not in one plane", "draw the half section in x (radius) and y (height)")
    if points[:, 0].min() < -1e-9 * size:
        raise _refused(path, "a point has a negative radius", "draw only the half with x (radius) above zero")
    flat = points[:, :2].T.copy()
    flat[0, np.abs(flat[0]) < 1e-9 * size] = 0.0
    return flat


def _check_joined(path: Path, points: Floats, cells: Ints) -> None:
    """Refuse points that stand twice at one place: no heat would cross there."""
    shortest = np.linalg.norm(points[:, cells] - points[:, np.roll(cells, 1, axis=0)], axis=0).min()
    grid = np.round(points / max(1e-3 * shortest, 1e-15))
    twice = points.shape[1] - len(np.unique(grid, axis=1).T)
    if twice:
        why = f"{twice} points stand twice at one place, so that the parts are not joined"
        raise _refused(path, why, "remove the doubles (in Gmsh: Coherence) and mesh it again")


def _check_once(path: Path, cells: Ints) -> None:
    if len(np.unique(np.sort(cells, axis=0), axis=1).T) < cells.shape[1]:
        why = "a surface lies in two physical groups"
        raise _refused(path, why, "put each surface into one physical group")


def _counter_clockwise(path: Path, points: Floats, cells: Ints) -> Ints:
    """Cells turned to counter-clockwise; refuses flat, folded and hollow ones."""
    corner = points[:, cells]
    after, before = np.roll(corner, -1, axis=1) - corner, np.roll(corner, 1, axis=1) - corner
    turn = after[0] * before[1] - after[1] * before[0]
    limit = 1e-9 * np.linalg.norm(after, axis=0) * np.linalg.norm(before, axis=0)
    right, left = (turn > limit).all(axis=0), (turn < -limit).all(axis=0)
    if not (right | left).all():
        bad = int(np.flatnonzero(~(right | left))[0])
        r, z = corner[:, :, bad].mean(axis=1)
        where = f"a cell near r = {1e3 * r:.4g} mm, z = {1e3 * z:.4g} mm is flat or folded"
        raise _refused(path, where, "mesh it again")
    return np.where(left, cells[::-1], cells)


def _renumbered(path: Path, name: str, lines: Ints, used: Ints) -> Ints:
    """Vertices `[2, facet]` of an edge, counted among the corners of cells."""
    place = np.minimum(np.searchsorted(used, lines), len(used) - 1)
    if (used[place] != lines).any():
        raise _refused(path, f'edge "{name}" lies off the cells', "name only edges of the meshed surfaces")
    return place
