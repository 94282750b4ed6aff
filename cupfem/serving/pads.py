"""The `[[pad]]` tables of a serving file: fingers on the wall, when and for how long."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Annotated, ClassVar, Literal, Protocol, Self

from pydantic import Field, model_validator

from cupfem.errors import InputError
from cupfem.inputs import NotNegative, Positive, Table, refused, within
from cupfem.quantities import FilmCoefficient, Fraction, Length, Time, format_quantity


class Pad(Table):
    """A `[[pad]]`: a finger pad, or all fingers at this height together."""

    place: ClassVar[str] = "pad"
    left_out: ClassVar[Mapping[str, str]] = {
        "release": "held to the end",
        "contact": "by the class of the outer layer's surface",
    }

    height: Annotated[Length, Positive] = Field(examples=["55 mm"])
    """Of the pad's middle, on the inside face of the wall."""
    width: Annotated[Length, Positive, within("2 mm", "150 mm", "length")] = 15e-3
    """Extent along the wall."""
    share: Annotated[Fraction, Positive] = 0.25
    """Of the circumference, all fingers at this height together."""
    pick_up: Annotated[Time, NotNegative] = 60.0
    """When the finger touches."""
    release: Annotated[Time, Positive] | None = None
    """When it lets go; left out: at the end of the serving."""
    contact: Annotated[FilmCoefficient, Positive] | None = None
    """Contact conductance between wall and skin; left out: by the class of the outer layer's surface."""
    skin: Literal["finger pad", "thumb", "palm", "thin"] = "finger pad"
    """Which skin."""
    sag: Annotated[Length, NotNegative] = 0.1e-3
    """How deep the pad reaches into valleys between crests."""
    gap_resistance: Annotated[Fraction, Positive] = 1.0
    """Share of each gap's resistance that is left under the grip: a gap may be crushed."""

    @property
    def low(self) -> float:
        """Height of the lower rim [m]."""
        return self.height - 0.5 * self.width

    @property
    def high(self) -> float:
        """Height of the upper rim [m]."""
        return self.height + 0.5 * self.width

    def until(self, duration: float) -> float:
        """When the finger lets go in a serving of a duration [s]."""
        return duration if self.release is None else self.release

    @model_validator(mode="after")
    def _consistent(self) -> Self:
        if self.release is not None and self.release <= self.pick_up:
            raise refused(
                "not after the pick-up",
                "write a later time",
                "release",
                format_quantity(self.release, "time"),
            )
        return self


class Space(Protocol):
    """What pads need to know of the cup (lengths m)."""

    @property
    def height(self) -> float: ...
    @property
    def floor(self) -> float: ...


def check_times(pads: tuple[Pad, ...], duration: float) -> None:
    """Refuse pads outside the serving, and pads that together hold more than the circumference."""
    for number, pad in enumerate(pads, 1):
        for key, time in (("pick_up", pad.pick_up), ("release", pad.until(duration))):
            if time > duration or (key == "pick_up" and time >= duration):
                why = f"not before the end of the serving at {format_quantity(duration, 'time')}"
                place = f"pad.{number}.{key}"
                raise refused(why, "write an earlier time", place, format_quantity(time, "time"))
    for moment in sorted({pad.pick_up for pad in pads}):
        held = sum(pad.share for pad in pads if pad.pick_up <= moment < pad.until(duration))
        if held > 1.0 + 1e-9:
            why = f"the pads held at {format_quantity(moment, 'time')} cover more than the circumference"
            raise refused(why, "write shares that add to at most 1", "pad", round(held, 3))


def check_places(cup: Space, pads: tuple[Pad, ...]) -> None:
    """Refuse, by InputError, pads that do not lie on the wall beside the drink."""
    for number, pad in enumerate(pads, 1):
        if pad.low < cup.floor - 1e-9 or pad.high > cup.height + 1e-9:
            span = f"{1e3 * pad.low:.4g} to {1e3 * pad.high:.4g} mm"
            why = (
                f"reaches beyond the wall, which goes from {1e3 * cup.floor:.4g} to {1e3 * cup.height:.4g} mm"
            )
            raise InputError(f"pad.{number}", span, why, "move the pad, or write a smaller width")
