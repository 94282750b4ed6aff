"""Published evaporation closures for the free surface, selectable by name; Shah is the default.

Which one is the default, and why: docs/decisions/0002-evaporation-closure.md.
"""

from __future__ import annotations

import math
from abc import abstractmethod
from dataclasses import dataclass
from typing import ClassVar

import numpy as np

from cupfem.errors import InputError, nearest
from cupfem.films import correlations as nu
from cupfem.films.base import (
    Applied,
    Validity,
    Values,
    reached,
    rounded_difference,
    smooth_maximum,
    upward_share,
)
from cupfem.films.correlations import FluidState
from cupfem.films.outside import air_film
from cupfem.films.surface import (
    LIGHTNESS_WIDTH,
    VIRTUAL_WIDTH,
    SurfaceClosure,
    SurfaceState,
    analogous_heat_coefficient,
)
from cupfem.films.underneath import disk_length
from cupfem.fluids import GAS_CONSTANT_AIR, GAS_CONSTANT_VAPOUR, vapour_diffusivity, water_latent_heat
from cupfem.quantities import ZERO_CELSIUS

SECONDS_PER_HOUR = 3600.0
QUIET_ROOM = 5e-5 / SECONDS_PER_HOUR  # kg/(m2 s Pa)
BOWEN = 61.0 / 101325.0  # 1/K; 0.61 mbar/K at standard pressure, as a share of the pressure
NEARLY_BOILING = 0.99  # share of the pressure; `ChiltonColburn` holds the vapour pressure below it


@dataclass(frozen=True)
class Shah(SurfaceClosure):
    """Evaporation from an undisturbed surface into quiet air, after Shah: the default.

    Formula: E = 35 rho_w (rho_r - rho_w)^(1/3) (W_w - W_r) [kg/(m2 h)]; rho is the mass of DRY air per
    volume of moist air, W the humidity ratio, w saturated at the water's temperature, r in the room. rho_w
    (W_w - W_r) equals p (p_w - p_r) / (R_v T_w (p - p_r)), the form used here. Never less than 0.00005 (p_w
    - p_r), the rate where room air moves without buoyancy. Sensible heat by the analogy from which the
    formula was derived.
    Parameters: none; arguments as in `SurfaceClosure` (the diameter only enters the range).
    Returns: mass flux [kg/(m2 s)] on the area of the free surface.
    Range: water 7 to 94 degC, air 6 to 35 degC, 0.07 to 425 m2 (a cup has 0.005 m2: always outside); mean
    deviation 18 % over 11 sets of data. Rounded where the densities are equal and where the two rates
    cross.
    Example: water and air at 28 degC, 50 %: 0.1360 kg/(m2 h), density difference 0.0219 kg/m3 (Shah's
    look-up table).
    Reference: Shah, HVAC&R Research 8 (2002) 125-131, abstract read. Constant and kind of density: checked
    by recomputing nine entries of the look-up table of Shah, ASHRAE Trans. 120(2) 2014, seen second-hand.
    Second rate: Shah, ASHRAE Trans. 118(2) 2012, from memory, not re-checked.
    """

    label: ClassVar[str] = "Shah"
    source: ClassVar[str] = "Shah, HVAC&R Research 8 (2002) 125-131"
    ranges: ClassVar[tuple[Validity, ...]] = (
        Validity("water temperature [degC]", 7.0, 94.0),
        Validity("air temperature [degC]", 6.0, 35.0),
        Validity("free surface [m2]", 0.07, 425.0),
    )

    def vapour(self, state: SurfaceState) -> Values:
        return self._per_pressure(state) * (state.vapour_water - state.vapour_air)

    def sensible(self, state: SurfaceState) -> Values:
        return analogous_heat_coefficient(state, self._per_pressure(state))

    def _per_pressure(self, state: SurfaceState) -> Values:
        kelvin_water = state.water + ZERO_CELSIUS
        dry_water = (state.pressure - state.vapour_water) / (GAS_CONSTANT_AIR * kelvin_water)
        dry_air = (state.pressure - state.vapour_air) / (GAS_CONSTANT_AIR * (state.air + ZERO_CELSIUS))
        lightness = dry_air - dry_water
        rising = 0.5 * (lightness + rounded_difference(lightness, LIGHTNESS_WIDTH))
        drive = state.pressure / (GAS_CONSTANT_VAPOUR * kelvin_water * (state.pressure - state.vapour_air))
        still = 35.0 / SECONDS_PER_HOUR * np.cbrt(rising) * drive
        return smooth_maximum(still, QUIET_ROOM, 0.05 * QUIET_ROOM)

    def applied(self, state: SurfaceState) -> list[Applied]:
        values = (state.water, state.air, 0.25 * math.pi * state.diameter**2)
        return [reached(validity, value) for validity, value in zip(self.ranges, values, strict=True)]


class _PlateAnalogy(SurfaceClosure):
    """A plate correlation for heat and vapour alike: Sh = Nu Le^(1/3), buoyancy from the moist densities."""

    @abstractmethod
    def _nusselt(self, rayleigh: Values, prandtl: Values) -> Values:
        """Nusselt number on the unstable side, on `_length`."""

    @abstractmethod
    def _length(self, diameter: float) -> float:
        """Length on which the correlation stands [m]."""

    def _layer(self, state: SurfaceState) -> tuple[FluidState, Values, Values]:
        """Air at the film temperature, Rayleigh number, relative density difference (light is positive)."""
        air = air_film(state.water, state.air, state.pressure)
        at_surface, in_room = state.moist_densities
        lightness = 2.0 * (in_room - at_surface) / (in_room + at_surface)
        buoyancy = rounded_difference(lightness, LIGHTNESS_WIDTH)
        return air, nu.rayleigh_number(air, buoyancy, self._length(state.diameter)), lightness

    def sensible(self, state: SurfaceState) -> Values:
        air, rayleigh, lightness = self._layer(state)
        stable = nu.nusselt_plate_hot_side_down(rayleigh)
        unstable = upward_share(lightness, LIGHTNESS_WIDTH)
        nusselt = stable + unstable * (self._nusselt(rayleigh, air.prandtl) - stable)
        return nusselt * air.conductivity / self._length(state.diameter)

    def transfer_velocity(self, state: SurfaceState) -> Values:
        """Mass-transfer coefficient h_m [m/s]."""
        air = air_film(state.water, state.air, state.pressure)
        lewis = air.diffusivity / vapour_diffusivity(state.film, state.pressure)
        return self.sensible(state) * air.diffusivity / air.conductivity / np.power(lewis, 2 / 3)

    def vapour(self, state: SurfaceState) -> Values:
        at_surface, in_room = state.vapour_densities
        return self.transfer_velocity(state) * (at_surface - in_room)


@dataclass(frozen=True)
class ChiltonColburn(_PlateAnalogy):
    """Evaporation by the analogy of heat and mass transfer on a hot plate facing up.

    Formula: Nu = `nusselt_plate_hot_side_up` with Ra from the moist-air densities, h_m = h / (rho c
    Le^(2/3)), m = h_m (rho_v,w - rho_v,r); with Stefan flow m = rho h_m ln(1 + B), B = (Y_w - Y_r) / (1 -
    Y_w) with vapour mass fractions Y. Over a surface that is heavier than the room
    `nusselt_plate_hot_side_down`.
    Parameters: stefan_flow: count the wind of the vapour itself. It runs away at boiling, so the vapour
    pressure is held below 0.99 of the pressure.
    Returns: mass flux [kg/(m2 s)]; the sensible coefficient is not corrected for the vapour's flow.
    Range: that of the plate, `PLATE_HOT_UP`; an open plate without a rim, and about twice Shah for hot water.
    Example: none in a textbook; a disk of 80 mm, 60 degC in 20 degC, 50 %: 4.375, with Stefan flow 5.302
    kg/(m2 h).
    Reference: Chilton and Colburn, Ind. Eng. Chem. 26 (1934) 1183; Incropera, 6th ed. 2007, Eqs. 6.60,
    9.30, 9.31; Stefan flow: Bird, Stewart and Lightfoot, Transport Phenomena, 2nd ed., sec. 22.8 (from
    memory, not re-checked).
    """

    stefan_flow: bool = False
    label: ClassVar[str] = "Chilton-Colburn"
    source: ClassVar[str] = (
        "Chilton and Colburn 1934 on McAdams' plate (Incropera 6th ed. Eqs. 6.60, 9.30, 9.31)"
    )

    def _nusselt(self, rayleigh: Values, prandtl: Values) -> Values:
        return nu.nusselt_plate_hot_side_up(rayleigh)

    def _length(self, diameter: float) -> float:
        return disk_length(diameter)

    def vapour(self, state: SurfaceState) -> Values:
        return self._with_stefan_flow(state) if self.stefan_flow else super().vapour(state)

    def _with_stefan_flow(self, state: SurfaceState) -> Values:
        held = state._replace(vapour_water=np.minimum(state.vapour_water, NEARLY_BOILING * state.pressure))
        vapour_surface, vapour_room = held.vapour_densities
        at_surface, in_room = held.moist_densities
        wet, dry = vapour_surface / at_surface, vapour_room / in_room
        mean_density = 0.5 * (at_surface + in_room)
        return mean_density * self.transfer_velocity(held) * np.log1p((wet - dry) / (1.0 - wet))

    def applied(self, state: SurfaceState) -> list[Applied]:
        _, rayleigh, lightness = self._layer(state)
        return nu.reached_by_plate(rayleigh, lightness)


@dataclass(frozen=True)
class BowerSaylor(_PlateAnalogy):
    """Evaporation from still water in tanks in a quiet room.

    Formula: Sh = 0.230 Sc^(1/3) Ra^0.321, Ra from the moist-air densities on the width of the tank (here
    the diameter); the same form with Pr for heat. Over a surface heavier than the room
    `nusselt_plate_hot_side_down`.
    Parameters: none; arguments as in `SurfaceClosure`.
    Returns: mass flux [kg/(m2 s)].
    Range: Ra 9.6e5 to 5.7e8, water up to about 50 degC in tanks of 0.15 to 0.6 m.
    Example: none found.
    Reference: Bower and Saylor, Int. J. Heat Mass Transfer 52 (2009) 3055-3063; formula, definition of Ra
    and range from memory, not re-checked.
    """

    label: ClassVar[str] = "Bower-Saylor"
    source: ClassVar[str] = "Bower and Saylor, Int. J. Heat Mass Transfer 52 (2009) 3055, from memory"
    validity: ClassVar[Validity] = Validity("Rayleigh number (evaporating tank)", 9.6e5, 5.7e8)

    def _nusselt(self, rayleigh: Values, prandtl: Values) -> Values:
        return 0.230 * np.cbrt(prandtl) * np.power(rayleigh, 0.321)

    def _length(self, diameter: float) -> float:
        return diameter

    def applied(self, state: SurfaceState) -> list[Applied]:
        return [reached(self.validity, self._layer(state)[1])]


@dataclass(frozen=True)
class RyanHarleman(SurfaceClosure):
    """Evaporation from heated ponds: buoyancy and wind in one wind function.

    Formula: latent flux = [2.7 (Tv_w - Tv_r)^(1/3) + 3.1 W] (e_w - e_r) [W/m2] with vapour pressures in
    mbar, wind W in m/s (2 m above the surface), virtual temperature Tv = T / (1 - 0.378 e/p); sensible flux
    by the Bowen ratio, 0.61 mbar/K. Without buoyancy the first term is zero. Divided by the latent heat at
    the surface.
    Parameters: wind [m/s], default 0.
    Returns: mass flux [kg/(m2 s)].
    Range: heated ponds and a laboratory basin; no bounds known to us.
    Example: none in a textbook; 60 degC in 20 degC, 50 %, no wind: 2044 W/m2.
    Reference: Ryan and Harleman, MIT Parsons Laboratory Report 161, 1973; Ryan, Harleman and Stolzenbach,
    Water Resources Research 10 (1974) 930. Form confirmed in public code, coefficients from memory, not
    re-checked.
    """

    wind: float = 0.0
    label: ClassVar[str] = "Ryan-Harleman"
    source: ClassVar[str] = (
        "Ryan and Harleman, MIT Parsons Laboratory Report 161 (1973), coefficients from memory"
    )

    def __post_init__(self) -> None:
        if not 0.0 <= self.wind < math.inf:
            raise InputError("wind", f"{self.wind:g} m/s", "must be zero or positive", 'write "0.1 m/s"')

    def _wind_function(self, state: SurfaceState) -> Values:
        """Latent heat per vapour-pressure difference [W/(m2 Pa)]."""
        water = (state.water + ZERO_CELSIUS) / (1.0 - 0.378 * state.vapour_water / state.pressure)
        air = (state.air + ZERO_CELSIUS) / (1.0 - 0.378 * state.vapour_air / state.pressure)
        rising = 0.5 * (water - air + rounded_difference(water - air, VIRTUAL_WIDTH))
        return (2.7 * np.cbrt(rising) + 3.1 * self.wind) / 100.0

    def vapour(self, state: SurfaceState) -> Values:
        latent = self._wind_function(state) * (state.vapour_water - state.vapour_air)
        return latent / water_latent_heat(state.water)

    def sensible(self, state: SurfaceState) -> Values:
        return BOWEN * state.pressure * self._wind_function(state)

    def applied(self, state: SurfaceState) -> list[Applied]:
        return []


CLOSURES: dict[str, SurfaceClosure] = {
    "Shah": Shah(),
    "Chilton-Colburn": ChiltonColburn(),
    "Chilton-Colburn with Stefan flow": ChiltonColburn(stefan_flow=True),
    "Bower-Saylor": BowerSaylor(),
    "Ryan-Harleman": RyanHarleman(),
}
DEFAULT_CLOSURE = "Shah"


def closure(name: str = DEFAULT_CLOSURE) -> SurfaceClosure:
    """The closure of that name; InputError with the nearest name if there is none."""
    if name not in CLOSURES:
        known = ", ".join(CLOSURES)
        raise InputError(
            "evaporation closure", name, "no such closure", f"use one of {known}.{nearest(name, CLOSURES)}"
        )
    return CLOSURES[name]
