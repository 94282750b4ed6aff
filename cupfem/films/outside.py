"""Films between cup and room: natural, forced and mixed convection of air on wall, brim and curl."""

from __future__ import annotations

import math
from abc import ABC, abstractmethod
from dataclasses import dataclass, replace
from typing import ClassVar, Literal

import numpy as np

from cupfem.errors import InputError
from cupfem.films import correlations as nu
from cupfem.films.base import (
    SMOOTHING,
    Applied,
    Values,
    reached,
    require_positive,
    rounded_difference,
    upward_share,
)
from cupfem.films.correlations import FluidState
from cupfem.fluids import STANDARD_PRESSURE, air_density, air_transport
from cupfem.quantities import ZERO_CELSIUS

LARGEST_LEAN = math.radians(60.0)
LEADING_EDGE = 0.02  # share of the height; see `correlations.leading_edge_shape`


def air_film(surface: Values, surroundings: Values, pressure: float) -> FluidState:
    """Dry air at the film temperature, the mean of surface and surroundings [degC]."""
    film = 0.5 * (surface + surroundings)
    conductivity, viscosity, specific_heat = air_transport(film)
    density = air_density(film, pressure)
    return FluidState(conductivity, viscosity / density, conductivity / (density * specific_heat))


def air_buoyancy(surface: Values, surroundings: Values) -> Values:
    """Relative density difference |dT| / T of an ideal gas, rounded at zero; temperatures in degC."""
    kelvin = 0.5 * (surface + surroundings) + ZERO_CELSIUS
    return rounded_difference(surface - surroundings) / kelvin


class Convection(ABC):
    """Base of the convection films: heat flux = coefficient (surface - surroundings)."""

    @abstractmethod
    def coefficient(self, surface: Values, surroundings: Values, height: Values = 0.0) -> Values:
        """Film coefficient [W/(m2 K)] at temperatures in degC and heights in m."""

    def heat_flux(self, surface: Values, surroundings: Values, height: Values, time: float) -> Values:
        return self.coefficient(surface, surroundings, height) * (surface - surroundings)


@dataclass(frozen=True)
class NaturalConvectionPlate(Convection):
    """Natural convection of air on a wall: a plate, upright or leaning, or a slender cylinder.

    Formula: Churchill and Chu, `nusselt_vertical_plate` (form "all") or `nusselt_vertical_plate_laminar`
    ("laminar"), g replaced by g cos(lean); with a diameter, times `slender_cylinder_factor`; local values by
    `leading_edge_shape`, the edge below on a wall hotter than the air and above on a colder one.
    Parameters: length: height of the wall along itself [m]; lean: angle from the vertical [rad], up to 60
    degrees, for the lower face of a hot wall or the upper face of a cold one; diameter: of the cylinder
    [m], or None for a plate; local: coefficient along the height instead of its mean; start: height of the
    lower edge above the table [m]; form; pressure [Pa].
    Returns: heat flux leaving the wall [W/m2]; mean coefficient of the whole height (or local), local
    temperatures.
    Range: Rayleigh number, see `applied`; local values laminar only. Both forms are for a wall at one
    temperature.
    Example: Incropera Ex. 9.2: 0.71 m, 232 degC in 23 degC: h = 7.0 W/(m2 K).
    Reference: Incropera, 6th ed. 2007, Eqs. 9.26, 9.27 and sec. 9.6.2 (inclined plates, after Rich, and
    Vliet); Popiel et al. 2007. See `correlations` for the full references.
    """

    length: float
    lean: float = 0.0
    diameter: float | None = None
    local: bool = False
    start: float = 0.0
    form: Literal["all", "laminar"] = "all"
    pressure: float = STANDARD_PRESSURE
    label: ClassVar[str] = "natural convection, wall"
    source: ClassVar[str] = "Churchill and Chu 1975 (Incropera 6th ed. Eqs. 9.26, 9.27); Popiel et al. 2007"

    def __post_init__(self) -> None:
        require_positive("wall height", self.length, "m")
        if self.diameter is not None:
            require_positive("wall diameter", self.diameter, "m")
        if abs(self.lean) > LARGEST_LEAN:
            shown = f"{math.degrees(self.lean):.3g} deg"
            raise InputError(
                "lean of the wall", shown, "plates were tested up to 60 deg", "use HorizontalPlate"
            )

    def with_length(self, length: float) -> NaturalConvectionPlate:
        return replace(self, length=length)

    def coefficient(self, surface: Values, surroundings: Values, height: Values = 0.0) -> Values:
        return self.of_air(air_film(surface, surroundings, self.pressure), surface, surroundings, height)

    def of_air(self, air: FluidState, surface: Values, surroundings: Values, height: Values) -> Values:
        """Film coefficient [W/(m2 K)] with the air's properties given."""
        prandtl, rayleigh = air.prandtl, self._rayleigh(air, surface, surroundings)
        plate = nu.nusselt_vertical_plate if self.form == "all" else nu.nusselt_vertical_plate_laminar
        mean = plate(rayleigh, prandtl) * air.conductivity / self.length
        if self.diameter is not None:
            mean = mean * nu.slender_cylinder_factor(rayleigh / prandtl, prandtl, self.length / self.diameter)
        return mean * self._shape(surface - surroundings, height) if self.local else mean

    def _rayleigh(self, air: FluidState, surface: Values, surroundings: Values) -> Values:
        return math.cos(self.lean) * nu.rayleigh_number(air, air_buoyancy(surface, surroundings), self.length)

    def _shape(self, difference: Values, height: Values) -> Values:
        distance = np.clip(height - self.start, 0.0, self.length)
        offset = LEADING_EDGE * self.length
        rising = upward_share(difference, SMOOTHING)
        from_below = nu.leading_edge_shape(distance, self.length, offset)
        from_above = nu.leading_edge_shape(self.length - distance, self.length, offset)
        return rising * from_below + (1.0 - rising) * from_above

    def applied(self, surface: Values, surroundings: Values) -> list[Applied]:
        air = air_film(surface, surroundings, self.pressure)
        tested = nu.VERTICAL_PLATE if self.form == "all" and not self.local else nu.VERTICAL_PLATE_LAMINAR
        found = [reached(tested, self._rayleigh(air, surface, surroundings))]
        if self.diameter is not None:
            found.append(reached(nu.SLENDER_CYLINDER, air.prandtl))
        return found


@dataclass(frozen=True)
class NaturalConvectionCurl(Convection):
    """Natural convection of air around a thin horizontal cylinder, such as the curl of a brim.

    Formula: Churchill and Chu, `nusselt_horizontal_cylinder`.
    Parameters: diameter [m], pressure [Pa].
    Returns: heat flux leaving the surface [W/m2]; mean coefficient around the cylinder, local temperatures.
    Range: Rayleigh number up to 1e12, see `applied`; a long straight cylinder away from walls.
    Example: Incropera Ex. 9.4: 0.1 m, 165 degC in 23 degC: h = 7.23 W/(m2 K).
    Reference: Churchill and Chu, Int. J. Heat Mass Transfer 18 (1975) 1049; Incropera, 6th ed. 2007, Eq.
    9.34.
    """

    diameter: float
    pressure: float = STANDARD_PRESSURE
    label: ClassVar[str] = "natural convection, curl"
    source: ClassVar[str] = "Churchill and Chu 1975 (Incropera 6th ed. Eq. 9.34)"

    def __post_init__(self) -> None:
        require_positive("curl diameter", self.diameter, "m")

    def _numbers(self, surface: Values, surroundings: Values) -> tuple[FluidState, Values]:
        air = air_film(surface, surroundings, self.pressure)
        return air, nu.rayleigh_number(air, air_buoyancy(surface, surroundings), self.diameter)

    def coefficient(self, surface: Values, surroundings: Values, height: Values = 0.0) -> Values:
        air, rayleigh = self._numbers(surface, surroundings)
        return nu.nusselt_horizontal_cylinder(rayleigh, air.prandtl) * air.conductivity / self.diameter

    def applied(self, surface: Values, surroundings: Values) -> list[Applied]:
        return [reached(nu.HORIZONTAL_CYLINDER, self._numbers(surface, surroundings)[1])]


@dataclass(frozen=True)
class ForcedConvection(Convection):
    """Forced convection on an upright cup across an air stream.

    Formula: Churchill and Bernstein, `nusselt_cross_flow`.
    Parameters: air_speed [m/s], diameter [m] (of the cup at half height), pressure [Pa].
    Returns: heat flux leaving the wall [W/m2]; mean coefficient around the cup, local temperatures.
    Range: Reynolds times Prandtl number above 0.2, see `applied`; a long cylinder, no end effects.
    Example: Incropera Ex. 7.4, third part: 12.7 mm, 10 m/s: h = 96 W/(m2 K).
    Reference: Churchill and Bernstein, J. Heat Transfer 99 (1977) 300; Incropera, 6th ed. 2007, Eq. 7.54.
    """

    air_speed: float
    diameter: float
    pressure: float = STANDARD_PRESSURE
    label: ClassVar[str] = "forced convection, wall"
    source: ClassVar[str] = "Churchill and Bernstein 1977 (Incropera 6th ed. Eq. 7.54)"

    def __post_init__(self) -> None:
        require_positive("wall diameter", self.diameter, "m")
        if not 0.0 <= self.air_speed < math.inf:
            raise InputError(
                "air speed", f"{self.air_speed:g} m/s", "must be zero or positive", 'write "0.1 m/s"'
            )

    def _reynolds(self, air: FluidState) -> Values:
        return self.air_speed * self.diameter / air.kinematic_viscosity

    def coefficient(self, surface: Values, surroundings: Values, height: Values = 0.0) -> Values:
        return self.of_air(air_film(surface, surroundings, self.pressure))

    def of_air(self, air: FluidState) -> Values:
        """Film coefficient [W/(m2 K)] with the air's properties given."""
        return nu.nusselt_cross_flow(self._reynolds(air), air.prandtl) * air.conductivity / self.diameter

    def applied(self, surface: Values, surroundings: Values) -> list[Applied]:
        air = air_film(surface, surroundings, self.pressure)
        return [reached(nu.CROSS_FLOW, self._reynolds(air) * air.prandtl)]


@dataclass(frozen=True)
class MixedConvection(Convection):
    """Natural convection and an air stream together, the stream across the rising air or along it.

    Formula: h^n = h_forced^n + h_natural^n.
    Parameters: natural, forced: the two films; exponent n [-].
    Returns: heat flux leaving the wall [W/m2].
    Range: cross or assisting flow; those of the two films, see `applied`. With no air stream the forced
    film leaves its conduction limit 0.3 k/D, less than 1e-5 of the sum on a cup.
    Example: equal coefficients blend to 1.26 times either.
    Reference: Churchill and Usagi, AIChE J. 18 (1972) 1121; Incropera, 6th ed. 2007, sec. 9.9, Eq. 9.64, n
    = 3.
    """

    natural: NaturalConvectionPlate
    forced: ForcedConvection
    exponent: float = 3.0
    label: ClassVar[str] = "mixed convection, wall"
    source: ClassVar[str] = "Churchill and Usagi 1972 (Incropera 6th ed. Eq. 9.64, n = 3)"

    def coefficient(self, surface: Values, surroundings: Values, height: Values = 0.0) -> Values:
        air = air_film(surface, surroundings, self.natural.pressure)
        natural = self.natural.of_air(air, surface, surroundings, height)
        return nu.blend(natural, self.forced.of_air(air), self.exponent)

    def applied(self, surface: Values, surroundings: Values) -> list[Applied]:
        return self.natural.applied(surface, surroundings) + self.forced.applied(surface, surroundings)
