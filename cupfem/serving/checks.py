"""What a serving is refused for: by itself, and together with a cup."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, Protocol

from cupfem import fluids
from cupfem.errors import InputError
from cupfem.inputs import refused
from cupfem.quantities import format_quantity
from cupfem.serving.events import Drinking, LidMove, Refill, Stand
from cupfem.serving.films import DrinkFilm, FixedFilm
from cupfem.serving.pads import check_places
from cupfem.serving.tables import Drink

if TYPE_CHECKING:
    from cupfem.serving.model import Serving

FREEBOARD = 10e-3  # m; from brim to level where the file tells neither level nor volume
COLDEST_DRINK = 0.0  # degC; ice is not modelled
ROUNDING = 1e-6  # K; the dew point is found to less
COLDEST_ROOM, HOTTEST_ROOM = -40.0, 60.0  # degC


class Space(Protocol):
    """What a serving needs to know of the cup (lengths m, volumes m3)."""

    @property
    def height(self) -> float: ...
    @property
    def floor(self) -> float: ...
    def volume(self, level: float) -> float: ...


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
    _check_drunk(fill_volume(cup, serving), cup.volume(cup.height), serving)
    if serving.carrier is not None and serving.carrier.height > cup.height:
        why = f"above the brim at {_mm(cup.height)}"
        raise InputError("carrier.height", _mm(serving.carrier.height), why, "write a lower one")
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


def _check_drunk(filled: float, brimful: float, serving: Serving) -> None:
    """Follow the volume through the events: never more than the brim holds, never more drunk than there is.

    Without evaporation and expansion; the run itself looks again at each refill.
    """
    poured = filled + sum(volume for _, volume, _ in serving.refills())
    if serving.drunk() > poured:
        why = f"more than the {_ml(poured)} poured"
        raise InputError("event", _ml(serving.drunk()), why, "write smaller or fewer sips, or less drinking")
    for time, volume, _ in serving.refills():
        there = filled + sum(v for t, v, _ in serving.refills() if t < time) - serving.drunk(time)
        if there + volume > brimful:
            why = f"above the brim: there is room for {_ml(max(brimful - there, 0.0))} at {_seconds(time)}"
            raise InputError("event.refill", _ml(volume), why, "write less, or drink more before")


def check_times(serving: Serving) -> None:
    """Refuse times after the end of the serving."""
    ends = {"room.temperature": serving.room.steps[-1][0], "drink.pour": serving.drink.pour or 0.0}
    if serving.target is not None:
        ends["target.until"] = serving.target.until or 0.0
    for number, event in enumerate(serving.event, 1):
        path = f"event.{number}"
        ends |= {f"{path}.{key}": end for key, end in event.ends().items()}
        if isinstance(event, Drinking) and event.to is None and event.from_ == serving.duration:
            raise refused("not before the end of the serving", "begin earlier", f"{path}.from")
    for path, end in ends.items():
        if end > serving.duration:
            why = f"after the end of the serving at {_seconds(serving.duration)}"
            raise refused(why, "write an earlier time, or a longer duration", path, _seconds(end))


def check_drink(serving: Serving) -> None:
    """Refuse drinks that boil or freeze, and a drink stirred although its film is given."""
    _check_poured(serving, "drink.temperature", serving.drink.temperature)
    for number, event in enumerate(serving.event, 1):
        if isinstance(event, Refill) and event.temperature is not None:
            _check_poured(serving, f"event.{number}.temperature", event.temperature)
    if serving.stirring() and isinstance(serving.films.wetted, DrinkFilm):
        why = "would change nothing: films.wetted is a fixed film"
        raise refused(why, "leave out stirring, or films.wetted", "drink.stirred")


def _check_poured(serving: Serving, path: str, temperature: float) -> None:
    boiling = fluids.boiling_point(serving.room.pressure)
    if temperature >= boiling:
        why = f"boils at {_celsius(boiling)}: boiling is not modelled"
        raise refused(why, "write a lower temperature", path, _celsius(temperature))
    if temperature <= COLDEST_DRINK:
        raise refused("ice is not modelled", "write a temperature above 0 degC", path, _celsius(temperature))


def check_lid(serving: Serving) -> None:
    """Refuse a lid that would change nothing, and moves of a lid that is not there."""
    if serving.lid is not None and isinstance(serving.films.surface, FixedFilm):
        why = "would change nothing: films.surface is one fixed film"
        raise refused(why, "leave out [lid], or films.surface", "lid")
    if serving.lid_moves() and serving.lid is None:
        raise refused("there is no lid to move", "write a [lid] table", "event")
    numbered = list(enumerate(serving.event, 1))
    moves = [(e.at, number, "lid", e.lid) for number, e in numbered if isinstance(e, LidMove)]
    _check_turns(moves, "on" if serving.lid_at(0.0) else "off")
    stands = [(e.at, number, "stand", e.stand) for number, e in numbered if isinstance(e, Stand)]
    _check_turns(stands, serving.start.stand)


def _check_turns(turns: Sequence[tuple[float, int, str, str]], now: str) -> None:
    """Refuse an event that leaves things as they are."""
    for _, number, key, new in sorted(turns):
        if new == now:
            why = "would change nothing: it is so already"
            raise refused(why, "leave it out", f"event.{number}.{key}", new)
        now = new


def check_room(serving: Serving) -> None:
    """Refuse rooms that are none, and what would be wet with the room's vapour."""
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
    if temperature < dew_point - ROUNDING:
        why = f"below the room's dew point of {_celsius(dew_point)}; outside condensation is not modelled"
        instead = "write a higher temperature, or a lower room.humidity"
        raise refused(why, instead, path, _celsius(temperature))


def _mm(length: float) -> str:
    return format_quantity(length, "length", digits=4)


def _ml(volume: float) -> str:
    return format_quantity(volume, "volume")


def _celsius(temperature: float) -> str:
    return format_quantity(temperature, "temperature", digits=4)


def _seconds(time: float) -> str:
    return format_quantity(time, "time", digits=4)
