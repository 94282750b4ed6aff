"""Film between the drink and the wetted wall or base: natural convection in the liquid."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from typing import ClassVar, Literal

import numpy as np

from cupfem.films import correlations as nu
from cupfem.films.base import Applied, Values, reached, require_positive, rounded_difference, upward_share
from cupfem.films.correlations import FluidState
from cupfem.films.outside import Convection
from cupfem.fluids import Liquid

SMALLEST_BUOYANCY = 1e-5  # what 0.05 K makes in water of 20 degC; rounds the coefficient at zero difference


def liquid_film(liquid: Liquid, film: Values) -> tuple[FluidState, Values]:
    """The liquid at the film temperature [degC], and its expansion coefficient [1/K]."""
    if isinstance(film, np.ndarray) and film.ndim == 1:
        density, specific_heat, conductivity, viscosity, expansion = liquid.transport(film)
        diffusivity = conductivity / (density * specific_heat)
        return FluidState(conductivity, viscosity / density, diffusivity), expansion
    state = FluidState(
        liquid.conductivity(film),
        liquid.viscosity(film) / liquid.density(film),
        liquid.conductivity(film) / (liquid.density(film) * liquid.specific_heat(film)),
    )
    return state, liquid.expansion(film)


@dataclass(frozen=True)
class DrinkConvection(Convection):
    """Natural convection of the drink on the wall below the level, or on the base.

    Formula: wall: Churchill and Chu over the wetted height, `nusselt_vertical_plate` ("all") or
    `nusselt_vertical_plate_laminar` ("laminar"), g replaced by g cos(lean); base:
    `nusselt_plate_hot_side_up` where it is hotter than the drink, `nusselt_plate_hot_side_down` where it is
    colder (a stable layer), joined smoothly.
    Parameters: liquid; length [m]: on the wall the wetted height, which falls with the level
    (`with_length`), on the base area over perimeter, a quarter of its diameter; place; lean [rad]; form.
    Returns: heat flux leaving the wall into the drink [W/m2] (negative under a hot drink); surroundings is
    the temperature of the drink. Mean over the place, at local temperatures.
    Range: Rayleigh number, see `applied`. For a still drink: stirring and the pour itself give several
    times more. The correlations are for a wall in a wide pool, and for Newtonian liquids.
    Example: none in a textbook; the correlations have theirs.
    Reference: Incropera, 6th ed. 2007, Eqs. 9.26, 9.27, 9.30-9.32. See `correlations` for the full
    references.
    """

    liquid: Liquid
    length: float
    place: Literal["wall", "base"] = "wall"
    lean: float = 0.0
    form: Literal["all", "laminar"] = "all"
    label: ClassVar[str] = "natural convection, drink"
    source: ClassVar[str] = (
        "Churchill and Chu 1975, McAdams 1954 (Incropera 6th ed. Eqs. 9.26, 9.27, 9.30-9.32)"
    )

    def __post_init__(self) -> None:
        require_positive("wetted length", self.length, "m")

    def with_length(self, length: float) -> DrinkConvection:
        return replace(self, length=length)

    def _numbers(self, surface: Values, drink: Values) -> tuple[FluidState, Values, Values]:
        liquid, expansion = liquid_film(self.liquid, 0.5 * (surface + drink))
        lightness = expansion * (surface - drink)
        buoyancy = rounded_difference(lightness, SMALLEST_BUOYANCY)
        rayleigh = nu.rayleigh_number(liquid, buoyancy, self.length)
        return liquid, lightness, math.cos(self.lean) * rayleigh if self.place == "wall" else rayleigh

    def coefficient(self, surface: Values, surroundings: Values, height: Values = 0.0) -> Values:
        liquid, lightness, rayleigh = self._numbers(surface, surroundings)
        if self.place == "base":
            nusselt = nu.nusselt_horizontal_plate(rayleigh, upward_share(lightness, SMALLEST_BUOYANCY))
        else:
            plate = nu.nusselt_vertical_plate if self.form == "all" else nu.nusselt_vertical_plate_laminar
            nusselt = plate(rayleigh, liquid.prandtl)
        return nusselt * liquid.conductivity / self.length

    def applied(self, surface: Values, surroundings: Values) -> list[Applied]:
        _, lightness, rayleigh = self._numbers(surface, surroundings)
        if self.place == "base":
            return nu.reached_by_plate(rayleigh, lightness)
        tested = nu.VERTICAL_PLATE if self.form == "all" else nu.VERTICAL_PLATE_LAMINAR
        return [reached(tested, rayleigh)]


@dataclass(frozen=True)
class Stirred(Convection):
    """A drink that pouring or a spoon keeps moving: natural convection blended with a given coefficient.

    Formula: h^3 = h_natural^3 + h_stirred^3.
    Parameters: still: the film of the still drink; moving [W/(m2 K)].
    Range: scoping: 1000 to 3000 W/(m2 K) in the seconds after pouring or stirring, no source.
    Reference: the blend as in `MixedConvection`.
    """

    still: DrinkConvection
    moving: float
    label: ClassVar[str] = "stirred drink"
    source: ClassVar[str] = "coefficient of the stirred drink: scoping estimate, no source"

    def coefficient(self, surface: Values, surroundings: Values, height: Values = 0.0) -> Values:
        return nu.blend(self.still.coefficient(surface, surroundings, height), self.moving)

    def applied(self, surface: Values, surroundings: Values) -> list[Applied]:
        return self.still.applied(surface, surroundings)
