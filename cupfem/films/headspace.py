"""Heat and vapour under a lid: condensation limited by air, and what passes through a hole in the lid."""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from typing import Any, ClassVar, Literal

import numpy as np

from cupfem.films import correlations as nu
from cupfem.films.base import (
    GRAVITY,
    STEFAN_BOLTZMANN,
    Applied,
    Values,
    fourth_power_difference,
    reached,
    rounded_difference,
    upward_share,
)
from cupfem.films.correlations import FluidState
from cupfem.films.outside import Convection, air_film
from cupfem.fluids import (
    GAS_CONSTANT_VAPOUR,
    air_conductivity,
    moist_air_density,
    vapour_diffusivity,
    water_latent_heat,
    water_saturation_pressure,
)
from cupfem.quantities import ZERO_CELSIUS

ONSET_WIDTH = 100.0  # Pa, about 0.6 K at 22 degC and 0.1 K at 70; rounds the onset of condensation
HEAVINESS_WIDTH = 1e-3  # relative density difference of 0.3 K; rounds the coefficients at zero
HOLE_WIDTH = 1e-3  # relative density difference; makes the exchange through a hole linear at zero drive
HOLE_FROUDE = 0.055


def positive_part(value: Values, width: float) -> Values:
    """max(0, value), rounded: exactly zero below zero, a parabola up to `width`, then value - width/2.

    One-sided to the last digit, so that a dry wall gives nothing off; its slope is continuous.
    """
    rising = np.clip(value, 0.0, width)
    rounded: Values = rising * rising / (2.0 * width) + np.maximum(value - width, 0.0)
    return rounded


def condensed(
    coefficient: Values, wall: Values, gas: Values, vapour_pressure: Values, pressure: float
) -> Values:
    """Vapour that condenses on a wall colder than the dew point of the gas [kg/(m2 s)].

    Formula: m = h_m max(0, p_v - p_sat(T_wall)) / (R_v T_film), h_m = h alpha / (k Le^(2/3)).
    Parameters: convection coefficient h [W/(m2 K)], temperatures of wall and gas [degC], vapour pressure of
    the gas and pressure [Pa].
    Returns: never negative: the wall has no water to give off.
    Range: that of h. The wind of the vapour itself (Stefan flow) is left out: at 80 degC it would add about
    a third; the film of water on the wall adds nothing, see `condensation`.
    Example: none in a textbook; h_m is that of Incropera, 6th ed. 2007, Eq. 6.60.
    Reference: Chilton and Colburn, Ind. Eng. Chem. 26 (1934) 1183.
    """
    air = air_film(wall, gas, pressure)
    film = 0.5 * (wall + gas)
    lewis = air.diffusivity / vapour_diffusivity(film, pressure)
    velocity = coefficient * air.diffusivity / air.conductivity * np.power(lewis, -2 / 3)
    drive = positive_part(vapour_pressure - water_saturation_pressure(wall), ONSET_WIDTH)
    return velocity * drive / (GAS_CONSTANT_VAPOUR * (film + ZERO_CELSIUS))


def heaviness(wall: Values, gas: Values, vapour_pressure: Values, pressure: float) -> Values:
    """Relative density difference between the gas at a wall and away from it, positive where it is heavier.

    The wall's gas is at the wall's temperature and gives up what condenses. So the gas keeps moving where
    wall and gas are equally warm and vapour condenses.
    """
    dried = vapour_pressure - positive_part(vapour_pressure - water_saturation_pressure(wall), ONSET_WIDTH)
    at_wall = moist_air_density(wall, dried, pressure)
    away = moist_air_density(gas, vapour_pressure, pressure)
    return 2.0 * (at_wall - away) / (at_wall + away)


@dataclass(frozen=True)
class HeadspaceConvection(Convection):
    """Natural convection between a headspace and what bounds it, buoyancy from the moist densities.

    Formula: wall: `nusselt_vertical_plate`, g replaced by g cos(lean); lid, facing down:
    `nusselt_horizontal_plate`, unstable where the gas at the lid is the heavier; Ra with `heaviness`, rounded
    at zero.
    Parameters: length [m], the dry height along the wall, or the lid's area over perimeter; vapour_pressure
    of the gas and pressure [Pa]; place; lean [rad].
    Returns: heat flux leaving the surface [W/m2]; surroundings is the gas.
    Range: that of the plates; a headspace is a small cavity in which wall, lid and drink share one flow.
    Example: none in a textbook; dry gas gives the plates' own values.
    Reference: those of the two correlations; density difference as in Bower and Saylor 2009.
    """

    length: float
    vapour_pressure: float
    pressure: float
    place: Literal["wall", "lid"] = "wall"
    lean: float = 0.0
    _last: list[Any] = field(default_factory=list, init=False, repr=False, compare=False)
    label: ClassVar[str] = "natural convection, headspace"
    source: ClassVar[str] = "Churchill and Chu 1975, McAdams 1954 (Incropera 6th ed. Eqs. 9.26, 9.30-9.32)"

    def _numbers(self, surface: Values, gas: Values) -> tuple[FluidState, Values, Values]:
        air = air_film(surface, gas, self.pressure)
        heavier = heaviness(surface, gas, self.vapour_pressure, self.pressure)
        buoyancy = rounded_difference(heavier, HEAVINESS_WIDTH)
        return air, nu.rayleigh_number(air, buoyancy, self.length), heavier

    def applied(self, surface: Values, surroundings: Values) -> list[Applied]:
        _, rayleigh, heavier = self._numbers(surface, surroundings)
        if self.place == "lid":
            return nu.reached_by_plate(rayleigh, heavier)
        return [reached(nu.VERTICAL_PLATE, rayleigh)]

    def coefficient(self, surface: Values, surroundings: Values, height: Values = 0.0) -> Values:
        """Film coefficient [W/(m2 K)]; heat and vapour ask for the same one in turn, so the last is kept."""
        if not (self._last and self._last[0] is surface and self._last[1] == surroundings):
            self._last[:] = [surface, surroundings, self._coefficient(surface, surroundings)]
        kept: Values = self._last[2]
        return kept

    def _coefficient(self, surface: Values, surroundings: Values) -> Values:
        air, rayleigh, heavier = self._numbers(surface, surroundings)
        if self.place == "lid":
            nusselt = nu.nusselt_horizontal_plate(rayleigh, upward_share(heavier, HEAVINESS_WIDTH))
        else:
            nusselt = nu.nusselt_vertical_plate(math.cos(self.lean) * rayleigh, air.prandtl)
        return nusselt * air.conductivity / self.length


@dataclass(frozen=True)
class Condensation:
    """Film of vapour that condenses on a wall: latent heat into it, `condensed` times h_fg of the wall.

    Parameters: carrier: the convection that carries the vapour.
    Returns: heat flux leaving the wall [W/m2], never positive; surroundings is the gas. Range, reference:
    `condensed`.
    """

    carrier: HeadspaceConvection
    label: ClassVar[str] = "condensation on the dry wall"
    source: ClassVar[str] = "Chilton and Colburn 1934 (Incropera 6th ed. Eq. 6.60)"

    def heat_flux(self, surface: Values, surroundings: Values, height: Values, time: float) -> Values:
        coefficient = self.carrier.coefficient(surface, surroundings, height)
        carrier = self.carrier
        mass = condensed(coefficient, surface, surroundings, carrier.vapour_pressure, carrier.pressure)
        return -mass * water_latent_heat(surface)


@dataclass(frozen=True)
class RadiationTo:
    """Radiation to a face of its own temperature, whatever the surroundings of the edge.

    Formula: factor sigma (Ts^4 - T^4), factor = e1 e2 F: what both faces reflect is left out, about 1 % of
    it for board and water. Reference: Incropera, 6th ed. 2007, sec. 13.3.
    """

    factor: float
    temperature: float
    label: ClassVar[str] = "radiation under the lid"
    source: ClassVar[str] = "Incropera et al., 6th ed. 2007, sec. 13.3, without reflections"

    def heat_flux(self, surface: Values, surroundings: Values, height: Values, time: float) -> Values:
        return self.factor * STEFAN_BOLTZMANN * fourth_power_difference(surface, self.temperature)


@dataclass(frozen=True)
class Hole:
    """A hole in the lid: light gas below and heavy air above change places, and diffusion helps.

    Formula: V = 0.055 (g drho/rho D^5)^(1/2) + D_v D, D from the area; nothing but diffusion where the
    room's air is the lighter (stable). The root is linear below a density difference of 1e-3.
    Parameters: area [m2].
    Returns: `volume_flow` [m3/s] in each direction, `conduction` [W/K] of the still air in the hole.
    Range: a thin plate, length over diameter below 0.15; a still room. Wind, sipping, tilting are left out.
    Example: none in a textbook; 1.2 cm2 at 75 degC: 2 ml/s, about 2 % of what an open cup loses.
    Reference: Epstein, J. Heat Transfer 110 (1988) 885-893, from memory, not re-checked. Diffusion and
    conduction through a circular hole, conductance D_v D: Carslaw and Jaeger, Conduction of Heat in Solids,
    2nd ed. 1959, sec. 8.2 (twice the disk on a half-space).
    """

    area: float

    @property
    def diameter(self) -> float:
        """Of the round hole of this area [m]."""
        return math.sqrt(4.0 * self.area / math.pi)

    def volume_flow(
        self, inside: float, vapour_inside: float, outside: float, vapour_outside: float, pressure: float
    ) -> float:
        """Temperatures [degC] and vapour pressures [Pa] of headspace and room, and the pressure [Pa]."""
        below = moist_air_density(inside, vapour_inside, pressure)
        above = moist_air_density(outside, vapour_outside, pressure)
        lightness = max(2.0 * (above - below) / (above + below), 0.0)
        root = lightness / math.sqrt(lightness + HOLE_WIDTH)
        exchanged = HOLE_FROUDE * math.sqrt(GRAVITY) * self.diameter**2.5 * root
        spread = float(vapour_diffusivity(0.5 * (inside + outside), pressure)) * self.diameter
        return float(exchanged + spread)

    def conduction(self, inside: float, outside: float) -> float:
        """Conductance of the still air [W/K]; temperatures [degC]."""
        return float(air_conductivity(0.5 * (inside + outside))) * self.diameter
