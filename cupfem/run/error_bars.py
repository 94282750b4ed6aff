"""Numerical errors of headline figures: space from a coarser companion, time from the embedded estimate.

A figure is told as value +- error, apart from what the model leaves out. Wanted is that a much finer run lies
within in 95 of 100 figures, by an error at most five times too large in the median; not yet reached: 86 of 94
figures of 17 random cases, and more than ten times (tests/hard_use/error_bars.py counts it).
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

if TYPE_CHECKING:
    from cupfem.run.result import Run

Floats = NDArray[np.float64]
Figures = Mapping[str, float | None]

COMPANION_GAIN = 1.0
"""Least factor, less one, by which the error falls from the companion, of half the fineness, to the run.

It is 3 for an error of second order and 1 for one of first order, which the level line and the ends of layers
bring (P. J. Roache, J. Fluids Engineering 116 (1994) 405: Richardson's estimate; from memory, not
re-checked)."""
PEAK = 2.0
"""Factor on the time error where a figure is the hottest of a face: the estimate is a mean over the wall."""
LEAST = 1e-3
"""Least error that is told [K]: of the dense output and of the iteration within a step."""
TEMPERATURES = ("drink_end_degC", "outer_max_degC", "outer_end_max_degC")
CROSSINGS = {
    "drink_below_65_degC_s": "drink",
    "drink_below_60_degC_s": "drink",
    "outer_past_40_degC_s": "outer",
}
"""Times at which a series passes a limit, and which series."""
HOTTEST_AT = "outer_max_time_s"


def space_errors(fine: Figures, coarse: Figures, duration: float) -> dict[str, float]:
    """Errors of a run's figures [K or s] from those of its companion.

    A time that the companion did not reach may be off by all that is left of the duration [s].
    """
    errors = {}
    for name in (*TEMPERATURES, *CROSSINGS, HOTTEST_AT):
        value, other = fine.get(name), coarse.get(name)
        if value is None or np.isnan(value):
            continue
        if other is not None and not np.isnan(other):
            errors[name] = abs(value - other) / COMPANION_GAIN
        elif name not in TEMPERATURES:
            errors[name] = max(duration - value, 0.0)
    return errors


def error_bars(run: Run) -> dict[str, float]:
    """Error of each figure whose space error is known, in the figure's own unit [K or s]."""
    told, bars = run.figures(), {}
    for name, space in run.space_errors.items():
        value = told.get(name)
        if value is None:
            continue
        in_time = _time_error(run, name)
        if name in TEMPERATURES:
            bars[name] = space + in_time
        elif name == HOTTEST_AT:
            bars[name] = space + _spacing(run.time, value)
        else:
            bars[name] = min(space + in_time / _rate(run, name, value), max(run.serving.duration, space))
    return bars


def worst_temperature(run: Run) -> tuple[float, float]:
    """Largest error of a temperature among the figures, of space and of time [K]."""
    space = max(run.space_errors.get(name, 0.0) for name in TEMPERATURES)
    return space, max(_time_error(run, name) for name in TEMPERATURES)


def _time_error(run: Run, name: str) -> float:
    """Of the temperature that a figure is taken from [K]."""
    return max(run.time_error * (1.0 if name.startswith("drink") else PEAK), LEAST)


def _rate(run: Run, name: str, time: float) -> float:
    """How fast the series passes its limit [K/s]."""
    series = run.series
    values = series.drink_temperature if CROSSINGS[name] == "drink" else series.outer_temperature.max(axis=1)
    last = int(np.clip(np.searchsorted(series.time, time), 1, len(series.time) - 1))
    rise = values[last] - values[last - 1]
    rate = abs(rise) / (series.time[last] - series.time[last - 1])
    return float(rate) if time > 0.0 and rate > 0.0 else np.inf


def _spacing(times: Floats, time: float) -> float:
    """Distance of a time of the series from its neighbours [s]."""
    place = int(np.searchsorted(times, time - 1e-9))
    around = times[max(place - 1, 0) : place + 2]
    return float(np.max(np.diff(around))) if len(around) > 1 else 0.0
