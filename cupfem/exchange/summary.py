"""`summary.json` and `series.csv` of a run: units in every key, the same bytes on a second run."""

from __future__ import annotations

import csv
import io
import json
import math
from collections.abc import Mapping
from typing import Any

import numpy as np
from numpy.typing import NDArray

from cupfem.run import CAUTION, FREE_WALL, PadField, Run
from cupfem.run.error_bars import worst_temperature
from cupfem.run.headline import Verdict, uncertainty_lines, verdicts
from cupfem.run.touched import HoldFigures
from cupfem.touch.felt import pad_verdict

Floats = NDArray[np.float64]

DIGITS = 9
"""Significant digits of a number in a file. What differs between two linear-algebra libraries, or between
numbers of their threads, lies in later digits."""
FINEST = 9
"""Decimals at the most: what is a difference of two larger numbers (a residual, a margin) has no more."""
STATION_SPACING = 10
"""Distance [mm] of the heights whose outer wall is kept in `series.csv`."""


def summary_json(run: Run) -> str:
    """Headline figures, verdicts, uncertainties, ledger, defaults and cautions of a run as JSON."""
    return json_text(summary(run))


def summary(run: Run) -> dict[str, Any]:
    """What `summary.json` holds; None for a time that was not reached, beside `..._at_least_s`."""
    return {
        **_bounded(run.figures(), run.serving.duration),
        "hold": {} if run.touch is None else _hold(run.touch),
        "pads": [_pad(run, field) for field in run.pads],
        "title": {"cup": run.cup.title, "serving": run.serving.title},
        "verdicts": [_verdict(verdict) for verdict in verdicts(run)],
        "uncertainty": {"numerical": _numerical(run), "model": _model(run)},
        "ledger": _ledger(run),
        "defaults": list(run.defaults),
        "ranges": list(run.ranges),
        "caution": CAUTION,
        **({"note": FREE_WALL} if run.touch is None else {}),
    }


def json_text(told: Mapping[str, Any]) -> str:
    """JSON with sorted keys, numbers rounded, and null for what is no number."""
    return json.dumps(_plain(told), indent=2, sort_keys=True, ensure_ascii=False, allow_nan=False) + "\n"


def rounded(value: float) -> float:
    """A number at `DIGITS` significant digits and at most `FINEST` decimals; never minus zero."""
    return round(float(f"{value:.{DIGITS}g}"), FINEST) + 0.0


def _plain(value: Any) -> Any:
    if isinstance(value, Mapping):
        return {str(key): _plain(item) for key, item in value.items()}
    if isinstance(value, (list, tuple)):
        return [_plain(item) for item in value]
    if isinstance(value, (float, np.floating)):
        return rounded(float(value)) if math.isfinite(value) else None
    if isinstance(value, (np.integer, np.bool_)):
        return value.item()
    return value


def _bounded(told: Mapping[str, Any], at_least: float) -> dict[str, Any]:
    """The figures, and a bound [s] for each time that was not reached (None or infinite)."""
    bounds = {
        f"{key.removesuffix('_s')}_at_least_s": at_least
        for key, value in told.items()
        if key.endswith("_s") and not key.endswith("_at_least_s") and (value is None or value == math.inf)
    }
    return bounds | dict(told)


def _pad(run: Run, field: PadField) -> dict[str, Any]:
    """What a pad felt: hold times for thin and thick skin, and injury on its own."""
    verdict, pad = pad_verdict(run, field), field.pad
    times = {
        "hold_time_s": verdict.thin,
        "hold_time_thick_skin_s": verdict.thick,
        "injury_time_s": verdict.injury,
    }
    return _bounded(times, verdict.at_least) | {
        "height_mm": 1e3 * pad.height,
        "width_mm": 1e3 * pad.width,
        "pick_up_s": pad.pick_up,
        "decided_by": verdict.thin_decided,
        "decided_by_thick_skin": verdict.thick_decided,
        "hottest_height_mm": 1e3 * verdict.height,
        "hottest_place": verdict.place,
    }


def _hold(touch: HoldFigures) -> dict[str, Any]:
    """Where and by what the hold times among the headline figures were decided."""
    return {
        "between_mm": [1e3 * touch.low, 1e3 * touch.high],
        "decided_by": touch.thin_decided,
        "decided_by_thick_skin": touch.thick_decided,
        "layer": touch.layer,
        "place": touch.place,
        "skin": touch.skin,
        "contact_W_m2_K": touch.conductance,
    }


def _verdict(verdict: Verdict) -> dict[str, Any]:
    value, difference = ("s", "s") if verdict.dimension == "time" else ("degC", "K")
    return {
        "asked": verdict.asked,
        "passed": verdict.passed,
        f"limit_{value}": verdict.limit,
        f"reached_{value}": verdict.reached,
        f"margin_{difference}": verdict.margin,
    }


def _numerical(run: Run) -> dict[str, Any]:
    told: dict[str, Any] = {"time_K": run.time_error, "space": _errors(run.space_errors)}
    told["plus_minus"] = _errors(run.error_bars())
    if run.accuracy is not None:
        told |= {"asked_K": run.accuracy, "met": sum(worst_temperature(run)) <= run.accuracy}
    return told


def _errors(errors: Mapping[str, float]) -> dict[str, float]:
    """Errors by the figure's name: of a temperature in kelvins, of a time in seconds."""
    return {
        name if name.endswith("_s") else f"{name.removesuffix('_degC')}_K": error
        for name, error in errors.items()
    }


def _model(run: Run) -> list[str]:
    lines = [line.partition(": ") for line in uncertainty_lines(run)]
    return [text for kind, _, text in lines if kind == "model"]


def _ledger(run: Run) -> dict[str, Any]:
    ledger = run.ledger
    return {
        "out": {f"{_key(name)}_J": value for name, value in ledger.out.items()},
        "stored": {f"{_key(name)}_J": value for name, value in ledger.stored.items()},
        "drink_J": ledger.drink,
        "wall_to_drink_J": ledger.to_drink,
        "residual_J": ledger.residual,
        "residual_relative": ledger.relative_residual,
    }


def _key(name: str) -> str:
    return name.replace(" ", "_")


# -- time series ---------------------------------------------------------------------------------------------


def series_csv(run: Run) -> str:
    """The time series with the unit in each heading; an empty cell where there is no value."""
    columns = series_columns(run)
    text = io.StringIO()
    writer = csv.writer(text, lineterminator="\n")
    writer.writerow(columns)
    for row in zip(*columns.values(), strict=True):
        writer.writerow("" if math.isnan(value) else f"{rounded(value):.{DIGITS}g}" for value in row)
    return text.getvalue()


def series_columns(run: Run) -> dict[str, Floats]:
    """Heading -> values `[t]`: the drink, the free outer wall at even heights, and every heat flow."""
    series = run.series
    columns = {
        "time_s": series.time,
        "drink_temperature_degC": series.drink_temperature,
        "drink_level_mm": 1e3 * series.drink_level,
        "drink_mass_g": 1e3 * series.drink_mass,
    }
    for height in station_heights(run):
        columns[f"outer_z{height:03d}mm_degC"] = run.outer_temperature_at(1e-3 * height)
    return columns | {f"{_key(name)}_W": values for name, values in series.powers.items()}


def station_heights(run: Run) -> range:
    """Heights on the inside face [mm] whose outer wall is kept: every 10 mm on the wall."""
    low, high = 1e3 * run.faces.outer_height[[0, -1]]
    first = STATION_SPACING * math.ceil((low - 1e-6) / STATION_SPACING)
    return range(first, math.floor(high + 1e-6) + 1, STATION_SPACING)
