"""Dry air between -40 and 150 degC at pressures near atmospheric.

The polynomials are our own least-squares fits to values at 101.325 kPa computed with the library CoolProp 8.0
(I. H. Bell et al., Ind. Eng. Chem. Res. 53, 2498-2508, 2014) from:
specific heat: E. W. Lemmon et al., J. Phys. Chem. Ref. Data 29, 331-385 (2000);
viscosity and conductivity: E. W. Lemmon, R. T. Jacobsen, Int. J. Thermophys. 25, 21-69 (2004).
The largest deviation of each fit stands beside it. All three hardly depend on pressure there.
"""

from __future__ import annotations

import numpy as np

from cupfem.fluids.polynomial import Coefficients, Value, horner, stacked, values_of
from cupfem.quantities import ZERO_CELSIUS

AIR_RANGE = (-40.0, 150.0)  # degC, of the fits
STANDARD_PRESSURE = 101325.0  # Pa, standard atmosphere (ISO 2533:1975)

# J/(kg K): molar gas constant 8.314462618 J/(mol K) (SI, 2019) over 28.96546 g/mol (Lemmon et al. 2000)
GAS_CONSTANT_AIR = 8.314462618 / 0.02896546

# W/(m K); 2e-5
CONDUCTIVITY: Coefficients = (0.0243602119, 7.65489655e-5, -4.38852493e-8, 4.33053749e-11)
# Pa s; 3e-5
VISCOSITY: Coefficients = (1.72181449e-5, 5.01097399e-8, -3.70288911e-11, 3.73338066e-14)
# J/(kg K); 2e-5
SPECIFIC_HEAT: Coefficients = (1005.66343, 0.0148730063, 4.09951114e-4)
_TRANSPORT = stacked(CONDUCTIVITY, VISCOSITY, SPECIFIC_HEAT)


def air_density(temperature: Value, pressure: float = STANDARD_PRESSURE) -> Value:
    """Density [kg/m3] of dry air at a temperature [degC] and a pressure [Pa]: ideal gas,
    within 0.06 % above 0 degC (0.12 % at -30 degC).
    """
    return pressure / (GAS_CONSTANT_AIR * (temperature + ZERO_CELSIUS))


def air_conductivity(temperature: Value) -> Value:
    """Thermal conductivity [W/(m K)] at a temperature [degC]; fit to Lemmon and Jacobsen 2004."""
    return horner(CONDUCTIVITY, temperature)


def air_viscosity(temperature: Value) -> Value:
    """Dynamic viscosity [Pa s] at a temperature [degC]; fit to Lemmon and Jacobsen 2004."""
    return horner(VISCOSITY, temperature)


def air_specific_heat(temperature: Value) -> Value:
    """Specific heat at constant pressure [J/(kg K)] at a temperature [degC]; fit to Lemmon et al. 2000."""
    return horner(SPECIFIC_HEAT, temperature)


def air_transport(temperature: Value) -> tuple[Value, Value, Value]:
    """Conductivity [W/(m K)], viscosity [Pa s], specific heat [J/(kg K)], as the three functions give."""
    if isinstance(temperature, np.ndarray) and temperature.ndim == 1:
        conductivity, viscosity, specific_heat = values_of(_TRANSPORT, temperature)
        return conductivity, viscosity, specific_heat
    return air_conductivity(temperature), air_viscosity(temperature), air_specific_heat(temperature)


def air_prandtl(temperature: Value) -> Value:
    """Prandtl number at a temperature [degC], from the three properties above."""
    return air_viscosity(temperature) * air_specific_heat(temperature) / air_conductivity(temperature)


def standard_pressure(altitude: float) -> float:
    """Pressure [Pa] of the standard atmosphere at a height above the sea [m], up to 11 km.

    ISO 2533:1975, Standard Atmosphere, section 2.6: a lapse of 6.5 K/km from 288.15 K.
    """
    lapse, gravity, start, gas_constant = 0.0065, 9.80665, 288.15, 287.05287
    return float(STANDARD_PRESSURE * (1.0 - lapse * altitude / start) ** (gravity / (lapse * gas_constant)))
