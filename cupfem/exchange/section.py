"""A mesh of another program as a section that the operators take."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from pathlib import Path

import numpy as np
from numpy.typing import NDArray
from scipy import sparse
from scipy.sparse.csgraph import reverse_cuthill_mckee
from skfem import Basis, MeshQuad, MeshTri

from cupfem.errors import InputError
from cupfem.exchange.files import shown
from cupfem.exchange.foreign import ForeignMesh, read_mesh
from cupfem.mesh import SectionMesh
from cupfem.mesh.section import element_of
from cupfem.quantities import parse_quantity

Floats = NDArray[np.float64]
Ints = NDArray[np.int_]

UPWARDS = (0.0, 1.0)


def read_section(
    path: str | Path,
    *,
    unit: str,
    order: int = 2,
    along: Mapping[str, tuple[float, float]] | None = None,
    needed: Iterable[str] = (),
) -> SectionMesh:
    """Read a half section from a Gmsh `.msh` file: x is the radius, y the height.

    Physical groups of surfaces become regions, those of curves become edges. Cells are triangles or
    quadrilaterals with straight sides; middle nodes of a second-order file are not needed, since `order`
    places its own.

    Parameters
    ----------
    unit:
        Unit of the file's coordinates, such as "mm".
    order:
        1 for linear, 2 for quadratic elements.
    along:
        Region -> direction (r, z) along the wall, for solids that conduct differently along and through;
        upwards where it is left out.
    needed:
        Names that the file must hold.

    Raises
    ------
    InputError
        If the file cannot be read, lacks names, or its cells cannot be used.
    """
    if order not in (1, 2):
        raise InputError("order", order, "elements are linear or quadratic", 'write "1" or "2"')
    along = along or {}
    found = read_mesh(path, parse_quantity(f"1 {unit}", "length"), [*needed, *along])
    kind = MeshTri if len(found.cells) == 3 else MeshQuad
    grid = kind(found.points, found.cells, sort_t=False, validate=False)
    basis = Basis(grid, element_of(grid, order), intorder=2)
    rank = _rank(basis)
    middles = [basis.facet_dofs] if order == 2 else []
    facets = rank[np.concatenate([basis.nodal_dofs[0, grid.facets], *middles])]
    points = np.empty(basis.doflocs.shape)
    points[:, rank] = basis.doflocs
    return SectionMesh(
        grid=grid,
        order=order,
        element_dofs=rank[basis.element_dofs],
        points=points,
        regions=found.regions,
        edges={name: facets[:, _facets(path, grid, name, ends)] for name, ends in found.edges.items()},
        along=_directions(found, along),
        wall_coordinates=np.full(points.shape, np.nan),
        nodes_across=0,
    )


def _rank(basis: Basis) -> Ints:
    """New number of each unknown: a narrow band by reverse Cuthill-McKee (George and Liu, Computer Solution
    of Large Sparse Positive Definite Systems, 1981, ch. 4)."""
    local = len(basis.element_dofs)
    rows = np.repeat(basis.element_dofs, local, axis=0).ravel()
    columns = np.tile(basis.element_dofs, (local, 1)).ravel()
    graph = sparse.csr_array((np.ones(len(rows), dtype=bool), (rows, columns)), shape=(basis.N, basis.N))
    sequence = reverse_cuthill_mckee(graph, symmetric_mode=True)
    rank = np.empty(basis.N, dtype=int)
    rank[sequence] = np.arange(basis.N)
    return rank


def _facets(path: str | Path, grid: MeshQuad | MeshTri, name: str, ends: Ints) -> Ints:
    """Facets of the grid by their two vertices."""
    count = grid.p.shape[1]
    low, high = np.sort(grid.facets.astype(np.int64), axis=0)
    codes = low * count + high
    order = np.argsort(codes)
    low, high = np.sort(ends.astype(np.int64), axis=0)
    wanted = low * count + high
    place = order[np.minimum(np.searchsorted(codes[order], wanted), len(codes) - 1)]
    if (codes[place] != wanted).any():
        raise InputError(
            "mesh file",
            shown(Path(path)),
            f'edge "{name}" does not follow the sides of cells',
            "mesh curves and surfaces together",
        )
    return np.asarray(place)


def _directions(found: ForeignMesh, along: Mapping[str, tuple[float, float]]) -> Floats:
    directions = np.tile(np.array([UPWARDS]).T, found.cells.shape[1])
    for name, vector in along.items():
        length = float(np.hypot(*vector))
        if not 0.0 < length < np.inf:
            raise InputError(f"along.{name}", str(vector), "not a direction", 'write "(0.0, 1.0)", upwards')
        directions[:, found.regions[name]] = (np.array(vector, dtype=float) / length)[:, None]
    return directions
