"""What the page says, as plain values: the template only lays it out."""

from __future__ import annotations

from base64 import b64encode
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from cupfem.against import Candidate, hold_answers, hold_grounds, hold_heads, hold_rows, side_by_side
from cupfem.breakdown import Slab
from cupfem.exchange.run_folder import versions
from cupfem.figures import (
    Figure,
    against_figure,
    field_frames,
    grouped_heats,
    hold_figure,
    png,
)
from cupfem.figures.against import MARKS
from cupfem.figures.breakdown import difference_figure, ladder_figure
from cupfem.figures.files import DPI, PICTURES
from cupfem.figures.style import clock, degrees, quantity, shown, unit_sign
from cupfem.inputs import resolved_toml
from cupfem.materials import Material, SourceRow, sources_table
from cupfem.quantities import Units
from cupfem.run import CAUTION, COMFORT, FREE_WALL, Run, headline
from cupfem.run.touched import told
from cupfem.touch.holding import HEIGHTS, Hold

FRAME_DPI = 95
FIRST_FRAME = 60.0
"""Time [s] at which the field is shown first, or the nearest."""
NUMERICAL = "numerical:"
DIFFERENCE_WORDS = (
    "Map of the difference between field and one-dimensional estimate over time and height",
    "Where and when a one-dimensional estimate of the outer wall is off; grey: ends on the wall.",
)
LADDER_WORDS = (
    "Outer wall against time by every estimate and by the field",
    "The estimates, from the simplest up, beside the field at one station.",
)
HOLD_WORDS = (
    "Hold time against height at three pick-ups, and against the pick-up in the grip band",
    "How long a finger pad can stay: against height, and against the moment at which it touches.",
)
AGAINST_WORDS = (
    "Outer wall and drink of each cup against time, and how long each can be held",
    "The cups in the same serving; their letters are those of the table.",
)


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


def content(
    candidates: Sequence[Candidate],
    asked: float,
    units: Units = "si",
    drawn: Mapping[str, Path] | None = None,
    slab: Slab | None = None,
) -> dict[str, Any]:
    """All values of the page: of the first cup, and of the others beside it.

    `asked` [s] is the hold time to judge by; `drawn` are pictures that exist as files, by name.
    """
    first, run = candidates[0], candidates[0].run
    uncertainty = headline.uncertainty_lines(run)
    frames = list(field_frames(run, units))
    return {
        "cup": run.cup.title,
        "serving": run.serving.title,
        "sentence": verdict_sentence(run),
        "verdicts": [
            (verdict.passed, headline.verdict_line(verdict, units)) for verdict in headline.verdicts(run)
        ],
        "note": FREE_WALL if run.touch is None else "",
        "held": held_sentence(run, units),
        "caution": CAUTION,
        "rows": headline.rows(run, run.figures(), units),
        "pictures": _pictures(candidates, asked, units, drawn or {})
        | ({} if slab is None else _slab_pictures(slab, units)),
        "estimates": None if slab is None else {"sentence": slab.sentence(units), "table": slab.table(units)},
        "hold": None if first.hold is None else _hold(first.hold, asked, units),
        "against": _against(candidates, asked, units),
        "frames": [Frame(_embedded(figure, FRAME_DPI), clock(time)) for time, figure in frames],
        "first": min(range(len(frames)), key=lambda index: abs(frames[index][0] - FIRST_FRAME)),
        "heats": heat_rows(run, units),
        "numerical": [_after(line, NUMERICAL) for line in uncertainty if line.startswith(NUMERICAL)],
        "model": [_after(line, "model:") for line in uncertainty if not line.startswith(NUMERICAL)],
        "ranges": run.ranges,
        "defaults": run.defaults,
        "residual": f"{100 * abs(run.ledger.relative_residual):.1g} %",
        "materials": source_rows(run, units),
        "inputs": _inputs(candidates),
        "command": _command(candidates, asked, slab),
        "versions": ", ".join(f"{name} {release}" for name, release in versions().items()),
    }


def verdict_sentence(run: Run) -> str:
    """Whether the target is met and by how much, in one sentence."""
    verdicts = headline.verdicts(run)
    if not verdicts:
        return "No target was set: the figures below are for comparing designs."
    failed = [verdict for verdict in verdicts if not verdict.passed]
    if len(verdicts) == 1:
        return "The cup misses its target." if failed else "The cup meets its target."
    if failed:
        return f"The cup misses {len(failed)} of {len(verdicts)} targets."
    return f"The cup meets all {len(verdicts)} targets."


def held_sentence(run: Run, units: Units) -> str:
    """How long the cup can be held, in one sentence; empty where that was not asked."""
    if run.touch is None:
        return ""
    touch = run.touch
    low, high, place = (quantity(z, "length", units) for z in (touch.low, touch.high, touch.height))
    thin, thick = told(touch.thin, touch.at_least), told(touch.thick, touch.thick_at_least)
    return (
        f"Between {low} and {high} high it can be held for {thin} (thin skin) to {thick} (thick skin); "
        f"shortest {place} high, picked up {touch.pick_up:.3g} s after the pour."
    )


def _hold(hold: Hold, asked: float, units: Units) -> dict[str, Any]:
    """The tables of hold times."""
    return {
        "heads": hold_heads(hold, units),
        "rows": hold_rows(hold, units),
        "answers": hold_answers(hold, asked, units),
        "grounds": hold_grounds(hold),
    }


def _against(candidates: Sequence[Candidate], asked: float, units: Units) -> dict[str, Any] | None:
    """The table of cups side by side; None for one alone."""
    if len(candidates) < 2:
        return None
    return {
        "heads": [f"{mark} {each.title}" for mark, each in zip(MARKS, candidates, strict=False)],
        "rows": side_by_side(candidates, asked, units),
    }


def _inputs(candidates: Sequence[Candidate]) -> dict[str, str]:
    """The files of the run by their names."""
    run = candidates[0].run
    others = {
        f"cup_{number}.toml": resolved_toml(each.run.cup) for number, each in enumerate(candidates[1:], 2)
    }
    return {"cup.toml": resolved_toml(run.cup), "serving.toml": resolved_toml(run.serving), **others}


def _command(candidates: Sequence[Candidate], asked: float, slab: Slab | None) -> str:
    """The line that makes the page again: `hold` where the map is full, `slab` where touch was not judged."""
    first = candidates[0]
    full = first.hold is not None and len(first.hold.heights) >= HEIGHTS
    job = "hold" if full else "slab" if slab is not None and first.run.touch is None else "pour"
    line = f"cupfem {job} cup.toml serving.toml"
    line += "".join(f" --against cup_{number}.toml" for number in range(2, len(candidates) + 1))
    line += f' --asked "{asked:g} s"' if full else ""
    return f"{line} --fineness {first.run.fineness:g} --report"


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


def _pictures(
    candidates: Sequence[Candidate], asked: float, units: Units, drawn: Mapping[str, Path]
) -> dict[str, Picture]:
    first, run = candidates[0], candidates[0].run
    pictures = {
        name: Picture(_drawn(drawn[name]) if name in drawn else _embedded(draw(run, units), DPI), *words)
        for name, draw, words in ((name, PICTURES[name], words) for name, words in _words(units).items())
    }
    if first.hold is not None:
        figure = (
            _drawn(drawn["hold"])
            if "hold" in drawn
            else _embedded(hold_figure(first.hold, asked, units), DPI)
        )
        pictures["hold"] = Picture(figure, *HOLD_WORDS)
    if len(candidates) > 1:
        pictures["against"] = Picture(_embedded(against_figure(candidates, units), DPI), *AGAINST_WORDS)
    return pictures


def _slab_pictures(slab: Slab, units: Units) -> dict[str, Picture]:
    return {
        "difference": Picture(_embedded(difference_figure(slab, units), DPI), *DIFFERENCE_WORDS),
        "ladder": Picture(_embedded(ladder_figure(slab, units=units), DPI), *LADDER_WORDS),
    }


def _words(units: Units) -> dict[str, tuple[str, str]]:
    """What a picture shows, for those who cannot see it, and its caption."""
    limit = degrees(COMFORT, units)
    return {
        "section": (
            "Dimensioned half section of the cup with details of brim, wall and foot",
            "Half section in true proportion; details of the wall are magnified.",
        ),
        "wall_map": (
            "Map of the free outer wall's temperature over time and height",
            f"Free outer wall over time and height. Blue: level of the drink; double line: {limit}.",
        ),
        "wall_history": (
            "Free outer wall's temperature against time at several heights",
            "Free outer wall against time at several heights; time is logarithmic.",
        ),
        "wall_profile": (
            "Free outer wall's temperature against height at several times",
            "Free outer wall against height; dashes on the right mark the level at the same times.",
        ),
        "field": (
            "Temperature in the section and across the wall at several times",
            "Temperature in the section, and across the wall unrolled.",
        ),
        "drink": ("Temperature and level of the drink against time", "The drink."),
        "heat": ("Heat flows against time, and heats over the run", "Heat that left, by way."),
    }


def _drawn(path: Path) -> str:
    return b64encode(path.read_bytes()).decode("ascii")


def _embedded(figure: Figure, dpi: float) -> str:
    return b64encode(png(figure, dpi)).decode("ascii")


def _after(line: str, mark: str) -> str:
    return line.removeprefix(mark).strip()
