"""How much heat the field conducts along the wall, beside what goes through it.

At each column of cells across the wall, H = sum of k_along dT/ds over the solids [W/m], and what a strip of
wall gains along the wall per area is dH/ds. Its share is |dH/ds| over the heat flux through the outer face,
-k dT/dn in the outermost cell. Array shapes: k snapshots, c columns, h heights.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from cupfem.conduction import Conductivity, Solid
from cupfem.problem import properties
from cupfem.run import Run

Floats = NDArray[np.float64]
Ints = NDArray[np.int_]

FIRST = 10.0
"""Snapshots before this time [s] are left out: little has come through the wall yet."""
LEAST_FLUX = 20.0
"""A smaller heat flux through the wall [W/m2] counts as this: about two kelvins above the room."""
TYPICAL = 60.0  # degC, for a conductivity that depends on temperature
_ALONG, _ACROSS = (4, 6), (7, 5)  # unknowns of a cell at the middles of opposite sides


def lateral_shares(run: Run, heights: Floats) -> Floats:
    """Largest share over the snapshots at heights [m] on the inside face `[h]`."""
    chosen = run.snapshots[run.snapshot_times >= min(FIRST, 0.5 * run.serving.duration)]
    s, gained, through = _columns(run, chosen)
    shares = np.abs(gained) / np.maximum(np.abs(through), LEAST_FLUX)
    arc = np.asarray(run.meridian.profile.arc_length_at(heights))
    return np.asarray(np.interp(arc, s, shares.max(axis=0)))


def _columns(run: Run, fields: Floats) -> tuple[Floats, Floats, Floats]:
    """Places along the wall `[c]` [m], gain along it and flux through it, `[k, c]` [W/m2]."""
    mesh = run.mesh
    solids = _solids(run)
    cells = np.concatenate([elements for elements, *_ in solids])
    along = np.concatenate([np.full(len(elements), k) for elements, k, _ in solids])
    across = np.concatenate([np.full(len(elements), k) for elements, _, k in solids])
    dofs = mesh.element_dofs[:, cells]
    s, n = mesh.wall_coordinates[:, dofs[8]]
    places, column = np.unique(np.round(s, 7), return_inverse=True)
    flow = along * _slope(mesh.points, fields, dofs, _ALONG) * _width(mesh.points, dofs, _ACROSS)
    summed = np.array([np.bincount(column, row, len(places)) for row in flow])
    order = np.lexsort((n, column))
    last = order[np.append(np.diff(column[order]) > 0, True)]
    through = -across[last] * _slope(mesh.points, fields, dofs[:, last], _ACROSS)
    return places, np.gradient(summed, places, axis=1), through


def _solids(run: Run) -> list[tuple[Ints, float, float]]:
    """Cells of each solid of the wall with its conductivities along and across [W/(m K)]."""
    given = properties(run.cup, run.mesh, run.serving.room.pressure)
    found = []
    for name, elements in run.mesh.regions.items():
        solid = given[name]
        if name != "base" and isinstance(solid, Solid):
            found.append((elements, _value(solid.along), _value(solid.through)))
    return found


def _value(conductivity: Conductivity) -> float:
    return float(conductivity(np.array([TYPICAL]))[0]) if callable(conductivity) else conductivity


def _slope(points: Floats, fields: Floats, dofs: Ints, sides: tuple[int, int]) -> Floats:
    """Slope between the middles of two sides `[k, cell]` [K/m], that of a quadratic at its middle."""
    first, second = dofs[sides[0]], dofs[sides[1]]
    return np.asarray((fields[:, second] - fields[:, first]) / _width(points, dofs, sides))


def _width(points: Floats, dofs: Ints, sides: tuple[int, int]) -> Floats:
    difference = points[:, dofs[sides[1]]] - points[:, dofs[sides[0]]]
    return np.asarray(np.hypot(*difference))
