"""A station: the wall at one height as a stack of layers between two films, taken from cup and serving.

The wall is a cone, and heat crosses it along its normal. The radii of the stack are therefore distances to
the axis along the normal, r / cos(taper) on the inside face plus the thicknesses: with them the formulas of a
cylinder hold for a cone whose temperature does not change along it.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, field

from cupfem import edges
from cupfem.cup import Cup
from cupfem.errors import InputError
from cupfem.films import Film, Values
from cupfem.fluids import air_conductivity, air_density, air_specific_heat
from cupfem.gaps import Gap
from cupfem.quantities import format_quantity
from cupfem.serving import Serving, fill_volume

GAS_TEMPERATURE = 50.0  # degC, at which the heat capacity of the air in a gap is taken


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
        """Whether the inner face leads to the drink."""
        return bool(self.inner.films) and self.inner.surroundings is None

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

    Level left out: that of the pour. A layer is there between its ends and not beyond: blends are left out.
    Below the floor the inside is insulated. Raises InputError for a height that is not on the wall.
    """
    if not 0.0 <= height <= cup.height:
        why = f"not on the wall, from 0 mm to {_mm(cup.height)}"
        raise InputError("station", _mm(height), why, f'write for example "{_mm(0.5 * cup.height)}"')
    layers = _stack(cup, height)
    radii = [cup.inner_radius(height) / math.cos(cup.half_taper_angle)]
    for layer in layers:
        radii.append(radii[-1] + layer.thickness)
    level = level_of(cup, fill_volume(cup, serving)) if level is None else level
    room = float(serving.room.temperature_at(time))
    inner, outer = _inner_face(cup, serving, height, level, room), _outer_face(cup, serving, height, room)
    temperatures = serving.start_temperature, serving.drink.temperature
    return Station(height, tuple(radii), tuple(layers), inner, outer, *temperatures)


def level_of(cup: Cup, volume: float) -> float:
    """Level [m] of a volume of drink [m3]: the frustum of a cone, solved for its height."""
    floor = cup.inner_radius(cup.floor)
    slope = math.tan(cup.half_taper_angle)
    ratio = 3.0 * slope * max(volume, 0.0) / (math.pi * floor**3)
    if abs(ratio) < 1e-9:  # a cylinder, to rounding
        return cup.floor + max(volume, 0.0) / (math.pi * floor * floor)
    return cup.floor + floor * (math.cbrt(1.0 + ratio) - 1.0) / slope


def _stack(cup: Cup, height: float) -> list[WallLayer]:
    """Layers at a height; where one with a contact has stopped between two others, its contact."""
    present = [cup.layer.index(layer) for layer in edges.stack_at(cup, height)]
    found = []
    for index, layer in enumerate(cup.layer):
        if index in present:
            found.append(_layer(cup, index, height))
        elif layer.contact is not None and min(present) < index < max(present):
            found.append(WallLayer(f"{layer.name} contact", 0.0, math.inf, 0.0, contact=layer.contact))
    return found


def _layer(cup: Cup, index: int, height: float) -> WallLayer:
    layer = cup.layer[index]
    material = cup.material(layer.material)
    if material.kind == "solid":
        capacity = material.density.value * material.specific_heat.value
        return WallLayer(layer.name, layer.thickness, material.conductivity_through.value, capacity)
    gap = edges.gap_of(cup, index, height)
    capacity = float(air_density(GAS_TEMPERATURE, gap.pressure)) * float(air_specific_heat(GAS_TEMPERATURE))
    conductivity = float(air_conductivity(GAS_TEMPERATURE))
    return WallLayer(layer.name, layer.thickness, conductivity, capacity, gap, edges.gap_height(cup, index))


def _inner_face(cup: Cup, serving: Serving, height: float, level: float, room: float) -> Face:
    if height < cup.floor:
        return Face()
    if height <= level:
        return Face(edges.wetted_films(cup, serving, level))
    emissivity = edges.emissivity_of(cup, edges.stack_at(cup, height)[0])
    films = edges.dry_films(cup, serving, level, emissivity)
    return Face(films, _led_to(serving, "dry", room))


def _outer_face(cup: Cup, serving: Serving, height: float, room: float) -> Face:
    emissivity = edges.emissivity_of(cup, edges.stack_at(cup, height)[-1])
    films = edges.outside_films(cup, serving, emissivity)
    return Face(films, _led_to(serving, "outside", room))


def _led_to(serving: Serving, edge: edges.EdgeName, room: float) -> float:
    given = edges.surroundings_of(serving, edge)
    return room if given is None else given


def _mm(length: float) -> str:
    return format_quantity(length, "length", digits=4)
