"""One-dimensional estimates beside a run, as one call."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from cupfem.breakdown.files import csv_text, headline
from cupfem.breakdown.height import over_height
from cupfem.breakdown.holding import Holds, as_estimated, first_touch, hold_times
from cupfem.breakdown.lateral import lateral_shares
from cupfem.breakdown.map import Map
from cupfem.breakdown.places import ends_of
from cupfem.breakdown.result import Comparison
from cupfem.breakdown.rungs import Ladder, Servings, along_times, ladder
from cupfem.breakdown.text import memo
from cupfem.errors import InputError
from cupfem.quantities import Units, parse_quantity
from cupfem.run import Run
from cupfem.touch.contact import problem_of

Floats = NDArray[np.float64]

STATIONS = 11
SHARES = (0.05, 0.95)
"""The stations are even between these shares of the height, mid-wall among them, and the floor joins them."""
PICK_UP = 60.0
"""When the finger of the hold times touches [s], or half-way through a shorter serving."""


class Slab(Comparison):
    """The comparison, with its table, its CSV and its headline figures."""

    def table(self, units: Units = "si") -> str:
        """The comparison as text to paste into a memo."""
        return memo(self, units)

    def csv(self) -> str:
        """All stations and rungs as CSV, unit in each heading."""
        return csv_text(self)

    def figures(self) -> dict[str, object]:
        """Headline figures, unit in the key."""
        return headline(self)


def slab(run: Run, heights: Sequence[str] | None = None, pick_up: str | None = None) -> Slab:
    """Set the one-dimensional estimates beside a run, at stations and over the whole height.

    Parameters
    ----------
    heights:
        Stations on the inside face, text with units such as ["45 mm", "60 mm"]; left out: twelve, with the
        base joint and mid-wall.
    pick_up:
        When the finger of the hold times touches, such as "60 s".

    Raises
    ------
    InputError
        For a height that is not on the wall, a pick-up outside the serving, a quantity without its unit, or a
        run whose films Python gave: the estimates take theirs from cup and serving.
    """
    if run.films:
        raise InputError(
            "run", ", ".join(run.films), "its films were given by Python, which the estimates do not see",
            "write them into the serving's [films]",
        )  # fmt: skip
    places = _stations(run) if heights is None else _heights(run, heights)
    touched = min(PICK_UP, 0.5 * run.serving.duration) if pick_up is None else _pick_up(run, pick_up)
    given = Servings(run.cup, run.serving, run.time)
    rungs = tuple(ladder(given, float(height)) for height in places)
    return Slab(
        run=run,
        heights=places,
        pick_up=touched,
        given=given,
        rungs=rungs,
        holds=_holds(run, places, rungs, given, touched),
        first=first_touch(run, rungs, touched),
        lateral=lateral_shares(run, places),
        ends=ends_of(run),
        map=difference_map(run),
    )


def difference_map(run: Run) -> Map:
    """Field minus radial estimate over all heights of the outer face, both behind the run's own drink."""
    known = np.isfinite(run.series.drink_temperature)
    last = np.maximum.accumulate(np.where(known, np.arange(len(known)), 0))
    drink = run.series.drink_temperature[last]
    estimate = over_height(run.cup, run.serving, run.time, along_times(run.time, drink))
    heights = run.faces.outer_height
    return Map(run.time, heights, run.series.outer_temperature - estimate.outer(heights), estimate.solves)


def _holds(
    run: Run, heights: Floats, rungs: tuple[Ladder, ...], given: Servings, pick_up: float
) -> dict[str, Holds]:
    """By rung and for the field; (a) and (c1) hold as (b) and (c): they are one by the time of a pick-up."""
    problem = problem_of(run)
    found = {"field": hold_times(run, heights, pick_up, problem)}
    for rung in ("b", "c", "d", "e"):
        outer, inner = (
            np.array([getattr(each, face)[rung] for each in rungs]).T for face in ("outer", "inner")
        )
        seen = as_estimated(run, heights, outer, inner, given.drink[rung])
        found[rung] = hold_times(seen, heights, pick_up, problem)
    return {**found, "a": found["b"], "c1": found["c"]}


def _stations(run: Run) -> Floats:
    even = np.linspace(*SHARES, STATIONS) * run.cup.height
    away = even[np.abs(even - run.cup.floor) > 1e-4]
    return np.sort(np.append(away, run.cup.floor)) if run.cup.floor > 0.0 else even


def _heights(run: Run, heights: Sequence[str]) -> Floats:
    if isinstance(heights, str) or not len(heights):
        raise InputError("heights", heights, "not a list of lengths", 'write for example ["45 mm", "60 mm"]')
    places = np.array([_number("heights", text, "length") for text in heights])
    for height in places:
        run.outer_temperature_at(float(height))  # refuses what is not on the wall
    return np.unique(places)


def _pick_up(run: Run, text: str) -> float:
    time, end = _number("pick_up", text, "time"), run.serving.duration
    if not 0.0 <= time < end:
        raise InputError(
            "pick_up", f"{time:g} s", "not within the serving", f'write a time before "{end:g} s"'
        )
    return time


def _number(what: str, text: object, dimension: str) -> float:
    if not isinstance(text, str):
        raise InputError(what, text, "no unit", 'write text with a unit, as "45 mm" or "60 s"')
    try:
        return parse_quantity(text, dimension)
    except InputError as error:
        raise InputError(what, error.value, error.why, error.instead) from None
