"""Water, air and drinks as functions of temperature [degC]; floats or arrays in, the same out.

`pure_water` and `dry_air` are the pure substances, `humidity` their mixture, `liquid` what fills a cup.
"""

from cupfem.fluids.dry_air import (
    GAS_CONSTANT_AIR,
    STANDARD_PRESSURE,
    air_conductivity,
    air_density,
    air_prandtl,
    air_specific_heat,
    air_transport,
    air_viscosity,
    standard_pressure,
)
from cupfem.fluids.humidity import (
    dew_point,
    moist_air_density,
    vapour_diffusivity,
    vapour_pressure,
    wet_bulb,
)
from cupfem.fluids.liquid import LIQUIDS, Liquid, constant_liquid, get_liquid, water
from cupfem.fluids.pure_water import (
    GAS_CONSTANT_VAPOUR,
    boiling_point,
    water_conductivity,
    water_density,
    water_enthalpy,
    water_expansion,
    water_latent_heat,
    water_saturation_pressure,
    water_specific_heat,
    water_temperature,
    water_viscosity,
)

__all__ = [
    "GAS_CONSTANT_AIR",
    "GAS_CONSTANT_VAPOUR",
    "LIQUIDS",
    "STANDARD_PRESSURE",
    "Liquid",
    "air_conductivity",
    "air_density",
    "air_prandtl",
    "air_specific_heat",
    "air_transport",
    "air_viscosity",
    "boiling_point",
    "constant_liquid",
    "dew_point",
    "get_liquid",
    "moist_air_density",
    "standard_pressure",
    "vapour_diffusivity",
    "vapour_pressure",
    "water",
    "water_conductivity",
    "water_density",
    "water_enthalpy",
    "water_expansion",
    "water_latent_heat",
    "water_saturation_pressure",
    "water_specific_heat",
    "water_temperature",
    "water_viscosity",
    "wet_bulb",
]
