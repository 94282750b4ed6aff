"""Text with a unit at the boundary, SI floats inside (temperatures: degrees Celsius).

`dimensions` holds the usual units, `text` reads and writes "0.35 mm", `fields` makes pydantic fields of it.
"""

from cupfem.quantities.dimensions import DIMENSIONS, ZERO_CELSIUS, Units
from cupfem.quantities.fields import (
    Angle,
    Area,
    Conductivity,
    Density,
    FilmCoefficient,
    Fraction,
    Grammage,
    HeatFlux,
    Length,
    Mass,
    MassFlow,
    Pressure,
    SpecificHeat,
    Speed,
    Temperature,
    TemperatureDifference,
    ThermalResistance,
    Time,
    Viscosity,
    Volume,
    VolumeFlow,
)
from cupfem.quantities.text import format_quantity, parse_quantity, read_quantity

__all__ = [
    "DIMENSIONS",
    "ZERO_CELSIUS",
    "Angle",
    "Area",
    "Conductivity",
    "Density",
    "FilmCoefficient",
    "Fraction",
    "Grammage",
    "HeatFlux",
    "Length",
    "Mass",
    "MassFlow",
    "Pressure",
    "SpecificHeat",
    "Speed",
    "Temperature",
    "TemperatureDifference",
    "ThermalResistance",
    "Time",
    "Units",
    "Viscosity",
    "Volume",
    "VolumeFlow",
    "format_quantity",
    "parse_quantity",
    "read_quantity",
]
