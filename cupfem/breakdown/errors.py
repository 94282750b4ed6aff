"""Errors of a rung beside the field at one station."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from cupfem.run import COMFORT

Floats = NDArray[np.float64]

SETTLED = 1.0
"""Errors count from this time on [s]: before it neither is exact, as the pour is not sudden."""


@dataclass(frozen=True)
class RungError:
    """A rung at a station beside the field.

    `worst` and `end` [K]: largest error of the outer wall from one second on, and that at the end. Times [s],
    infinite where not reached, and their errors, NaN where one of the two was not reached. `since`, `until`
    [s]: the longest time during which the outer wall is good enough; None where it never is.
    """

    rung: str
    worst: float
    end: float
    comfort: float
    comfort_error: float
    drink_end: float
    drink_error: float
    hold: float
    hold_error: float
    span: tuple[float, float] | None


def passing(times: Floats, outer: Floats) -> float:
    """First time [s] at which a wall `[t]` [degC] is above 40 degC, linear in between; infinite if never."""
    above = outer > COMFORT
    if not above.any():
        return np.inf
    first = int(np.argmax(above))
    if first == 0:
        return float(times[0])
    share = (COMFORT - outer[first - 1]) / (outer[first] - outer[first - 1])
    return float(times[first - 1] + share * (times[first] - times[first - 1]))


def difference(estimate: float, field: float) -> float:
    """Error of a time [s]; zero where neither was reached, NaN where one of the two was not."""
    if np.isinf(estimate) and np.isinf(field):
        return 0.0
    return estimate - field if np.isfinite(estimate) and np.isfinite(field) else np.nan


def longest_within(times: Floats, off: Floats, bound: float) -> tuple[float, float] | None:
    """Longest span [s] of times from one second on during which `[t]` is within a bound."""
    best: tuple[float, float] | None = None
    begin: float | None = None
    for time, good in zip(times[times >= SETTLED], off[times >= SETTLED] <= bound, strict=True):
        begin = (float(time) if begin is None else begin) if good else None
        if begin is not None and (best is None or time - begin > best[1] - best[0]):
            best = begin, float(time)
    return best
