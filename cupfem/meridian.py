"""The half section of a cup: inside profile, layers across the wall, base, and volume against level.

Pure geometry, no mesh. Heights are z on the wall's inside face, above the table; thickness is measured along
the wall's normal.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass, field
from functools import cached_property

import numpy as np
from numpy.typing import ArrayLike, NDArray

from cupfem.cup import Cup, Layer, Profile
from cupfem.errors import InputError
from cupfem.fluids import air_conductivity
from cupfem.gaps import exchange_factor, radiation_conductance
from cupfem.materials import Material

Floats = NDArray[np.float64]
Conductance = Callable[[Floats], Floats]
"""Contact conductance [W/(m2 K)] at heights on the inside face [m]."""

MINIMUM_THICKNESS = 1e-9
"""A layer thinner than this [m] is absent."""
FIT_TEMPERATURE = 50.0
"""Temperature [degC] at which air and radiation of a loose fit are taken."""


@dataclass(frozen=True, eq=False)
class Rings:
    """Ridges: heights of their feet on the inside face `[ring]` [m], and their cross-section.

    `flank_run` [m] along the wall is what each flank takes of the foot (the cells lean with the flanks);
    `half_crest` [m] is half the crest's width, `crest_radius` [m] that of a rounded crest (infinite: flat).
    """

    low: Floats
    high: Floats
    flank_run: float = 0.0
    half_crest: float = 0.0
    crest_radius: float = np.inf

    def place(self, height: Floats) -> Floats:
        """Place across the ring at heights, -1 and 1 at the ends of its foot; NaN between the rings."""
        ring = np.clip(np.searchsorted(self.low, height + 1e-12, side="right") - 1, 0, len(self.low) - 1)
        low, high = self.low[ring], self.high[ring]
        inside = (height >= low - 1e-12) & (height <= high + 1e-12)
        return np.where(inside, (2.0 * height - low - high) / (high - low), np.nan)

    def places(self, cells: int) -> Floats:
        """Places from -1 to 1 that divide a ring into cells: evenly, or along the arc of a rounded crest."""
        even = np.linspace(-1.0, 1.0, cells + 1)
        if np.isinf(self.crest_radius):
            return even
        opening = np.arcsin(self.half_crest / self.crest_radius)
        return np.asarray(np.sin(opening * even) / np.sin(opening))

    def thickness(self, height: Floats, full: float) -> Floats:
        """Height of the ridge [m] over its foot; none between the rings."""
        place = self.place(height)
        drop = np.zeros(np.shape(height))
        if np.isfinite(self.crest_radius):
            sine = self.half_crest / self.crest_radius * np.nan_to_num(place)
            drop = self.crest_radius * (1.0 - np.sqrt(1.0 - sine * sine))
        return np.where(np.isnan(place), 0.0, full - drop)

    def shift(self, height: Floats) -> Floats:
        """How far along the wall the crest's points lie from those of the foot [m]."""
        return np.nan_to_num(-self.flank_run * self.place(height))


@dataclass(frozen=True, eq=False)
class LayerBand:
    """One layer of the wall between two heights.

    `blend` is the length over which the layers outside move in where this layer stops; zero where nothing
    lies outside. `inner_conductance` [W/(m2 K)] couples the layer to what is inside it, over its whole
    reach: a number, or a function of heights on the inside face [m]; infinite where it is glued.
    `along` gives heights and thicknesses instead of one thickness; `spans` are the heights of hollow rings
    of which the layer consists (each with the blends), `rings` those of solid ridges.
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
    along: tuple[Floats, Floats] | None = None
    spans: tuple[tuple[float, float], ...] = ()
    rings: Rings | None = None

    @property
    def loose(self) -> bool:
        """Whether a contact conductance lies between this layer and what is inside it."""
        return callable(self.inner_conductance) or bool(np.isfinite(self.inner_conductance))

    def inner_conductance_at(self, height: ArrayLike) -> Floats:
        """Contact conductance of the inner face [W/(m2 K)] at heights [m]."""
        z = np.asarray(height, dtype=float)
        given = self.inner_conductance
        return np.broadcast_to(np.asarray(given(z) if callable(given) else given, dtype=float), z.shape)

    @property
    def parts(self) -> tuple[tuple[float, float], ...]:
        """Heights [m] between which the layer has its full thickness."""
        return self.spans or ((self.low, self.high),)

    def thickness_at(self, height: ArrayLike) -> Floats:
        """Thickness [m] at heights; over a blend it falls to nothing along a smooth step (no kink at either
        end)."""
        z = np.asarray(height, dtype=float)
        if self.rings is not None:
            return self.rings.thickness(z, self.thickness)
        full = self.thickness if self.along is None else np.interp(z, *self.along)
        return np.asarray(full * sum(self._presence(z, low, high) for low, high in self.parts))

    def _presence(self, z: Floats, low: float, high: float) -> Floats:
        below = _smooth_step((z - (low - self.blend_low)) / max(self.blend_low, 1e-300))
        above = _smooth_step(((high + self.blend_high) - z) / max(self.blend_high, 1e-300))
        inside_low = np.where(z >= low - 1e-12, 1.0, below if self.blend_low else 0.0)
        inside_high = np.where(z <= high + 1e-12, 1.0, above if self.blend_high else 0.0)
        return np.asarray(inside_low * inside_high)

    def shift_at(self, height: ArrayLike) -> Floats:
        """How far along the wall the outer face's points lie from those of the inner face [m]."""
        z = np.asarray(height, dtype=float)
        return np.zeros(z.shape) if self.rings is None else self.rings.shift(z)

    def is_full(self, height: Floats) -> NDArray[np.bool_]:
        """Whether the layer itself is at heights, not the pocket that its blend leaves."""
        inside = [(height > low) & (height < high) for low, high in self.parts]
        return np.asarray(np.any(inside, axis=0))

    @property
    def reach(self) -> tuple[float, float]:
        """Heights [m] between which the layer or its tapering pocket is there."""
        return self.low - self.blend_low, self.high + self.blend_high

    def breaks(self) -> Floats:
        """Heights [m] at which the layer changes."""
        if self.rings is not None:
            return np.concatenate([self.rings.low, self.rings.high])
        ends = [(low - self.blend_low, low, high, high + self.blend_high) for low, high in self.parts]
        corners = np.zeros(0) if self.along is None else self.along[0]
        inside = (corners > self.low) & (corners < self.high)
        return np.concatenate([np.ravel(ends), corners[inside]])


@dataclass(frozen=True)
class LooseFit:
    """Conductance [W/(m2 K)] across air whose thickness varies from one end of a layer to the other.

    k / (g + g0) + h_rad, where g0 is the thickness of air that gives the conductance where the faces touch
    (g = 0). Air and radiation in parallel, as in `gaps`; g0: common practice for rough faces, no source.
    """

    touching: float
    ends: tuple[float, float]
    gap: tuple[float, float]
    air_conductivity: float
    radiation: float

    def __call__(self, height: Floats) -> Floats:
        gap = np.interp(height, self.ends, self.gap)
        least = self.air_conductivity / (self.touching - self.radiation)
        return np.asarray(self.air_conductivity / (gap + least) + self.radiation)


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
        heights = [self.profile.corners]
        for layer in self.layers:
            heights.append(layer.breaks())
        if self.base:
            heights.append(np.array([self.base.recess, self.base.top]))
        return _merge(np.concatenate(heights))


def build(cup: Cup) -> Meridian:
    """The half section of a cup file."""
    layers = tuple(_band(cup, index) for index in range(len(cup.layer)))
    base = None
    if cup.base_disc is not None:
        base = BaseDisc(cup.material(cup.base_disc.material), cup.base_disc.thickness, cup.base_disc.recess)
    return Meridian(cup.profile, layers, base, cup.title)


def _band(cup: Cup, index: int) -> LayerBand:
    layer = cup.layer[index]
    (low, high), (blend_low, blend_high) = cup.layer_range(layer), cup.blends(layer)
    _check_room(cup, layer, low - blend_low, high + blend_high)
    hollow = layer.ridge is not None and cup.is_gas(layer)
    heights, values = np.array(layer.thickness_along).T if layer.thickness_along else (None, None)
    return LayerBand(
        layer.name,
        cup.layer_material(layer),
        layer.thickness,
        low,
        high,
        blend_low,
        blend_high,
        np.inf if layer.contact is None else layer.contact,
        _fit(cup, index),
        None if heights is None or values is None else (heights, values),
        cup.rings(layer) if hollow else (),
        None if hollow else _rings(cup, layer),
    )


def _check_room(cup: Cup, layer: Layer, low: float, high: float) -> None:
    if low < -1e-9 or high > cup.height + 1e-9:
        raise InputError(
            f"layer.{layer.name}.blend",
            f"{layer.blend * 1e3:g} mm",
            "the layers outside have no room to move in between the layer's end and the end of the wall",
            f"leave {layer.blend * 1e3:g} mm of wall beyond `from` and `to`, or shorten `blend`",
        )


def _rings(cup: Cup, layer: Layer) -> Rings | None:
    ridge = layer.ridge
    if ridge is None:
        return None
    low, high = np.array(cup.rings(layer)).T
    radius = ridge.crest_radius if ridge.crest == "rounded" else np.inf
    return Rings(low, high, ridge.flank_run, 0.5 * ridge.crest_width, radius)


def _fit(cup: Cup, index: int) -> float | Conductance:
    """Conductance of the inner face of a layer that lies loosely."""
    layer = cup.layer[index]
    if layer.fit is None:
        return np.inf
    if layer.fit_gap is None:
        return layer.fit
    low, high = cup.layer_range(layer)
    stack = cup.stack(0.5 * (low + high))
    inside = cup.emissivity(stack[stack.index(layer) - 1], "outer")
    factor = exchange_factor(inside, cup.emissivity(layer, "inner"))
    radiation = float(radiation_conductance(FIT_TEMPERATURE, FIT_TEMPERATURE, factor))
    return LooseFit(
        layer.fit, (low, high), layer.fit_gap, float(air_conductivity(FIT_TEMPERATURE)), radiation
    )


def _merge(heights: Floats, tolerance: float = 1e-9) -> Floats:
    ordered = np.sort(heights)
    return np.asarray(ordered[np.concatenate([[True], np.diff(ordered) > tolerance])])


def _smooth_step(x: Floats) -> Floats:
    x = np.clip(x, 0.0, 1.0)
    return np.asarray(x * x * (3.0 - 2.0 * x))
