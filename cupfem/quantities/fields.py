"""pydantic fields: text with a unit in the file, an SI float (temperature: degC) in the model.

Serialised, a field is text with a unit again.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Annotated, Any

from pydantic import GetCoreSchemaHandler, GetJsonSchemaHandler
from pydantic.json_schema import JsonSchemaValue
from pydantic_core import CoreSchema, PydanticCustomError, core_schema

from cupfem.errors import InputError
from cupfem.quantities.dimensions import DIMENSIONS
from cupfem.quantities.text import in_unit, read_quantity, shown_unit


@dataclass(frozen=True)
class Quantity:
    """Marks a float field as a quantity of one dimension.

    A refused value gives an error of type "quantity", text ``why; instead``, both also in its ctx.
    """

    dimension: str

    def __get_pydantic_core_schema__(self, source: Any, handler: GetCoreSchemaHandler) -> CoreSchema:
        written = core_schema.plain_serializer_function_ser_schema(self.write)
        return core_schema.no_info_before_validator_function(
            self.read, handler(source), serialization=written
        )

    def __get_pydantic_json_schema__(self, _: CoreSchema, handler: GetJsonSchemaHandler) -> JsonSchemaValue:
        return {"type": "string", "examples": list(DIMENSIONS[self.dimension].examples)}

    def read(self, value: object) -> float:
        """Return the SI float of a text with a unit."""
        return _read(value, self.dimension)

    def write(self, value: float) -> str:
        """Return the text with unit of an SI float, exact to 1e-14 relative."""
        unit = shown_unit(value, self.dimension, "si")
        return f"{in_unit(value, unit, self.dimension):.15g} {unit}"


@dataclass(frozen=True)
class Share:
    """Marks a float field as a share from 0 to 1: a bare number, or text such as "20 %"."""

    def __get_pydantic_core_schema__(self, source: Any, handler: GetCoreSchemaHandler) -> CoreSchema:
        return core_schema.no_info_before_validator_function(self.read, handler(source))

    def __get_pydantic_json_schema__(self, _: CoreSchema, handler: GetJsonSchemaHandler) -> JsonSchemaValue:
        number = {"type": "number", "minimum": 0, "maximum": 1}
        return {"anyOf": [number, {"type": "string"}], "examples": [0.2, "20 %"]}

    def read(self, value: object) -> float:
        """Return the share as a float."""
        return _read(value, "fraction")


def _read(value: object, dimension: str) -> float:
    try:
        return read_quantity(value, dimension)
    except InputError as error:
        parts = {"why": error.why, "instead": error.instead}
        raise PydanticCustomError("quantity", "{why}; {instead}", parts) from None


Length = Annotated[float, Quantity("length")]
Area = Annotated[float, Quantity("area")]
Volume = Annotated[float, Quantity("volume")]
Time = Annotated[float, Quantity("time")]
Temperature = Annotated[float, Quantity("temperature")]
TemperatureDifference = Annotated[float, Quantity("temperature_difference")]
Speed = Annotated[float, Quantity("speed")]
Conductivity = Annotated[float, Quantity("conductivity")]
SpecificHeat = Annotated[float, Quantity("specific_heat")]
Density = Annotated[float, Quantity("density")]
Grammage = Annotated[float, Quantity("grammage")]
FilmCoefficient = Annotated[float, Quantity("film_coefficient")]
HeatFlux = Annotated[float, Quantity("heat_flux")]
Pressure = Annotated[float, Quantity("pressure")]
Mass = Annotated[float, Quantity("mass")]
MassFlow = Annotated[float, Quantity("mass_flow")]
VolumeFlow = Annotated[float, Quantity("volume_flow")]
Viscosity = Annotated[float, Quantity("viscosity")]
ThermalResistance = Annotated[float, Quantity("thermal_resistance")]
Angle = Annotated[float, Quantity("angle")]
Fraction = Annotated[float, Share()]
