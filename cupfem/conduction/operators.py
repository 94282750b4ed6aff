"""Mass and stiffness of one section on a fixed pattern, its loads and its stored heat."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
from numpy.typing import NDArray

from cupfem.axisymmetry import (
    AXISYMMETRIC,
    EdgeQuadrature,
    Measure,
    capacity_matrices,
    conduction_matrices,
    source_load,
)
from cupfem.conduction import cells
from cupfem.conduction.cells import GapCells, TemperatureDependentCells, Varying, contact_matrices
from cupfem.conduction.conditions import NOTHING, Conditions, FixedTemperature, GasLayer, Solid
from cupfem.conduction.exchange import EdgeExchange, add_to_load
from cupfem.linear import Pattern
from cupfem.mesh import SectionMesh

Floats = NDArray[np.float64]
Ints = NDArray[np.int_]


class Conduction:
    """Operators of one section.

    Parameters
    ----------
    properties:
        Region name -> `Solid` or `GasLayer`; every region of the mesh must be there.
    """

    def __init__(
        self,
        mesh: SectionMesh,
        properties: Mapping[str, Solid | GasLayer],
        conditions: Conditions = NOTHING,
        measure: Measure = AXISYMMETRIC,
    ):
        self.mesh, self.measure, self.conditions = mesh, measure, conditions
        contacts = [np.concatenate([c.inner, c.outer]) for c in mesh.contacts]
        self.pattern = Pattern([mesh.element_dofs, *contacts], mesh.size)
        self._assemble(properties)
        self.exchanges = [EdgeExchange(mesh, each, measure, self.pattern) for each in conditions.exchanges]
        self.fixed, self._fixed_parts = self._fixed_unknowns()
        self._fluxes = [
            (flux, EdgeQuadrature(mesh, mesh.edge(flux.edge), measure)) for flux in conditions.fluxes
        ]
        self.source = np.zeros(mesh.size)
        for region, density in conditions.sources.items():
            self.source += source_load(mesh, mesh.regions[region], density, measure)

    # -- assembly --------------------------------------------------------------------------------------------

    def _assemble(self, properties: Mapping[str, Solid | GasLayer]) -> None:
        mesh, pattern = self.mesh, self.pattern
        mass, stiffness = np.zeros(pattern.entries), np.zeros(pattern.entries)
        self._varying: list[Varying] = []
        self._capacities: dict[str, Floats] = {}
        for name, elements in mesh.regions.items():
            given = properties[name]
            dofs = mesh.element_dofs[:, elements]
            capacity = capacity_matrices(
                mesh, elements, np.full(len(elements), given.heat_capacity), self.measure
            )
            mass += pattern.gather(dofs, capacity)
            shares = np.bincount(dofs.T.ravel(), weights=capacity.sum(axis=1).ravel(), minlength=mesh.size)
            self._capacities[name] = np.asarray(shares, dtype=float)
            if isinstance(given, GasLayer):
                self._varying.append(GapCells(mesh, name, given, self.measure))
            elif callable(given.through) or callable(given.along):
                self._varying.append(TemperatureDependentCells(mesh, elements, given, self.measure))
            else:
                tensor = cells.tensor(mesh.along[:, elements], given.through, given.along)
                stiffness += pattern.gather(dofs, conduction_matrices(mesh, elements, tensor, self.measure))
        for contact in mesh.contacts:
            dofs, matrices = contact_matrices(mesh, contact, self.measure)
            stiffness += pattern.gather(dofs, matrices)
        self.mass, self.stiffness = pattern.operator(mass), pattern.operator(stiffness)
        self._places = [pattern.positions(varying.dofs) for varying in self._varying]

    def _fixed_unknowns(self) -> tuple[Ints, list[tuple[Ints, FixedTemperature]]]:
        parts = [(np.unique(self.mesh.edge(c.edge)), c) for c in self.conditions.temperatures]
        fixed = np.unique(np.concatenate([dofs for dofs, _ in parts])) if parts else np.zeros(0, dtype=int)
        return fixed, parts

    # -- the field's own terms -------------------------------------------------------------------------------

    def fixed_values(self, time: float) -> Floats:
        """Prescribed temperatures of the `fixed` unknowns; where edges meet the later condition holds."""
        values = np.zeros(self.mesh.size)
        for dofs, condition in self._fixed_parts:
            r, z = self.mesh.points[:, dofs]
            given = condition.value
            values[dofs] = given(r, z, time) if callable(given) else given
        return values[self.fixed]

    def fixed_slopes(self, time: float) -> Floats:
        """Rates [K/s] of the prescribed temperatures, `[dof]`, zero elsewhere; by difference quotient."""
        slopes = np.zeros(self.mesh.size)
        if len(self.fixed):
            step = 1e-6
            slopes[self.fixed] = (self.fixed_values(time + step) - self.fixed_values(time)) / step
        return slopes

    def subtract_varying(self, load: Floats, temperature: Floats) -> None:
        """Subtract K(T) T of the cells whose conductivity follows the field from a load (in place) [W]."""
        for varying in self._varying:
            np.subtract.at(load, varying.dofs.T, varying.heat(temperature))

    def supplied(self, time: float) -> Floats:
        """Loads of sources and prescribed fluxes, `[dof]` [W]; a new array."""
        out = self.source.copy()
        for flux, quadrature in self._fluxes:
            points = quadrature.between(flux.low, flux.high)
            density = flux.value(points.height, time) if callable(flux.value) else flux.value
            add_to_load(out, points, np.broadcast_to(density, points.weight.shape) * points.weight)
        return out

    def supplied_power(self, time: float) -> dict[str, float]:
        """Heat that sources and prescribed fluxes bring in [W], by name."""
        terms: dict[str, float] = {}
        if self.conditions.sources:
            terms["source"] = float(self.source.sum())
        for flux, quadrature in self._fluxes:
            points = quadrature.between(flux.low, flux.high)
            density = flux.value(points.height, time) if callable(flux.value) else flux.value
            power = float((points.weight * density).sum())
            terms[flux.label] = terms.get(flux.label, 0.0) + power
        return terms

    def varying_data(self, temperature: Floats) -> Floats:
        """Stored entries of K(T) of the varying cells; the slope of K itself is left out: the matrix stays
        symmetric."""
        data = np.zeros(self.pattern.entries)
        for varying, (taken, entry) in zip(self._varying, self._places, strict=True):
            data += np.bincount(
                entry, weights=varying.matrices(temperature).ravel()[taken], minlength=len(data)
            )
        return data

    def stored_heat(self, temperature: Floats) -> dict[str, float]:
        """Heat stored above 0 degC [J], by region."""
        return {name: float(weights @ temperature) for name, weights in self._capacities.items()}

    def capacity_weights(self) -> Floats:
        """Heat capacity that each unknown stands for [J/K]."""
        return np.asarray(sum(self._capacities.values()))
