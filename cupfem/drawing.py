"""What a cup's drawing tells before anything is poured: capacity, mass, cost, and the quality of its mesh."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from cupfem.axisymmetry import AXISYMMETRIC, volume_moments
from cupfem.cup import Cup
from cupfem.materials import Material
from cupfem.meridian import Meridian
from cupfem.meridian import build as build_meridian
from cupfem.mesh import SectionMesh, default_fractions
from cupfem.mesh import build as build_mesh
from cupfem.quantities import Units, format_quantity
from cupfem.serving import Serving, fill_volume

Floats = NDArray[np.float64]

FILL_STEP = 5e-3
"""Step of the table of volume against height [m]."""


@dataclass(frozen=True)
class Part:
    """A layer of the wall, or the base.

    `volume` [m3] and `mass` [kg] are those of the meshed region; `cost` is in the currency of `cost_per_kg`,
    None where the material has none.
    """

    name: str
    material: Material
    thickness: float
    cells_across: int
    volume: float

    @property
    def is_solid(self) -> bool:
        """Whether it counts as packaging: gas does not."""
        return self.material.kind == "solid"

    @property
    def mass(self) -> float:
        """Volume times density [kg]."""
        return self.volume * self.material.density.value

    @property
    def cost(self) -> float | None:
        """Mass times cost per kg, None if that is not known."""
        price = self.material.cost_per_kg
        return None if price is None else self.mass * price.value


@dataclass(frozen=True)
class MeshQuality:
    """Smallest corner angle [rad], worst ratio of longest to shortest side, sizes of mesh and matrix."""

    smallest_angle: float
    worst_aspect_ratio: float
    cells: int
    unknowns: int
    half_bandwidth: int


@dataclass(frozen=True, eq=False)
class Drawing:
    """A cup's half section with what can be told of it; `levels` and `volumes` are `[l]` [m, m3]."""

    cup: Cup
    meridian: Meridian
    mesh: SectionMesh
    parts: tuple[Part, ...]
    quality: MeshQuality
    fill_level: float
    fill_volume: float
    levels: Floats
    volumes: Floats

    @property
    def brimful_capacity(self) -> float:
        """Volume up to the brim [m3]."""
        return self.meridian.brimful_capacity

    @property
    def mass(self) -> float:
        """Mass of all solids [kg]."""
        return sum(part.mass for part in self.parts if part.is_solid)

    @property
    def cost(self) -> float | None:
        """Cost of all solids; None unless each has a cost per kg."""
        costs = [part.cost for part in self.parts if part.is_solid]
        return None if None in costs else math.fsum(cost for cost in costs if cost is not None)

    def figures(self) -> dict[str, float | None]:
        """All figures, unit in the key."""
        told: dict[str, float | None] = {
            "brimful_capacity_ml": 1e6 * self.brimful_capacity,
            "fill_level_mm": 1e3 * self.fill_level,
            "fill_volume_ml": 1e6 * self.fill_volume,
            "mass_g": 1e3 * self.mass,
        }
        for part in self.parts:
            told[f"{part.name}_volume_cm3"] = 1e6 * part.volume
            told[f"{part.name}_mass_g"] = 1e3 * part.mass
        if self.cost is not None:
            told["cost"] = self.cost
        return told | {
            "smallest_angle_deg": math.degrees(self.quality.smallest_angle),
            "worst_aspect_ratio": self.quality.worst_aspect_ratio,
            "cells": self.quality.cells,
            "unknowns": self.quality.unknowns,
            "half_bandwidth": self.quality.half_bandwidth,
        }

    def headline_rows(self, units: Units = "si") -> list[tuple[str, str]]:
        """Capacity, fill, mass and cost as text."""
        level = format_quantity(self.fill_level, "length", units)
        rows = [
            ("brimful capacity", format_quantity(self.brimful_capacity, "volume", units)),
            ("default fill", f"{format_quantity(self.fill_volume, 'volume', units)}, level at {level}"),
            ("mass of the solids", format_quantity(self.mass, "mass", units)),
        ]
        return rows if self.cost is None else [*rows, ("cost of the solids", f"{self.cost:.3g}")]

    def part_rows(self, units: Units = "si") -> list[tuple[str, ...]]:
        """For each part: name, material, thickness, volume, mass, cells across."""
        return [
            (
                part.name,
                part.material.name,
                format_quantity(part.thickness, "length", units),
                f"{1e6 * part.volume:.3g} cm^3" if units == "si" else f"{part.volume / 0.0254**3:.3g} in^3",
                format_quantity(part.mass, "mass", units) if part.is_solid else "-",
                str(part.cells_across),
            )
            for part in self.parts
        ]

    def quality_rows(self) -> list[tuple[str, str]]:
        """Mesh quality as text."""
        quality = self.quality
        return [
            ("smallest angle", f"{math.degrees(quality.smallest_angle):.3g} deg"),
            ("worst aspect ratio", f"{quality.worst_aspect_ratio:.3g}"),
            ("cells, unknowns", f"{quality.cells}, {quality.unknowns}"),
            ("half-bandwidth", str(quality.half_bandwidth)),
        ]

    def fill_rows(self, units: Units = "si") -> list[tuple[str, str]]:
        """Level and volume as text."""
        return [
            (format_quantity(level, "length", units), format_quantity(volume, "volume", units))
            for level, volume in zip(self.levels, self.volumes, strict=True)
        ]

    def table(self, units: Units = "si") -> str:
        """Everything as plain text."""
        heads = ("layer", "material", "thickness", "volume", "mass", "cells across")
        return "\n".join(
            [
                self.cup.title,
                "",
                *_aligned(self.headline_rows(units)),
                "",
                *_aligned([heads, *self.part_rows(units)]),
                "",
                *_aligned(self.quality_rows()),
                "",
                *_aligned([("level", "volume"), *self.fill_rows(units)]),
            ]
        )


def survey(cup: Cup, fineness: float = 1.0) -> Drawing:
    """Mesh a cup and tell what its drawing holds.

    Parameters
    ----------
    fineness:
        Cells per length relative to the default.

    Raises
    ------
    InputError
        If the section cannot be meshed.
    """
    meridian = build_meridian(cup)
    mesh = build_mesh(meridian, fineness)
    volume = fill_volume(cup, Serving())
    inner_levels = (
        np.arange(math.floor(meridian.floor / FILL_STEP) + 1, meridian.height / FILL_STEP) * FILL_STEP
    )
    levels = np.unique(np.concatenate([[meridian.floor], inner_levels, [meridian.height]]))
    return Drawing(
        cup=cup,
        meridian=meridian,
        mesh=mesh,
        parts=_parts(cup, meridian, mesh, fineness),
        quality=_quality(mesh),
        fill_level=meridian.level(volume),
        fill_volume=volume,
        levels=levels,
        volumes=np.array([meridian.volume(level) for level in levels]),
    )


def _parts(cup: Cup, meridian: Meridian, mesh: SectionMesh, fineness: float) -> tuple[Part, ...]:
    across = {name: len(lines) - 1 for name, lines in default_fractions(meridian, fineness).items()}
    parts = [(layer.name, layer.material, layer.thickness) for layer in meridian.layers]
    if meridian.base is not None:
        parts.append(("base", meridian.base.material, meridian.base.thickness))
        heights = mesh.grid.p[1, mesh.grid.t[:, mesh.regions["base"]]]
        across["base"] = len(np.unique(np.round(heights, 9))) - 1
    return tuple(
        Part(name, material, thickness, across[name], _volume(mesh, name))
        for name, material, thickness in parts
    )


def _volume(mesh: SectionMesh, region: str) -> float:
    return volume_moments(mesh, mesh.regions[region], AXISYMMETRIC)[0]


def _quality(mesh: SectionMesh) -> MeshQuality:
    """Corner angles and side ratios of the quadrilaterals."""
    corner = mesh.grid.p[:, mesh.grid.t]
    side = np.roll(corner, -1, axis=1) - corner
    length = np.hypot(*side)
    back = -np.roll(side, 1, axis=1)
    cosine = (side * back).sum(axis=0) / (length * np.roll(length, 1, axis=0))
    return MeshQuality(
        smallest_angle=float(np.arccos(np.clip(cosine, -1.0, 1.0)).min()),
        worst_aspect_ratio=float((length.max(axis=0) / length.min(axis=0)).max()),
        cells=int(corner.shape[2]),
        unknowns=mesh.size,
        half_bandwidth=mesh.half_bandwidth,
    )


def _aligned(rows: list[Any]) -> list[str]:
    """Rows as lines with columns of even width."""
    widths = [max(len(row[column]) for row in rows) for column in range(len(rows[0]))]
    return [
        "  ".join(cell.ljust(width) for cell, width in zip(row, widths, strict=True)).rstrip() for row in rows
    ]
