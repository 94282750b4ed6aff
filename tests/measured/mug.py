"""A mug as one lumped node, with the closures and the outside films of the package.

The data tell neither vessel nor mass. A cylinder as high as wide is taken, filled to nine tenths, 4 mm of
stoneware; its inside diameter is the one vessel number that is fitted. The wall carries heat and stores
none: when the mug was warmed, by what and from where, nobody wrote down.
"""

from dataclasses import dataclass

import numpy as np
from scipy.integrate import solve_ivp
from scipy.optimize import least_squares

from cupfem.films import NaturalConvectionPlate, Radiation, Recessed, SurfaceState, closure
from cupfem.fluids import get_liquid, vapour_pressure, water_latent_heat, water_saturation_pressure

PRESSURE = 101325.0
HUMIDITY = 0.45  # the default of a serving; fixed before any comparison
WALL = 0.004  # m
INWARD = WALL / 1.4 + 1.0 / 450.0  # m2 K/W, stoneware and the film of the drink
FILL = 0.9
WATER_EMISSIVITY, STONEWARE_EMISSIVITY = 0.96, 0.92


def surface_fluxes(name, kind, drink, room, diameter):
    """Latent and sensible heat flux of an open surface [W/m2], and its mass flux [kg/(m2 s)]."""
    at_surface = get_liquid(kind).vapour_factor * water_saturation_pressure(drink)
    in_room = vapour_pressure(room, HUMIDITY)
    state = SurfaceState(drink, room, at_surface, in_room, PRESSURE, diameter)
    chosen = Recessed(closure(name))
    mass = chosen.vapour(state)
    radiated = Radiation(WATER_EMISSIVITY).heat_flux(drink, room, 0.0, 0.0)
    return mass * water_latent_heat(drink), chosen.sensible(state) * (drink - room) + radiated, mass


@dataclass(frozen=True)
class Mug:
    """Inside diameter [m], room [degC], closure and drink by name."""

    diameter: float
    room: float
    name: str
    kind: str

    def wall_flux(self, drink):
        """Heat flux leaving the outside of the wall [W/m2]."""
        height = self.diameter + WALL
        plate = NaturalConvectionPlate(height, diameter=self.diameter + 2.0 * WALL)
        flux = 0.0
        for _ in range(4):
            face = drink - INWARD * flux
            flux = plate.heat_flux(face, self.room, 0.0, 0.0)
            flux += Radiation(STONEWARE_EMISSIVITY).heat_flux(face, self.room, 0.0, 0.0)
        return flux

    def rates(self, time, state):
        """Rates of depth [m/s] and temperature [K/s]."""
        depth, drink = state
        liquid = get_liquid(self.kind)
        surface = 0.25 * np.pi * self.diameter**2
        wetted = np.pi * (self.diameter + 2.0 * WALL) * FILL * self.diameter
        latent, sensible, mass = surface_fluxes(self.name, self.kind, drink, self.room, self.diameter)
        density = liquid.density(drink)
        capacity = density * surface * depth * liquid.specific_heat(drink)
        return [-mass / density, -(surface * (latent + sensible) + wetted * self.wall_flux(drink)) / capacity]

    def cooled(self, times, start):
        """Temperatures of the drink [degC] at times [s] from a start [degC]."""
        begin = [FILL * self.diameter, start]
        return solve_ivp(self.rates, (0.0, times[-1]), begin, "LSODA", times, rtol=1e-6, atol=1e-6).y[1]


def fitted(name, times, measured, kind="water", room=None):
    """Best diameter [m] and room [degC] (where it is not given), and the root mean square error [K].

    The first reading is the start.
    """

    def misfit(numbers):
        mug = Mug(numbers[0], numbers[1] if room is None else room, name, kind)
        return mug.cooled(times, measured[0]) - measured

    start = np.array([0.08, 23.0] if room is None else [0.08])
    best = least_squares(misfit, start, x_scale=start, diff_step=1e-4)
    return best.x, float(np.sqrt(np.mean(best.fun**2)))
