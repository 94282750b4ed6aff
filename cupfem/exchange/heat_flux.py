"""Heat flux at the centres of cells, from the gradient of the field and each cell's own conductivities."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
from numpy.typing import NDArray
from skfem import Basis

from cupfem.conduction import GasLayer, Solid
from cupfem.mesh import SectionMesh

Floats = NDArray[np.float64]
Ints = NDArray[np.int_]


class HeatFlux:
    """Heat flux of fields on a mesh; what does not change from field to field is set up once."""

    def __init__(self, mesh: SectionMesh, properties: Mapping[str, Solid | GasLayer]):
        self._mesh, self._properties = mesh, properties
        self._shape, self._slope = centre_shapes(mesh)

    def at(self, temperature: Floats) -> Floats:
        """Heat flux -k grad T `[2, element]` [W/m2] in r and z, from a field `[dof]` [degC].

        In the cells of a gap the conductivity across is the effective one (gas, radiation and contact), so
        that the heat flux is the whole that crosses the gap there.
        """
        gradient = np.einsum("dle,le->de", self._slope, temperature[self._mesh.element_dofs])
        through, along = self._conductivities(temperature)
        direction = self._mesh.along
        part_along = (direction * gradient).sum(axis=0)
        return np.asarray(-through * gradient - (along - through) * part_along * direction)

    def _conductivities(self, temperature: Floats) -> tuple[Floats, Floats]:
        """Conductivities across and along the wall `[element]` [W/(m K)] at the field."""
        across, along = np.empty((2, self._mesh.element_dofs.shape[1]))
        for name, elements in self._mesh.regions.items():
            given = self._properties[name]
            if isinstance(given, GasLayer):
                across[elements], along[elements] = self._of_gap(name, given, temperature)
            else:
                across[elements], along[elements] = self._of_solid(elements, given, temperature)
        return across, along

    def _of_solid(self, elements: Ints, solid: Solid, temperature: Floats) -> tuple[Floats, ...]:
        centre = self._shape @ temperature[self._mesh.element_dofs[:, elements]]
        return tuple(
            np.asarray(k(centre)) if callable(k) else np.full(len(elements), k)
            for k in (solid.through, solid.along)
        )

    def _of_gap(self, name: str, layer: GasLayer, temperature: Floats) -> tuple[Floats, Floats]:
        """As in the march: from the mean temperatures and radii of the gap's faces at the cell."""
        faces, radius = self._mesh.gaps[name], self._mesh.points[0]
        inner, outer = temperature[faces.inner].mean(axis=0), temperature[faces.outer].mean(axis=0)
        radii = radius[faces.inner].mean(axis=0), radius[faces.outer].mean(axis=0)
        through = layer.gap.through_conductivity(inner, outer, *radii, layer.height)
        return np.asarray(through), np.asarray(layer.gap.along_conductivity(0.5 * (inner + outer)))


def centre_shapes(mesh: SectionMesh) -> tuple[Floats, Floats]:
    """Shape functions `[local]` and their gradients `[2, local, element]` [1/m] at the centres of the
    cells."""
    centre = np.full((2, 1), 0.5 if len(mesh.grid.t) == 4 else 1.0 / 3.0)
    basis = Basis(mesh.grid, mesh.basis(np.zeros(1, dtype=int)).elem, quadrature=(centre, np.ones(1)))
    fields = [shape[0] for shape in basis.basis]
    values = np.array([np.asarray(shape).flat[0] for shape in fields])
    return values, np.stack([np.asarray(shape.grad)[:, :, 0] for shape in fields], axis=1)
