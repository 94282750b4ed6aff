"""Several cups side by side: outer wall and drink against time, and how long each can be held."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from numpy.typing import NDArray

from cupfem.against import Candidate
from cupfem.figures import style
from cupfem.figures.hold import DASHES, NARROW_TICK, in_grip_band, known
from cupfem.quantities import Units
from cupfem.run import Run
from cupfem.touch.verdict import grip_band

Floats = NDArray[np.float64]

FIRST = 1.0
"""Start of the time axes [s]."""
COLOURS = ("#1b3a6b", "#b3541e", "#3f7f7a", "#8a3a6b", "#7a6a58", "#0b6e99")
"""Of unordered curves; each has a dash and a letter of its own too."""
MARKS = "ABCDEF"


def against_figure(candidates: Sequence[Candidate], units: Units = "si") -> Figure:
    """Outer wall of the grip band and drink against time; hold times as bars, or against the pick-up."""
    serving = candidates[0].run.serving.title
    key = ";  ".join(f"{mark} {each.title}" for mark, each in zip(MARKS, candidates, strict=False))
    figure = style.new_figure(11.4, 5.0, f"Side by side: {serving}", key)
    wall = style.add_axes(figure, 0.65, 0.9, 7.95, 0.85)
    drink = style.add_axes(figure, 4.35, 0.9, 4.25, 0.85)
    held = style.add_axes(figure, 8.1, 0.9, 0.35, 0.85)
    _walls(wall, [each.run for each in candidates], units)
    _drinks(drink, [each.run for each in candidates], units)
    if all(each.hold is not None for each in candidates):
        _against_pick_up(held, candidates)
    else:
        _bars(held, candidates)
    return figure


def _hottest_of_grip(run: Run) -> Floats:
    low, high = grip_band(run)
    heights = run.faces.outer_height
    inside = (heights >= low - 1e-9) & (heights <= high + 1e-9)
    return np.asarray(run.series.outer_temperature[:, inside].max(axis=1))


def _walls(axes: Axes, runs: Sequence[Run], units: Units) -> None:
    """Hottest free wall of the grip band, each curve marked at its highest."""
    duration = runs[0].serving.duration
    first = min(FIRST, 0.1 * duration)
    for index, run in enumerate(runs):
        late = run.time >= first * (1 - 1e-9)
        time, curve = run.time[late], style.shown(_hottest_of_grip(run)[late], "temperature", units)
        axes.plot(time, curve, color=COLOURS[index], linewidth=1.8, dashes=_dash(index))
        highest = int(np.argmax(curve))
        _mark(axes, index, (float(time[highest]), float(curve[highest])), (0, 4))
    style.log_time(axes, first, duration, NARROW_TICK)
    sign = style.unit_sign("temperature", units)
    style.label_axes(axes, "time after the pour", f"hottest free wall of the grip band [{sign}]")


def _drinks(axes: Axes, runs: Sequence[Run], units: Units) -> None:
    """The drinks, marked at their ends."""
    curves = [style.shown(run.series.drink_temperature, "temperature", units) for run in runs]
    for index, (run, curve) in enumerate(zip(runs, curves, strict=True)):
        axes.plot(run.time, curve, color=COLOURS[index], linewidth=1.8, dashes=_dash(index))
    style.even_time(axes, runs[0].serving.duration, 4)
    style.label_axes(axes, "time after the pour", f"drink [{style.unit_sign('temperature', units)}]")
    ends = [_last(curve) for curve in curves]
    style.label_right(axes, ends, list(MARKS[: len(ends)]), list(COLOURS[: len(ends)]))


def _mark(axes: Axes, index: int, place: tuple[float, float], shift: tuple[float, float]) -> None:
    """The letter of a cup beside its curve."""
    axes.annotate(
        MARKS[index], place, shift, textcoords="offset points", size=style.NORMAL, weight="bold",
        color=COLOURS[index], ha="center", va="bottom", annotation_clip=False,
    )  # fmt: skip


def _last(curve: Floats) -> float:
    return float(curve[~np.isnan(curve)][-1])


def _dash(index: int) -> tuple[float, ...]:
    return DASHES[index % len(DASHES)]


def _against_pick_up(axes: Axes, candidates: Sequence[Candidate]) -> None:
    """Shortest hold time of the grip band, thin skin, against the pick-up."""
    ends = []
    for index, each in enumerate(candidates):
        assert each.hold is not None
        shortest = known(each.hold)[:, in_grip_band(each.hold)].min(axis=1)
        axes.plot(each.hold.pick_ups, shortest, color=COLOURS[index], linewidth=1.8, dashes=_dash(index))
        ends.append((float(each.hold.pick_ups[0]), float(shortest[0])))
        last = float(each.hold.pick_ups[-1])
    style.log_time(axes, max(0.8 * ends[0][0], 0.1), 1.1 * last, NARROW_TICK)
    _seconds_axis(axes, "y")
    for index, place in enumerate(ends):
        _mark(axes, index, place, (0, 4))
    style.label_axes(axes, "picked up after the pour", "hold time of the grip band, thin skin")


def _bars(axes: Axes, candidates: Sequence[Candidate]) -> None:
    """From thin to thick skin, one bar for each cup."""
    for index, each in enumerate(candidates):
        touch = each.run.touch
        if touch is None:
            continue
        thin = touch.thin if np.isfinite(touch.thin) else touch.at_least
        thick = touch.thick if np.isfinite(touch.thick) else touch.thick_at_least
        row = len(candidates) - 1 - index
        axes.plot([thin, max(thick, 1.02 * thin)], [row, row], color=COLOURS[index], linewidth=7, alpha=0.45,
                  solid_capstyle="butt")  # fmt: skip
        axes.plot([thin], [row], "o" if np.isfinite(touch.thin) else ">", color=COLOURS[index], markersize=7)
        axes.annotate(f"{thin:.3g} s" if np.isfinite(touch.thin) else f"more than {thin:.3g} s", (thin, row),
                      (0, 9), textcoords="offset points", size=style.SMALL, ha="center",
                      color=COLOURS[index])  # fmt: skip
    _seconds_axis(axes, "x")
    axes.set_yticks(range(len(candidates)), list(MARKS[: len(candidates)])[::-1])
    axes.set_ylim(-0.6, len(candidates) - 0.3)
    style.label_axes(axes, "hold time, thin (dot) to thick skin", "")


def _seconds_axis(axes: Axes, which: str) -> None:
    """A logarithmic axis of times, ticks at those that people name."""
    low, high = axes.get_ylim() if which == "y" else axes.get_xlim()
    low, high = max(0.6 * low, 0.2) if low > 0 else 0.2, 1.3 * high
    ticks = [tick for tick in (0.2, 0.5, 1, 2, 5, 10, 20, 60, 120, 300, 900, 3600) if low <= tick <= high]
    labels = [style.clock(tick) for tick in ticks]
    if which == "y":
        axes.set_yscale("log")
        axes.set_yticks(ticks, labels)
        axes.set_yticks([], minor=True)
        axes.set_ylim(low, high)
        return
    axes.set_xscale("log")
    axes.set_xticks(ticks, labels)
    axes.set_xticks([], minor=True)
    axes.set_xlim(low, high)
