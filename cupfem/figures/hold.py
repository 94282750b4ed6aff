"""How long the cup can be held: against height at some pick-ups, and against the pick-up in the grip band."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from numpy.typing import NDArray

from cupfem.figures import style
from cupfem.quantities import Units
from cupfem.touch.holding import Hold
from cupfem.touch.verdict import grip_band

Floats = NDArray[np.float64]

SHOWN_PICK_UPS = (10.0, 60.0, 240.0)
"""Pick-ups [s] of the curves against height, or the nearest of the map."""
DASHES: tuple[tuple[float, ...], ...] = ((), (6, 2), (2, 1.5), (8, 2, 2, 2))
"""Of ordered curves, so that colour is not needed."""
TIME_TICKS = (0.5, 1, 2, 5, 10, 20, 30, 60, 120, 300, 600, 1800)
LEAST = 0.5
"""Start of the axis of hold times [s] where none is shorter."""
APART = 0.8
"""The worst place of the wall has a curve of its own where it is below this share of the grip band's."""
NARROW_TICK = 0.14
"""Smallest distance of two ticks as a share of the length of a narrow axis."""
NOTE = "full: thin skin; pale band: up to thick skin; open triangle: not reached within that time"


def hold_figure(hold: Hold, asked: float, units: Units = "si") -> Figure:
    """Hold time against height at the left, against the pick-up in the grip band at the right.

    `asked` is the hold time [s] at which the line of the two pictures stands.
    """
    figure = style.new_figure(11.4, 5.2, f"{hold.run.cup.title}: how long it can be held", NOTE)
    _against_height(style.add_axes(figure, 0.75, 0.85, 5.55, 0.85), hold, asked, units)
    _against_pick_up(style.add_axes(figure, 6.95, 0.85, 0.4, 0.85), hold, asked, units)
    return figure


def known(hold: Hold, thick_skin: bool = False) -> Floats:
    """Hold times `[p, h]` [s], where not reached the time that was tried."""
    times = hold.times.thick if thick_skin else hold.times.thin
    return np.where(np.isfinite(times), times, hold.times.at_least)


def in_grip_band(hold: Hold) -> NDArray[np.bool_]:
    """`[h]` the heights of the grip band, or the one nearest to its middle."""
    low, high = grip_band(hold.run)
    inside = np.asarray((hold.heights >= low - 1e-9) & (hold.heights <= high + 1e-9))
    if not inside.any():
        inside[np.argmin(np.abs(hold.heights - 0.5 * (low + high)))] = True
    return inside


def _shown(hold: Hold) -> list[int]:
    nearest = [int(np.argmin(np.abs(hold.pick_ups - wanted))) for wanted in SHOWN_PICK_UPS]
    return list(dict.fromkeys(nearest))


def _against_height(axes: Axes, hold: Hold, asked: float, units: Units) -> None:
    heights = style.shown(hold.heights, "length", units)
    rows = _shown(hold)
    colours = style.shades(len(rows))
    for row, colour, dashes in zip(rows, colours, DASHES, strict=False):
        thin, thick = known(hold)[row], known(hold, thick_skin=True)[row]
        axes.fill_betweenx(heights, thin, thick, color=colour, alpha=0.13, linewidth=0)
        label = f"picked up after {style.clock(float(hold.pick_ups[row]))}"
        axes.plot(thin, heights, color=colour, linewidth=2.0, dashes=dashes, label=label)
        open_ended = ~np.isfinite(hold.times.thin[row])
        axes.plot(thin[open_ended], heights[open_ended], ">", color=colour, fillstyle="none", markersize=4)
    _time_axis(axes, hold, asked, "x")
    axes.set_ylim(0.0, style.shown(hold.run.meridian.height, "length", units))
    low, high = (float(style.shown(edge, "length", units)) for edge in grip_band(hold.run))
    axes.axhspan(low, high, facecolor="none", edgecolor=style.FAINT, hatch="////", linewidth=0, zorder=0)
    axes.text(
        0.01, high, " grip band", size=style.SMALL, color=style.QUIET, va="bottom", ha="left",
        transform=axes.get_yaxis_transform(),
    )  # fmt: skip
    style.label_axes(axes, "hold time", f"height of the pad's middle [{style.unit_sign('length', units)}]")
    axes.legend(loc="lower left", bbox_to_anchor=(0.0, 1.0), ncols=len(rows), frameon=False,
                fontsize=style.SMALL, borderaxespad=0.1, columnspacing=1.2)  # fmt: skip


def _against_pick_up(axes: Axes, hold: Hold, asked: float, units: Units) -> None:
    chosen = in_grip_band(hold)
    ends = (hold.heights[chosen].min(), hold.heights[chosen].max())
    low, high = (style.quantity(float(end), "length", units) for end in ends)
    thin, thick = (known(hold, skin)[:, chosen].min(axis=1) for skin in (False, True))
    axes.fill_between(hold.pick_ups, thin, thick, color=style.DRINK, alpha=0.18, linewidth=0)
    axes.plot(hold.pick_ups, thin, "o-", color=style.DRINK, linewidth=2.0, markersize=3.5)
    _mark_open(axes, hold.pick_ups, thin, ~np.asarray(np.isfinite(hold.times.thin[:, chosen]).any(axis=1)))
    everywhere = known(hold).min(axis=1)
    apart = bool((everywhere < APART * thin).any())
    if apart:
        axes.plot(hold.pick_ups, everywhere, color=style.ALERT, linewidth=1.4, dashes=(2, 1.5))
        _beside(axes, hold.pick_ups, everywhere, "worst place of the wall", style.ALERT)
    words = "grip band, thin skin" if apart else "grip band, thin skin; no place is much worse"
    _beside(axes, hold.pick_ups, thin, words, style.DRINK)
    start = max(min(0.8 * float(hold.pick_ups[0]), 4.0), 0.1)
    style.log_time(axes, start, 1.15 * float(hold.pick_ups[-1]), NARROW_TICK)
    _time_axis(axes, hold, asked, "y")
    style.label_axes(axes, "picked up after the pour", "hold time")
    axes.set_title(f"shortest from {low} to {high} high", y=1.0, size=style.NORMAL, loc="left")


def _mark_open(axes: Axes, pick_ups: Floats, values: Floats, open_ended: NDArray[np.bool_]) -> None:
    axes.plot(
        pick_ups[open_ended], values[open_ended], "^", color=style.DRINK, fillstyle="none", markersize=8
    )


def _beside(axes: Axes, pick_ups: Floats, values: Floats, text: str, colour: str) -> None:
    axes.annotate(
        text, (float(pick_ups[0]), float(values[0])), (2, 6), textcoords="offset points",
        size=style.SMALL, color=colour, va="bottom", annotation_clip=False,
        bbox={"facecolor": "white", "edgecolor": "none", "pad": 0.8, "alpha": 0.85},
    )  # fmt: skip


def _time_axis(axes: Axes, hold: Hold, asked: float, which: str) -> None:
    """A logarithmic axis of hold times with the line of what is asked."""
    shortest = float(known(hold).min())
    low = min(LEAST if shortest > 2 * LEAST else 0.5 * max(shortest, 0.02), 0.5 * asked)
    low = max(low, 0.3 * shortest) if shortest > LEAST else low
    high = 1.15 * max(float(known(hold, thick_skin=True).max()), asked)
    ticks = [tick for tick in TIME_TICKS if low <= tick <= high]
    ticks = _thinned(ticks, low, high)
    labels = [style.clock(tick) for tick in ticks]
    if which == "x":
        axes.set_xscale("log")
        axes.set_xticks(ticks, labels)
        axes.set_xticks([], minor=True)
        axes.set_xlim(low, high)
        axes.axvline(asked, color=style.ALERT, linewidth=1.0, dashes=(5, 3), gid="asked")
        axes.text(
            asked, 0.01, f" {style.clock(asked)} asked", color=style.ALERT, size=style.SMALL,
            rotation=90, ha="right", va="bottom", transform=axes.get_xaxis_transform(),
        )  # fmt: skip
        return
    axes.set_yscale("log")
    axes.set_yticks(ticks, labels)
    axes.set_yticks([], minor=True)
    axes.set_ylim(low, high)
    axes.axhline(asked, color=style.ALERT, linewidth=1.0, dashes=(5, 3), gid="asked")
    axes.text(
        0.99, asked, f"{style.clock(asked)} asked", color=style.ALERT, size=style.SMALL, ha="right",
        va="bottom", transform=axes.get_yaxis_transform(),
    )  # fmt: skip


def _thinned(ticks: Sequence[float], low: float, high: float) -> list[float]:
    """Ticks that leave room for their labels."""
    kept: list[float] = []
    for tick in ticks:
        if not kept or np.log(tick / kept[-1]) > 0.08 * np.log(high / low):
            kept.append(float(tick))
    return kept
