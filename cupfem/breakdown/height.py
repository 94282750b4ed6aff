"""The radial estimate over the whole height, behind the drink of the run: the one-dimensional part of it.

Where the stack is the same and wet or dry for the same time, the estimate varies with the radius alone, so it
is solved at a few heights of each such span and taken as linear in between. Where the level falls past a span
while somebody drinks steadily, a height follows its lower neighbour until the level has passed, and then its
upper neighbour, as long after the level passed that one. Array shapes: t times, p heights, m solved heights.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from cupfem.breakdown.rungs import ELEMENTS, TOLERANCE
from cupfem.cup import Cup
from cupfem.estimates import follow, lumped_drink
from cupfem.serving import Serving

Floats = NDArray[np.float64]

SPACING, PASSED_SPACING, SHORT = 25e-3, 5e-3, 6e-3
"""Largest distance of solved heights in a span, and in one that the level passes; a shorter span is solved
in its middle alone [m]."""
INSET = 1e-5  # m; a span is solved this far from its ends
SAME = 1e-6  # m; nearer heights are one
STEADY_FALL = 1e-4  # m; a level that moves less within a span of time stands


@dataclass(frozen=True, eq=False)
class Solved:
    """Heights of a span `[m]` [m] and their outer face `[m, t]` [degC]; `passed`: the level falls past it."""

    low: float
    high: float
    heights: Floats
    outer: Floats
    passed: bool


@dataclass(frozen=True, eq=False)
class OverHeight:
    """The outer face by the radial estimate at any height."""

    times: Floats
    level: Floats
    """`[t]` level of the drink [m] as the estimate takes it."""
    spans: tuple[Solved, ...]

    @property
    def solves(self) -> int:
        """How many heights were solved."""
        return sum(len(span.heights) for span in self.spans)

    def outer(self, heights: Floats) -> Floats:
        """`[t, p]` [degC]."""
        ends = np.array([span.high for span in self.spans])
        places = np.clip(np.searchsorted(ends, heights), 0, len(ends) - 1)
        rows = np.array(
            [self._at(self.spans[place], float(z)) for place, z in zip(places, heights, strict=True)]
        )
        return np.asarray(rows.T)

    def _at(self, span: Solved, height: float) -> Floats:
        known = span.heights
        if len(known) == 1:
            return np.asarray(span.outer[0])
        place = int(np.clip(np.searchsorted(known, height) - 1, 0, len(known) - 2))
        if span.passed:
            return self._after_level(span, place, height)
        share = np.clip((height - known[place]) / (known[place + 1] - known[place]), 0.0, 1.0)
        return np.asarray((1.0 - share) * span.outer[place] + share * span.outer[place + 1])

    def _after_level(self, span: Solved, place: int, height: float) -> Floats:
        passing, above = self._passing(height), self._passing(float(span.heights[place + 1]))
        later = np.interp(self.times - passing + above, self.times, span.outer[place + 1])
        return np.asarray(np.where(self.times < passing, span.outer[place], later))

    def _passing(self, height: float) -> float:
        """When the level falls past a height [s]."""
        return float(np.interp(-height, -self.level, self.times))


def over_height(cup: Cup, serving: Serving, times: Floats, drink: Callable[[float], float]) -> OverHeight:
    """The radial estimate over the height behind a given drink, temperature [degC] of the time [s]."""
    level = _levels(cup, serving, times)
    falling = _falls(cup, serving)
    monotone = bool(np.all(np.diff(level) <= STEADY_FALL))
    spans = []
    for low, high in pairwise(_edges(cup, serving)):
        passed = any(a < 0.5 * (low + high) < b for a, b in falling)
        heights = _chosen(low, high, PASSED_SPACING if passed else SPACING)
        solved = [follow(cup, serving, z, drink, elements=ELEMENTS, tolerance=TOLERANCE) for z in heights]
        outer = np.array([each.outside(times) for each in solved])
        spans.append(Solved(low, high, np.array(heights), outer, passed and monotone))
    return OverHeight(times, level, tuple(spans))


def _chosen(low: float, high: float, spacing: float) -> list[float]:
    if high - low < SHORT:
        return [0.5 * (low + high)]
    count = int(np.ceil((high - low) / spacing)) + 1
    return [float(z) for z in np.linspace(low + INSET, high - INSET, count)]


def _edges(cup: Cup, serving: Serving) -> list[float]:
    """Heights [m] at which stack, films or the passing of the level change."""
    ends = [0.0, cup.floor, cup.height]
    for layer in cup.layer:
        ends += [end for span in cup.spans(layer) for end in span]
        ends += [height for height, _ in layer.thickness_along]
    if serving.carrier is not None:
        ends.append(serving.carrier.height)
    ends += [level for span in _span_levels(cup, serving) for level in span]
    inside = np.unique([end for end in ends if 0.0 <= end <= cup.height])
    keep = np.concatenate([[True], np.diff(inside) > SAME])
    return [float(end) for end in inside[keep]]


def _span_levels(cup: Cup, serving: Serving) -> list[tuple[float, float]]:
    """Levels [m] at the beginning and the end of each span between two jumps."""
    out = []
    for begin, end in pairwise((0.0, *serving.breaks(), serving.duration)):
        volume = lumped_drink(cup, serving, begin).volume
        out.append((cup.level(volume(begin)), cup.level(volume(end))))
    return out


def _falls(cup: Cup, serving: Serving) -> list[tuple[float, float]]:
    """Ranges of height [m] past which the level moves steadily."""
    spans = [(min(pair), max(pair)) for pair in _span_levels(cup, serving)]
    return [(low, high) for low, high in spans if high - low > STEADY_FALL]


def _levels(cup: Cup, serving: Serving, times: Floats) -> Floats:
    cuts = (0.0, *serving.breaks())
    drinks = [lumped_drink(cup, serving, begin) for begin in cuts]
    places = np.clip(np.searchsorted(cuts, times, side="right") - 1, 0, len(cuts) - 1)
    pairs = zip(places, times, strict=True)
    return np.array([cup.level(drinks[place].volume(float(time))) for place, time in pairs])
