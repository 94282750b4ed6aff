"""Drink, room, start, events and target: the tables of a serving file but for its films."""

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
    Density,
    Fraction,
    Length,
    SpecificHeat,
    Speed,
    Temperature,
    Time,
    Volume,
    format_quantity,
)

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


class Sip(Table):
    """An `[[event]]` of single sips, each taken at once."""

    place: ClassVar[str] = "event"

    wanted: ClassVar[Mapping[str, str]] = {"sip": 'write sip = "15 ml", or drinking = "180 ml"'}

    sip: Annotated[Volume, Positive]
    """Volume of each."""
    first: Annotated[Time, Positive] = Field(examples=["2 min"])
    """Time of the first."""
    every: Annotated[Time, Positive, within("1 s", "48 h", "time")] | None = None
    """From one to the next; left out: one sip only."""
    count: Annotated[int, Field(strict=True, ge=1)] | None = None
    """How many; left out: until `last`, or the end of the serving."""
    last: Annotated[Time, Positive] | None = None
    """No sip after this time, instead of count."""

    @model_validator(mode="after")
    def _consistent(self) -> Self:
        for key in ("count", "last"):
            if self.every is None and getattr(self, key) is not None:
                raise refused("would change nothing: without every there is one sip", "write every too", key)
        if self.count is not None and self.last is not None:
            raise refused("given together with count", "keep one of the two", "last")
        if self.last is not None and self.last < self.first:
            raise refused(
                "before the first sip", "write a later time", "last", format_quantity(self.last, "time")
            )
        return self


class Drinking(Table):
    """An `[[event]]` of drinking at a steady rate."""

    place: ClassVar[str] = "event"
    left_out: ClassVar[Mapping[str, str]] = {"to": "the end of the serving"}

    drinking: Annotated[Volume, Positive]
    """Volume drunk in all."""
    from_: Annotated[Time, NotNegative] = Field(default=0.0, alias="from")
    """When it begins."""
    to: Annotated[Time, Positive] | None = None
    """When it ends; left out: the end of the serving."""

    @model_validator(mode="after")
    def _consistent(self) -> Self:
        if self.to is not None and self.from_ >= self.to:
            raise refused("not after its start", "write a later time", "to", format_quantity(self.to, "time"))
        return self


def _kind_of_event(value: object) -> str:
    steady = isinstance(value, Drinking) or (isinstance(value, Mapping) and "drinking" in value)
    return "<drinking>" if steady else "<sip>"


Event = Annotated[
    Annotated[Sip, Tag("<sip>")] | Annotated[Drinking, Tag("<drinking>")],
    tag(_kind_of_event),
]


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
