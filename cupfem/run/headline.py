"""Headline figures of a run, the verdict on its target, and the cautions that go with them."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Literal

import numpy as np
from numpy.typing import NDArray

from cupfem.quantities import Units, format_quantity
from cupfem.run.error_bars import error_bars, worst_temperature

if TYPE_CHECKING:
    from cupfem.run.result import Run
    from cupfem.run.touched import HoldFigures

Floats = NDArray[np.float64]

COMFORT = 40.0
"""Temperature [degC] that a hand finds comfortable; common practice, no source."""
WARM = (65.0, 60.0)
"""Drink temperatures [degC] whose times are told: "very hot" above 65 (IARC Monographs 116, 2018), about
what people prefer (Brown and Diller, Burns 34 (2008) 648: 60)."""

FREE_WALL = "free-wall figures, not a hold time"
CAUTION = (
    "An estimate for comparing designs, not a safety certificate: test real cups; local codes and "
    "qualified people decide; spilled drink scalds whatever the wall does."
)
MOISTURE = "board moisture not modelled: the first two minutes of double walls may be off by about 10 K"


@dataclass(frozen=True)
class Verdict:
    """One line of the target: what was asked, what came out, and the margin (negative: failed).

    In degC and kelvins, or for a `time` in seconds, infinite where the end was not reached.
    """

    asked: str
    limit: float
    reached: float
    margin: float
    dimension: Literal["temperature", "time"] = "temperature"

    @property
    def passed(self) -> bool:
        """Whether the target is met."""
        return self.margin >= 0.0


def figures(run: Run) -> dict[str, float | None]:
    """Headline figures, unit in the key; a time that was not reached is None."""
    series, ledger = run.series, run.ledger
    hottest = np.unravel_index(int(np.argmax(series.outer_temperature)), series.outer_temperature.shape)
    told: dict[str, float | None] = {
        "drink_start_degC": float(series.drink_temperature[0]),
        "drink_end_degC": _last(series.drink_temperature),
        "drink_end_ml": 1e6 * run.meridian.volume(float(series.drink_level[-1])),
        "drink_level_end_mm": 1e3 * float(series.drink_level[-1]),
    }
    for limit in WARM:
        told[f"drink_below_{limit:.0f}_degC_s"] = crossing(series.time, -series.drink_temperature, -limit)
    told |= {
        "outer_max_degC": float(series.outer_temperature[hottest]),
        "outer_max_time_s": float(series.time[hottest[0]]),
        "outer_max_height_mm": 1e3 * float(run.faces.outer_height[hottest[1]]),
        "outer_end_max_degC": float(series.outer_temperature[-1].max()),
        "outer_past_40_degC_s": crossing(series.time, series.outer_temperature.max(axis=1), COMFORT),
        "brimful_capacity_ml": 1e6 * run.meridian.brimful_capacity,
        "heat_lost_by_drink_kJ": -1e-3 * ledger.drink,
        "ledger_residual_relative": ledger.relative_residual,
    }
    return told | ({} if run.touch is None else run.touch.figures())


def crossing(time: Floats, values: Floats, limit: float) -> float | None:
    """First time [s] at which a series passes a limit upwards (linear in between); None if it never does."""
    above = np.flatnonzero(np.nan_to_num(values, nan=-np.inf) > limit)
    if not len(above):
        return None
    first = int(above[0])
    if first == 0 or np.isnan(values[first - 1]):
        return float(time[first])
    share = (limit - values[first - 1]) / (values[first] - values[first - 1])
    return float(time[first - 1] + share * (time[first] - time[first - 1]))


def verdicts(run: Run) -> list[Verdict]:
    """The target line by line; empty without one."""
    target = run.serving.target
    if target is None:
        return []
    until = run.serving.duration if target.until is None else target.until
    out = []
    within = run.series.time <= until + 1e-9
    if target.drink_above is not None:
        lowest = float(np.nanmin(run.series.drink_temperature[within]))
        out.append(
            Verdict(
                f"drink above, until {until:g} s", target.drink_above, lowest, lowest - target.drink_above
            )
        )
    if target.wall_below is not None:
        out.append(_wall_verdict(run, target.wall_below, target.between, within, until))
    if target.hold_time is not None and run.touch is not None:
        out.append(_hold_verdict(run.touch, target.hold_time))
    return out


def _hold_verdict(touch: HoldFigures, asked: float) -> Verdict:
    """Judged with pain at 0.1 mm; a time that was not reached counts as long as it was tried."""
    reached = touch.thin if np.isfinite(touch.thin) else touch.at_least
    place = f"hold time from {1e3 * touch.low:g} to {1e3 * touch.high:g} mm, shortest at {touch.pick_up:g} s"
    return Verdict(place, asked, reached, reached - asked, "time")


def _wall_verdict(
    run: Run, limit: float, between: tuple[float, float] | None, within: NDArray[np.bool_], until: float
) -> Verdict:
    low, high = between or (0.0, run.meridian.height)
    heights = run.faces.outer_height
    chosen = (heights >= low - 1e-9) & (heights <= high + 1e-9)
    hottest = float(run.series.outer_temperature[np.ix_(within, chosen)].max())
    place = f"free wall from {1e3 * low:g} to {1e3 * high:g} mm below, until {until:g} s"
    return Verdict(place, limit, hottest, limit - hottest)


def text(run: Run, units: Units = "si") -> str:
    """Headline figures, verdict and cautions as plain text."""
    told = figures(run)
    lines = [f"{run.cup.title} - {run.serving.title}", *([FREE_WALL] if run.touch is None else []), ""]
    lines += [f"  {name:<44}{value}" for name, value in rows(run, told, units)]
    for verdict in verdicts(run):
        lines.append(f"  {verdict_line(verdict, units)}")
    lines += ["", *uncertainty_lines(run), CAUTION]
    return "\n".join(lines)


def rows(run: Run, told: dict[str, float | None], units: Units = "si") -> list[tuple[str, str]]:
    """Rows of the table of headline figures: what, and value with unit."""
    end = run.serving.duration
    error = error_bars(run)

    def temperature(key: str) -> str:
        value = told[key]
        if value is None or np.isnan(value):
            return "none left"
        shown = format_quantity(value, "temperature", units, digits=3 if abs(value) < 100 else 4)
        return shown + _plus_minus(error.get(key), "K", units)

    def seconds(key: str) -> str:
        value = told[key]
        if value is None:
            return f"not within {end:g} s"
        return f"{value:.3g} s" + _plus_minus(error.get(key), "s", units)

    return [
        (f"drink after {end:g} s", temperature("drink_end_degC")),
        ("drink falls below 65 degC after", seconds("drink_below_65_degC_s")),
        ("drink falls below 60 degC after", seconds("drink_below_60_degC_s")),
        ("hottest free outer wall", temperature("outer_max_degC")),
        ("  at time and height", _place(told, units)),
        ("free outer wall first passes 40 degC after", seconds("outer_past_40_degC_s")),
        (
            "brimful capacity",
            format_quantity(1e-6 * float(told["brimful_capacity_ml"] or 0.0), "volume", units),
        ),
        ("heat that the drink lost", f"{told['heat_lost_by_drink_kJ']:.3g} kJ"),
        *(run.touch.rows() if run.touch is not None else []),
    ]


def _place(told: dict[str, float | None], units: Units) -> str:
    height = format_quantity(1e-3 * float(told["outer_max_height_mm"] or 0.0), "length", units)
    return f"{told['outer_max_time_s']:.3g} s, {height}"


def _plus_minus(error: float | None, unit: str, units: Units) -> str:
    if error is None:
        return ""
    if unit == "K" and units == "us":
        return f" +- {1.8 * error:.1g} degF"
    return f" +- {error:.1g} {unit}"


def uncertainty_lines(run: Run) -> list[str]:
    """Numerical and model uncertainty, apart."""
    space, time = worst_temperature(run)
    told = f"space {space:.1g} K (coarser companion)" if run.space_errors else "space not estimated"
    lines = [f"numerical: time {run.time_error:.1g} K (embedded), {told}"]
    if run.accuracy is not None:
        reached = f"{space + time:.1g} K at fineness {run.fineness:g}, tolerance {run.tolerance:.1g} K"
        word = "met" if space + time <= run.accuracy else "NOT met"
        lines.append(f"numerical: accuracy {run.accuracy:g} K {word}: {reached}")
    lines.append("model: inputs and physics left out; see the sources of each property")
    solids = (layer.material for layer in run.meridian.layers if layer.material.kind == "solid")
    if any(material.surface_class == "board" for material in solids):
        lines.append(f"model: {MOISTURE}")
    return lines


def verdict_line(verdict: Verdict, units: Units = "si") -> str:
    """A verdict as one line."""
    word = "PASS" if verdict.passed else "FAIL"
    if verdict.dimension == "time":
        shown = f"{verdict.limit:g} s asked, {verdict.reached:.3g} s reached, margin {verdict.margin:+.3g} s"
        return f"{word}  {verdict.asked}: {shown}"
    limit, reached = (
        format_quantity(value, "temperature", units) for value in (verdict.limit, verdict.reached)
    )
    scale, unit = (1.8, "degF") if units == "us" else (1.0, "K")
    margin = f"{scale * verdict.margin:+.1f} {unit}"
    return f"{word}  {verdict.asked}: {limit} asked, {reached} reached, margin {margin}"


def _last(values: Floats) -> float | None:
    return None if np.isnan(values[-1]) else float(values[-1])
