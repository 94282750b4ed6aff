"""The comparison as a memo, as CSV, and as headline figures."""

from __future__ import annotations

import csv
import io
import math
from collections.abc import Sequence

import numpy as np

from cupfem.breakdown.result import BOUNDS, GOOD_ENOUGH, Slab
from cupfem.breakdown.rungs import RUNGS
from cupfem.quantities import Units, format_quantity
from cupfem.run import CAUTION, MOISTURE

Row = Sequence[str]


def memo(slab: Slab, units: Units) -> str:
    """All that a person needs to decide, as plain text."""
    run, place = slab.run, slab.reference
    height = _length(float(slab.heights[place]), units)
    parts = [
        f"{run.cup.title} - {run.serving.title}",
        "One-dimensional estimates beside the finite-element field",
        "",
        f"Station {height} high ({_kind(slab, place)}); hold times: thin skin, picked up at {slab.pick_up:g} s",
        *_columns(_rung_rows(slab, place, units)),
        f"f    first touch by effusivities: contact at {_temperature(float(slab.first.contact[place]), units)}, "
        f"skin surface at pain {_time(float(slab.first.hold[place]))}",
        "",
        "What the estimates assume there",
        *_columns(_assumption_rows(slab, place)),
        "",
        f"All stations: outer wall at the end, error of each rung at its worst from 1 s on [{_kelvin(units)}]",
        *_columns(_station_rows(slab, units)),
        "",
        "Not one-dimensional",
        *_flag_lines(slab, units),
        "",
        *_map_lines(slab, units),
        "",
        slab.sentence(units),
        "",
        *_notes(slab),
    ]
    return "\n".join(parts)


def _rung_rows(slab: Slab, place: int, units: Units) -> list[Row]:
    unit = _kelvin(units)
    rows: list[Row] = [
        ("", "rung", "40 degC after", "(error)", "wall at end", f"worst [{unit}]",
         f"within {_difference(GOOD_ENOUGH, units)} {unit}", "drink at end", "hold", "(error)")
    ]  # fmt: skip
    field, drink = slab.field(place), slab.run.series.drink_temperature
    rows.append(
        ("", "field", _time(slab.field_comfort(place)), "", _temperature(float(field[-1]), units), "", "",
         _temperature(float(drink[-1]), units), _time(float(slab.holds["field"].thin[place])), "")
    )  # fmt: skip
    for error in slab.errors[place]:
        span = "never" if error.span is None else f"{error.span[0]:.3g} to {error.span[1]:.3g} s"
        end = float(slab.rungs[place].outer[error.rung][-1])
        rows.append(
            (error.rung, RUNGS[error.rung], _time(error.comfort), _signed(error.comfort_error),
             _temperature(end, units), _difference(error.worst, units), span,
             _temperature(error.drink_end, units), _time(error.hold), _signed(error.hold_error))
        )  # fmt: skip
    return rows


def _assumption_rows(slab: Slab, place: int) -> list[Row]:
    return [
        ("FAILS" if each.failed else "holds", each.text, f"{each.number:.3g}", f"limit {each.limit:g}",
         f"({', '.join(each.rungs)})")
        for each in slab.assumptions(place)
    ]  # fmt: skip


def _station_rows(slab: Slab, units: Units) -> list[Row]:
    rows: list[Row] = [("height", "", "field", *RUNGS, "2-D - 1-D", "flags")]
    for place in range(len(slab.heights))[::-1]:
        worst = [_difference(error.worst, units) for error in slab.errors[place]]
        off = slab.map.worst_at(float(slab.heights[place]))
        rows.append(
            (_length(float(slab.heights[place]), units), _kind(slab, place),
             _temperature(float(slab.field(place)[-1]), units), *worst, _difference(off, units),
             ", ".join(flag.name for flag in slab.flagged[place]))
        )  # fmt: skip
    return rows


def _flag_lines(slab: Slab, units: Units) -> list[str]:
    lines = []
    for height in slab.heights[::-1]:
        flags = slab.flags(float(height), units)
        if flags:
            lines.append(f"  {_length(float(height), units)}: " + "; ".join(_told(*each) for each in
                         ((flag.name, flag.text) for flag in flags)))  # fmt: skip
    return lines or ["  none of the stations"]


def _told(name: str, text: str) -> str:
    return text if name in text or name in ("lateral flux",) else f"{name} {text}"


def _map_lines(slab: Slab, units: Units) -> list[str]:
    shares = [
        f"{_difference(bound, units)} {_kelvin(units)}: {100 * slab.map.within(bound):.0f} %"
        for bound in BOUNDS
    ]
    walls = [f"{100 * slab.map.wall_within(bound):.0f} %" for bound in BOUNDS]
    return [
        "2-D minus 1-D (rung d behind the field's own drink), share of wall and time within "
        + ", ".join(shares),
        f"share of the height that stays within them from 1 s on: {', '.join(walls)}",
        f"(rung d solved at {slab.map.solves} heights, interpolated where stack and wetting are the same)",
    ]


def _notes(slab: Slab) -> list[str]:
    lines = ["Rungs a to c and e see the serving as poured: no sips, no refills, no steps of the room."]
    if any(layer.material.surface_class == "board" for layer in slab.run.meridian.layers):
        lines.append(f"model: {MOISTURE}")
    return [*lines, CAUTION]


def _kind(slab: Slab, place: int) -> str:
    rungs = slab.rungs[place].station
    if rungs.wetted:
        return "beside the drink"
    return "above the level" if rungs.inner.films else "below the base"


def _columns(rows: Sequence[Row]) -> list[str]:
    widths = [max(len(row[index]) for row in rows) for index in range(len(rows[0]))]
    return [
        "  ".join(cell.ljust(width) for cell, width in zip(row, widths, strict=True)).rstrip() for row in rows
    ]


def _time(seconds: float) -> str:
    if math.isnan(seconds):
        return "-"
    return f"{seconds:.3g} s" if math.isfinite(seconds) else "not reached"


def _signed(seconds: float) -> str:
    return "(-)" if math.isnan(seconds) else f"({seconds:+.2g})"


def _temperature(value: float, units: Units) -> str:
    if math.isnan(value):
        return "none left"
    return format_quantity(value, "temperature", units, digits=3 if abs(value) < 100 else 4)


def _length(value: float, units: Units) -> str:
    return format_quantity(value, "length", units, digits=3)


def _kelvin(units: Units) -> str:
    return "degF" if units == "us" else "K"


def _difference(value: float, units: Units) -> str:
    return f"{value * (1.8 if units == 'us' else 1.0):.2g}"


# -- files ---------------------------------------------------------------------------------------------------

FIGURES = 6
"""Significant digits in files."""


def csv_text(slab: Slab) -> str:
    """One row for each station and rung; an empty cell where there is no value or it was not reached."""
    text = io.StringIO()
    writer = csv.writer(text, lineterminator="\n")
    writer.writerow(
        ["height_mm", "place", "rung", "outer_end_degC", "field_outer_end_degC", "outer_worst_error_K",
         "outer_end_error_K", "past_40_degC_s", "field_past_40_degC_s", "past_40_degC_error_s", "good_since_s",
         "good_until_s", "drink_end_degC", "drink_end_error_K", "hold_time_s", "field_hold_time_s",
         "hold_time_error_s", "two_minus_one_d_worst_K", "lateral_share", "outer_biot", "wall_time_scale_s",
         "radiation_share", "flags"]
    )  # fmt: skip
    for place in range(len(slab.heights)):
        for error in slab.errors[place]:
            writer.writerow(_csv_row(slab, place, error.rung))
    return text.getvalue()


def _csv_row(slab: Slab, place: int, rung: str) -> list[str]:
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
    return [_number(1e3 * height), _kind(slab, place), rung, *map(_number, values), flags]


def _number(value: float) -> str:
    return f"{value:.{FIGURES}g}" if math.isfinite(value) else ""


def headline(slab: Slab) -> dict[str, object]:
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


def _rung_figures(slab: Slab, place: int, rung: str) -> dict[str, object]:
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
