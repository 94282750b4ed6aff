"""Drink, room, start, lid, table, carrier, target: the tables of a serving file but for events and films."""

from __future__ import annotations

from collections.abc import Mapping
from itertools import pairwise
from typing import Annotated, ClassVar, Literal, Self

import numpy as np
from numpy.typing import ArrayLike, NDArray
from pydantic import Field, Tag, model_validator

from cupfem import fluids
from cupfem.inputs import NotNegative, Positive, Table, refused, tag, within
from cupfem.quantities import (
    Area,
    Density,
    FilmCoefficient,
    Fraction,
    Length,
    SpecificHeat,
    Speed,
    Temperature,
    ThermalResistance,
    Time,
    Volume,
)

STIRRED_COEFFICIENT = 1500.0
"""Of the moving drink after pouring or stirring [W/(m2 K)]: 1000 to 3000, scoping estimate, no source."""
THINNEST_LID, LID_THICKNESS = "0.1 mm", 0.45e-3

Kind = Literal["water", "coffee", "milk drink", "broth", "thick soup"]


class Drink(Table):
    """The `[drink]` table."""

    place: ClassVar[str] = "drink"
    left_out: ClassVar[Mapping[str, str]] = {"level": "10 mm below the brim"}

    kind: Kind = "water"
    """What it is; left out where density and specific_heat are given."""
    density: Annotated[Density, Positive] | None = None
    """Of the drink's own, together with specific_heat, instead of kind."""
    specific_heat: Annotated[SpecificHeat, Positive] | None = None
    """Of the drink's own, together with density, instead of kind."""
    temperature: Temperature = 85.0
    """At the pour."""
    level: Annotated[Length, Positive] | None = None
    """Height of the surface above the table at the pour."""
    volume: Annotated[Volume, Positive] | None = None
    """Poured, instead of level."""
    pour: Annotated[Time, Positive, within("1 s", "10 min", "time")] | None = None
    """How long the pour takes, from time zero on; left out: at once."""
    stirred: Annotated[Time, Positive] | None = None
    """How long after the pour, and after each refill, pour and spoon keep the drink moving."""
    stirred_coefficient: Annotated[FilmCoefficient, Positive] = STIRRED_COEFFICIENT
    """Film between a stirred drink and the wall, blended with natural convection."""
    foam_factor: Annotated[Fraction, Positive] = 1.0
    """Share of evaporation and convection that a layer of foam or cream on the surface lets through."""

    @property
    def liquid(self) -> fluids.Liquid:
        """Properties of the drink."""
        if self.density is None or self.specific_heat is None:
            return fluids.get_liquid(self.kind)
        return fluids.constant_liquid(density=self.density, specific_heat=self.specific_heat)

    @model_validator(mode="after")
    def _consistent(self) -> Self:
        if (self.density is None) != (self.specific_heat is None):
            key = "density" if self.density is None else "specific_heat"
            raise refused("missing: density and specific_heat belong together", "write both or neither", key)
        if self.level is not None and self.volume is not None:
            raise refused("given together with level", "keep one of the two", "volume")
        return self


Steps = Annotated[
    Annotated[Temperature, Tag("<constant>")]
    | Annotated[tuple[tuple[Annotated[Time, NotNegative], Temperature], ...], Tag("<steps>")],
    tag(lambda value: "<steps>" if isinstance(value, list | tuple) else "<constant>"),
]
"""A temperature, or steps of time and temperature; each holds until the next."""


class Room(Table):
    """The `[room]` table."""

    place: ClassVar[str] = "room"

    temperature: Steps = 22.0
    """Of the air and of the surfaces around; or steps [["0 s", "22 degC"], ["5 min", "4 degC"]]."""
    humidity: Fraction = 0.45
    """Relative humidity."""
    air_speed: Annotated[Speed, NotNegative] = 0.1
    """Past the cup."""
    altitude: Annotated[Length, NotNegative, within("0 m", "9 km", "length")] = 0.0
    """Above the sea: sets the pressure, and with it boiling, evaporation and convection."""

    @property
    def pressure(self) -> float:
        """Pressure of the air [Pa]."""
        return fluids.standard_pressure(self.altitude)

    @property
    def steps(self) -> tuple[tuple[float, float], ...]:
        """Times [s] from which each temperature [degC] holds."""
        return ((0.0, self.temperature),) if isinstance(self.temperature, float) else self.temperature

    def temperature_at(self, time: ArrayLike) -> NDArray[np.float64]:
        """Temperature [degC] at times [s]; at a step already the new one."""
        starts, temperatures = np.transpose(self.steps)
        last = np.searchsorted(starts, np.asarray(time, dtype=float), side="right") - 1
        return np.asarray(temperatures[np.maximum(last, 0)])

    @model_validator(mode="after")
    def _rising_times(self) -> Self:
        starts = [start for start, _ in self.steps]
        if not starts or starts[0] != 0.0:
            raise refused("the first step is not at the pour", 'begin with ["0 s", ...]', "temperature")
        if any(later <= earlier for earlier, later in pairwise(starts)):
            raise refused("the times of the steps do not rise", "put the steps in order", "temperature")
        return self


class Start(Table):
    """The `[start]` table: the state before the pour."""

    place: ClassVar[str] = "start"
    left_out: ClassVar[Mapping[str, str]] = {"temperature": "that of the room"}

    temperature: Temperature | None = None
    """Of the cup; left out: that of the room."""
    stand: Literal["table", "air"] = "table"
    """Where the cup is at the pour."""


class Lid(Table):
    """The `[lid]` table: a lid on the mouth, on from the pour unless the first event of the lid says "on"."""

    place: ClassVar[str] = "lid"
    left_out: ClassVar[Mapping[str, str]] = {"sip_hole": "closed", "vent": "none"}

    sip_hole: Annotated[Area, Positive] | None = None
    """Area of the hole to drink from; left out: closed."""
    vent: Annotated[Area, Positive] | None = None
    """Area of a second hole; left out: none."""
    conductance: Annotated[FilmCoefficient, NotNegative] | None = None
    """From the inside of the lid to the room, on the area of the mouth, instead of material and thickness."""
    material: str = "polystyrene"
    """Of the lid: one of the library's, or of the cup file's own."""
    thickness: Annotated[Length, Positive, within(THINNEST_LID, "10 mm", "length")] = LID_THICKNESS
    """Of the lid. The default is a scoping value, no source."""

    @property
    def openings(self) -> tuple[float, ...]:
        """Areas of the holes [m2]."""
        return tuple(area for area in (self.sip_hole, self.vent) if area is not None)


class Tabletop(Table):
    """The `[table]` table: what the cup stands on."""

    place: ClassVar[str] = "table"
    left_out: ClassVar[Mapping[str, str]] = {"resistance": "0.0333 m^2 K/W"}

    resistance: Annotated[ThermalResistance, NotNegative] | None = None
    """From the face of the table to the room, on the area of the base."""
    material: str | None = None
    """Instead of resistance: of a thick table, warmed by the cup from the moment it stands there."""

    @model_validator(mode="after")
    def _one_way(self) -> Self:
        if self.resistance is not None and self.material is not None:
            raise refused("given together with resistance", "keep one of the two", "material")
        return self


class Carrier(Table):
    """The `[carrier]` table: a holder around the lower part of the cup."""

    place: ClassVar[str] = "carrier"

    height: Annotated[Length, Positive] = Field(examples=["40 mm"])
    """Upper end above the table; below it the carrier's film replaces that of the outside."""
    coefficient: Annotated[FilmCoefficient, NotNegative] = 30.0
    """From the outside of the wall to a carrier at the temperature of the room. 15 to 60, no source."""


class Target(Table):
    """The `[target]` table: what the serving has to meet, from the pour until `until`."""

    place: ClassVar[str] = "target"
    left_out: ClassVar[Mapping[str, str]] = {"until": "the end of the serving"}

    drink_above: Temperature | None = None
    """The drink stays at or above this."""
    hold_time: Annotated[Time, Positive] | None = None
    """A finger can stay on the wall at least this long, whenever it is picked up."""
    wall_below: Temperature | None = None
    """The free outside of the wall stays at or below this."""
    between: tuple[Annotated[Length, NotNegative], Annotated[Length, Positive]] | None = None
    """Heights between which wall_below and hold_time hold; left out: the whole outside, and for hold_time the
    grip band."""
    until: Annotated[Time, Positive] | None = None
    """Left out: the end of the serving."""

    @model_validator(mode="after")
    def _consistent(self) -> Self:
        if self.drink_above is None and self.wall_below is None and self.hold_time is None:
            raise refused("nothing to meet", "write drink_above, wall_below or hold_time", "drink_above")
        if self.between is not None and self.wall_below is None and self.hold_time is None:
            why = "would change nothing: it belongs to wall_below and hold_time"
            raise refused(why, "write one of them too", "between")
        if self.between is not None and self.between[0] >= self.between[1]:
            raise refused("the first height is not below the second", "write the lower one first", "between")
        return self
