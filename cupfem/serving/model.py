"""The serving as a whole, and what needs the cup beside it."""

from __future__ import annotations

import math
from collections.abc import Mapping
from pathlib import Path
from typing import Annotated, Any, ClassVar, Self

from pydantic import Field, model_validator

from cupfem import fluids
from cupfem.inputs import InputFile, Positive, json_schema, within
from cupfem.quantities import Time
from cupfem.serving import checks
from cupfem.serving.events import Drinking, Event, LidMove, Refill, Sip, Stand, Stir
from cupfem.serving.films import Films, FixedFilm, NamedFilm
from cupfem.serving.pads import Pad
from cupfem.serving.pads import check_times as check_pads
from cupfem.serving.tables import Carrier, Drink, Lid, Room, Start, Tabletop, Target

PRESSURE = fluids.STANDARD_PRESSURE  # Pa
COINCIDENT = 1e-9  # s; moments nearer than this are one


class Serving(InputFile):
    """What happens to a cup from the pour on."""

    not_yet: ClassVar[tuple[str, ...]] = ("grip",)
    never: ClassVar[Mapping[str, str]] = {
        "handle": "not axisymmetric: a handle cannot be modelled",
        "altitude": "it belongs in [room]",
    }

    title: str = "Serving"
    """What reports call the serving."""
    duration: Annotated[Time, Positive, within("1 s", "48 h", "time")] = 600.0
    """From the pour to the end."""
    drink: Drink = Field(default_factory=Drink)
    """What is poured."""
    room: Room = Field(default_factory=Room)
    """Where."""
    start: Start = Field(default_factory=Start)
    """The state before the pour."""
    lid: Lid | None = None
    """On the mouth; left out: an open cup."""
    table: Tabletop = Field(default_factory=Tabletop)
    """Below the cup."""
    carrier: Carrier | None = None
    """Around the lower part of the cup; left out: none."""
    event: tuple[Event, ...] = ()
    """What happens on the way: sips, drinking, refills, lid on or off, stirring, table or air."""
    pad: tuple[Pad, ...] = ()
    """Fingers on the wall."""
    target: Target | None = None
    """What has to be met."""
    films: Films = Field(default_factory=Films)
    """Heat transfer at the edges."""

    @property
    def start_temperature(self) -> float:
        """Temperature of the cup at the pour [degC]."""
        given = self.start.temperature
        return float(self.room.temperature_at(0.0)) if given is None else given

    # -- what happens when -----------------------------------------------------------------------------------

    def sips(self) -> tuple[tuple[float, float], ...]:
        """All single sips as (time [s], volume [m3]), in the order of time."""
        taken = [(time, event.sip) for event in self.event if isinstance(event, Sip)
                 for time in event.times(self.duration)]  # fmt: skip
        return tuple(sorted(taken))

    def refills(self) -> tuple[tuple[float, float, float], ...]:
        """All refills as (time [s], volume [m3], temperature [degC]), in the order of time."""
        usual = self.drink.temperature
        found = [(event.at, event.refill, usual if event.temperature is None else event.temperature)
                 for event in self.event if isinstance(event, Refill)]  # fmt: skip
        return tuple(sorted(found))

    def steady_drinking(self) -> tuple[tuple[float, float, float], ...]:
        """All steady drinking as (volume flow [m3/s], start [s], end [s])."""
        spans = [(event, self.duration if event.to is None else event.to)
                 for event in self.event if isinstance(event, Drinking)]  # fmt: skip
        return tuple((event.drinking / (end - event.from_), event.from_, end) for event, end in spans)

    def drunk(self, until: float = math.inf) -> float:
        """Volume of all sips and all drinking before a time [m3]."""
        spans = ((flow, start, min(end, until)) for flow, start, end in self.steady_drinking())
        steady = sum(flow * max(end - start, 0.0) for flow, start, end in spans)
        return sum(volume for time, volume in self.sips() if time < until) + steady

    def stirring(self) -> tuple[tuple[float, float], ...]:
        """Spans (start, end) in which the drink moves [s]: by a spoon, after the pour, after refills."""
        spans = [(event.at, event.at + event.stir) for event in self.event if isinstance(event, Stir)]
        if self.drink.stirred is not None:
            spans.append((0.0, (self.drink.pour or 0.0) + self.drink.stirred))
            spans += [(time, time + self.drink.stirred) for time, *_ in self.refills()]
        return tuple(sorted(spans))

    def lid_moves(self) -> tuple[tuple[float, str], ...]:
        """All moves of the lid as (time [s], "on" or "off"), in the order of time."""
        return tuple(sorted((event.at, event.lid) for event in self.event if isinstance(event, LidMove)))

    def stands(self) -> tuple[tuple[float, str], ...]:
        """Where the cup is, as (time [s] from which, "table" or "air"), in the order of time."""
        moves = [(event.at, event.stand) for event in self.event if isinstance(event, Stand)]
        return ((0.0, self.start.stand), *sorted(moves))

    def lid_at(self, time: float) -> bool:
        """Whether the lid is on from a time [s] on."""
        moves = self.lid_moves()
        if self.lid is None:
            return False
        before = [move for at, move in moves if at <= time + COINCIDENT]
        return before[-1] == "on" if before else not moves or moves[0][1] == "off"

    def stirred_at(self, time: float) -> bool:
        """Whether the drink moves from a time [s] on."""
        return any(start <= time + COINCIDENT < end for start, end in self.stirring())

    def stand_at(self, time: float) -> tuple[float, str]:
        """Since when [s] the cup is where it is from a time [s] on, and where."""
        return [entry for entry in self.stands() if entry[0] <= time + COINCIDENT][-1]

    def breaks(self) -> tuple[float, ...]:
        """Times within the serving at which something jumps [s], rising."""
        times = {start for start, _ in self.room.steps} | {time for time, _ in self.sips()}
        times |= {time for _, start, end in self.steady_drinking() for time in (start, end)}
        times |= {time for span in self.stirring() for time in span}
        times |= {time for time, *_ in self.refills()} | {self.drink.pour or 0.0}
        times |= {time for time, _ in (*self.lid_moves(), *self.stands())}
        times |= {time for pad in self.pad for time in (pad.pick_up, pad.until(self.duration))}
        return tuple(sorted(time for time in times if 0.0 < time < self.duration))

    def idle(self) -> dict[str, str]:
        """Keys of this serving that would change nothing, with the reason."""
        reasons: dict[str, str] = {}
        if self.drink.density is not None:
            reasons["drink.kind"] = "density and specific_heat are given"
        if self.drink.volume is not None:
            reasons["drink.level"] = "the volume is given"
        if not self.stirring():
            reasons["drink.stirred_coefficient"] = "nothing stirs the drink"
        if self.lid is not None and self.lid.conductance is not None:
            reasons |= {f"lid.{key}": "the conductance is given" for key in ("material", "thickness")}
        return reasons | self._idle_films()

    def _idle_films(self) -> dict[str, str]:
        reasons: dict[str, str] = {}
        if isinstance(self.films.surface, FixedFilm):
            reasons["drink.foam_factor"] = "films.surface is a fixed film"
        elif self.lid_at(0.0) and not self.lid_moves():
            reasons["films.surface.freeboard_factor"] = "the lid is on all the time"
        contact = isinstance(self.films.heel, NamedFilm) and self.films.heel.correlation != "insulated"
        if isinstance(self.films.underside, FixedFilm) and not contact:
            why = "films.underside is a fixed film and the heel has no contact with the table"
            reasons |= {f"table.{key}": why for key in ("resistance", "material")}
        return reasons

    @model_validator(mode="after")
    def _consistent(self) -> Self:
        self.refuse_idle()
        checks.check_times(self)
        checks.check_drink(self)
        checks.check_room(self)
        checks.check_lid(self)
        check_pads(self.pad, self.duration)
        return self


def load_serving(path: str | Path) -> Serving:
    """Read a serving file; InputError, in one line, for anything that cannot be used."""
    return Serving.load(path)


def serving_schema() -> dict[str, Any]:
    """JSON Schema of a serving file."""
    return json_schema(Serving, "cupfem serving file")
