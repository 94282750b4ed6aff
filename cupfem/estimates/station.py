"""A station: the wall at one height as a stack of layers between two films, taken from cup and serving.

The wall is locally a cone, and heat crosses it along its normal. The radii of the stack are therefore
distances to the axis along the normal, r / cos(lean) on the inside face plus the thicknesses: with them the
formulas of a cylinder hold for a cone whose temperature does not change along it.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, field

import numpy as np

from cupfem import edges
from cupfem.cup import Cup, Layer
from cupfem.errors import InputError
from cupfem.films import Film, Values
from cupfem.fluids import air_conductivity, air_density, air_specific_heat
from cupfem.gaps import Gap, exchange_factor, radiation_conductance
from cupfem.quantities import format_quantity
from cupfem.serving import Serving, fill_volume

GAS_TEMPERATURE = 50.0  # degC, of the air in a gap for its heat capacity, and of that in a loose fit


@dataclass(frozen=True)
class WallLayer:
    """One layer of a stack.

    thickness [m], conductivity [W/(m K)] (of a gap: of its still air) and heat_capacity [J/(m3 K)]. A `gap`
    has its conductance from `Gap.conductance`, for a gap of height gap_height [m]. A layer without thickness
    is a contact with a `contact` conductance [W/(m2 K)].
    """

    name: str
    thickness: float
    conductivity: float
    heat_capacity: float
    gap: Gap | None = None
    gap_height: float = math.inf
    contact: float = math.inf

    def conductance(
        self, inner: Values, outer: Values, inner_radius: float = math.inf, plane: bool = False
    ) -> Values:
        """Conductance per area of the inner face [W/(m2 K)] at face temperatures [degC]."""
        if self.thickness == 0.0:
            return self.contact
        outer_radius = inner_radius + self.thickness
        if self.gap is not None:
            return self.gap.conductance(inner, outer, inner_radius, outer_radius, self.gap_height)
        if plane:
            return self.conductivity / self.thickness
        return self.conductivity / (inner_radius * math.log(outer_radius / inner_radius))


@dataclass(frozen=True)
class Face:
    """Films on one side of the stack, by name, and what they lead to [degC]; None: the drink.

    Without films the face is insulated.
    """

    films: Mapping[str, Film] = field(default_factory=dict)
    surroundings: float | None = None

    def heat_flux(self, surface: Values, around: Values, height: float = 0.0, time: float = 0.0) -> Values:
        """Heat flux that leaves the wall [W/m2]; temperatures [degC], height [m], time [s]."""
        total: Values = 0.0 * surface
        for film in self.films.values():
            total = total + film.heat_flux(surface, around, height, time)
        return total


@dataclass(frozen=True)
class Station:
    """The wall at one height [m] on the inside face.

    radii[n + 1] of the interfaces from inside to outside [m], layers[n], films on both sides, and the
    temperatures of wall and drink at the pour [degC].
    """

    height: float
    radii: tuple[float, ...]
    layers: tuple[WallLayer, ...]
    inner: Face
    outer: Face
    start_temperature: float = 22.0
    drink_temperature: float = 85.0

    @property
    def wetted(self) -> bool:
        """Whether the inner face touches the drink."""
        return edges.TO_DRINK in self.inner.films

    @property
    def thickness(self) -> float:
        """Of the whole stack [m]."""
        return sum(layer.thickness for layer in self.layers)

    @property
    def inside(self) -> float:
        """What the inner film leads to at the pour [degC]."""
        given = self.inner.surroundings
        return self.drink_temperature if given is None else given

    @property
    def outside(self) -> float:
        """What the outer film leads to [degC]."""
        given = self.outer.surroundings
        return self.drink_temperature if given is None else given


def station(
    cup: Cup, serving: Serving, height: float, level: float | None = None, time: float = 0.0
) -> Station:
    """The station at a height [m], with the films of a level [m] and the room of a time [s].

    Level left out: that of the pour. A layer is there between its ends and not beyond, a ridge over its foot
    with its full height: blends and flanks are left out. Below the floor the inside is insulated. Under a
    lid the dry wall meets still air at the temperature of the drink; what condenses there is left out.
    Raises InputError for a height that is not on the wall.
    """
    if not 0.0 <= height <= cup.height:
        why = f"not on the wall, from 0 mm to {_mm(cup.height)}"
        raise InputError("station", _mm(height), why, f'write for example "{_mm(0.5 * cup.height)}"')
    layers = _stack(cup, height, serving.room.pressure)
    radii = [cup.inner_radius(height) / math.cos(float(cup.profile.angle_at(height)))]
    for layer in layers:
        radii.append(radii[-1] + layer.thickness)
    level = cup.level(fill_volume(cup, serving)) if level is None else level
    room = float(serving.room.temperature_at(time))
    inner = _inner_face(cup, serving, height, level, time)
    outer = _outer_face(cup, serving, height, room)
    temperatures = serving.start_temperature, serving.drink.temperature
    return Station(height, tuple(radii), tuple(layers), inner, outer, *temperatures)


def _stack(cup: Cup, height: float, pressure: float) -> list[WallLayer]:
    """Layers at a height, with the contacts of loose layers and of layers that have stopped."""
    present = [cup.layer.index(layer) for layer in cup.stack(height)]
    found = []
    for index, layer in enumerate(cup.layer):
        if index in present:
            if layer.fit is not None:
                found.append(_contact(f"{layer.name} fit", _fit_conductance(cup, layer, height)))
            found.append(_layer(cup, index, height, pressure))
        elif layer.contact is not None and min(present) < index < max(present):
            found.append(_contact(f"{layer.name} contact", layer.contact))
    return found


def _contact(name: str, conductance: float) -> WallLayer:
    return WallLayer(name, 0.0, math.inf, 0.0, contact=conductance)


def _fit_conductance(cup: Cup, layer: Layer, height: float) -> float:
    """Conductance of a loose layer to what is inside it [W/(m2 K)].

    Where air lies between, k / (g + g0) + h_radiation with g0 so that touching faces (g = 0) have the
    conductance of the fit; common practice for rough faces, no source.
    """
    touching = layer.fit or math.inf
    if layer.fit_gap is None:
        return touching
    low, high = cup.layer_range(layer)
    gap = float(np.interp(height, (low, high), layer.fit_gap))
    stack = cup.stack(height)
    inside = cup.emissivity(stack[stack.index(layer) - 1], "outer")
    factor = exchange_factor(inside, cup.emissivity(layer, "inner"))
    radiation = float(radiation_conductance(GAS_TEMPERATURE, GAS_TEMPERATURE, factor))
    air = float(air_conductivity(GAS_TEMPERATURE))
    return air / (gap + air / (touching - radiation)) + radiation


def _layer(cup: Cup, index: int, height: float, pressure: float) -> WallLayer:
    layer = cup.layer[index]
    material, thickness = cup.layer_material(layer), layer.thickness_at(height)
    if material.kind == "solid":
        capacity = material.density.value * material.specific_heat.value
        return WallLayer(layer.name, thickness, material.conductivity_through.value, capacity)
    gap = edges.gap_of(cup, index, height, pressure)
    capacity = float(air_density(GAS_TEMPERATURE, gap.pressure)) * float(air_specific_heat(GAS_TEMPERATURE))
    conductivity = float(air_conductivity(GAS_TEMPERATURE))
    return WallLayer(layer.name, thickness, conductivity, capacity, gap, edges.gap_height(cup, index))


def _inner_face(cup: Cup, serving: Serving, height: float, level: float, time: float) -> Face:
    if height < cup.floor:
        return Face()
    if height <= level:
        return Face(edges.wetted_films(cup, serving, level, serving.stirred_at(time)))
    emissivity = cup.emissivity(cup.stack(height)[0], "inner")
    films = edges.dry_films(cup, serving, level, emissivity)
    if serving.lid_at(time):
        return Face({name: film for name, film in films.items() if name != "dry wall radiation"})
    return Face(films, _led_to(serving, "dry", float(serving.room.temperature_at(time))))


def _outer_face(cup: Cup, serving: Serving, height: float, room: float) -> Face:
    if serving.carrier is not None and height <= serving.carrier.height:
        return Face(edges.carrier_films(serving), room)
    emissivity = cup.emissivity(cup.stack(height)[-1], "outer")
    films = edges.outside_films(cup, serving, emissivity)
    return Face(films, _led_to(serving, "outside", room))


def _led_to(serving: Serving, edge: edges.EdgeName, room: float) -> float:
    given = edges.surroundings_of(serving, edge)
    return room if given is None else given


def _mm(length: float) -> str:
    return format_quantity(length, "length", digits=4)
