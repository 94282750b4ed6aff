"""The drink of an estimate: one lumped node whose volume falls as it is drunk.

Balance of the temperature, m c dT/dt = A q - loss, with q the heat flux that the wall passes to the drink and
the loss that of the open surface: vapour with its latent heat, convection, radiation. What evaporates is left
out of the mass, and what is drunk leaves at the drink's own temperature, so it is in m alone. A well-mixed
node is common practice (Incropera, DeWitt, Bergman, Lavine, Fundamentals of Heat and Mass Transfer, 6th ed.
2007, sec. 5.1).
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

from cupfem import edges
from cupfem.cup import Cup
from cupfem.estimates.station import level_of
from cupfem.fluids import Liquid, vapour_pressure, water_latent_heat
from cupfem.serving import PRESSURE, Serving, fill_volume

SMALLEST_VOLUME = 1e-6
"""A drink is never less than this [m3]; a rest of a millilitre follows the wall at once."""


@dataclass(frozen=True)
class LumpedDrink:
    """A drink that one wall cools.

    volume [m3] and wetted_area [m2] as functions of the time [s]; loss of the surface [W] as a function of
    the time [s] and the drink's temperature [degC].
    """

    liquid: Liquid
    volume: Callable[[float], float]
    wetted_area: Callable[[float], float]
    loss: Callable[[float, float], float]

    def heat_capacity(self, time: float, temperature: float) -> float:
        """m c [J/K]."""
        mass = float(self.liquid.density(temperature)) * max(self.volume(time), SMALLEST_VOLUME)
        return mass * float(self.liquid.specific_heat(temperature))

    def rate(self, time: float, temperature: float, received: float) -> float:
        """dT/dt [K/s]; `received` is the heat flux from the wall [W/m2]."""
        heat = self.wetted_area(time) * received - self.loss(time, temperature)
        return heat / self.heat_capacity(time, temperature)


def lumped_drink(cup: Cup, serving: Serving, begin: float = 0.0) -> LumpedDrink:
    """The drink of a serving from a time [s] on, until the next sip or step of the room.

    The base counts as wetted wall.
    """

    def volume(time: float) -> float:
        return volume_at(cup, serving, time, begin)

    def area(time: float) -> float:
        return wetted_area(cup, level_of(cup, volume(time)))

    def loss(time: float, temperature: float) -> float:
        return surface_loss(cup, serving, level_of(cup, volume(time)), temperature, begin)

    return LumpedDrink(serving.drink.liquid, volume, area, loss)


def volume_at(cup: Cup, serving: Serving, time: float, begin: float | None = None) -> float:
    """Volume of drink [m3] at a time [s].

    Of the sips those up to `begin` [s] count; left out: up to the time.
    """
    until = time if begin is None else begin
    sips = sum(volume for taken, volume in serving.sips() if taken <= until)
    steady = sum(flow * min(max(time - a, 0.0), b - a) for flow, a, b in serving.steady_drinking())
    return max(fill_volume(cup, serving) - sips - steady, SMALLEST_VOLUME)


def wetted_area(cup: Cup, level: float) -> float:
    """Inside of wall and base below a level [m]: side of a cone, and a disk unless open [m2]."""
    low, high = cup.inner_radius(cup.floor), cup.inner_radius(level)
    side = math.pi * (low + high) * math.hypot(level - cup.floor, high - low)
    return side + (math.pi * low * low if cup.base_disc else 0.0)


def surface_loss(cup: Cup, serving: Serving, level: float, temperature: float, time: float = 0.0) -> float:
    """Heat that leaves the drink's surface at a level [m] [W]: vapour, convection, radiation."""
    radius = cup.inner_radius(level)
    room = float(serving.room.temperature_at(time))
    given = edges.surroundings_of(serving, "surface")
    around = room if given is None else given
    films = edges.surface_films(serving).values()
    flux = sum(float(film.heat_flux(temperature, around, level, time)) for film in films)
    flux += _vapour_and_convection(serving, radius, temperature, room)
    return math.pi * radius * radius * flux


def _vapour_and_convection(serving: Serving, radius: float, temperature: float, room: float) -> float:
    """Heat flux by the closure [W/m2]; none where a fixed film replaces it."""
    closure = edges.surface_closure(serving)
    if closure is None:
        return 0.0
    vapour = float(vapour_pressure(room, serving.room.humidity))
    air = (temperature, room, vapour, PRESSURE, 2.0 * radius, serving.drink.liquid.vapour_factor)
    latent = float(closure.mass_flux(*air)) * float(water_latent_heat(temperature))
    return latent + float(closure.heat_transfer_coefficient(*air)) * (temperature - room)
