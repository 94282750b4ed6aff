"""A meshed half section: unknowns, regions, edges."""

from __future__ import annotations

from dataclasses import dataclass, field
from functools import cached_property

import numpy as np
from numpy.typing import NDArray
from skfem import Basis, Element, ElementQuad1, ElementQuad2, ElementTriP1, ElementTriP2, MeshQuad, MeshTri

from cupfem.errors import InputError

Floats = NDArray[np.float64]
Ints = NDArray[np.int_]

_ELEMENTS = {3: (ElementTriP1, ElementTriP2), 4: (ElementQuad1, ElementQuad2)}
"""Linear and quadratic element of a cell with that many corners."""


@dataclass(frozen=True, eq=False)
class GapFaces:
    """For each cell of a gap: the facets that face it from inside and from outside, `[3, cell]`, and where
    it lies."""

    elements: Ints
    inner: Ints
    outer: Ints


@dataclass(frozen=True, eq=False)
class Contact:
    """Facets in pairs at the same place that exchange heat through a contact conductance [W/(m2 K)].

    `inner` and `outer` are `[3, facet]` or `[2, facet]`; the conductance is a number, or one for each
    `[facet]`.
    """

    inner: Ints
    outer: Ints
    conductance: float | Floats


@dataclass(frozen=True, eq=False)
class SectionMesh:
    """A meshed half section; unknowns are numbered so that neighbours have near numbers.

    Attributes
    ----------
    grid:
        The scikit-fem mesh (vertices and cells): quadrilaterals, or triangles from another program.
    element_dofs:
        `[local, element]`, numbers of the unknowns.
    points:
        `[2, dof]`, r and z of each unknown [m].
    regions:
        Name -> elements.
    edges:
        Name -> unknowns of its facets, `[3, facet]` (start, end, middle) or `[2, facet]`.
    along:
        `[2, element]`, unit vector along the wall.
    wall_coordinates:
        `[2, dof]`, s along the wall and n across it [m]; NaN in the base.
    """

    grid: MeshQuad | MeshTri
    order: int
    element_dofs: Ints
    points: Floats
    regions: dict[str, Ints]
    edges: dict[str, Ints]
    along: Floats
    wall_coordinates: Floats
    nodes_across: int
    gaps: dict[str, GapFaces] = field(default_factory=dict)
    contacts: tuple[Contact, ...] = ()
    pockets: tuple[str, ...] = ()

    @property
    def size(self) -> int:
        """Number of unknowns."""
        return int(self.points.shape[1])

    @cached_property
    def half_bandwidth(self) -> int:
        """Largest distance between the numbers of two coupled unknowns."""
        spread = int(np.max(self.element_dofs.max(axis=0) - self.element_dofs.min(axis=0)))
        for contact in self.contacts:
            both = np.concatenate([contact.inner, contact.outer])
            spread = max(spread, int(np.max(both.max(axis=0) - both.min(axis=0))))
        return spread

    def basis(self, elements: Ints | None = None) -> Basis:
        """scikit-fem basis; its own numbering, see `element_dofs` for ours."""
        return Basis(
            self.grid, element_of(self.grid, self.order), intorder=2 * self.order + 1, elements=elements
        )

    def edge(self, name: str) -> Ints:
        """Facets of a named edge; an unknown or empty edge is an error."""
        if name not in self.edges or self.edges[name].shape[1] == 0:
            known = ", ".join(sorted(key for key, value in self.edges.items() if value.shape[1]))
            raise InputError("edge", name, "the mesh has no facets of that name", f"one of: {known}")
        return self.edges[name]


def element_of(grid: MeshQuad | MeshTri, order: int) -> Element:
    """The Lagrange element of a grid."""
    return _ELEMENTS[len(grid.t)][order - 1]()
