"""The half section of a cup: inside profile, layers across the wall, base, and volume against level.

Pure geometry, no mesh. Heights are z on the wall's inside face, above the table; thickness is measured along
the wall's normal.

Volumes and areas of a profile made of straight pieces are exact sums over frusta (Pappus-Guldin theorem; any
handbook of
geometry, e.g. Bronshtein and Semendyayev, Handbook of Mathematics, section on bodies of revolution).
"""

from __future__ import annotations

import math
from bisect import bisect_right
from collections.abc import Callable
from dataclasses import dataclass, field
from functools import cached_property

import numpy as np
from numpy.typing import ArrayLike, NDArray

from cupfem.cup import Cup
from cupfem.errors import InputError
from cupfem.materials import Material

Floats = NDArray[np.float64]
Conductance = Callable[[Floats], Floats]
"""Contact conductance [W/(m2 K)] at heights on the inside face [m]."""

MINIMUM_THICKNESS = 1e-9
"""A layer thinner than this [m] is absent."""


@dataclass(frozen=True, eq=False)
class Profile:
    """Inside face of the wall as a polyline that rises: `height[p]` and `radius[p]`, both in metres."""

    height: Floats
    radius: Floats

    def __post_init__(self) -> None:
        if np.any(np.diff(self.height) <= 0):
            raise InputError(
                "inside profile", None, "its heights must rise", "list the points from the table up"
            )

    def radius_at(self, height: ArrayLike) -> Floats:
        """Inside radius [m] at heights [m]."""
        return np.asarray(np.interp(np.asarray(height, dtype=float), self.height, self.radius))

    def arc_length_at(self, height: ArrayLike) -> Floats:
        """Length along the inside face from the table [m]."""
        pieces = np.hypot(np.diff(self.height), np.diff(self.radius))
        reached = np.concatenate([[0.0], np.cumsum(pieces)])
        return np.asarray(np.interp(np.asarray(height, dtype=float), self.height, reached))

    def normal_at(self, height: ArrayLike) -> Floats:
        """Outward normals `[2, p]` (r, z); at a corner of the profile the mean of both sides."""
        slopes = np.diff(self.radius) / np.diff(self.height)
        z = np.asarray(height, dtype=float)
        last = len(slopes) - 1
        above = np.clip(np.searchsorted(self.height, z + 1e-12, side="right") - 1, 0, last)
        below = np.clip(np.searchsorted(self.height, z - 1e-12, side="right") - 1, 0, last)
        angle = 0.5 * (np.arctan(slopes[above]) + np.arctan(slopes[below]))
        return np.array([np.cos(angle), -np.sin(angle)])

    @cached_property
    def _pieces(self) -> tuple[list[float], list[float], list[float], list[float]]:
        """Heights, radii, slopes of the straight pieces, and volumes below their lower ends, as plain floats:
        the level is asked thousands of times in a run."""
        slopes = np.diff(self.radius) / np.diff(self.height)
        volumes = np.cumsum(_frustum(np.diff(self.height), self.radius[:-1], self.radius[1:]))
        return self.height.tolist(), self.radius.tolist(), slopes.tolist(), [0.0, *volumes.tolist()]

    def radius_of(self, height: float) -> float:
        """Inside radius [m] at one height [m]."""
        heights, radii, slopes, _ = self._pieces
        z = min(max(height, heights[0]), heights[-1])
        piece = min(bisect_right(heights, z) - 1, len(slopes) - 1)
        return radii[piece] + slopes[piece] * (z - heights[piece])

    def volume_below(self, height: float) -> float:
        """Inside volume [m3] between the table and a height [m]."""
        heights, radii, slopes, volumes = self._pieces
        z = min(max(height, heights[0]), heights[-1])
        piece = min(bisect_right(heights, z) - 1, len(slopes) - 1)
        rise, radius = z - heights[piece], radii[piece]
        upper = radius + slopes[piece] * rise
        return volumes[piece] + math.pi / 3.0 * rise * (radius * radius + radius * upper + upper * upper)

    def height_of_volume(self, volume: float) -> float:
        """Height [m] below which the inside volume [m3] is found; the inverse of `volume_below` to rounding.

        In a frustum r_upper^3 = r^3 + 3 m V / pi, and V = pi/3 x (r^2 + r r_upper + r_upper^2) gives x
        without the difference of the two radii, so that it holds for a cylinder (m = 0) too.
        """
        heights, radii, slopes, volumes = self._pieces
        piece = min(max(bisect_right(volumes, volume) - 1, 0), len(slopes) - 1)
        radius, part = radii[piece], 3.0 / math.pi * (volume - volumes[piece])
        upper = math.cbrt(radius**3 + slopes[piece] * part)
        squares = radius * radius + radius * upper + upper * upper
        return heights[piece] + (part / squares if squares > 0.0 else 0.0)


@dataclass(frozen=True, eq=False)
class LayerBand:
    """One layer of the wall between two heights.

    `blend` is the length over which the layers outside move in where this layer stops; zero where nothing
    lies outside. `inner_conductance` [W/(m2 K)] couples the layer to what is inside it, over its whole
    reach: a number, or a function of heights on the inside face [m]; infinite where it is glued.
    """

    name: str
    material: Material
    thickness: float
    low: float
    high: float
    blend_low: float = 0.0
    blend_high: float = 0.0
    closing_conductance: float = np.inf
    inner_conductance: float | Conductance = np.inf

    @property
    def loose(self) -> bool:
        """Whether a contact conductance lies between this layer and what is inside it."""
        return callable(self.inner_conductance) or bool(np.isfinite(self.inner_conductance))

    def inner_conductance_at(self, height: ArrayLike) -> Floats:
        """Contact conductance of the inner face [W/(m2 K)] at heights [m]."""
        z = np.asarray(height, dtype=float)
        given = self.inner_conductance
        return np.broadcast_to(np.asarray(given(z) if callable(given) else given, dtype=float), z.shape)

    def thickness_at(self, height: ArrayLike) -> Floats:
        """Thickness [m] at heights; over a blend it falls to nothing along a smooth step (no kink at either
        end)."""
        z = np.asarray(height, dtype=float)
        below = _smooth_step((z - (self.low - self.blend_low)) / max(self.blend_low, 1e-300))
        above = _smooth_step(((self.high + self.blend_high) - z) / max(self.blend_high, 1e-300))
        inside_low = np.where(z >= self.low - 1e-12, 1.0, below if self.blend_low else 0.0)
        inside_high = np.where(z <= self.high + 1e-12, 1.0, above if self.blend_high else 0.0)
        return np.asarray(self.thickness * inside_low * inside_high)

    @property
    def reach(self) -> tuple[float, float]:
        """Heights [m] between which the layer or its tapering pocket is there."""
        return self.low - self.blend_low, self.high + self.blend_high


@dataclass(frozen=True, eq=False)
class BaseDisc:
    """The base: a disc whose underside lies `recess` above the table [m]."""

    material: Material
    thickness: float
    recess: float

    @property
    def top(self) -> float:
        """Height of its upper side [m]."""
        return self.recess + self.thickness


@dataclass(frozen=True, eq=False)
class Meridian:
    """The half section."""

    profile: Profile
    layers: tuple[LayerBand, ...]
    base: BaseDisc | None = None
    title: str = ""
    materials: dict[str, Material] = field(default_factory=dict)

    @property
    def height(self) -> float:
        """Table to brim, on the inside face [m]."""
        return float(self.profile.height[-1])

    @property
    def floor(self) -> float:
        """Height of the drink's lowest point [m]."""
        return self.base.top if self.base else float(self.profile.height[0])

    @property
    def brimful_capacity(self) -> float:
        """Volume up to the brim [m3]."""
        return self.volume(self.height)

    def volume(self, level: float) -> float:
        """Drink volume [m3] below a level [m]."""
        return self.profile.volume_below(level) - self._volume_under_floor

    def level(self, volume: float) -> float:
        """Level [m] of a drink volume [m3]; exact inverse of `volume`."""
        return self.profile.height_of_volume(max(volume, 0.0) + self._volume_under_floor)

    @cached_property
    def _volume_under_floor(self) -> float:
        return self.profile.volume_below(self.floor)

    def surface_area(self, level: float) -> float:
        """Area of the drink's surface [m2]."""
        return math.pi * self.profile.radius_of(level) ** 2

    def outer_offset_at(self, height: ArrayLike) -> Floats:
        """Distance from the inside face to the outer face along the normal [m]."""
        return np.asarray(sum(layer.thickness_at(height) for layer in self.layers))

    def outer_layer_at(self, height: float) -> LayerBand:
        """The layer whose face is the outer face at a height."""
        present = [layer for layer in self.layers if layer.thickness_at(height) > MINIMUM_THICKNESS]
        return present[-1]

    def outer_radius_at(self, height: ArrayLike) -> Floats:
        """Radius of the outer face on the normal through the inside face at a height [m]."""
        return np.asarray(
            self.profile.radius_at(height) + self.outer_offset_at(height) * self.profile.normal_at(height)[0]
        )

    def breaks(self) -> Floats:
        """Heights at which the section changes [m]: ends of layers and blends, base, table and brim."""
        heights = [self.profile.height]
        for layer in self.layers:
            heights.append(np.array([*layer.reach, layer.low, layer.high]))
        if self.base:
            heights.append(np.array([self.base.recess, self.base.top]))
        return _merge(np.concatenate(heights))


def build(cup: Cup) -> Meridian:
    """The half section of a cup file."""
    height = cup.height
    profile = Profile(np.array([0.0, height]), np.array([cup.inner_radius(0.0), cup.inner_radius(height)]))
    ranges = [cup.layer_range(layer) for layer in cup.layer]
    layers = tuple(_band(cup, index, ranges) for index in range(len(ranges)))
    base = None
    if cup.base_disc is not None:
        base = BaseDisc(cup.material(cup.base_disc.material), cup.base_disc.thickness, cup.base_disc.recess)
    return Meridian(profile, layers, base, cup.title)


def _band(cup: Cup, index: int, ranges: list[tuple[float, float]]) -> LayerBand:
    layer = cup.layer[index]
    low, high = ranges[index]
    outside = ranges[index + 1 :]
    blend_low = layer.blend if any(r[0] < low - 1e-9 for r in outside) else 0.0
    blend_high = layer.blend if any(r[1] > high + 1e-9 for r in outside) else 0.0
    path = f"layer.{layer.name}"
    if low - blend_low < -1e-9 or high + blend_high > cup.height + 1e-9:
        raise InputError(
            f"{path}.blend",
            f"{layer.blend * 1e3:g} mm",
            "the layers outside have no room to move in between the layer's end and the end of the wall",
            f"leave {layer.blend * 1e3:g} mm of wall beyond `from` and `to`, or shorten `blend`",
        )
    conductance = np.inf if layer.contact is None else layer.contact
    return LayerBand(
        layer.name,
        cup.material(layer.material),
        layer.thickness,
        low,
        high,
        blend_low,
        blend_high,
        conductance,
        np.inf if layer.fit is None else layer.fit,
    )


def _merge(heights: Floats, tolerance: float = 1e-9) -> Floats:
    ordered = np.sort(heights)
    return np.asarray(ordered[np.concatenate([[True], np.diff(ordered) > tolerance])])


def _smooth_step(x: Floats) -> Floats:
    x = np.clip(x, 0.0, 1.0)
    return np.asarray(x * x * (3.0 - 2.0 * x))


def _frustum(height: ArrayLike, lower: ArrayLike, upper: ArrayLike) -> Floats:
    lower, upper = np.asarray(lower), np.asarray(upper)
    return np.asarray(np.pi / 3.0 * np.asarray(height) * (lower * lower + lower * upper + upper * upper))
