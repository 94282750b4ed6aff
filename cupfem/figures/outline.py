"""Triangles, cells and boundary lines of a meshed section, in any pair of coordinates of its unknowns."""

from __future__ import annotations

import numpy as np
from matplotlib.path import Path
from numpy.typing import NDArray

from cupfem.meridian import Meridian
from cupfem.mesh import SectionMesh

Floats = NDArray[np.float64]
Ints = NDArray[np.int_]

_QUARTERS = ((0, 4, 8, 7), (4, 1, 5, 8), (8, 5, 2, 6), (7, 8, 6, 3))
"""A nine-point quadrilateral as four of four points: corners 0-3, middles of sides 4-7, middle 8."""
SHADE = {
    "board": ("#c9a366", "#dfc697"),
    "plastic": ("#7d9fc4", "#abc4dd"),
    "glazed": ("#b3a79c", "#cdc4bb"),
    "metal": ("#8b96a3", "#b4bcc6"),
}
GAS = "#f2f7fa"


def wall_elements(mesh: SectionMesh) -> Ints:
    """Elements of the wall: all but those of the base."""
    return np.setdiff1d(np.arange(mesh.element_dofs.shape[1]), mesh.regions.get("base", []))


def quarters(mesh: SectionMesh, elements: Ints) -> Ints:
    """`[4, cell]`, unknowns at the corners of the cells that all unknowns of the elements span."""
    dofs = mesh.element_dofs[:, elements]
    return np.concatenate([dofs[list(four)] for four in _QUARTERS], axis=1) if mesh.order == 2 else dofs


def triangles(mesh: SectionMesh, elements: Ints) -> Ints:
    """`[triangle, 3]`, unknowns of triangles that fill the elements."""
    four = quarters(mesh, elements)
    return np.concatenate([four[[0, 1, 2]], four[[0, 2, 3]]], axis=1).T


def heights_across(mesh: SectionMesh, meridian: Meridian) -> Floats:
    """`[2, dof]`, distance across the wall and height on the inside face [m]: the wall unrolled."""
    height = meridian.profile.height
    s, n = mesh.wall_coordinates
    return np.array([n, np.interp(s, meridian.profile.arc_length_at(height), height)])


def boundaries(mesh: SectionMesh, coordinates: Floats) -> Floats:
    """`[line, 2, 2]`, facets between two regions or at the edge of the section; coordinates are `[2, dof]`.

    Lines without coordinates (those of the base in the unrolled wall) are left out.
    """
    region = np.full(mesh.grid.t.shape[1] + 1, -1)  # the last entry stands for "outside"
    for number, elements in enumerate(mesh.regions.values()):
        region[elements] = number
    first, second = region[mesh.grid.f2t]
    dof = np.empty(mesh.grid.p.shape[1], dtype=int)
    dof[mesh.grid.t] = mesh.element_dofs[:4]
    lines = coordinates[:, dof[mesh.grid.facets[:, first != second]]].transpose(2, 1, 0)
    return np.asarray(lines[~np.isnan(lines).any(axis=(1, 2))])


def path_of_cells(cells: Floats) -> Path:
    """All cells `[cell, corner, 2]` as one path: one artist draws far faster than one for each cell."""
    return Path.make_compound_path_from_polys(cells)


def path_of_lines(lines: Floats) -> Path:
    """All lines `[line, 2, 2]` as one path."""
    return Path(lines.reshape(-1, 2), np.tile([Path.MOVETO, Path.LINETO], len(lines)))


def layer_colours(meridian: Meridian) -> dict[str, str]:
    """Layer (and "base") -> colour by its kind of material; solids that follow each other take two shades in
    turn."""
    colours, turn = {}, 0
    for layer in meridian.layers:
        if layer.material.kind == "gas":
            colours[layer.name] = GAS
        else:
            colours[layer.name] = SHADE[layer.material.surface_class][turn % 2]
            turn += 1
    if meridian.base is not None:
        colours["base"] = SHADE[meridian.base.material.surface_class][1]
    return colours


def region_colours(mesh: SectionMesh, meridian: Meridian) -> dict[str, str]:
    """Region -> colour; a pocket is air, whatever the layer that left it."""
    known = layer_colours(meridian)
    return {region: known.get(region, GAS) for region in mesh.regions}
