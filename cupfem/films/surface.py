"""The free surface of the drink: what an evaporation closure is, and the air layer that it works on.

Every closure answers the vapour that leaves the surface [kg/(m2 s)] and the coefficient of the sensible
heat that goes with it [W/(m2 K)]; radiation is not in it. Vapour flux is a smooth positive coefficient
times a driving difference that is zero with the vapour-pressure difference and changes sign with it
(negative: vapour condenses on a cold drink). The closures themselves are in `evaporation`.
"""

from __future__ import annotations

from abc import ABC, abstractmethod
from dataclasses import dataclass
from typing import ClassVar, NamedTuple

import numpy as np

from cupfem.errors import InputError
from cupfem.films.base import Applied, Values
from cupfem.films.outside import air_film
from cupfem.fluids import (
    GAS_CONSTANT_VAPOUR,
    air_density,
    air_specific_heat,
    moist_air_density,
    vapour_diffusivity,
    water_saturation_pressure,
)
from cupfem.quantities import ZERO_CELSIUS

LIGHTNESS_WIDTH = 1e-3  # relative density difference of 0.3 K in air; rounds the coefficients at zero
VIRTUAL_WIDTH = 0.3  # K, the same in virtual temperature
FREEBOARD_FACTOR = 0.75  # see `Recessed`
FREEBOARD_RANGE = (0.65, 0.85)


class SurfaceState(NamedTuple):
    """Both sides of the air layer above the drink."""

    water: Values  # degC, the surface
    air: Values  # degC
    vapour_water: Values  # Pa, at the surface
    vapour_air: Values  # Pa
    pressure: float  # Pa
    diameter: float  # m, of the free surface

    @property
    def film(self) -> Values:
        """Film temperature [degC]."""
        return 0.5 * (self.water + self.air)

    @property
    def vapour_densities(self) -> tuple[Values, Values]:
        """Vapour density [kg/m3] at the surface and in the air, ideal gas."""
        at_surface = self.vapour_water / (GAS_CONSTANT_VAPOUR * (self.water + ZERO_CELSIUS))
        return at_surface, self.vapour_air / (GAS_CONSTANT_VAPOUR * (self.air + ZERO_CELSIUS))

    @property
    def moist_densities(self) -> tuple[Values, Values]:
        """Density of the moist air [kg/m3] at the surface and in the room."""
        at_surface = moist_air_density(self.water, self.vapour_water, self.pressure)
        return at_surface, moist_air_density(self.air, self.vapour_air, self.pressure)

    @property
    def lewis(self) -> Values:
        """Thermal over vapour diffusivity of air at the film temperature [-]."""
        layer = air_film(self.water, self.air, self.pressure)
        return layer.diffusivity / vapour_diffusivity(self.film, self.pressure)


class SurfaceClosure(ABC):
    """Base of the evaporation closures; a closure fills in `vapour`, `sensible` and `reached`.

    Arguments of the public methods: temperatures of water and air [degC], vapour pressure of the air and
    pressure [Pa], diameter of the free surface [m], and the vapour pressure of the drink over that of pure
    water [-].
    """

    label: ClassVar[str]
    source: ClassVar[str]

    def mass_flux(
        self,
        water_temperature: Values,
        air_temperature: Values,
        vapour_pressure_air: Values,
        pressure: float,
        diameter: float,
        water_activity: float = 1.0,
    ) -> Values:
        """Vapour that leaves the free surface [kg/(m2 s)]."""
        at_surface = water_activity * water_saturation_pressure(water_temperature)
        return self.vapour(
            SurfaceState(
                water_temperature, air_temperature, at_surface, vapour_pressure_air, pressure, diameter
            )
        )

    def heat_transfer_coefficient(
        self,
        water_temperature: Values,
        air_temperature: Values,
        vapour_pressure_air: Values,
        pressure: float,
        diameter: float,
        water_activity: float = 1.0,
    ) -> Values:
        """Coefficient of the sensible convection [W/(m2 K)], on water minus air temperature."""
        at_surface = water_activity * water_saturation_pressure(water_temperature)
        return self.sensible(
            SurfaceState(
                water_temperature, air_temperature, at_surface, vapour_pressure_air, pressure, diameter
            )
        )

    @abstractmethod
    def vapour(self, state: SurfaceState) -> Values:
        """Vapour that leaves [kg/(m2 s)]."""

    @abstractmethod
    def sensible(self, state: SurfaceState) -> Values:
        """Coefficient of the sensible convection [W/(m2 K)]."""

    @abstractmethod
    def applied(self, state: SurfaceState) -> list[Applied]:
        """What the state reaches of the closure's ranges of validity."""


@dataclass(frozen=True)
class Recessed(SurfaceClosure):
    """A closure for a surface that lies below a rim: its fluxes times one freeboard factor.

    Formula: factor times the closure, vapour and sensible heat alike. The published closures take the state
    of the room; this stands for the whole way from surface to room and is not to be chained with a
    resistance of the mouth.
    Parameters: closure; factor [-], above 0 and up to 1; foam [-], what a layer of foam or cream lets through
    (5 to 20 mm: 0.1 to 0.3, no source), which multiplies too. Default of the factor 0.75, credible
    0.65 to 0.85: a scoping estimate for about 10 mm below the brim of an 80 mm cup. No source; the first
    thing to fit to a weighed cup.
    Returns, range, reference: those of the closure.
    """

    closure: SurfaceClosure
    factor: float = FREEBOARD_FACTOR
    foam: float = 1.0

    def __post_init__(self) -> None:
        for what, value in (("freeboard factor", self.factor), ("foam factor", self.foam)):
            if not 0.0 < value <= 1.0:
                raise InputError(what, value, "must be above 0 and up to 1", "write 0.75")

    @property
    def label(self) -> str:  # type: ignore[override]
        return f"{self.closure.label}, freeboard factor {self.factor:g}"

    @property
    def source(self) -> str:  # type: ignore[override]
        return f"{self.closure.source}; freeboard factor: scoping estimate, no source"

    def vapour(self, state: SurfaceState) -> Values:
        return self.factor * self.foam * self.closure.vapour(state)

    def sensible(self, state: SurfaceState) -> Values:
        return self.factor * self.foam * self.closure.sensible(state)

    def applied(self, state: SurfaceState) -> list[Applied]:
        return self.closure.applied(state)


def analogous_heat_coefficient(state: SurfaceState, per_pressure: Values) -> Values:
    """Sensible coefficient [W/(m2 K)] of a layer that passes `per_pressure` [kg/(m2 s Pa)] of vapour.

    h = h_m rho c Le^(2/3), h_m = per_pressure R_v T; Chilton and Colburn, Ind. Eng. Chem. 26 (1934) 1183,
    as in Incropera, 6th ed. 2007, Eq. 6.60.
    """
    velocity = per_pressure * GAS_CONSTANT_VAPOUR * (state.film + ZERO_CELSIUS)
    heat_capacity = air_density(state.film, state.pressure) * air_specific_heat(state.film)
    return velocity * heat_capacity * np.power(state.lewis, 2 / 3)
