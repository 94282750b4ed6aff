"""The rungs of the ladder at one station: what each estimate says of the wall and of the drink.

Array shapes: t times, h stations.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from cupfem.cup import Cup
from cupfem.estimates import (
    Effective,
    SlabEstimate,
    Station,
    Steady,
    TwoNode,
    drink_course,
    effective,
    follow,
    lumped_cooling,
    lumped_drink,
    slab_estimate,
    station,
    steady,
)
from cupfem.serving import Serving

Floats = NDArray[np.float64]

RUNGS: Mapping[str, str] = {
    "a": "L2/alpha: heated through after one time scale",
    "b": "steady resistance network, drink as poured",
    "c1": "one term of the series, drink as poured",
    "c": "full series, drink as poured",
    "e": "two time scales: network behind a lumped drink",
    "d": "layered radial transient, lumped drink",
}
"""Rungs that tell a wall temperature, from the simplest up; (f), the first touch, tells one of the skin."""
SIMPLEST_FIRST = ("a", "b", "c1", "c", "e", "d")
ELEMENTS, TOLERANCE = 4, 5e-3
"""Of the radial estimate here; against its defaults the outer face moves by less than 0.02 K."""
COURSE_POINTS = 5
"""Temperatures of the drink at which the network of a station is solved."""
NO_DRIVE = 1e-6  # K; between sides of one temperature nothing flows


@dataclass(frozen=True, eq=False)
class Servings:
    """What the rungs need of cup and serving once, for all stations: the drink `[t]` [degC] of each rung."""

    cup: Cup
    serving: Serving
    times: Floats

    @cached_property
    def drink(self) -> Mapping[str, Floats]:
        """Temperature of the drink by rung."""
        held = np.full(len(self.times), self.serving.drink.temperature)
        course = np.asarray(drink_course(self.cup, self.serving, tolerance=TOLERANCE)(self.times))
        lumped = lumped_cooling(self.cup, self.serving, self.times)
        return {"a": held, "b": held, "c1": held, "c": held, "e": lumped, "d": course}

    @cached_property
    def capacity(self) -> float:
        """Heat capacity of the drink per wetted area at the pour [J/(m2 K)]."""
        drink = lumped_drink(self.cup, self.serving)
        return drink.heat_capacity(0.0, self.serving.drink.temperature) / drink.wetted_area(0.0)

    def curve(self, rung: str) -> Callable[[float], float]:
        """The drink of a rung as a function of the time [s]."""
        return along_times(self.times, self.drink[rung])


def along_times(times: Floats, values: Floats) -> Callable[[float], float]:
    """A series as a function of the time [s], linear in between."""
    return lambda time: float(np.interp(time, times, values))


@dataclass(frozen=True, eq=False)
class Ladder:
    """All rungs at one station: outer and inner face by rung, `[t]` [degC]."""

    station: Station
    network: Steady
    wall: Effective
    slab: SlabEstimate | None
    """None where nothing drives heat through the wall: below the floor, or dry in the open."""
    outer: Mapping[str, Floats]
    inner: Mapping[str, Floats]

    @property
    def outer_biot(self) -> float:
        """h L / k of the outer film."""
        return self.network.outer_coefficient / self.wall.conductance

    @property
    def inner_biot(self) -> float:
        """h L / k of the inner film."""
        return self.network.inner_coefficient / self.wall.conductance


def ladder(given: Servings, height: float) -> Ladder:
    """The rungs at a height [m]."""
    place = station(given.cup, given.serving, height)
    network = steady(place)
    wall = effective(place, network.temperature.tolist())
    driven = bool(place.inner.films) and abs(place.inside - place.outside) > NO_DRIVE
    slab = slab_estimate(place, inner_film=not place.wetted) if driven else None
    short = _short_time(given, place, network) if driven else 0.0
    outer, inner = _by_hand(given, place, network, wall, slab, short)
    radial = follow(
        given.cup, given.serving, height, given.curve("d"), elements=ELEMENTS, tolerance=TOLERANCE
    ).interfaces(given.times)
    outer["d"], inner["d"] = radial[:, -1], radial[:, 0]
    return Ladder(place, network, wall, slab, outer, inner)


def _by_hand(
    given: Servings,
    place: Station,
    network: Steady,
    wall: Effective,
    slab: SlabEstimate | None,
    short: float,
) -> tuple[dict[str, Floats], dict[str, Floats]]:
    times, start = given.times, place.start_temperature
    first, last = float(network.temperature[0]), float(network.temperature[-1])
    through = times >= wall.time_scale
    outer = {"a": np.where(through, last, start), "b": np.full(len(times), last)}
    inner = {"a": np.where(through, first, start), "b": np.full(len(times), first)}
    for rung, terms in (("c1", 1), ("c", None)):
        outer[rung] = np.full(len(times), last) if slab is None else slab.outside(times, terms)
        inner[rung] = np.where(times > 0.0, first, start)
    for faces, index in ((outer, -1), (inner, 0)):
        faces["e"] = _behind_lumped_drink(given, place, index, short)
    return outer, inner


def _short_time(given: Servings, place: Station, network: Steady) -> float:
    """Shorter time constant of wall and drink as two nodes [s], half the wall's resistance on each side."""
    half = 0.5 * float(network.resistance[1:-1].sum())
    stored = sum(layer.heat_capacity * layer.thickness for layer in place.layers)
    inside, outside = (1.0 / (float(network.resistance[end]) + half) for end in (0, -1))
    return TwoNode((given.capacity, stored), inside, outside).time_constants[0]


def _behind_lumped_drink(given: Servings, place: Station, index: int, short: float) -> Floats:
    """A face of the steady network behind the lumped drink `[t]`, approached with the shorter time constant.

    Common practice, no source.
    """
    drink = given.drink["e"]
    if not place.wetted:
        drink = np.full(len(drink), place.inside)
    grid = np.linspace(float(drink.min()) - NO_DRIVE, float(drink.max()) + NO_DRIVE, COURSE_POINTS)
    faces = [float(steady(place, float(temperature)).temperature[index]) for temperature in grid]
    settled = np.interp(drink, grid, faces)
    if short == 0.0:
        return settled
    missing = (settled[0] - place.start_temperature) * np.exp(-given.times / short)
    return np.asarray(settled - missing)
