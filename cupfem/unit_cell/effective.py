"""The layer that conducts and stores as much as a cell of flutes or struts."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from typing import TypeAlias

import numpy as np
from numpy.typing import NDArray
from scipy.sparse import coo_array, csr_array
from scipy.sparse.linalg import spsolve

from cupfem.axisymmetry import EdgeQuadrature, Measure, conduction_matrices
from cupfem.cup import Cup, Layer
from cupfem.fluids import air_conductivity, air_density, air_specific_heat
from cupfem.gaps import exchange_factor, radiation_conductance
from cupfem.materials import Material
from cupfem.mesh import SectionMesh
from cupfem.unit_cell.cell import AIR, Cell, fluted, strutted

Floats = NDArray[np.float64]
Values: TypeAlias = float | Floats

SAMPLES = (0.0, 50.0, 100.0)
"""Temperatures [degC] at which a cell is solved; between them a parabola."""
OUTSIDE_FILM = 10.0
"""Film [W/(m2 K)] outside a cell, air and radiation: over a crest a thin liner is warmer than beside it."""
PLANE = Measure(plane=True)


@dataclass(frozen=True)
class Ply:
    """A board in the cell: conductivities [W/(m K)] across and in its plane, heat capacity [J/(m3 K)]."""

    through: float
    along: float
    heat_capacity: float


@dataclass(frozen=True)
class Parabola:
    """A property that depends on temperature [degC], from its values at `SAMPLES`."""

    values: tuple[float, float, float]

    def __call__(self, temperature: Floats) -> Floats:
        low, middle, high = self.values
        x = np.clip(
            (np.asarray(temperature, dtype=float) - SAMPLES[1]) / (SAMPLES[2] - SAMPLES[1]), -1.5, 1.5
        )
        return np.asarray(middle + 0.5 * (high - low) * x + (0.5 * (high + low) - middle) * x * x)


@dataclass(frozen=True)
class EffectiveLayer:
    """Conductivities through and along the wall [W/(m K)] over temperature [degC]; heat capacity [J/(m3
    K)]."""

    through: Parabola
    along: Parabola
    heat_capacity: float


def cavity_conductivity(height: Values, temperature: float, emissivity: float) -> Values:
    """Conductivity across a cavity of a height [m] between boards of one emissivity: still air and radiation.

    k_gas + h_rad d, with h_rad = 4 E sigma T^3 and E of parallel plates (see `gaps`).
    """
    factor = exchange_factor(emissivity, emissivity)
    return air_conductivity(temperature) + radiation_conductance(temperature, temperature, factor) * height


def conductivity_across(
    cell: Cell, plies: Mapping[str, Ply], air: Floats, outside_film: float = math.inf
) -> float:
    """Conductivity of a cell between its inner and its outer face [W/(m K)].

    `air` is `[column, row]`, the conductivity of its cells of air [W/(m K)]. Both faces are at even
    temperatures; with an outside film [W/(m2 K)] the outer one is not, and the film's resistance is taken
    off.
    """
    mesh = cell.mesh()
    matrix = _stiffness(cell, mesh, plies, air)
    warm, cold = np.unique(mesh.edges["inside"]), np.unique(mesh.edges["outside"])
    if math.isfinite(outside_film):
        matrix, cold = matrix + outside_film * _edge_matrix(mesh, "outside"), cold[:0]
    field = np.zeros(mesh.size)
    field[warm] = 1.0
    free = np.setdiff1d(np.arange(mesh.size), np.concatenate([warm, cold]))
    loads = np.asarray(matrix @ field)[free]
    field[free] = np.asarray(spsolve(matrix[free][:, free].tocsc(), -loads))
    through = float(np.asarray(matrix @ field)[warm].sum() / cell.width)
    return cell.height / (1.0 / through - 1.0 / outside_film)


def _edge_matrix(mesh: SectionMesh, edge: str) -> csr_array[np.float64]:
    points = EdgeQuadrature(mesh, mesh.edge(edge), PLANE).whole()
    local = points.shape[:, :, None] * points.shape[:, None, :] * points.weight[:, None, None]
    return _assembled(points.dofs, local, mesh.size)


def _assembled(dofs: NDArray[np.int_], local: Floats, size: int) -> csr_array[np.float64]:
    rows = np.broadcast_to(dofs[:, :, None], local.shape).ravel()
    columns = np.broadcast_to(dofs[:, None, :], local.shape).ravel()
    return coo_array((local.ravel(), (rows, columns)), shape=(size, size)).tocsr()


def _stiffness(cell: Cell, mesh: SectionMesh, plies: Mapping[str, Ply], air: Floats) -> csr_array[np.float64]:
    words = cell.parts.ravel()
    across, along = air.ravel().copy(), air.ravel().copy()
    for name, ply in plies.items():
        across[words == name], along[words == name] = ply.through, ply.along
    direction = mesh.along
    normal = np.array([direction[1], -direction[0]])
    tensor = along * direction[:, None] * direction[None] + across * normal[:, None] * normal[None]
    local = conduction_matrices(mesh, np.arange(len(words)), tensor, PLANE)
    return _assembled(mesh.element_dofs.T, local, mesh.size)


def effective_layer(cup: Cup, layer: Layer) -> EffectiveLayer:
    """The layer that stands for a layer of flutes or struts of a cup.

    The liners are layers of the cup; they spread heat in the cell, and their resistance is taken off again.
    """
    cell, plies = cell_of(cup, layer)
    emissivity = cup.material(layer.material).emissivity.value
    through, along = [], []
    for temperature in SAMPLES:
        air = np.asarray(cavity_conductivity(cell.cavity_heights(), temperature, emissivity))
        through.append(_of_core(cell, plies, conductivity_across(cell, plies, air, OUTSIDE_FILM)))
        boards = {name: ply.along for name, ply in plies.items()}
        along.append(_mean(cell, boards, float(air_conductivity(temperature))))
    gas = float(air_density(SAMPLES[1]) * air_specific_heat(SAMPLES[1]))
    capacity = _mean(cell, {name: ply.heat_capacity for name, ply in plies.items()}, gas)
    return EffectiveLayer(_parabola(through), _parabola(along), capacity)


def _of_core(cell: Cell, plies: Mapping[str, Ply], whole: float) -> float:
    """Conductivity of the core from that of the whole cell: resistances in series."""
    resistance, core = cell.height / whole, cell.height
    for part, thickness in zip(cell.parts[0].tolist(), np.diff(cell.y[0]).tolist(), strict=True):
        if part.endswith("liner"):
            resistance -= thickness / plies[part].through
            core -= thickness
    return core / resistance


def stack_at(cup: Cup, layer: Layer, place: float) -> list[tuple[str, float]]:
    """What lies across a layer at a place around the cup: parts and thicknesses [m], inside to outside.

    `place` is 0 under a crest at the outer face (or in a strut), 1 halfway to the next. The layers on both
    sides are not part of it.
    """
    cell, _ = cell_of(cup, layer)
    column = min(int(np.searchsorted(cell.x, place * cell.width, side="right")) - 1, len(cell.x) - 2)
    heights = 0.5 * np.diff(cell.y[column : column + 2], axis=1).sum(axis=0)
    found: list[tuple[str, float]] = []
    for part, height in zip(cell.parts[column, cell.core].tolist(), heights[cell.core].tolist(), strict=True):
        before = found.pop() if found and found[-1][0] == part else (part, 0.0)
        found.append((part, before[1] + height))
    return found


def cell_of(cup: Cup, layer: Layer, fineness: float = 1.0) -> tuple[Cell, dict[str, Ply]]:
    """The cell of a layer of flutes or struts, and the plies in it by the names of its parts."""
    height = 0.5 * sum(cup.layer_range(layer))
    stack = cup.stack(height)
    place = stack.index(layer)
    inner, outer = stack[place - 1], stack[place + 1]
    liners = inner.thickness_at(height), outer.thickness_at(height)
    plies = {"inner liner": _ply(cup.layer_material(inner)), "outer liner": _ply(cup.layer_material(outer))}
    board = _ply(cup.material(layer.material))
    if layer.strut is not None:
        return strutted(layer.strut, *liners, fineness), {**plies, "strut": board}
    assert layer.flute is not None
    return fluted(layer.flute, *liners, fineness), {**plies, "medium": board}


def _mean(cell: Cell, values: Mapping[str, float], air: float) -> float:
    return sum(share * (air if name == AIR else values[name]) for name, share in cell.shares().items())


def _ply(material: Material) -> Ply:
    capacity = material.density.value * material.specific_heat.value
    return Ply(material.conductivity_through.value, material.conductivity_along.value, capacity)


def _parabola(values: list[float]) -> Parabola:
    low, middle, high = values
    return Parabola((low, middle, high))
