"""A measured log beside a run: what a thermometer read, and how far the run is from it."""

from __future__ import annotations

import csv
import math
import re
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from cupfem.errors import InputError, nearest

if TYPE_CHECKING:
    from cupfem.run.result import Run

Floats = NDArray[np.float64]

TIME, DRINK = "time_s", "drink_temperature_degC"
WALL = re.compile(r"outer_z(\d+(?:\.\d+)?)mm_degC")
"""Headings as in the series of a run; the wall's tells a height on its inside face in mm."""
EXAMPLES = f"{TIME},{DRINK},outer_z045mm_degC"


@dataclass(frozen=True, eq=False)
class MeasuredLog:
    """Times `[t]` [s] and temperatures `[t]` [degC] by heading; NaN where nothing was read."""

    time: Floats
    columns: dict[str, Floats]


@dataclass(frozen=True)
class Misfit:
    """How far a run is from one column of a log: root mean square, mean (run minus log) and largest [K]."""

    column: str
    points: int
    root_mean_square: float
    mean: float
    largest: float

    def line(self) -> str:
        """As one line of text."""
        return (
            f"{self.column}: RMSE {self.root_mean_square:.2f} K over {self.points} points, "
            f"mean {self.mean:+.2f} K, largest {self.largest:.2f} K"
        )


def read_log(path: str | Path) -> MeasuredLog:
    """Read a CSV file with the headings `time_s` and `drink_temperature_degC` or `outer_z045mm_degC` (any
    height).

    Raises InputError, in one line, for anything that cannot be used.
    """
    try:
        with Path(path).open(encoding="utf-8-sig", newline="") as file:
            rows = [row for row in csv.reader(file) if row]
    except (OSError, UnicodeDecodeError) as error:
        raise InputError("log", str(path), "cannot be read as text", "name a CSV file") from error
    if len(rows) < 2:
        raise InputError(
            "log", str(path), "holds no rows below its headings", f'head the columns "{EXAMPLES}"'
        )
    headings = [heading.strip() for heading in rows[0]]
    _check_headings(headings)
    values = np.array([_numbers(row, headings, number) for number, row in enumerate(rows[1:], 2)]).T
    columns = dict(zip(headings, values, strict=True))
    time = columns.pop(TIME)
    if not np.all(np.diff(time) > 0.0):
        raise InputError("log", TIME, "the times do not rise", "sort the rows by time")
    return MeasuredLog(time, columns)


def misfits(run: Run, log: MeasuredLog) -> list[Misfit]:
    """Each column of a log against the run, at the times that both have."""
    return [_misfit(run, log, heading) for heading in log.columns]


def curve_of(run: Run, heading: str) -> Floats:
    """What the run has under a heading of a log `[t]` [degC]."""
    if heading == DRINK:
        return run.series.drink_temperature
    return run.outer_temperature_at(_height(heading))


def _misfit(run: Run, log: MeasuredLog, heading: str) -> Misfit:
    curve, read = curve_of(run, heading), log.columns[heading]
    counts = np.isfinite(read) & (log.time >= run.time[0]) & (log.time <= run.time[-1])
    difference = np.interp(log.time[counts], run.time, curve) - read[counts]
    difference = difference[np.isfinite(difference)]
    if not len(difference):
        raise InputError("log", heading, "has no reading within the run", "run for as long as was measured")
    square = float(np.sqrt(np.mean(difference**2)))
    return Misfit(
        heading, len(difference), square, float(np.mean(difference)), float(np.abs(difference).max())
    )


def _check_headings(headings: Sequence[str]) -> None:
    if TIME not in headings or len(headings) < 2:
        raise InputError(
            "log", headings[0], f"no column {TIME} beside a temperature", f'write "{TIME},{DRINK}"'
        )
    for heading in headings:
        if heading not in (TIME, DRINK) and math.isnan(_height(heading)):
            why = f"no such column{nearest(heading, (TIME, DRINK))}"
            raise InputError("log", heading, why, f'head the columns "{EXAMPLES}"')


def _height(heading: str) -> float:
    """Height [m] that a heading names; NaN where it names none."""
    found = WALL.fullmatch(heading)
    return 1e-3 * float(found[1]) if found else math.nan


def _numbers(row: Sequence[str], headings: Sequence[str], line: int) -> list[float]:
    if len(row) != len(headings):
        why = f"{len(row)} values below {len(headings)} headings"
        raise InputError(f"log, line {line}", None, why, "write one value, or nothing, per heading")
    out = []
    for heading, cell in zip(headings, row, strict=True):
        try:
            out.append(float(cell) if cell.strip() or heading == TIME else math.nan)
        except ValueError:
            why = "not a number"
            raise InputError(f"log, line {line}, {heading}", cell, why, 'write "71.5"') from None
    return out
