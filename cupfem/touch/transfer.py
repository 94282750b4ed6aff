"""Carry a field from one mesh of a wall to another that has other stations but the same lines across.

Both meshes hold the same layers cell by cell across; along the wall each target unknown takes the value of
the source's own quadratic along the same line. The base has no stations of its own and is copied.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from cupfem.mesh import SectionMesh

Floats = NDArray[np.float64]
Ints = NDArray[np.int_]

# Local unknowns of a cell (corners, sides, middle) by place: three along the wall, three across it.
_PLACES = np.array([[0, 4, 1], [7, 8, 5], [3, 6, 2]])


def transfer(source: SectionMesh, field: Floats, target: SectionMesh, out: Floats) -> Floats:
    """Write a field `[dof]` of the source into `out` `[dof]` of the target, region by region (in place).

    Regions that only one of the two has are left alone.
    """
    for name, elements in source.regions.items():
        if name not in target.regions:
            continue
        here, there = source.element_dofs[:, elements], target.element_dofs[:, target.regions[name]]
        if np.isnan(source.wall_coordinates[0, here]).any():
            out[there] = field[here]
        else:
            _along(source, here, field, target, there, out)
    return out


def _along(
    source: SectionMesh, here: Ints, field: Floats, target: SectionMesh, there: Ints, out: Floats
) -> None:
    start, end, lines = _intervals(source, here)
    other_start, other_end, _ = _intervals(target, there)
    values = field[here].T.reshape(len(start), lines, 9)[:, :, _PLACES]
    dofs = there.T.reshape(len(other_start), lines, 9)[:, :, _PLACES]
    for place, share in enumerate((0.0, 0.5, 1.0)):
        s = other_start + share * (other_end - other_start)
        inner = s + 1e-9 * (0.5 - share)  # an end belongs to the interval on this side of it
        interval = np.clip(np.searchsorted(start, inner, side="right") - 1, 0, len(start) - 1)
        x = np.clip((s - start[interval]) / (end[interval] - start[interval]), 0.0, 1.0)
        shape = np.array([(1 - x) * (1 - 2 * x), 4 * x * (1 - x), x * (2 * x - 1)])
        out[dofs[:, :, place]] = np.einsum("ki,ilkn->iln", shape, values[interval])


def _intervals(mesh: SectionMesh, dofs: Ints) -> tuple[Floats, Floats, int]:
    """Where the intervals of a region begin and end along the wall [m], and how many cells stand across."""
    low, high = mesh.wall_coordinates[0, dofs[0]], mesh.wall_coordinates[0, dofs[3]]
    lines = int(np.count_nonzero(np.abs(low - low[0]) < 1e-12))
    return low[::lines], high[::lines], lines
