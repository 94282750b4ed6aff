"""The comparison as CSV, and its headline figures."""

from __future__ import annotations

import csv
import io
import math

import numpy as np

from cupfem.breakdown.map import BOUNDS
from cupfem.breakdown.result import GOOD_ENOUGH, Comparison
from cupfem.breakdown.text import kind
from cupfem.run import CAUTION

FIGURES = 6
"""Significant digits in files."""


def csv_text(slab: Comparison) -> str:
    """One row for each station and rung; an empty cell where there is no value or it was not reached."""
    text = io.StringIO()
    writer = csv.writer(text, lineterminator="\n")
    writer.writerow(
        ["height_mm", "place", "rung", "outer_end_degC", "field_outer_end_degC", "outer_worst_error_K",
         "outer_end_error_K", "past_40_degC_s", "field_past_40_degC_s", "past_40_degC_error_s",
         "good_since_s", "good_until_s", "drink_end_degC", "drink_end_error_K", "hold_time_s",
         "field_hold_time_s",
         "hold_time_error_s", "two_minus_one_d_worst_K", "lateral_share", "outer_biot", "wall_time_scale_s",
         "radiation_share", "flags"]
    )  # fmt: skip
    for place in range(len(slab.heights)):
        for error in slab.errors[place]:
            writer.writerow(_csv_row(slab, place, error.rung))
    return text.getvalue()


def _csv_row(slab: Comparison, place: int, rung: str) -> list[str]:
    error, rungs = slab.error(rung, place), slab.rungs[place]
    height = float(slab.heights[place])
    since, until = error.span or (math.nan, math.nan)
    values = [
        float(rungs.outer[rung][-1]), float(slab.field(place)[-1]), error.worst, error.end, error.comfort,
        slab.field_comfort(place), error.comfort_error, since, until, error.drink_end, error.drink_error,
        error.hold, float(slab.holds["field"].thin[place]), error.hold_error, slab.map.worst_at(height),
        float(slab.lateral[place]), rungs.outer_biot, rungs.wall.time_scale, float(slab.radiation[place]),
    ]  # fmt: skip
    flags = "; ".join(flag.name for flag in slab.flagged[place])
    return [_number(1e3 * height), kind(slab, place), rung, *map(_number, values), flags]


def _number(value: float) -> str:
    return f"{value:.{FIGURES}g}" if math.isfinite(value) else ""


def headline(slab: Comparison) -> dict[str, object]:
    """Headline figures, unit in the key; None for what was not reached."""
    place, found = slab.reference, slab.verdict()
    told: dict[str, object] = {
        "station_mm": _rounded(1e3 * float(slab.heights[place])),
        "pick_up_s": slab.pick_up,
        "good_enough_K": GOOD_ENOUGH,
        "good_rung": None if found is None else found[0],
        "good_since_s": None if found is None else _rounded(found[1]),
        "good_until_s": None if found is None else _rounded(found[2]),
        "sentence": slab.sentence(),
        "contact_temperature_degC": _rounded(float(slab.first.contact[place])),
        "wall_time_scale_s": _rounded(slab.rungs[place].wall.time_scale),
        "outer_biot": _rounded(slab.rungs[place].outer_biot),
        "radiation_share": _rounded(float(slab.radiation[place])),
        "map_solves": slab.map.solves,
        "flags": {f"{1e3 * z:.6g} mm": [flag.name for flag in flags]
                  for z, flags in zip(slab.heights, slab.flagged, strict=True)},
        "caution": CAUTION,
    }  # fmt: skip
    for bound in BOUNDS:
        told[f"share_within_{bound:g}_K"] = _rounded(slab.map.within(bound))
        told[f"wall_within_{bound:g}_K"] = _rounded(slab.map.wall_within(bound))
    told["rungs"] = {error.rung: _rung_figures(slab, place, error.rung) for error in slab.errors[place]}
    return told


def _rung_figures(slab: Comparison, place: int, rung: str) -> dict[str, object]:
    error = slab.error(rung, place)
    return {
        "outer_end_degC": _rounded(float(slab.rungs[place].outer[rung][-1])),
        "outer_worst_error_K": _rounded(error.worst),
        "past_40_degC_s": _rounded(error.comfort),
        "past_40_degC_error_s": _rounded(error.comfort_error),
        "drink_end_degC": _rounded(error.drink_end),
        "hold_time_s": _rounded(error.hold),
        "hold_time_error_s": _rounded(error.hold_error),
    }


def _rounded(value: float) -> float | None:
    return float(f"{value:.{FIGURES}g}") if np.isfinite(value) else None
