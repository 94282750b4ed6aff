"""The comparison as a memo."""

from __future__ import annotations

import math
from collections.abc import Sequence

from cupfem.breakdown.map import BOUNDS
from cupfem.breakdown.places import Flag
from cupfem.breakdown.result import GOOD_ENOUGH, Comparison
from cupfem.breakdown.rungs import RUNGS
from cupfem.quantities import Units, format_quantity
from cupfem.run import CAUTION, COMFORT, MOISTURE
from cupfem.skin import PAIN

Row = Sequence[str]


def memo(slab: Comparison, units: Units) -> str:
    """All that a person needs to decide, as plain text."""
    run, place = slab.run, slab.reference
    height = _length(float(slab.heights[place]), units)
    parts = [
        f"{run.cup.title} - {run.serving.title}",
        "One-dimensional estimates beside the finite-element field",
        "",
        f"Station {height} high ({kind(slab, place)}); hold: thin skin, picked up at {slab.pick_up:g} s",
        *_columns(_rung_rows(slab, place, units)),
        _first_touch(slab, place, units),
        "",
        "What the estimates assume there",
        *_columns(_assumption_rows(slab, place)),
        "",
        f"All stations: field at the end, worst error of each rung from 1 s on [{_kelvin(units)}]",
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


def _first_touch(slab: Comparison, place: int, units: Units) -> str:
    contact, hold = float(slab.first.contact[place]), float(slab.first.hold[place])
    reached = f"skin surface at {_temperature(PAIN, units)}: {_time(hold)}"
    return f"f    first touch by effusivities: contact at {_temperature(contact, units)}, {reached}"


def _rung_rows(slab: Comparison, place: int, units: Units) -> list[Row]:
    unit = _kelvin(units)
    rows: list[Row] = [
        ("", "rung", f"{_temperature(COMFORT, units)} after", "(error)", "wall at end", f"worst [{unit}]",
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


def _assumption_rows(slab: Comparison, place: int) -> list[Row]:
    return [
        ("FAILS" if each.failed else "holds", each.text, f"{each.number:.3g}", f"limit {each.limit:g}",
         f"({', '.join(each.rungs)})")
        for each in slab.assumptions(place)
    ]  # fmt: skip


def _station_rows(slab: Comparison, units: Units) -> list[Row]:
    rows: list[Row] = [("height", "", "field", *RUNGS, "2-D - 1-D", "flags")]
    for place in range(len(slab.heights))[::-1]:
        worst = [_difference(error.worst, units) for error in slab.errors[place]]
        off = slab.map.worst_at(float(slab.heights[place]))
        rows.append(
            (_length(float(slab.heights[place]), units), kind(slab, place),
             _temperature(float(slab.field(place)[-1]), units), *worst, _difference(off, units),
             ", ".join(flag.name for flag in slab.flagged[place]))
        )  # fmt: skip
    return rows


def _flag_lines(slab: Comparison, units: Units) -> list[str]:
    lines = []
    for height in slab.heights[::-1]:
        flags = slab.flags(float(height), units)
        if flags:
            lines.append(f"  {_length(float(height), units)}: {'; '.join(_flag_words(flags))}")
    return lines or ["  none of the stations"]


def _flag_words(flags: Sequence[Flag]) -> list[str]:
    """The nearest end in full, further ends by their names, then what is no end."""
    ends = sorted((flag for flag in flags if flag.end), key=lambda flag: flag.number)
    words = [f"{flag.name} {flag.text}" for flag in ends[:1]]
    words += [f"also near: {', '.join(flag.name for flag in ends[1:])}"] if ends[1:] else []
    return words + [flag.text for flag in flags if not flag.end]


def _map_lines(slab: Comparison, units: Units) -> list[str]:
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


def _notes(slab: Comparison) -> list[str]:
    lines = ["Rungs a to c and e see the serving as poured: no sips, no refills, no steps of the room."]
    solids = [layer.material for layer in slab.run.meridian.layers if layer.material.kind == "solid"]
    if any(material.surface_class == "board" for material in solids):
        lines.append(f"model: {MOISTURE}")
    return [*lines, CAUTION]


def kind(slab: Comparison, place: int) -> str:
    """Where a station lies, in words."""
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
