"""Element matrices of conduction: constant cells, and cells whose conductivity follows the field."""

from __future__ import annotations

from typing import Protocol

import numpy as np
from numpy.typing import NDArray

from cupfem.axisymmetry import (
    EdgeQuadrature,
    Measure,
    conduction_matrices,
)
from cupfem.conduction.conditions import Conductivity, GasLayer, Solid
from cupfem.mesh import Contact, SectionMesh

Floats = NDArray[np.float64]
Ints = NDArray[np.int_]


class Varying(Protocol):
    """Cells whose conductivity follows the field."""

    dofs: Ints

    def heat(self, temperature: Floats) -> Floats: ...

    def matrices(self, temperature: Floats) -> Floats: ...


class GapCells:
    """Cells of a gap: through the gap the whole conductance (gas, radiation, contact), along it the gas
    only."""

    def __init__(self, mesh: SectionMesh, name: str, layer: GasLayer, measure: Measure):
        faces = mesh.gaps[name]
        self.dofs = mesh.element_dofs[:, faces.elements]
        self._layer, self._inner, self._outer = layer, faces.inner, faces.outer
        self._r_inner = mesh.points[0, faces.inner].mean(axis=0)
        self._r_outer = mesh.points[0, faces.outer].mean(axis=0)
        self._through, self._along = _unit_matrices(mesh, faces.elements, measure)

    def _conductivities(self, temperature: Floats) -> tuple[Floats, Floats]:
        inner, outer = temperature[self._inner].mean(axis=0), temperature[self._outer].mean(axis=0)
        gap, height = self._layer.gap, self._layer.height
        through = gap.through_conductivity(inner, outer, self._r_inner, self._r_outer, height)
        return np.asarray(through), np.asarray(gap.along_conductivity(0.5 * (inner + outer)))

    def heat(self, temperature: Floats) -> Floats:
        """K(T) T, `[element, local]`."""
        through, along = self._conductivities(temperature)
        local = temperature[self.dofs.T]
        out = through[:, None] * np.matmul(self._through, local[:, :, None])[:, :, 0]
        return np.asarray(out + along[:, None] * np.matmul(self._along, local[:, :, None])[:, :, 0])

    def matrices(self, temperature: Floats) -> Floats:
        """Element matrices at the field."""
        through, along = self._conductivities(temperature)
        return np.asarray(through[:, None, None] * self._through + along[:, None, None] * self._along)


class TemperatureDependentCells:
    """Cells of a solid whose conductivity depends on temperature (taken at the mean of the cell)."""

    def __init__(self, mesh: SectionMesh, elements: Ints, solid: Solid, measure: Measure):
        self.dofs = mesh.element_dofs[:, elements]
        self._solid = solid
        self._through, self._along = _unit_matrices(mesh, elements, measure)
        self._mean = _mean_weights(len(self.dofs))

    def matrices(self, temperature: Floats) -> Floats:
        """Element matrices at the field."""
        mean = self._mean @ temperature[self.dofs]
        through, along = (_value(k, mean) for k in (self._solid.through, self._solid.along))
        return np.asarray(through[:, None, None] * self._through + along[:, None, None] * self._along)

    def heat(self, temperature: Floats) -> Floats:
        """K(T) T, `[element, local]`."""
        return np.asarray(
            np.matmul(self.matrices(temperature), temperature[self.dofs.T][:, :, None])[:, :, 0]
        )


def tensor(along: Floats, k_through: float, k_along: float) -> Floats:
    """Conductivity tensor `[2, 2, element]` in r, z from the values across and along each cell's own axis."""
    through = np.array([along[1], -along[0]])
    return np.asarray(k_along * along[:, None] * along[None] + k_through * through[:, None] * through[None])


def _unit_matrices(mesh: SectionMesh, elements: Ints, measure: Measure) -> tuple[Floats, Floats]:
    along = mesh.along[:, elements]
    through = conduction_matrices(mesh, elements, tensor(along, 1.0, 0.0), measure)
    return through, conduction_matrices(mesh, elements, tensor(along, 0.0, 1.0), measure)


def _mean_weights(local: int) -> Floats:
    """Weights of the mean over a cell: Simpson's rule in both directions for nine nodes."""
    if local == 9:
        return np.array([1, 1, 1, 1, 4, 4, 4, 4, 16]) / 36.0
    return np.full(local, 1.0 / local)


def _value(conductivity: Conductivity, temperature: Floats) -> Floats:
    if callable(conductivity):
        return np.asarray(conductivity(temperature))
    return np.full(temperature.shape, conductivity)


def contact_matrices(mesh: SectionMesh, contact: Contact, measure: Measure) -> tuple[Ints, Floats]:
    points = EdgeQuadrature(mesh, contact.inner, measure).whole()
    jump = np.concatenate([points.shape, -points.shape], axis=1)
    facets = contact.inner.shape[1]
    conductance = np.repeat(np.broadcast_to(contact.conductance, facets), len(points.weight) // facets)
    matrices = (jump[:, :, None] * jump[:, None, :]) * (points.weight * conductance)[:, None, None]
    matrices = matrices.reshape(facets, -1, *matrices.shape[1:]).sum(axis=1)
    return np.concatenate([contact.inner, contact.outer]), matrices
