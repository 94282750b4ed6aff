"""The skin of a finger as nodes of a column: grid, properties, and its state at rest."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from cupfem.materials import Material, SurfaceClass
from cupfem.skin import RESTING_FILM, THICK_DEPTH, THIN_DEPTH, Skin
from cupfem.touch.columns import Columns, cells

Floats = NDArray[np.float64]

CONTACT: dict[SurfaceClass, float] = {"board": 600.0, "plastic": 850.0, "glazed": 1200.0, "metal": 2000.0}
"""Contact conductance of a dry finger pad at 5 to 20 kPa [W/(m2 K)] by class of surface: within 300-1200,
700-1000, 1000-1500 and 1500-2500. Scoping estimates along the touch formula of Ho and Jones, from memory, not
re-checked; sweat raises them 1.5 to 3 times within 10 to 20 s."""
FLAT = 1e6
"""Radius [m] at which a column counts as plane."""
FINEST, GROWTH = 6e-6, 0.11
"""Width of the first cell of skin [m], and how a cell's width grows with depth."""


def contact_conductance(material: Material) -> float:
    """Contact conductance of a finger pad on a material [W/(m2 K)], by the class of its surface."""
    return CONTACT[material.surface_class]


def skin_nodes(skin: Skin) -> Floats:
    """Depths of the nodes [m]: at the ends of the layers and at both judged depths, finest at the surface."""
    ends = np.cumsum([layer.thickness for layer in skin.layers])
    depths = [depth for depth in (THIN_DEPTH, THICK_DEPTH) if depth < ends[-1]]
    marks = np.unique(np.round([0.0, *depths, *ends], 12))
    pieces = [np.zeros(1)]
    for low, high in pairwise(marks):
        pieces.append(_graded(float(low), float(high)))
    return np.concatenate(pieces)


def _graded(low: float, high: float) -> Floats:
    depths = [low]
    while depths[-1] < high:
        depths.append(depths[-1] + FINEST + GROWTH * depths[-1])
    return low + (np.array(depths[1:]) - low) * (high - low) / (depths[-1] - low)


@dataclass(frozen=True, eq=False)
class SkinColumn:
    """Nodes of a skin from the surface inwards, on a surface of given radii `[c]` [m] (`FLAT`: plane)."""

    skin: Skin
    nodes: Floats
    capacity: Floats
    link: Floats
    sink: Floats
    below: Floats

    @classmethod
    def of(cls, skin: Skin, radius: Floats) -> SkinColumn:
        nodes = skin_nodes(skin)
        middle = 0.5 * (nodes[:-1] + nodes[1:])
        ends = np.cumsum([layer.thickness for layer in skin.layers])
        layer = np.minimum(np.searchsorted(ends, middle), len(ends) - 1)
        shape = (len(radius), len(middle))

        def spread(values: list[float]) -> Floats:
            return np.broadcast_to(np.array(values)[layer], shape)

        depths = np.broadcast_to(nodes, (len(radius), len(nodes)))
        capacity, link = cells(
            depths,
            spread([tissue.conductivity for tissue in skin.layers]),
            spread([tissue.heat_capacity for tissue in skin.layers]),
            radius,
        )
        # perfusion is spread over the nodes as heat capacity is
        sink, _ = cells(
            depths, spread([1.0] * 3), spread([tissue.perfusion for tissue in skin.layers]), radius
        )
        return cls(skin, nodes, capacity, link, sink, skin.below * (radius + skin.thickness))

    def index(self, depth: float) -> int:
        """Node at a depth [m]."""
        return int(np.argmin(np.abs(self.nodes - depth)))

    def alone(self) -> Columns:
        """The skin without anything that it touches."""
        return Columns(self.capacity, self.link, self.sink, self.skin.core)


def resting_profile(skin: Skin, room: Floats, film: float = RESTING_FILM) -> Floats:
    """Temperatures of the nodes `[c, n]` [degC] of a hand at rest in rooms `[c]` [degC], steady."""
    room = np.atleast_1d(np.asarray(room, dtype=float))
    column = SkinColumn.of(skin, np.full(len(room), FLAT))
    core = np.full(len(room), skin.core)
    return column.alone().steady((np.full(len(room), film * FLAT), room), (column.below, core))
