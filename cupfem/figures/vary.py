"""Pictures of an outcome: main effects, tornado, variance indices, the front, and a chart over two keys."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from pathlib import Path

import numpy as np
from matplotlib.axes import Axes
from matplotlib.colors import BoundaryNorm
from matplotlib.figure import Figure
from matplotlib.ticker import MaxNLocator
from numpy.typing import NDArray

from cupfem.errors import InputError
from cupfem.figures import style
from cupfem.figures.files import png
from cupfem.vary.outcome import FAILED, PASSED, UNDECIDED, UNITS, Outcome, Row, Varied
from cupfem.vary.reading import Bar, Effect, Sense, main_effects, pareto_front, sobol_indices, tornado

Floats = NDArray[np.float64]

MOST_FACTORS = 12
"""Factors that a picture shows: those of the largest effect."""
COLUMNS = 3
FIRST_ORDER, TOTAL = "#0b6e99", "#b3541e"
LOW, HIGH = "#4aa3c7", "#d98b2b"
MARKS = {PASSED: ("o", "#5f8f4e"), FAILED: ("x", style.ALERT), UNDECIDED: ("D", "#7b6bb3")}
SHADES = 8


def main_effects_figure(outcome: Outcome, key: str) -> Figure:
    """Mean of a figure against each factor, the others averaged, on one scale."""
    effects = main_effects(outcome, key)[:MOST_FACTORS]
    rows = -(-len(effects) // COLUMNS)
    height = 1.1 + 2.3 * rows
    figure = style.new_figure(8.4, height, f"{outcome.title}: {words(key)}", _note(outcome, key))
    for place, effect in enumerate(effects):
        row, column = divmod(place, COLUMNS)
        axes = style.add_axes(
            figure, 0.75 + 2.6 * column, height - 2.1 - 2.3 * row, 8.4 - 3.0 - 2.6 * column, 0.75 + 2.3 * row
        )
        _draw_effect(axes, effect)
    _share_scale(figure.axes)
    figure.axes[0].set_ylabel(label(key), size=style.SMALL)
    return figure


def tornado_figure(outcome: Outcome, key: str) -> Figure:
    """Bars from the low to the high value of each factor, the widest on top."""
    bars = tornado(outcome, key)[:MOST_FACTORS]
    height = 1.5 + 0.42 * len(bars)
    how = "each alone" if outcome.combine == "one at a time" else "means over the others"
    figure = style.new_figure(
        8.0, height, f"{outcome.title}: what moves {words(key)}", _note(outcome, key, how)
    )
    axes = style.add_axes(figure, 2.6, 0.85, 0.9, 0.6)
    for place, bar in enumerate(reversed(bars)):
        _draw_bar(axes, place, bar)
    axes.axvline(bars[0].base, color=style.INK, linewidth=0.8)
    axes.set_yticks(range(len(bars)), [bar.key for bar in reversed(bars)], size=style.SMALL)
    axes.margins(x=0.18)
    axes.set_xlabel(label(key), size=style.NORMAL)
    return figure


def sobol_figure(outcome: Outcome, key: str) -> Figure:
    """First-order and total index of variance of each factor with their intervals."""
    indices = sorted(sobol_indices(outcome, key), key=lambda index: -index.total)[:MOST_FACTORS]
    height = 1.6 + 0.5 * len(indices)
    figure = style.new_figure(
        8.0, height, f"{outcome.title}: shares of the variance of {words(key)}", _note(outcome, key)
    )
    axes = style.add_axes(figure, 2.6, 0.85, 0.3, 0.85)
    places = np.arange(len(indices))[::-1]
    first = np.array([(index.first, *index.first_interval) for index in indices])
    total = np.array([(index.total, *index.total_interval) for index in indices])
    for shift, colour, name, values in (
        (0.14, FIRST_ORDER, "by itself", first),
        (-0.14, TOTAL, "with its interactions", total),
    ):
        middle, low, high = values.T
        errors = np.maximum([middle - low, high - middle], 0.0)
        axes.errorbar(middle, places + shift, xerr=errors, fmt="o", color=colour, capsize=3, label=name)
    axes.set_yticks(places, [index.key for index in indices], size=style.SMALL)
    axes.axvline(0.0, color=style.QUIET, linewidth=0.8)
    axes.set_xlabel("share of the variance, with 95 % interval", size=style.NORMAL)
    axes.legend(loc="lower left", bbox_to_anchor=(0.0, 1.0), ncols=2, frameon=False, fontsize=style.SMALL)
    return figure


def front_figure(outcome: Outcome, x: str, y: str, senses: tuple[Sense, Sense] = ("least", "most")) -> Figure:
    """One figure against another: each case by its verdict, and the cases that no other beats in both."""
    notes = " / ".join(dict.fromkeys([_note(outcome, x), _note(outcome, y)]))
    figure = style.new_figure(8.0, 5.0, f"{outcome.title}: {words(y)} against {words(x)}", notes)
    axes = style.add_axes(figure, 0.8, 0.85, 0.3, 0.85)
    across, up, verdicts = outcome.figure(x), outcome.figure(y), np.array(outcome.verdicts())
    for verdict, (mark, colour) in MARKS.items():
        chosen = verdicts == verdict
        if chosen.any():
            axes.scatter(
                across[chosen], up[chosen], marker=mark, color=colour, s=22, alpha=0.7, label=verdict
            )
    front = sorted(
        pareto_front(outcome, {x: senses[0], y: senses[1]}), key=lambda row: across[row.number - 1]
    )
    places = [row.number - 1 for row in front]
    axes.plot(across[places], up[places], color=style.INK, linewidth=1.0, label="no case beats these in both")
    for number in _spaced(front, across, up):
        place = (across[number - 1], up[number - 1])
        axes.annotate(f"{number}", place, (4, 4), textcoords="offset points", size=style.SMALL)
    style.label_axes(axes, label(x), label(y))
    axes.legend(loc="lower left", bbox_to_anchor=(0.0, 1.0), ncols=4, frameon=False, fontsize=style.SMALL)
    return figure


def chart_figure(
    outcome: Outcome, key: str, x: str | None = None, y: str | None = None, bound: float | None = None
) -> Figure:
    """A recorded figure over two keys of a grid, with the line where it passes a bound.

    Parameters
    ----------
    x, y:
        Paths of the two keys; left out: the first two numbers that vary. Over further ones it is averaged.
    bound:
        In the unit of the figure; left out: that of the plan's limits, if it has one.

    Raises
    ------
    InputError
        If fewer than two numbers vary, each with at least two values.
    """
    across, up = _two(outcome, x, y)
    places = [np.unique(outcome.inputs(varied.key)) for varied in (across, up)]
    places = [place[~np.isnan(place)] for place in places]
    field = _averaged(outcome, key, (across, up), places)
    figure = style.new_figure(8.0, 5.4, f"{outcome.title}: {words(key)}", _note(outcome, key))
    axes = style.add_axes(figure, 0.85, 0.85, 1.3, 0.6)
    edges = MaxNLocator(SHADES).tick_values(float(np.nanmin(field)), float(np.nanmax(field)))
    norm = BoundaryNorm(edges, 256)
    drawn = axes.pcolormesh(*places, field, cmap="viridis", norm=norm, shading="nearest")
    bar = figure.colorbar(drawn, ax=axes, pad=0.02, fraction=0.06)
    bar.set_label(label(key), size=style.NORMAL)
    limit = _bound(outcome, key) if bound is None else bound
    if limit is not None and np.nanmin(field) < limit < np.nanmax(field):
        lines = axes.contour(*places, field, levels=[limit], colors="white", linewidths=2.0)
        axes.clabel(lines, fmt=f"{limit:g}", fontsize=style.NORMAL)
    style.label_axes(axes, heading(across), heading(up))
    return figure


Picture = Callable[[], Figure]


def outcome_pictures(outcome: Outcome, key: str) -> dict[str, Picture]:
    """File name without its ending -> the picture, for those that the plan gives about one figure."""
    numbers = [varied for varied in outcome.varied if varied.is_number]
    pictures: dict[str, Picture] = {f"tornado_{key}": lambda: tornado_figure(outcome, key)}
    if outcome.combine != "one at a time":
        pictures[f"effects_{key}"] = lambda: main_effects_figure(outcome, key)
    if outcome.combine == "sobol indices" and not outcome.errors:
        pictures[f"indices_{key}"] = lambda: sobol_figure(outcome, key)
    if outcome.combine == "grid" and len(numbers) >= 2:
        pictures[f"chart_{key}"] = lambda: chart_figure(outcome, key)
    return pictures


def write_outcome_figures(outcome: Outcome, folder: str | Path) -> list[Path]:
    """Write the pictures of all recorded figures that vary as PNG into a folder; returns their paths."""
    pictures: dict[str, Picture] = {}
    for key in outcome.recorded:
        values = outcome.figure(key)
        known = values[~np.isnan(values)]
        if len(known) and np.ptp(known) > 0.0:
            pictures |= outcome_pictures(outcome, key)
    if {"board_mass_g", "hold_time_s"} <= set(outcome.recorded):
        pictures["front"] = lambda: front_figure(outcome, "board_mass_g", "hold_time_s")
    paths = []
    for name, picture in pictures.items():
        path = Path(folder) / f"{name}.png"
        path.write_bytes(png(picture()))
        paths.append(path)
    return paths


def words(key: str) -> str:
    """A figure's key in words: outer_max_degC is "outer max"."""
    name, _, unit = key.rpartition("_")
    return (name if name and unit in UNITS else key).replace("_", " ")


def label(key: str) -> str:
    """A figure's key as the label of an axis: "outer max [°C]"."""
    name, _, unit = key.rpartition("_")
    return f"{words(key)} [{style.SIGN.get(unit, unit)}]" if name and unit in UNITS else words(key)


def heading(varied: Varied) -> str:
    """A factor as the label of an axis."""
    more = f" (and {len(varied.others)} more)" if varied.others else ""
    unit = style.SIGN.get(varied.unit, varied.unit)
    return f"{varied.key}{more} [{unit}]" if unit else f"{varied.key}{more}"


def _note(outcome: Outcome, key: str, more: str = "") -> str:
    return "; ".join(part for part in (f"{len(outcome)} cases", outcome.note(key), more) if part)


def _draw_effect(axes: Axes, effect: Effect) -> None:
    axes.plot(effect.places, effect.means, "o-" if effect.varied.is_number else "o", color=FIRST_ORDER, ms=4)
    axes.set_xlabel(heading(effect.varied), size=style.SMALL - 1)
    axes.set_title(f"{effect.share:.0%} of the variance", size=style.SMALL, color=style.QUIET, loc="left")
    if not effect.varied.is_number:
        axes.set_xticks(effect.places, [text[:14] for text in effect.labels], size=style.SMALL - 1)
        axes.margins(x=0.2)


def _draw_bar(axes: Axes, place: int, bar: Bar) -> None:
    ends = [(bar.low, bar.low_label, LOW), (bar.high, bar.high_label, HIGH)]
    for end, _, colour in sorted(ends, key=lambda one: -abs(one[0] - bar.base)):
        axes.barh(place, end - bar.base, left=bar.base, color=colour, height=0.6)
    longer, shorter = sorted(ends, key=lambda one: abs(one[0] - bar.base), reverse=True)
    right = longer[0] >= bar.base
    one_side = (shorter[0] - bar.base) * (longer[0] - bar.base) > 0.0
    for end, text, side in (
        (longer[0], longer[1], right),
        (bar.base if one_side else shorter[0], shorter[1], not right),
    ):
        shift, anchor = (3, "left") if side else (-3, "right")
        axes.annotate(text, (end, place), (shift, 0), textcoords="offset points", ha=anchor, va="center",
                      size=style.SMALL - 1, color=style.INK)  # fmt: skip


def _share_scale(many: Sequence[Axes]) -> None:
    ends = [axes.get_ylim() for axes in many]
    for axes in many:
        axes.set_ylim(min(low for low, _ in ends), max(high for _, high in ends))


def _spaced(front: Sequence[Row], across: Floats, up: Floats) -> list[int]:
    """Numbers of cases on the front that lie apart enough to be labelled."""
    size = np.array([np.nanmax(across) - np.nanmin(across), np.nanmax(up) - np.nanmin(up)])
    chosen: list[int] = []
    for row in front:
        number = row.number
        here = np.array([across[number - 1], up[number - 1]])
        others = [np.array([across[other - 1], up[other - 1]]) for other in chosen]
        if all(np.hypot(*((here - there) / np.maximum(size, 1e-12))) > 0.05 for there in others):
            chosen.append(number)
    return chosen


def _two(outcome: Outcome, x: str | None, y: str | None) -> tuple[Varied, Varied]:
    numbers = [
        varied
        for varied in outcome.varied
        if varied.is_number
        and len(set(outcome.inputs(varied.key)[~np.isnan(outcome.inputs(varied.key))])) > 1
    ]
    rest = [varied for varied in numbers if varied.key not in (x, y)]
    first = outcome.varied_by(x) if x else (rest.pop(0) if rest else None)
    second = outcome.varied_by(y) if y else (rest.pop(0) if rest else None)
    if first is None or second is None or outcome.combine != "grid":
        raise InputError(
            "chart", None, "needs a grid over two numbers", 'write combine = "grid" and two [[vary]]'
        )
    return first, second


def _averaged(outcome: Outcome, key: str, axes: tuple[Varied, Varied], places: list[Floats]) -> Floats:
    """Mean of a figure in each cell `[y, x]`; NaN where every case failed."""
    values = outcome.figure(key)
    columns = np.searchsorted(places[0], outcome.inputs(axes[0].key))
    rows = np.searchsorted(places[1], outcome.inputs(axes[1].key))
    total, count = np.zeros((len(places[1]), len(places[0]))), np.zeros((len(places[1]), len(places[0])))
    known = ~np.isnan(values)
    np.add.at(total, (rows[known], columns[known]), values[known])
    np.add.at(count, (rows[known], columns[known]), 1.0)
    return np.where(count > 0.0, total / np.maximum(count, 1.0), np.nan)


def _bound(outcome: Outcome, key: str) -> float | None:
    for goal in outcome.goals:
        if goal.key == key:
            return goal.at_most if goal.at_least is None else goal.at_least
    return None
