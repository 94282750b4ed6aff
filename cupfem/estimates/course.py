"""The layered radial estimate through a serving: sips, refills, steps of the room, a level that passes.

The serving is cut where something jumps: there the films of the station change, and the wall goes on from
where it was. Between two cuts the wetted and dry lengths are those of the middle of the span.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator
from dataclasses import replace
from itertools import pairwise

import numpy as np
from numpy.typing import ArrayLike, NDArray

from cupfem import edges
from cupfem.cup import Cup
from cupfem.estimates.drink import lumped_drink, volume_at
from cupfem.estimates.radial import ELEMENTS, TOLERANCE, RadialWall, Transient
from cupfem.estimates.rosenbrock import Path, integrate, joined
from cupfem.estimates.station import Face, Station, station
from cupfem.serving import Serving

Floats = NDArray[np.float64]


def follow(
    cup: Cup,
    serving: Serving,
    height: float,
    drink: float | Callable[[float], ArrayLike] | None = None,
    elements: int = ELEMENTS,
    tolerance: float = TOLERANCE,
) -> Transient:
    """The station at a height [m] through the serving.

    `drink`: temperature [degC] that holds, or a function of the time [s]; left out: `drink_course`. Raises
    InputError for a height that is not on the wall.
    """
    course = drink_course(cup, serving) if drink is None else drink
    paths: list[Path] = []
    state: Floats | None = None
    for begin, end in _spans(cup, serving, height):
        level = cup.level(lumped_drink(cup, serving, begin).volume(0.5 * (begin + end)))
        wall = RadialWall(station(cup, serving, height, level, begin), _until(course, end), elements)
        paths.append(integrate(wall, wall.start() if state is None else state, begin, end, tolerance))
        state = paths[-1].last
    path = joined(paths)
    return Transient(station(cup, serving, height), path, wall.faces, wall.drink_of(path))


def _until(course: float | Callable[[float], ArrayLike], end: float) -> float | Callable[[float], ArrayLike]:
    """The course up to a time [s], without a jump that it makes there."""
    if not callable(course):
        return course
    last = math.nextafter(end, -math.inf)
    return lambda time: course(min(time, last))


def drink_course(cup: Cup, serving: Serving, tolerance: float = TOLERANCE) -> DrinkCourse:
    """The lumped drink through the serving, cooled by its surface and by a wall like that of one station.

    The station lies at half the wetted height of the pour, and the wetted wall and base count as like it.
    """
    paths: list[Path] = []
    state: Floats | None = None
    for begin, end in pairwise((0.0, *serving.breaks(), serving.duration)):
        place = wetted_station(cup, serving, 0.5 * (begin + end), begin)
        wall = RadialWall(place, lumped_drink(cup, serving, begin))
        paths.append(integrate(wall, wall.start() if state is None else state, begin, end, tolerance))
        state = _refilled(cup, serving, paths[-1].last, end)
    return DrinkCourse(joined(paths))


def _refilled(cup: Cup, serving: Serving, state: Floats, time: float) -> Floats:
    """The state after what is poured in at a time: the drink mixed by volume."""
    after, held = volume_at(cup, serving, time), float(state[0])
    added = [(volume, poured) for at, volume, poured in serving.refills() if at == time]
    rise = sum(volume * (poured - held) for volume, poured in added) / after
    return np.concatenate([[held + rise], state[1:]])


class DrinkCourse:
    """Temperature of the drink [degC] as a function of the time [s]."""

    def __init__(self, path: Path):
        self.path = path

    def __call__(self, time: ArrayLike) -> Floats:
        return np.asarray(self.path(time)[..., 0])


def wetted_station(cup: Cup, serving: Serving, time: float = 0.0, begin: float = 0.0) -> Station:
    """The station at half the wetted height of the pour, with the film of a time and the room of `begin`."""
    poured = cup.level(volume_at(cup, serving, 0.0))
    level = cup.level(lumped_drink(cup, serving, begin).volume(time))
    found = station(cup, serving, 0.5 * (cup.floor + poured), poured, begin)
    return replace(found, inner=Face(edges.wetted_films(cup, serving, level, serving.stirred_at(begin))))


def _spans(cup: Cup, serving: Serving, height: float) -> Iterator[tuple[float, float]]:
    """Spans between two jumps, cut where the level passes the height."""
    passed = cup.volume(max(height, cup.floor))
    for begin, end in pairwise((0.0, *serving.breaks(), serving.duration)):
        volume = lumped_drink(cup, serving, begin).volume
        first, last = volume(begin), volume(end)
        if min(first, last) < passed < max(first, last):
            cut = begin + (end - begin) * (first - passed) / (first - last)
            yield begin, cut
            yield cut, end
        else:
            yield begin, end
