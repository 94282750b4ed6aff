"""What a cup is filled with: water, or a drink whose properties are those of water times stated factors."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from functools import cached_property
from types import MappingProxyType
from typing import Any

from cupfem.errors import InputError, nearest
from cupfem.fluids import pure_water
from cupfem.fluids.polynomial import (
    Array,
    Coefficients,
    Value,
    derivative,
    horner,
    integral,
    scaled,
    stacked,
    values_of,
)

MEMORY = "from memory, not re-checked"


@dataclass(frozen=True)
class Liquid:
    """A liquid by polynomials in the temperature [degC], lowest power first; picklable and fast.

    `buoyant_density` is the density whose slope drives natural convection; it stays that of the real liquid
    where the density is set to a constant. `vapour_factor` is the water activity: vapour pressure over the
    drink over that of water.
    """

    name: str
    source: str
    mark: str = "derived"
    density_coefficients: Coefficients = pure_water.DENSITY
    specific_heat_coefficients: Coefficients = pure_water.SPECIFIC_HEAT
    conductivity_coefficients: Coefficients = pure_water.CONDUCTIVITY
    fluidity_coefficients: Coefficients = pure_water.FLUIDITY
    buoyant_density: Coefficients = pure_water.DENSITY
    vapour_factor: float = 1.0

    @cached_property
    def _enthalpy(self) -> Coefficients:
        return integral(self.specific_heat_coefficients)

    @cached_property
    def _buoyant_slope(self) -> Coefficients:
        return derivative(self.buoyant_density)

    @cached_property
    def _transport(self) -> Array:
        return stacked(
            self.density_coefficients,
            self.specific_heat_coefficients,
            self.conductivity_coefficients,
            self.fluidity_coefficients,
            self.buoyant_density,
            self._buoyant_slope,
        )

    def transport(self, temperature: Array) -> tuple[Array, Array, Array, Array, Array]:
        """Density, specific heat, conductivity, viscosity and expansion at temperatures `[point]`, as the
        methods below give them one by one."""
        density, specific_heat, conductivity, fluidity, buoyant, slope = values_of(
            self._transport, temperature
        )
        return density, specific_heat, conductivity, 1.0 / fluidity, -slope / buoyant

    def density(self, temperature: Value) -> Value:
        """Density [kg/m3] at a temperature [degC]."""
        return horner(self.density_coefficients, temperature)

    def specific_heat(self, temperature: Value) -> Value:
        """Specific heat [J/(kg K)] at a temperature [degC]."""
        return horner(self.specific_heat_coefficients, temperature)

    def enthalpy(self, temperature: Value) -> Value:
        """Specific enthalpy [J/kg] above that at 0 degC: the exact integral of the specific heat."""
        return horner(self._enthalpy, temperature)

    def temperature(self, enthalpy: Value) -> Value:
        """Temperature [degC] at a specific enthalpy [J/kg]; inverse of `enthalpy` to rounding."""
        return pure_water.temperature_at(enthalpy, self.specific_heat_coefficients, self._enthalpy)

    def conductivity(self, temperature: Value) -> Value:
        """Thermal conductivity [W/(m K)] at a temperature [degC]."""
        return horner(self.conductivity_coefficients, temperature)

    def viscosity(self, temperature: Value) -> Value:
        """Dynamic viscosity [Pa s] at a temperature [degC]."""
        return 1.0 / horner(self.fluidity_coefficients, temperature)

    def expansion(self, temperature: Value) -> Value:
        """Volumetric expansion [1/K] at a temperature [degC]."""
        return -horner(self._buoyant_slope, temperature) / horner(self.buoyant_density, temperature)

    def with_constants(
        self,
        *,
        name: str | None = None,
        density: float | None = None,
        specific_heat: float | None = None,
        conductivity: float | None = None,
        viscosity: float | None = None,
        vapour_factor: float | None = None,
    ) -> Liquid:
        """Return a copy with these properties [SI] constant; the others, and the expansion, stay.

        Raises InputError for a property that is not positive.
        """
        given = {"density": density, "specific_heat": specific_heat, "conductivity": conductivity}
        new: dict[str, Any] = {
            f"{key}_coefficients": (_positive(key, value),)
            for key, value in given.items()
            if value is not None
        }
        if viscosity is not None:
            new["fluidity_coefficients"] = (1.0 / _positive("viscosity", viscosity),)
        activity = self.vapour_factor if vapour_factor is None else _positive("vapour_factor", vapour_factor)
        mark = "user" if new or vapour_factor is not None else self.mark
        return replace(self, name=name or self.name, mark=mark, vapour_factor=activity, **new)


def water() -> Liquid:
    """Water."""
    return LIQUIDS["water"]


def constant_liquid(
    *, density: float, specific_heat: float, conductivity: float | None = None, viscosity: float | None = None
) -> Liquid:
    """A liquid with constant density [kg/m3] and specific heat [J/(kg K)].

    What is left out, and the expansion, is that of water. Raises InputError if a property is not positive.
    """
    return water().with_constants(
        name="own liquid",
        density=density,
        specific_heat=specific_heat,
        conductivity=conductivity,
        viscosity=viscosity,
    )


def get_liquid(name: str) -> Liquid:
    """Return the drink of this name. Raises InputError with the nearest name."""
    if name not in LIQUIDS:
        choices = ", ".join(f'"{choice}"' for choice in LIQUIDS)
        why = f"no such drink.{nearest(name, LIQUIDS)}"
        raise InputError("drink.kind", name, why, f"use one of {choices}")
    return LIQUIDS[name]


def _positive(name: str, value: float) -> float:
    if not 0.0 < value < float("inf"):
        raise InputError(name, value, "must be positive and finite", "give a positive number")
    return value


def _like_water(
    name: str, source: str, *, density: float, specific_heat: float, conductivity: float, viscosity: float
) -> Liquid:
    """Water with each property times a factor."""
    return Liquid(
        name,
        source,
        MEMORY,
        scaled(pure_water.DENSITY, density),
        scaled(pure_water.SPECIFIC_HEAT, specific_heat),
        scaled(pure_water.CONDUCTIVITY, conductivity),
        scaled(pure_water.FLUIDITY, 1.0 / viscosity),
    )


_PRESETS = (
    Liquid("water", "fits to IAPWS-95, R15-11 and R12-08, see cupfem.fluids.pure_water"),
    Liquid("coffee", "brewed, 1.2 to 1.5 % solids: as water within 1 %; common practice, no source", MEMORY),
    Liquid("broth", "clear: as water; common practice, no source", MEMORY),
    _like_water(
        # half to all milk: c 3900 to 4050 J/(kg K), density 1015 to 1030 kg/m3, k 0.56 to 0.60 W/(m K),
        # viscosity 1.5 to 2 times that of water
        "milk drink",
        "water times factors for half to all whole milk; handbook values from memory",
        density=1.024,
        specific_heat=0.95,
        conductivity=0.90,
        viscosity=1.75,
    ),
    _like_water(
        # c 3700 to 3900 J/(kg K); viscosity 20 to 500 times that of water, falling with shear
        "thick soup",
        "water times factors for cream soup, shear-thinning not modelled; handbook values from memory",
        density=1.02,
        specific_heat=0.907,
        conductivity=0.92,
        viscosity=100.0,
    ),
)

LIQUIDS: Mapping[str, Liquid] = MappingProxyType({liquid.name: liquid for liquid in _PRESETS})
