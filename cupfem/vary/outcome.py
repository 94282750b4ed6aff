"""What came of a plan: one row per case, and the same as a table with units in its headings."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from cupfem.errors import InputError
from cupfem.inputs.messages import did_you_mean
from cupfem.quantities import DIMENSIONS
from cupfem.quantities.text import in_unit
from cupfem.vary.cases import Figures
from cupfem.vary.plan import Limit
from cupfem.vary.values import Value, column_unit, number

Floats = NDArray[np.float64]

UNITS = {
    "degC": "temperature", "K": "temperature_difference", "s": "time", "mm": "length", "ml": "volume",
    "g": "mass", "kJ": "energy", "W": "heat_flow",
}  # fmt: skip
"""Unit at the end of a figure's key -> its dimension."""
PASSED, FAILED, UNDECIDED, NOT_RUN = "passed", "failed", "undecided", "not run"


@dataclass(frozen=True)
class Varied:
    """A factor as the outcome tells it: its path, kind and unit, and the further paths that it sets."""

    key: str
    kind: str
    unit: str = ""
    others: tuple[str, ...] = ()

    @property
    def is_number(self) -> bool:
        """Whether its values can stand on an axis."""
        return self.kind != "word"

    @property
    def heading(self) -> str:
        """Path with the unit."""
        return f"{self.key} [{self.unit}]" if self.unit else self.key


@dataclass(frozen=True)
class Goal:
    """A limit in the unit of its figure; `at_least`, `at_most` are open where None."""

    key: str
    at_least: float | None = None
    at_most: float | None = None

    @property
    def text(self) -> str:
        """The limit in words."""
        ends = [(self.at_least, "at least"), (self.at_most, "at most")]
        told = " and ".join(f"{word} {end:g}" for end, word in ends if end is not None)
        return f"{self.key} {told}"

    def margins(self, values: Floats) -> Floats:
        """How far values keep to it, negative where they do not."""
        low = np.inf if self.at_least is None else values - self.at_least
        high = np.inf if self.at_most is None else self.at_most - values
        return np.asarray(np.minimum(low, high), dtype=float) + 0.0 * values


@dataclass(frozen=True)
class Row:
    """One case: what was varied, what came out, or the error.

    `text` holds all its inputs, `key` is that of the store.
    """

    number: int
    inputs: Mapping[str, Value]
    figures: Figures
    error: str = ""
    text: str = field(default="", repr=False)
    key: str = field(default="", repr=False)


@dataclass(frozen=True)
class Outcome:
    """All cases of a plan.

    Array shape `[c]`, c cases in the order of the plan.
    """

    title: str
    combine: str
    samples: int
    varied: tuple[Varied, ...]
    recorded: tuple[str, ...]
    goals: tuple[Goal, ...]
    rows: tuple[Row, ...]

    def __len__(self) -> int:
        return len(self.rows)

    @property
    def errors(self) -> tuple[Row, ...]:
        """Cases that failed."""
        return tuple(row for row in self.rows if row.error)

    def inputs(self, key: str) -> Floats:
        """Values of a varied number `[c]`, in the unit of its heading; NaN where a case does not have it."""
        varied = self.varied_by(key)
        return np.array([in_shown_unit(row.inputs.get(key), varied) for row in self.rows])

    def words(self, key: str) -> list[str]:
        """Values of anything varied as text, for each case."""
        return [str(row.inputs.get(key, "as in the file")) for row in self.rows]

    def varied_by(self, key: str) -> Varied:
        """A factor by its path; InputError with the nearest one."""
        for varied in self.varied:
            if varied.key == key:
                return varied
        known = [varied.key for varied in self.varied]
        raise InputError("key", key, "not varied in this plan", did_you_mean(key, known) or ", ".join(known))

    def figure(self, key: str) -> Floats:
        """A recorded figure `[c]`: NaN where there is none, for a time that was not reached its least value.

        `censored` tells which those are. A mean over them is a restricted mean (Royston and Parmar, BMC
        Medical Research Methodology 13 (2013) 152): that of the time within the serving.
        """
        self._check_recorded(key)
        least = at_least_key(key)
        return np.array([_number(row.figures.get(key), row.figures.get(least)) for row in self.rows])

    def censored(self, key: str) -> NDArray[np.bool_]:
        """Where a time was not reached, so that only its least value is known `[c]`."""
        self._check_recorded(key)
        least = at_least_key(key)
        return np.array(
            [row.figures.get(key) is None and row.figures.get(least) is not None for row in self.rows]
        )

    def verdicts(self) -> list[str]:
        """For each case: passed, failed, undecided (a time only known to be long) or not run."""
        worst = np.full(len(self.rows), PASSED, dtype=object)
        for goal in self.goals:
            good = self._keeps(goal)
            worst[(good == UNDECIDED) & (worst == PASSED)] = UNDECIDED
            worst[good == FAILED] = FAILED
        worst[[bool(row.error) for row in self.rows]] = NOT_RUN
        return list(worst)

    def note(self, key: str) -> str:
        """What has to be said beside a figure: how many cases failed, and how many times were not reached."""
        cut, values = self.censored(key), self.figure(key)
        parts = []
        if self.errors:
            parts.append(f"{len(self.errors)} of {len(self)} cases failed")
        if cut.any():
            low, high = np.min(values[cut]), np.max(values[cut])
            taken = f"{low:g}" if low == high else f"{low:g} to {high:g}"
            parts.append(f"{int(cut.sum())} of {len(self)} not reached, taken as {taken}")
        return "; ".join(parts)

    def _keeps(self, goal: Goal) -> NDArray[np.object_]:
        margins, cut = goal.margins(self.figure(goal.key)), self.censored(goal.key)
        kept = np.where(margins >= 0.0, PASSED, FAILED).astype(object)
        # of a time not reached only the least value is known: it can still be beyond an upper limit
        if goal.at_most is not None:
            kept[cut & (margins >= 0.0)] = UNDECIDED
        if goal.at_least is not None:
            beyond = goal.at_most is not None and self.figure(goal.key) > goal.at_most
            kept[cut & (margins < 0.0) & ~np.asarray(beyond)] = UNDECIDED
        return kept

    def _check_recorded(self, key: str) -> None:
        known = {name for row in self.rows for name in row.figures} | set(self.recorded)
        if key not in known:
            instead = did_you_mean(key, known) or f"recorded are {', '.join(sorted(known))}"
            raise InputError("figure", key, "not recorded by this plan", instead)


def at_least_key(key: str) -> str:
    """The key of the least value, for a time that was not reached: hold_time_s, hold_time_at_least_s."""
    return f"{key.removesuffix('_s')}_at_least_s"


def goal_of(key: str, limit: Limit) -> Goal:
    """A limit of a plan in the unit of its figure; InputError if its values do not fit the figure."""
    return Goal(key, _in_figure_unit(key, limit.at_least), _in_figure_unit(key, limit.at_most))


def _in_figure_unit(key: str, value: object) -> float | None:
    if value is None:
        return None
    unit = key.rpartition("_")[2] if "_" in key else ""
    if unit not in UNITS:
        return number(f"limits.{key}", value, "number")
    return in_unit(number(f"limits.{key}", value, UNITS[unit]), unit, UNITS[unit])


def varied_of(key: str, kind: str, rows: list[Mapping[str, Value]], others: tuple[str, ...] = ()) -> Varied:
    """A factor, with the unit that its values are shown in."""
    if kind == "word":
        return Varied(key, kind, "", others)
    values = [number(key, row[key], kind) for row in rows if key in row]
    return Varied(key, kind, column_unit(values, kind), others)


def in_shown_unit(value: Value | None, varied: Varied) -> float:
    """A value of a varied number in the unit of its heading; NaN if there is none."""
    if value is None or not varied.is_number:
        return np.nan
    plain = number(varied.key, value, varied.kind)
    has_unit = varied.kind in DIMENSIONS and varied.unit
    return float(f"{in_unit(plain, varied.unit, varied.kind):.12g}") if has_unit else plain


def _number(value: float | None, least: float | None) -> float:
    if value is not None:
        return float(value)
    return np.nan if least is None else float(least)
