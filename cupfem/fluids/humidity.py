"""Moist air: an ideal mixture of dry air and water vapour."""

from __future__ import annotations

from cupfem.fluids.dry_air import GAS_CONSTANT_AIR, STANDARD_PRESSURE
from cupfem.fluids.polynomial import Value
from cupfem.fluids.pure_water import GAS_CONSTANT_VAPOUR, boiling_point, water_saturation_pressure
from cupfem.quantities import ZERO_CELSIUS


def vapour_pressure(temperature: Value, relative_humidity: float) -> Value:
    """Vapour pressure [Pa] at a temperature [degC] and a relative humidity (0 to 1) over liquid water."""
    return relative_humidity * water_saturation_pressure(temperature)


def dew_point(temperature: Value, relative_humidity: float) -> Value:
    """Dew point [degC] of air at a temperature [degC] and a relative humidity above 0."""
    return boiling_point(vapour_pressure(temperature, relative_humidity))


def moist_air_density(
    temperature: Value, vapour_pressure: Value, pressure: float = STANDARD_PRESSURE
) -> Value:
    """Density [kg/m3] of moist air at a temperature [degC], vapour and total pressure [Pa]; ideal gases."""
    kelvin = temperature + ZERO_CELSIUS
    dry = (pressure - vapour_pressure) / (GAS_CONSTANT_AIR * kelvin)
    return dry + vapour_pressure / (GAS_CONSTANT_VAPOUR * kelvin)


def vapour_diffusivity(temperature: Value, pressure: float = STANDARD_PRESSURE) -> Value:
    """Diffusivity [m2/s] of water vapour in air at a temperature [degC] and a pressure [Pa].

    W. J. Massman, Atmospheric Environment 32, 1111-1127 (1998): 0.2178 cm2/s at 0 degC and 1 atm, growing
    with the power 1.81 of T. From memory, not re-checked.
    """
    kelvin_ratio = (temperature + ZERO_CELSIUS) / ZERO_CELSIUS
    result: Value = 2.178e-5 * kelvin_ratio**1.81 * (STANDARD_PRESSURE / pressure)
    return result


def humidity_ratio(vapour_pressure: float, pressure: float = STANDARD_PRESSURE) -> float:
    """Mass of vapour per mass of dry air, from vapour pressure and total pressure [Pa]."""
    return GAS_CONSTANT_AIR / GAS_CONSTANT_VAPOUR * vapour_pressure / (pressure - vapour_pressure)


def wet_bulb(temperature: float, relative_humidity: float, pressure: float = STANDARD_PRESSURE) -> float:
    """Thermodynamic wet-bulb temperature [degC] of air at a temperature [degC] and a pressure [Pa].

    ASHRAE Handbook, Fundamentals, 2017, chapter 1, equation (33), over liquid water also below 0 degC;
    from memory, not re-checked. Solved by bisection to 1e-9 K.
    """
    actual = humidity_ratio(vapour_pressure(temperature, relative_humidity), pressure)
    low, high = temperature - 60.0, min(temperature, boiling_point(0.999 * pressure))
    enthalpy_of_vapour = 2501.0 + 1.86 * temperature  # kJ/kg, as in the handbook
    while high - low > 1e-9:
        middle = 0.5 * (low + high)
        saturated = humidity_ratio(water_saturation_pressure(middle), pressure)
        gain = (2501.0 - 2.326 * middle) * saturated - 1.006 * (temperature - middle)
        implied = gain / (enthalpy_of_vapour - 4.186 * middle)
        low, high = (middle, high) if implied < actual else (low, middle)
    return 0.5 * (low + high)
