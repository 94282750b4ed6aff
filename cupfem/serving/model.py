"""The serving as a whole, and what needs the cup beside it."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path
from typing import Annotated, Any, ClassVar, Protocol, Self

from pydantic import Field, model_validator

from cupfem import fluids
from cupfem.errors import InputError
from cupfem.inputs import InputFile, Positive, json_schema, refused, within
from cupfem.quantities import Time, format_quantity
from cupfem.serving.films import Films
from cupfem.serving.pads import Pad, check_places, check_times
from cupfem.serving.tables import Drink, Drinking, Event, Room, Sip, Start, Target

FREEBOARD = 10e-3  # m; from brim to level where the file tells neither level nor volume
PRESSURE = fluids.STANDARD_PRESSURE  # Pa
COLDEST_DRINK = 0.0  # degC; ice is not modelled
COLDEST_ROOM, HOTTEST_ROOM = -40.0, 60.0  # degC


class Space(Protocol):
    """What a serving needs to know of the cup (lengths m, volumes m3)."""

    @property
    def height(self) -> float: ...
    @property
    def floor(self) -> float: ...
    def volume(self, level: float) -> float: ...


class Serving(InputFile):
    """What happens to a cup from the pour on."""

    not_yet: ClassVar[tuple[str, ...]] = ("lid", "grip", "altitude")
    never: ClassVar[Mapping[str, str]] = {"handle": "not axisymmetric: a handle cannot be modelled"}

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
    event: tuple[Event, ...] = ()
    """What is drunk when."""
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

    def sips(self) -> tuple[tuple[float, float], ...]:
        """All single sips as (time [s], volume [m3]), in the order of time."""
        taken = [(time, event.sip) for event in self.event if isinstance(event, Sip)
                 for time in _sip_times(event, self.duration)]  # fmt: skip
        return tuple(sorted(taken))

    def steady_drinking(self) -> tuple[tuple[float, float, float], ...]:
        """All steady drinking as (volume flow [m3/s], start [s], end [s])."""
        spans = [(event, self.duration if event.to is None else event.to)
                 for event in self.event if isinstance(event, Drinking)]  # fmt: skip
        return tuple((event.drinking / (end - event.from_), event.from_, end) for event, end in spans)

    def drunk(self) -> float:
        """Volume of all sips and all drinking [m3]."""
        steady = sum(flow * (end - start) for flow, start, end in self.steady_drinking())
        return sum(volume for _, volume in self.sips()) + steady

    def breaks(self) -> tuple[float, ...]:
        """Times within the serving at which something jumps [s], rising."""
        times = {start for start, _ in self.room.steps} | {time for time, _ in self.sips()}
        times |= {time for _, start, end in self.steady_drinking() for time in (start, end)}
        times |= {time for pad in self.pad for time in (pad.pick_up, pad.until(self.duration))}
        return tuple(sorted(time for time in times if 0.0 < time < self.duration))

    def idle(self) -> dict[str, str]:
        """Keys of this serving that would change nothing, with the reason."""
        reasons: dict[str, str] = {}
        if self.drink.density is not None:
            reasons["drink.kind"] = "density and specific_heat are given"
        if self.drink.volume is not None:
            reasons["drink.level"] = "the volume is given"
        return reasons

    @model_validator(mode="after")
    def _consistent(self) -> Self:
        self.refuse_idle()
        _check_times(self)
        _check_drink(self)
        _check_room(self)
        check_times(self.pad, self.duration)
        return self


def load_serving(path: str | Path) -> Serving:
    """Read a serving file; InputError, in one line, for anything that cannot be used."""
    return Serving.load(path)


def serving_schema() -> dict[str, Any]:
    """JSON Schema of a serving file."""
    return json_schema(Serving, "cupfem serving file")


def fill_volume(cup: Space, serving: Serving) -> float:
    """Volume of drink at the pour [m3]."""
    if serving.drink.volume is not None:
        return serving.drink.volume
    level = cup.height - FREEBOARD if serving.drink.level is None else serving.drink.level
    return cup.volume(level) if level > cup.floor else 0.0


def check(cup: Space, serving: Serving) -> None:
    """Refuse, by InputError, a serving that this cup cannot take.

    `cup` is a Cup or anything else with its height, floor and volume below a level.
    """
    _check_fill(cup, serving.drink)
    _check_drunk(fill_volume(cup, serving), serving)
    check_places(cup, serving.pad)
    between = serving.target.between if serving.target else None
    if between is not None and between[1] > cup.height:
        why = f"above the brim at {_mm(cup.height)}"
        raise InputError("target.between", _mm(between[1]), why, f'write at most "{_mm(cup.height)}"')


def _check_fill(cup: Space, drink: Drink) -> None:
    if drink.volume is not None:
        if drink.volume >= cup.volume(cup.height):
            why = f"the cup is brimful with {_ml(cup.volume(cup.height))}"
            raise InputError("drink.volume", _ml(drink.volume), why, "write less")
        return
    level = cup.height - FREEBOARD if drink.level is None else drink.level
    if level >= cup.height:
        why = f"not below the brim at {_mm(cup.height)}"
        raise InputError("drink.level", _mm(level), why, f'write for example "{_mm(cup.height - FREEBOARD)}"')
    if level <= cup.floor:
        why = f"no drink: the floor of the cup is at {_mm(cup.floor)}"
        raise InputError("drink.level", _mm(level), why, "write a higher level")


def _check_drunk(filled: float, serving: Serving) -> None:
    if serving.drunk() > filled:
        why = f"more than the {_ml(filled)} poured"
        raise InputError("event", _ml(serving.drunk()), why, "write smaller or fewer sips, or less drinking")


def _check_times(serving: Serving) -> None:
    ends = {"room.temperature": serving.room.steps[-1][0]}
    if serving.target is not None:
        ends["target.until"] = serving.target.until or 0.0
    for number, event in enumerate(serving.event, 1):
        path = f"event.{number}"
        if isinstance(event, Sip):
            ends |= {f"{path}.first": event.first, f"{path}.last": event.last or 0.0}
            ends[f"{path}.count"] = _last_of_count(event)
        else:
            ends |= {f"{path}.from": event.from_, f"{path}.to": event.to or 0.0}
            if event.to is None and event.from_ == serving.duration:
                raise refused("not before the end of the serving", "begin earlier", f"{path}.from")
    for path, end in ends.items():
        if end > serving.duration:
            why = f"after the end of the serving at {_seconds(serving.duration)}"
            raise refused(why, "write an earlier time, or a longer duration", path, _seconds(end))


def _check_drink(serving: Serving) -> None:
    temperature, boiling = serving.drink.temperature, fluids.boiling_point(PRESSURE)
    if temperature >= boiling:
        why = f"boils at {_celsius(boiling)}: boiling is not modelled"
        raise refused(why, "write a lower temperature", "drink.temperature", _celsius(temperature))
    if temperature <= COLDEST_DRINK:
        why = "ice is not modelled"
        raise refused(why, "write a temperature above 0 degC", "drink.temperature", _celsius(temperature))


def _check_room(serving: Serving) -> None:
    for _, room in serving.room.steps:
        if not COLDEST_ROOM <= room <= HOTTEST_ROOM:
            why = f"not a room from {_celsius(COLDEST_ROOM)} to {_celsius(HOTTEST_ROOM)}"
            raise refused(why, "write a temperature in between", "room.temperature", _celsius(room))
        _check_dew(serving, room, "drink.temperature", serving.drink.temperature)
    _check_dew(serving, serving.room.steps[0][1], "start.temperature", serving.start_temperature)


def _check_dew(serving: Serving, room: float, path: str, temperature: float) -> None:
    if serving.room.humidity == 0.0:
        return
    dew_point = float(fluids.dew_point(room, serving.room.humidity))
    if temperature < dew_point:
        why = f"below the room's dew point of {_celsius(dew_point)}; outside condensation is not modelled"
        instead = "write a higher temperature, or a lower room.humidity"
        raise refused(why, instead, path, _celsius(temperature))


def _sip_times(event: Sip, duration: float) -> list[float]:
    if event.every is None:
        return [event.first]
    end = duration if event.last is None else event.last
    count = int((end - event.first) / event.every * (1.0 + 1e-12)) + 1 if event.count is None else event.count
    return [event.first + index * event.every for index in range(count)]


def _last_of_count(event: Sip) -> float:
    return event.first + (event.count - 1) * event.every if event.count and event.every else 0.0


def _mm(length: float) -> str:
    return format_quantity(length, "length", digits=4)


def _ml(volume: float) -> str:
    return format_quantity(volume, "volume")


def _celsius(temperature: float) -> str:
    return format_quantity(temperature, "temperature", digits=4)


def _seconds(time: float) -> str:
    return format_quantity(time, "time", digits=4)
