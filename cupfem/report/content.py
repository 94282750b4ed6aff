"""What the page says, as plain values: the template only lays it out."""

from __future__ import annotations

from base64 import b64encode
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from cupfem.exchange.run_folder import versions
from cupfem.figures import (
    Figure,
    drink_figure,
    field_figure,
    field_frames,
    grouped_heats,
    heat_figure,
    png,
    section_figure,
    wall_history,
    wall_map,
    wall_profile,
)
from cupfem.figures.style import clock, degrees, shown, unit_sign
from cupfem.inputs import resolved_toml
from cupfem.materials import Material, SourceRow, sources_table
from cupfem.quantities import Units
from cupfem.run import CAUTION, COMFORT, FREE_WALL, Run, headline

DPI, FRAME_DPI = 110, 95
FIRST_FRAME = 60.0
"""Time [s] at which the field is shown first, or the nearest."""
NUMERICAL = "numerical:"


@dataclass(frozen=True)
class Picture:
    """An embedded picture with its words."""

    data: str
    alt: str
    caption: str


@dataclass(frozen=True)
class Frame:
    """The field at one time."""

    data: str
    time: str


def content(run: Run, units: Units = "si") -> dict[str, Any]:
    """All values of the page."""
    uncertainty = headline.uncertainty_lines(run)
    frames = list(field_frames(run, units))
    return {
        "cup": run.cup.title,
        "serving": run.serving.title,
        "sentence": verdict_sentence(run),
        "verdicts": [
            (verdict.passed, headline.verdict_line(verdict, units)) for verdict in headline.verdicts(run)
        ],
        "free_wall": FREE_WALL,
        "caution": CAUTION,
        "rows": headline.rows(run, run.figures(), units),
        "pictures": _pictures(run, units),
        "frames": [Frame(_embedded(figure, FRAME_DPI), clock(time)) for time, figure in frames],
        "first": min(range(len(frames)), key=lambda index: abs(frames[index][0] - FIRST_FRAME)),
        "heats": heat_rows(run, units),
        "numerical": [_after(line, NUMERICAL) for line in uncertainty if line.startswith(NUMERICAL)],
        "model": [_after(line, "model:") for line in uncertainty if not line.startswith(NUMERICAL)],
        "ranges": run.ranges,
        "defaults": run.defaults,
        "residual": f"{100 * abs(run.ledger.relative_residual):.1g} %",
        "materials": source_rows(run, units),
        "inputs": {"cup.toml": resolved_toml(run.cup), "serving.toml": resolved_toml(run.serving)},
        "command": f"cupfem pour cup.toml serving.toml --fineness {run.fineness:g} --report",
        "versions": ", ".join(f"{name} {release}" for name, release in versions().items()),
    }


def verdict_sentence(run: Run) -> str:
    """Whether the target is met, in one sentence."""
    verdicts = headline.verdicts(run)
    if not verdicts:
        return "No target was set: the figures below are for comparing designs."
    failed = sum(not verdict.passed for verdict in verdicts)
    if not failed:
        return (
            "The cup meets its target."
            if len(verdicts) == 1
            else f"The cup meets all {len(verdicts)} targets."
        )
    return (
        f"The cup misses {failed} of {len(verdicts)} targets."
        if len(verdicts) > 1
        else "The cup misses its target."
    )


def heat_rows(run: Run, units: Units) -> list[tuple[str, str, str]]:
    """Where the heat went: name, amount and share of all that was lost by cooling."""
    heats = grouped_heats(run)
    total = sum(heats.values())
    return [
        (
            name,
            f"{shown(heat, 'energy', units):.2f} {unit_sign('energy', units)}",
            f"{100 * heat / total:.1f} %" if total else "",
        )
        for name, heat in heats.items()
    ]


def source_rows(run: Run, units: Units) -> list[SourceRow]:
    """A row for each property of each material of the cup."""
    used: dict[str, Material] = {layer.material.name: layer.material for layer in run.meridian.layers}
    if run.meridian.base is not None:
        used.setdefault(run.meridian.base.material.name, run.meridian.base.material)
    return sources_table(used.values(), units)


def _pictures(run: Run, units: Units) -> Mapping[str, Picture]:
    limit = degrees(COMFORT, units)

    def picture(figure: Figure, alt: str, caption: str) -> Picture:
        return Picture(_embedded(figure, DPI), alt, caption)

    return {
        "section": picture(
            section_figure(run, units),
            "Dimensioned half section of the cup with details of brim, wall and foot",
            "Half section in true proportion; details of the wall are magnified.",
        ),
        "map": picture(
            wall_map(run, units=units),
            "Map of the free outer wall's temperature over time and height",
            f"Free outer wall over time and height. Blue: level of the drink; double line: {limit}.",
        ),
        "history": picture(
            wall_history(run, units=units),
            "Free outer wall's temperature against time at several heights",
            "Free outer wall against time at several heights; time is logarithmic.",
        ),
        "profile": picture(
            wall_profile(run, units=units),
            "Free outer wall's temperature against height at several times",
            "Free outer wall against height; dashes on the right mark the level at the same times.",
        ),
        "field": picture(
            field_figure(run, units=units),
            "Temperature in the section and across the wall at several times",
            "Temperature in the section, and across the wall unrolled.",
        ),
        "drink": picture(
            drink_figure(run, units), "Temperature and level of the drink against time", "The drink."
        ),
        "heat": picture(
            heat_figure(run, units),
            "Heat flows against time, and heats over the run",
            "Heat that left, by way.",
        ),
    }


def _embedded(figure: Figure, dpi: float) -> str:
    return b64encode(png(figure, dpi)).decode("ascii")


def _after(line: str, mark: str) -> str:
    return line.removeprefix(mark).strip()
