"""The drink of an estimate: one lumped node whose volume falls as it is drunk.

Balance of the temperature, m c dT/dt = A q - loss, with q the heat flux that the wall passes to the drink and
the loss that of the open surface: vapour with its latent heat, convection, radiation; a lid is taken as tight
and insulating. What evaporates is left out of the mass, and what is drunk leaves at the drink's own
temperature, so it is in m alone. The pour and refills are taken as sudden. A well-mixed
node is common practice (Incropera, DeWitt, Bergman, Lavine, Fundamentals of Heat and Mass Transfer, 6th ed.
2007, sec. 5.1).
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from cupfem import edges
from cupfem.cup import Cup
from cupfem.fluids import Liquid, vapour_pressure, water_latent_heat
from cupfem.serving import Serving, fill_volume

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
    volume, loss = _volume_from(cup, serving, begin), surface_loss(serving, begin)

    def area(time: float) -> float:
        return wetted_area(cup, cup.level(volume(time)))

    def lost(time: float, temperature: float) -> float:
        return loss(cup.inner_radius(cup.level(volume(time))), temperature)

    return LumpedDrink(serving.drink.liquid, volume, area, lost)


def volume_at(cup: Cup, serving: Serving, time: float) -> float:
    """Volume of drink [m3] at a time [s], after a sip or a refill at that time."""
    return _volume_from(cup, serving, time)(time)


def _volume_from(cup: Cup, serving: Serving, begin: float) -> Callable[[float], float]:
    """Volume of drink [m3] as a function of the time [s]; of sips and refills those up to `begin` count."""
    start = fill_volume(cup, serving) - sum(volume for taken, volume in serving.sips() if taken <= begin)
    start += sum(volume for poured, volume, _ in serving.refills() if poured <= begin)
    flows = serving.steady_drinking()

    def volume(time: float) -> float:
        drunk = sum(flow * min(max(time - a, 0.0), b - a) for flow, a, b in flows)
        return max(start - drunk, SMALLEST_VOLUME)

    return volume


def wetted_area(cup: Cup, level: float) -> float:
    """Inside of wall and base below a level [m]: frusta of cones, and a disk unless the cup is open [m2]."""
    profile, floor = cup.profile, cup.floor
    between = profile.height[(profile.height > floor) & (profile.height < level)]
    height = np.concatenate([[floor], between, [max(level, floor)]])
    radius = profile.radius_at(height)
    side = float((radius[1:] + radius[:-1]) @ np.hypot(np.diff(height), np.diff(radius)))
    return math.pi * (side + (float(radius[0]) ** 2 if cup.base_disc else 0.0))


def surface_loss(serving: Serving, time: float = 0.0) -> Callable[[float, float], float]:
    """Heat that leaves the drink's surface [W]: vapour, convection, radiation.

    A function of the surface's radius [m] and the drink's temperature [degC], in the room of a time [s];
    nothing leaves while the lid is on.
    """
    if serving.lid_at(time):
        return lambda radius, temperature: 0.0
    room = float(serving.room.temperature_at(time))
    given = edges.surroundings_of(serving, "surface")
    around = room if given is None else given
    films = tuple(edges.surface_films(serving).values())
    with_closure = _vapour_and_convection(serving, room)

    def loss(radius: float, temperature: float) -> float:
        flux = sum(float(film.heat_flux(temperature, around, 0.0, time)) for film in films)
        return math.pi * radius * radius * (flux + with_closure(radius, temperature))

    return loss


def _vapour_and_convection(serving: Serving, room: float) -> Callable[[float, float], float]:
    """Heat flux by the closure [W/m2] of radius and temperature; none where a fixed film replaces it."""
    closure = edges.surface_closure(serving)
    if closure is None:
        return lambda radius, temperature: 0.0
    vapour = float(vapour_pressure(room, serving.room.humidity))
    activity = serving.drink.liquid.vapour_factor

    def flux(radius: float, temperature: float) -> float:
        air = (temperature, room, vapour, serving.room.pressure, 2.0 * radius, activity)
        latent = float(closure.mass_flux(*air)) * float(water_latent_heat(temperature))
        return latent + float(closure.heat_transfer_coefficient(*air)) * (temperature - room)

    return flux
