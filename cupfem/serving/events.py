"""What happens to a cup on the way: sips, drinking, refills, the lid, stirring, the table."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Annotated, ClassVar, Literal, Self

from pydantic import Field, Tag, model_validator

from cupfem.inputs import NotNegative, Positive, Table, refused, tag, within
from cupfem.quantities import Temperature, Time, Volume, format_quantity


class Sip(Table):
    """An `[[event]]` of single sips, each taken at once."""

    place: ClassVar[str] = "event"

    wanted: ClassVar[Mapping[str, str]] = {
        "sip": 'write sip = "15 ml", or drinking, refill, lid, stir or stand'
    }

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

    def times(self, duration: float) -> list[float]:
        """Time of each sip [s] in a serving of this duration [s]."""
        if self.every is None:
            return [self.first]
        end = duration if self.last is None else self.last
        fitting = int((end - self.first) / self.every * (1.0 + 1e-12)) + 1
        return [self.first + index * self.every for index in range(self.count or fitting)]

    def ends(self) -> dict[str, float]:
        """Times [s] by key that have to lie within the serving."""
        of_count = self.first + (self.count - 1) * self.every if self.count and self.every else 0.0
        return {"first": self.first, "last": self.last or 0.0, "count": of_count}


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

    def ends(self) -> dict[str, float]:
        """Times [s] by key that have to lie within the serving."""
        return {"from": self.from_, "to": self.to or 0.0}


class Refill(Table):
    """An `[[event]]` of more drink, poured in at once."""

    place: ClassVar[str] = "event"
    left_out: ClassVar[Mapping[str, str]] = {"temperature": "that of the drink at the pour"}

    refill: Annotated[Volume, Positive]
    """Volume poured in."""
    at: Annotated[Time, Positive] = Field(examples=["8 min"])
    """When."""
    temperature: Temperature | None = None
    """Of what is poured in; left out: that of the drink at the pour."""

    def ends(self) -> dict[str, float]:
        """Times [s] by key that have to lie within the serving."""
        return {"at": self.at}


class LidMove(Table):
    """An `[[event]]` of a lid that is put on or taken off."""

    place: ClassVar[str] = "event"

    lid: Literal["on", "off"]
    """What is done; the first one tells whether the lid is off or on before it."""
    at: Annotated[Time, Positive] = Field(examples=["1 min"])
    """When."""

    def ends(self) -> dict[str, float]:
        """Times [s] by key that have to lie within the serving."""
        return {"at": self.at}


class Stir(Table):
    """An `[[event]]` of stirring: a higher film between drink and wall for a while."""

    place: ClassVar[str] = "event"

    stir: Annotated[Time, Positive]
    """How long."""
    at: Annotated[Time, NotNegative] = Field(examples=["30 s"])
    """When it begins."""

    def ends(self) -> dict[str, float]:
        """Times [s] by key that have to lie within the serving."""
        return {"at": self.at, "stir": self.at + self.stir}


class Stand(Table):
    """An `[[event]]` of a cup that is set on the table or picked up."""

    place: ClassVar[str] = "event"

    stand: Literal["table", "air"]
    """Where it is from then on."""
    at: Annotated[Time, Positive] = Field(examples=["2 min"])
    """When."""

    def ends(self) -> dict[str, float]:
        """Times [s] by key that have to lie within the serving."""
        return {"at": self.at}


KINDS: Mapping[str, type[Table]] = {
    "drinking": Drinking, "refill": Refill, "lid": LidMove, "stir": Stir, "stand": Stand, "sip": Sip,
}  # fmt: skip


def _kind_of_event(value: object) -> str:
    for key, kind in KINDS.items():
        if isinstance(value, kind) or (isinstance(value, Mapping) and key in value):
            return f"<{key}>"
    return "<sip>"


Event = Annotated[
    Annotated[Sip, Tag("<sip>")]
    | Annotated[Drinking, Tag("<drinking>")]
    | Annotated[Refill, Tag("<refill>")]
    | Annotated[LidMove, Tag("<lid>")]
    | Annotated[Stir, Tag("<stir>")]
    | Annotated[Stand, Tag("<stand>")],
    tag(_kind_of_event),
]
