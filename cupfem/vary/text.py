"""An outcome as plain text: what ran, what keeps the limits, what moves each figure, the best ten."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from cupfem.run import CAUTION
from cupfem.vary.outcome import PASSED, Outcome, Row, in_shown_unit
from cupfem.vary.plan import SAMPLED
from cupfem.vary.reading import (
    Sense,
    best_rows,
    failure_share,
    interactions,
    main_effects,
    sobol_indices,
)

MOST = 5
"""Factors that are told of each figure."""
LEAST = 0.01
"""Share of the variance from which an interaction is told."""
BEST = 10


def outcome_text(outcome: Outcome, aim: tuple[str, Sense] | None = None) -> str:
    """The outcome as text.

    Parameters
    ----------
    aim:
        Figure by which cases are better, and whether least or most of it; left out: the least of the first
        recorded.
    """
    lines = [outcome.title, f"{len(outcome)} cases, {len(outcome.errors)} failed", *_first_error(outcome)]
    lines += ["", *_limits(outcome), "", *_aligned(figure_table(outcome))]
    for key in outcome.recorded:
        lines += _movers(outcome, key)
    key, sense = aim or (outcome.recorded[0], "least")
    lines += ["", *_best(outcome, key, sense), "", CAUTION]
    return "\n".join(lines) + "\n"


def _first_error(outcome: Outcome) -> list[str]:
    return [f"first: case {row.number}: {row.error}" for row in outcome.errors[:1]]


def _limits(outcome: Outcome) -> list[str]:
    if not outcome.goals:
        return ["no limits"]
    lines = [f"limit: {goal.text}" for goal in outcome.goals]
    if outcome.combine in SAMPLED:
        return [*lines, f"{failure_share(outcome).text}, 95 % interval of Wilson"]
    verdicts = outcome.verdicts()
    told = ", ".join(f"{verdicts.count(word)} {word}" for word in dict.fromkeys(sorted(verdicts)))
    return [*lines, f"cases: {told}"]


def figure_table(outcome: Outcome) -> list[Sequence[str]]:
    """Heads, then for each recorded figure its least, mean and most, and what has to be said beside them."""
    rows: list[Sequence[str]] = [("figure", "least", "mean", "most", "")]
    for key in outcome.recorded:
        values = outcome.figure(key)
        known = values[~np.isnan(values)]
        if len(known):
            told = [f"{value:.4g}" for value in (known.min(), known.mean(), known.max())]
            rows.append((key, *told, outcome.note(key)))
    return rows


def best_table(outcome: Outcome, key: str, sense: Sense) -> list[Sequence[str]]:
    """Heads, then the best cases that keep the limits: what varied, what came out."""
    heads = ["case", *(varied.heading for varied in outcome.varied), *outcome.recorded]
    return [heads, *(_cells(outcome, row) for row in best_rows(outcome, key, sense, BEST))]


def _movers(outcome: Outcome, key: str) -> list[str]:
    """What moves a figure: indices of variance where the plan gives them, else shares of the variance."""
    values = outcome.figure(key)
    known = values[~np.isnan(values)]
    if len(known) < 2 or np.ptp(known) == 0.0 or outcome.combine == "best":
        return []
    lines = ["", f"what moves {key}:"]
    if outcome.combine == "sobol indices" and len(known) == len(values):
        rows = [
            (f"  {index.key}", f"{index.first:.2f} {_ends(index.first_interval)} by itself",
             f"{index.total:.2f} {_ends(index.total_interval)} with its interactions")
            for index in sorted(sobol_indices(outcome, key), key=lambda index: -index.total)[:MOST]
        ]  # fmt: skip
        return lines + _aligned(rows)
    found = main_effects(outcome, key)[:MOST]
    rows = [(f"  {effect.varied.key}", f"{effect.share:.1%} of the variance", "") for effect in found]
    both = interactions(outcome, key)[:MOST]
    rows += [
        (f"  {two.first} with {two.second}", f"{two.share:.1%}", "") for two in both if two.share >= 0.01
    ]
    return lines + _aligned(rows)


def _best(outcome: Outcome, key: str, sense: Sense) -> list[str]:
    rows = best_table(outcome, key, sense)
    if len(rows) == 1:
        return [f"no case {'keeps the limits' if outcome.goals else 'ran'}"]
    kept = " that keep the limits" if outcome.goals else ""
    count = outcome.verdicts().count(PASSED)
    told = f"the {len(rows) - 1} of {count} cases{kept} with the {sense} {key}:"
    return [told, *_aligned(rows)]


def _cells(outcome: Outcome, row: Row) -> list[str]:
    cells = [str(row.number)]
    for varied in outcome.varied:
        value = row.inputs.get(varied.key)
        cells.append(f"{in_shown_unit(value, varied):.5g}" if varied.is_number else str(value))
    for key in outcome.recorded:
        figure = outcome.figure(key)[row.number - 1]
        least = ">= " if outcome.censored(key)[row.number - 1] else ""
        cells.append(f"{least}{figure:.4g}")
    return cells


def _ends(interval: tuple[float, float]) -> str:
    return f"({interval[0]:.2f} to {interval[1]:.2f})"


def _aligned(rows: Sequence[Sequence[str]]) -> list[str]:
    widths = [max(len(row[column]) for row in rows) for column in range(len(rows[0]))]
    return [
        "  ".join(cell.ljust(width) for cell, width in zip(row, widths, strict=True)).rstrip() for row in rows
    ]
