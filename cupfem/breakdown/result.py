"""The comparison of a run with the one-dimensional estimates, and what can be read from it.

Array shapes: t times of the run's series, h stations, p heights of the map.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from cupfem.breakdown.errors import SETTLED, RungError, difference, longest_within, passing
from cupfem.breakdown.holding import FirstTouch, Holds
from cupfem.breakdown.map import Map
from cupfem.breakdown.places import LEVEL, PROPERTIES, End, Flag, flags_at, nearest_end
from cupfem.breakdown.rungs import RUNGS, SIMPLEST_FIRST, Ladder, Servings
from cupfem.errors import InputError
from cupfem.quantities import Units, format_quantity, parse_quantity
from cupfem.run import COMFORT, Run

Floats = NDArray[np.float64]

GOOD_ENOUGH = 2.0
"""A rung is good enough where its outer wall is within this of the field [K]; a choice."""
FLAG_FROM = 1.0
"""A station whose 2-D minus 1-D reaches this [K] is not one-dimensional."""
LEAST_INNER_BIOT = 20.0
"""Below it the inner film takes more than 5 % of the difference between drink and outer face."""
AS_POURED = ("a", "b", "c1", "c")
"""Rungs that take the drink as it was poured."""
LOOKED_UP = 1e-6  # m; a height nearer than this to a station is that station


@dataclass(frozen=True)
class Assumption:
    """What a rung assumes, by its number at a station; `failed` where the number passes the limit."""

    rungs: tuple[str, ...]
    text: str
    number: float
    limit: float
    failed: bool


@dataclass(frozen=True, eq=False)
class Comparison:
    """One-dimensional estimates beside the finite-element field.

    Attributes
    ----------
    heights:
        `[h]` stations on the inside face [m]; the first is the reference for what a table says of the cup.
    pick_up:
        When the finger of the hold times touches [s].
    holds:
        Hold times by rung, and those of the field under "field".
    first:
        Rung (f).
    lateral:
        `[h]` share of the heat that flows along the wall.
    """

    run: Run
    heights: Floats
    pick_up: float
    given: Servings
    rungs: tuple[Ladder, ...]
    holds: Mapping[str, Holds]
    first: FirstTouch
    lateral: Floats
    ends: tuple[End, ...]
    map: Map

    # -- stations --------------------------------------------------------------------------------------------

    def station(self, height: str | float) -> int:
        """Number of the station at a height; text with a unit, or metres."""
        z = parse_quantity(height, "length") if isinstance(height, str) else float(height)
        place = int(np.argmin(np.abs(self.heights - z)))
        if abs(self.heights[place] - z) > LOOKED_UP:
            known = ", ".join(f"{1e3 * each:g}" for each in self.heights)
            raise InputError(
                "station",
                f"{1e3 * z:g} mm",
                "not among those of this slab",
                f"one of {known} mm, or heights=[...]",
            )
        return place

    def flags(self, height: str | float, units: Units = "si") -> tuple[Flag, ...]:
        """Why a station is not one-dimensional; empty where it is."""
        return self._flags(self.station(height), units)

    def _flags(self, place: int, units: Units = "si") -> tuple[Flag, ...]:
        off = self.map.worst_at(float(self.heights[place]))
        lateral = float(self.lateral[place])
        return flags_at(self.run, self.rungs[place], self.ends, lateral, off, FLAG_FROM, units)

    @cached_property
    def flagged(self) -> tuple[tuple[Flag, ...], ...]:
        """Flags of all stations."""
        return tuple(self._flags(place) for place in range(len(self.heights)))

    @cached_property
    def plain(self) -> tuple[int, ...]:
        """Stations beside the drink that are one-dimensional."""
        wet = [place for place, each in enumerate(self.rungs) if each.station.wetted]
        return tuple(p for p in wet if all(flag.name == PROPERTIES for flag in self.flagged[p]))

    @cached_property
    def reference(self) -> int:
        """The station that a table is told for: of the plain ones, else of all, the nearest to mid-wall."""
        among = self.plain or tuple(range(len(self.heights)))
        return min(among, key=lambda place: abs(self.heights[place] - 0.5 * self.run.cup.height))

    def field(self, place: int) -> Floats:
        """Outer wall of the field at a station `[t]` [degC]."""
        return self.run.outer_temperature_at(float(self.heights[place]))

    def field_comfort(self, place: int) -> float:
        """When the field's outer wall first passes 40 degC at a station [s]; infinite if it does not."""
        return passing(self.run.time, self.field(place))

    # -- errors ----------------------------------------------------------------------------------------------

    @cached_property
    def errors(self) -> tuple[tuple[RungError, ...], ...]:
        """Errors of all rungs at all stations."""
        return tuple(tuple(self._error(rung, place) for rung in RUNGS) for place in range(len(self.heights)))

    def error(self, rung: str, place: int) -> RungError:
        """Error of a rung at a station."""
        return self.errors[place][list(RUNGS).index(rung)]

    def _error(self, rung: str, place: int) -> RungError:
        rungs, time = self.rungs[place], self.run.time
        off = rungs.outer[rung] - self.field(place)
        comfort = self._comfort(rung, place)
        drink = float(self.given.drink[rung][-1])
        hold = float(self.holds[rung].thin[place])
        return RungError(
            rung=rung,
            worst=float(np.abs(off[time >= SETTLED]).max()),
            end=float(off[-1]),
            comfort=comfort,
            comfort_error=difference(comfort, self.field_comfort(place)),
            drink_end=drink,
            drink_error=drink - float(self.run.series.drink_temperature[-1]),
            hold=hold,
            hold_error=difference(hold, float(self.holds["field"].thin[place])),
            span=longest_within(time, np.abs(off), GOOD_ENOUGH),
        )

    def _comfort(self, rung: str, place: int) -> float:
        if rung != "a":
            return passing(self.run.time, self.rungs[place].outer[rung])
        through = float(self.rungs[place].outer["a"][-1])
        return self.rungs[place].wall.time_scale if through > COMFORT else np.inf

    # -- assumptions -----------------------------------------------------------------------------------------

    @cached_property
    def radiation(self) -> Floats:
        """`[h]` share of radiation in the heat flux that leaves the outer face in the steady network."""
        return np.array([_radiation_share(each) for each in self.rungs])

    def drop_over(self, seconds: float) -> float:
        """By how much the field's drink cools in the first seconds [K]."""
        drink = self.run.series.drink_temperature
        return float(drink[0] - np.interp(seconds, self.run.time, drink))

    def assumptions(self, place: int) -> tuple[Assumption, ...]:
        """What the rungs assume at a station, each with its number and whether it failed."""
        rungs = self.rungs[place]
        scale, asked = rungs.wall.time_scale, self.field_comfort(place)
        fourier = (asked if np.isfinite(asked) else self.run.serving.duration) / scale
        when = "at 40 degC outside" if np.isfinite(asked) else "at the end"
        drop, whole = self.drop_over(scale), self.drop_over(self.run.serving.duration)
        radiation = float(self.radiation[place])
        return (
            _above(("c1",), f"one term: Fourier number {when}", fourier, 0.2),
            _above(("a", "b"), f"heated through: Fourier number {when}", fourier, 1.0),
            _below(("e",), "one wall temperature: Biot number outside", rungs.outer_biot, 0.1),
            _above(("c1", "c"), "no film inside: Biot number there", rungs.inner_biot, LEAST_INNER_BIOT),
            _below(AS_POURED, f"drink as poured: drop over L2/alpha ({scale:.3g} s) [K]", drop, 1.0),
            _below(AS_POURED, "drink as poured: drop over the serving [K]", whole, 1.0),
            _below(("any without radiation",), "no radiation: its share outside", radiation, 0.05),
            _below(("all",), "nothing along the wall: its share", float(self.lateral[place]), 0.05),
        )

    def nearest_end(self, place: int) -> tuple[str, float]:
        """Nearest end of a station and how far away it is [m]."""
        return nearest_end(self.ends, float(self.heights[place]))

    # -- words -----------------------------------------------------------------------------------------------

    def verdict(self) -> tuple[str, float, float] | None:
        """(rung, since, until) of the simplest rung that is good enough for longest at all plain stations.

        Of the rungs that last to the same time the simplest; None where no station is plain, or no rung good
        enough.
        """
        spans = {rung: self.good(rung) for rung in SIMPLEST_FIRST}
        known = {rung: span for rung, span in spans.items() if span is not None and span[1] > span[0]}
        if not known:
            return None
        latest = max(until for _, until in known.values())
        last = {rung: span for rung, span in known.items() if span[1] >= latest * (1.0 - 1e-9)}
        earliest = min(since for since, _ in last.values())
        rung = next(
            each for each in SIMPLEST_FIRST if each in last and last[each][0] <= max(earliest, SETTLED)
        )
        return rung, *last[rung]

    def good(self, rung: str) -> tuple[float, float] | None:
        """(since, until) [s] of a rung at all plain stations together."""
        spans = [self.error(rung, place).span for place in self.plain]
        known = [span for span in spans if span is not None]
        if not known or len(known) < len(spans):
            return None
        return max(span[0] for span in known), min(span[1] for span in known)

    def sentence(self, units: Units = "si") -> str:
        """Which rung is good enough for this cup and serving, and up to when."""
        limit = f"{GOOD_ENOUGH * (1.8 if units == 'us' else 1.0):.2g} {'degF' if units == 'us' else 'K'}"
        cup = f"{self.run.cup.title}, {self.run.serving.title}"
        found = self.verdict()
        if not self.plain:
            return f"{cup}: no station beside the drink is one-dimensional throughout; only the field tells."
        if found is None:
            return f"{cup}: no hand estimate is within {limit} of the field at stations beside the drink."
        rung, since, until = found
        heights = self.heights[list(self.plain)]
        low, high = (format_quantity(float(z), "length", units) for z in (heights.min(), heights.max()))
        told = (
            f"{cup}: rung ({rung}), {RUNGS[rung].split(':')[0]}, is good enough (outer wall within {limit})"
        )
        told += f" from {since:.3g} s up to {self._until(until)}"
        where = f"from {low} to {high}" if len(self.plain) > 1 else f"at {low}"
        told += f", on the wall beside the drink {where}, away from ends"
        return f"{told}{self._mid_wall(rung, units)}{self._simpler(rung)}."

    def _mid_wall(self, rung: str, units: Units) -> str:
        """How long the rung is good enough at mid-wall, where the level passes there."""
        place = int(np.argmin(np.abs(self.heights - 0.5 * self.run.cup.height)))
        span = self.error(rung, place).span
        if span is None or all(flag.name != LEVEL for flag in self.flagged[place]):
            return ""
        height = format_quantity(float(self.heights[place]), "length", units)
        return f"; at {height}, where the level passes, up to {self._until(span[1])}"

    def _simpler(self, rung: str) -> str:
        """The rungs before this one, each with its longest span."""
        before = SIMPLEST_FIRST[: SIMPLEST_FIRST.index(rung)]
        spans = [(each, span) for each in before if (span := self.good(each)) and span[1] > span[0]]
        told = [f"({each}) from {since:.3g} s up to {self._until(until)}" for each, (since, until) in spans]
        return f"; simpler: {', '.join(told)}" if told else ""

    def _until(self, time: float) -> str:
        end = self.run.serving.duration
        return f"the end ({end:g} s)" if time >= end * (1.0 - 1e-9) else f"{time:.3g} s"


def _above(rungs: tuple[str, ...], text: str, number: float, limit: float) -> Assumption:
    return Assumption(rungs, text, number, limit, number < limit)


def _below(rungs: tuple[str, ...], text: str, number: float, limit: float) -> Assumption:
    return Assumption(rungs, text, number, limit, number > limit)


def _radiation_share(rungs: Ladder) -> float:
    network, films = rungs.network, rungs.station.outer.films
    surface, around = float(network.temperature[-1]), rungs.station.outside
    if abs(surface - around) < 0.01:
        surface = around + 1.0
    fluxes = {
        name: float(film.heat_flux(surface, around, rungs.station.height, 0.0))
        for name, film in films.items()
    }
    whole = sum(fluxes.values())
    return sum(flux for name, flux in fluxes.items() if "radiation" in name) / whole if whole else 0.0
