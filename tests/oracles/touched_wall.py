"""A one-layer wall touched by skin, by finite differences on a grid of its own. SI, temperatures in C.

Cylindrical conduction (1/r) d/dr(r k dT/dr) = rho c dT/dt with a film to the drink inside, a contact
conductance between wall and skin, perfused tissues, and a film to the core behind the last of them. Cell
centres (not the nodes and elements of the program), integrated by SciPy's BDF at a tolerance of 1e-6.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from scipy.integrate import solve_ivp
from scipy.sparse import diags

from ._series import Array


@dataclass(frozen=True)
class Slab:
    """A layer: thickness, conductivity, heat capacity per volume, perfusion [W/(m3 K)], number of cells."""

    thickness: float
    conductivity: float
    heat_capacity: float
    perfusion: float = 0.0
    cells: int = 60


def touched_wall(
    layers: list[Slab],
    radius: float,
    start: list[tuple[float, float]],
    inside: tuple[float, Callable[[float], float]],
    contact: float,
    behind: tuple[float, float],
    times: Array,
) -> tuple[Array, Array]:
    """Depths below the skin's surface of the cells, and temperatures `[time, cell]`.

    `start` is (temperature at the inner face, at the outer face) of each layer, `inside` (film, drink as a
    function of time), `behind` (film, core). The contact conductance lies between the first layer and the
    rest.
    """
    edges, k, capacity, sink, first = [radius], [], [], [], []
    for layer, (low, high) in zip(layers, start, strict=True):
        step = layer.thickness / layer.cells
        edges += list(edges[-1] + step * np.arange(1, layer.cells + 1))
        k += [layer.conductivity] * layer.cells
        capacity += [layer.heat_capacity] * layer.cells
        sink += [layer.perfusion] * layer.cells
        first += list(low + (high - low) * (np.arange(layer.cells) + 0.5) / layer.cells)
    r, k = np.array(edges), np.array(k)
    width, middle = np.diff(r), 0.5 * (r[1:] + r[:-1])
    resistance = width / (2 * k)
    between = resistance[:-1] + resistance[1:]
    wall = layers[0].cells
    between[wall - 1] += 1 / contact
    link = r[1:-1] / between
    ends = r[0] / (1 / inside[0] + resistance[0]), r[-1] / (1 / behind[0] + resistance[-1])
    volume = 0.5 * (r[1:] ** 2 - r[:-1] ** 2)
    mass, drain = np.array(capacity) * volume, np.array(sink) * volume
    diagonal = np.zeros(len(k))
    diagonal[:-1] -= link
    diagonal[1:] -= link
    diagonal[0] -= ends[0]
    diagonal[-1] -= ends[1]
    matrix = diags([link, diagonal - drain, link], [-1, 0, 1]).tocsc()
    supply = drain * behind[1]
    supply[-1] += ends[1] * behind[1]
    jacobian = diags(1 / mass) @ matrix

    def rates(time: float, temperature: Array) -> Array:
        out = matrix @ temperature + supply
        out[0] += ends[0] * inside[1](time)
        return np.asarray(out / mass)

    solved = solve_ivp(
        rates,
        (0, times[-1]),
        np.array(first),
        method="BDF",
        t_eval=times,
        jac=jacobian.tocsc(),
        rtol=1e-6,
        atol=1e-6,
    )
    return middle[wall:] - r[wall], solved.y.T[:, wall:]
