"""Liquid water between 0 and 110 degC at atmospheric pressure (above 100 degC: at saturation).

The polynomials are our own least-squares fits to values of the IAPWS formulations, computed with the
library CoolProp 8.0 (I. H. Bell et al., Ind. Eng. Chem. Res. 53, 2498-2508, 2014). The formulations are:
thermodynamic properties: IAPWS-95 (W. Wagner, A. Pruss, J. Phys. Chem. Ref. Data 31, 387-535, 2002);
thermal conductivity: IAPWS R15-11 (M. L. Huber et al., J. Phys. Chem. Ref. Data 41, 033102, 2012);
viscosity: IAPWS R12-08 (M. L. Huber et al., J. Phys. Chem. Ref. Data 38, 101-125, 2009).
The largest deviation of each fit stands beside it.
"""

from __future__ import annotations

import numpy as np

from cupfem.fluids.polynomial import Coefficients, Value, derivative, horner, integral
from cupfem.quantities import ZERO_CELSIUS

WATER_RANGE = (0.0, 110.0)  # degC, of the fits

# kg/m3; 3e-6
DENSITY: Coefficients = (
    999.845775, 0.0651641755, -8.67325709e-3, 7.77521048e-5, -6.36978427e-7, 3.13527572e-9, -6.68456783e-12,
)  # fmt: skip
# J/(kg K); 1e-4
SPECIFIC_HEAT: Coefficients = (
    4219.10126, -3.1953542, 0.09467739, -1.33738809e-3, 9.79724894e-6, -2.72842614e-8,
)  # fmt: skip
# W/(m K); 3e-4
CONDUCTIVITY: Coefficients = (0.555809069, 2.47375716e-3, -2.02672954e-5, 1.12050644e-7, -3.52375779e-10)
# 1/(Pa s), the reciprocal of the viscosity, which is nearly quadratic; 5e-5
FLUIDITY: Coefficients = (558.084543, 19.4730968, 0.13184892, -2.32133827e-4, -4.03295131e-7)
# J/kg; 1e-5
LATENT_HEAT: Coefficients = (2500923.78, -2376.78373, 0.57563587, -0.0126101739)

# J/(kg K): molar gas constant 8.314462618 J/(mol K) (SI, 2019) over the molar mass 18.015268 g/mol (IAPWS-95)
GAS_CONSTANT_VAPOUR = 8.314462618 / 0.018015268

_CRITICAL_TEMPERATURE, _CRITICAL_PRESSURE = 647.096, 22.064e6  # K, Pa
_ENTHALPY, _DENSITY_SLOPE = integral(SPECIFIC_HEAT), derivative(DENSITY)


def water_density(temperature: Value) -> Value:
    """Density [kg/m3] at a temperature [degC]; fit to IAPWS-95."""
    return horner(DENSITY, temperature)


def water_expansion(temperature: Value) -> Value:
    """Volumetric expansion -(d rho/dT)/rho [1/K] at a temperature [degC]; negative below 4 degC."""
    return -horner(_DENSITY_SLOPE, temperature) / horner(DENSITY, temperature)


def water_specific_heat(temperature: Value) -> Value:
    """Specific heat at constant pressure [J/(kg K)] at a temperature [degC]; fit to IAPWS-95."""
    return horner(SPECIFIC_HEAT, temperature)


def water_enthalpy(temperature: Value) -> Value:
    """Specific enthalpy [J/kg] above that at 0 degC: the exact integral of `water_specific_heat`."""
    return horner(_ENTHALPY, temperature)


def water_temperature(enthalpy: Value) -> Value:
    """Temperature [degC] at a specific enthalpy [J/kg]; inverse of `water_enthalpy` to rounding."""
    return temperature_at(enthalpy, SPECIFIC_HEAT, _ENTHALPY)


def water_conductivity(temperature: Value) -> Value:
    """Thermal conductivity [W/(m K)] at a temperature [degC]; fit to IAPWS R15-11."""
    return horner(CONDUCTIVITY, temperature)


def water_viscosity(temperature: Value) -> Value:
    """Dynamic viscosity [Pa s] at a temperature [degC]; fit to IAPWS R12-08."""
    return 1.0 / horner(FLUIDITY, temperature)


def water_latent_heat(temperature: Value) -> Value:
    """Latent heat of evaporation [J/kg] at a temperature [degC]; fit to IAPWS-95."""
    return horner(LATENT_HEAT, temperature)


def water_saturation_pressure(temperature: Value) -> Value:
    """Saturation pressure [Pa] over liquid water at a temperature [degC].

    W. Wagner, A. Pruss, J. Phys. Chem. Ref. Data 22, 783-787 (1993), equation (1), also IAPWS SR1-86(1992).
    Valid from 0.01 degC to the critical point; below 0 degC it stands for supercooled water.
    """
    kelvin = temperature + ZERO_CELSIUS
    t = 1.0 - kelvin / _CRITICAL_TEMPERATURE
    root = np.sqrt(t)
    odd = root * t * (1.84408259 + t * t * (22.6807411 + t**4 * 1.80122502))
    even = t * (-7.85951783 + t * t * (-11.7866497 - 15.9618719 * t))
    result: Value = _CRITICAL_PRESSURE * np.exp(_CRITICAL_TEMPERATURE / kelvin * (even + odd))
    return result


def boiling_point(pressure: Value) -> Value:
    """Temperature [degC] at which water boils under a pressure [Pa]; inverse of `water_saturation_pressure`.

    Newton steps on ln p against 1/T, with the slope -L/R of Clausius and Clapeyron for an ideal vapour. The
    slope is within 2 % up to 100 degC, so that each step gains about two digits.
    """
    log_ratio = np.log(pressure / 611.2)
    celsius: Value = 243.12 * log_ratio / (17.62 - log_ratio)  # Magnus form: WMO-No. 8, 2008, annex 4.B
    for _ in range(8):
        kelvin = celsius + ZERO_CELSIUS
        slope = water_latent_heat(celsius) / (GAS_CONSTANT_VAPOUR * kelvin * kelvin)
        celsius = celsius + np.log(pressure / water_saturation_pressure(celsius)) / slope
    return celsius


def temperature_at(enthalpy: Value, specific_heat: Coefficients, integrated: Coefficients) -> Value:
    """Temperature [degC] at a specific enthalpy [J/kg]: Newton steps from h/c(0).

    `integrated` is the integral of the polynomial `specific_heat`. The specific heat of water changes by 1 %
    from 0 to 100 degC, so that three steps reach rounding.
    """
    temperature = enthalpy / specific_heat[0]
    for _ in range(4):
        excess = horner(integrated, temperature) - enthalpy
        temperature = temperature - excess / horner(specific_heat, temperature)
    return temperature
