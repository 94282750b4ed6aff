"""The outcome of a plan as one page: what keeps the limits, what moves each figure, the best drawn."""

from __future__ import annotations

import tomllib
from base64 import b64encode
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np
from jinja2 import Environment, PackageLoader, StrictUndefined

from cupfem.cup import Cup
from cupfem.drawing import survey
from cupfem.figures import Figure, png, section_figure
from cupfem.figures.vary import front_figure, outcome_pictures, words
from cupfem.run import CAUTION
from cupfem.vary import Outcome, Row
from cupfem.vary.outcome import PASSED
from cupfem.vary.plan import SAMPLED
from cupfem.vary.reading import Sense, best_rows, failure_share, pareto_front
from cupfem.vary.text import best_table, figure_table

TEMPLATE = "outcome.html"
DPI = 100
MOST_ERRORS, DRAWN = 10, 3
CAPTIONS = {
    "tornado": "What moves {}: from the low to the high value of each key",
    "effects": "Mean of {} against each key, the others averaged",
    "indices": "Shares of the variance of {} with their intervals",
    "chart": "{} over two keys",
}
"""How the name of a picture begins -> its caption."""
FRONT: tuple[tuple[str, str, Sense, Sense], ...] = (
    ("board_mass_g", "hold_time_s", "least", "most"),
    ("board_mass_g", "outer_max_degC", "least", "least"),
    ("board_mass_g", "drink_end_degC", "least", "most"),
)
"""Figures that are set against each other where both are recorded, and which is good."""


@dataclass(frozen=True)
class Shown:
    """An embedded picture with its words."""

    data: str
    alt: str
    caption: str


def write_outcome(outcome: Outcome, path: str | Path, aim: tuple[str, Sense] | None = None) -> Path:
    """Write the page; returns its path. A second call writes the same bytes.

    Parameters
    ----------
    aim:
        Figure by which cases are better, and which of it is good; left out: the least of the first recorded.
    """
    place = Path(path)
    place.write_text(render_outcome(outcome, aim), encoding="utf-8")
    return place


def render_outcome(outcome: Outcome, aim: tuple[str, Sense] | None = None) -> str:
    """The page as HTML with everything in it: no other file and no network is needed."""
    environment = Environment(
        loader=PackageLoader("cupfem.report"),
        autoescape=True,
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
    )
    return environment.get_template(TEMPLATE).render(_content(outcome, aim or (outcome.recorded[0], "least")))


def _content(outcome: Outcome, aim: tuple[str, Sense]) -> dict[str, Any]:
    drawn = outcome.combine in SAMPLED
    return {
        "title": outcome.title,
        "sentence": _sentence(outcome, aim),
        "limits": [goal.text for goal in outcome.goals],
        "failures": failure_share(outcome).text if outcome.goals and drawn else "",
        "figures": figure_table(outcome),
        "aim": f"{aim[1]} {words(aim[0])}",
        "best": best_table(outcome, *aim),
        "fronts": [_front(outcome, *pair) for pair in FRONT if {pair[0], pair[1]} <= set(outcome.recorded)],
        "sections": _sections(outcome, aim),
        "pictures": [
            (words(key), [_shown(picture(), _caption(name, key)) for name, picture in pictures.items()])
            for key, pictures in _moving(outcome)
        ],
        "errors": [(row.number, row.error) for row in outcome.errors[:MOST_ERRORS]],
        "failed": len(outcome.errors),
        "caution": CAUTION,
    }


def _sentence(outcome: Outcome, aim: tuple[str, Sense]) -> str:
    kept = outcome.verdicts().count(PASSED)
    limits = " keep the limits" if outcome.goals else " ran"
    told = f"{kept} of {len(outcome)} cases{limits}"
    best = best_rows(outcome, *aim, count=1)
    return f"{told}; case {best[0].number} has the {aim[1]} {words(aim[0])} of them." if best else f"{told}."


def _moving(outcome: Outcome) -> list[tuple[str, Any]]:
    """Recorded figures that are not the same in all cases, with their pictures."""
    found = []
    for key in outcome.recorded:
        values = outcome.figure(key)
        known = values[~np.isnan(values)]
        if len(known) > 1 and np.ptp(known) > 0.0:
            found.append((key, outcome_pictures(outcome, key)))
    return found


def _front(outcome: Outcome, x: str, y: str, good_x: Sense, good_y: Sense) -> Shown:
    return _shown(front_figure(outcome, x, y, (good_x, good_y)), f"{words(y)} against {words(x)}")


def _sections(outcome: Outcome, aim: tuple[str, Sense]) -> list[Shown]:
    """Sections of the best designs: those of the front that keep the limits, else of the best by the aim."""
    pair = next((pair for pair in FRONT if {pair[0], pair[1]} <= set(outcome.recorded)), None)
    verdicts = outcome.verdicts()
    rows = best_rows(outcome, *aim, count=DRAWN)
    if pair is not None:
        front = pareto_front(outcome, {pair[0]: pair[2], pair[1]: pair[3]})
        front = [row for row in front if verdicts[row.number - 1] == PASSED]
        rows = _spread(sorted(front, key=lambda row: float(row.figures[pair[0]] or 0.0))) or rows
    return [_section(row) for row in rows if row.text and not row.text.startswith("{")]


def _spread(front: list[Row]) -> list[Row]:
    """The first, the middle and the last."""
    return front if len(front) <= DRAWN else [front[0], front[len(front) // 2], front[-1]]


def _section(row: Row) -> Shown:
    data = tomllib.loads(row.text)
    data.pop("serving", None)
    figure = section_figure(survey(Cup.from_data(data)))
    varied = ", ".join(f"{key} {value}" for key, value in row.inputs.items())
    return _shown(figure, f"Case {row.number}: {varied}")


def _caption(name: str, key: str) -> str:
    return CAPTIONS[name.partition("_")[0]].format(words(key))


def _shown(figure: Figure, caption: str) -> Shown:
    return Shown(b64encode(png(figure, DPI)).decode("ascii"), caption, caption)
