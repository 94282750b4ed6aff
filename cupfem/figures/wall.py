"""The free outer wall: against time at stations, against height at times, and as a map of both."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from matplotlib.axes import Axes
from matplotlib.cm import ScalarMappable
from matplotlib.figure import Figure
from numpy.typing import NDArray

from cupfem.figures import style
from cupfem.quantities import Units
from cupfem.run import COMFORT, FREE_WALL, Run

Floats = NDArray[np.float64]

STATIONS = (0.15, 0.35, 0.55, 0.75, 0.95)
"""Heights of the stations as shares of the cup's."""
TIMES = (2.0, 10.0, 60.0, 300.0, 600.0)
"""Times [s] of the profiles, beside the last."""
NEAR_HOTTEST = 5e-3
"""A station nearer than this to the hottest place [m] is left out."""
FIRST = 0.5
"""Start of the time axis [s]."""
ROOM_FOR_LABELS = 1.15  # inches


def stations_of(run: Run) -> list[float]:
    """Heights [m] of the stations, rounded to a millimetre: even ones, and the hottest place."""
    height, series = run.meridian.height, run.series
    heights = [round(share * height, 3) for share in STATIONS]
    place = int(np.argmax(series.outer_temperature.max(axis=0)))
    hottest = min(round(float(run.faces.outer_height[place]), 3), height)
    return sorted([*(z for z in heights if abs(z - hottest) > NEAR_HOTTEST), hottest])


def wall_history(run: Run, heights: Sequence[float] | None = None, units: Units = "si") -> Figure:
    """Free outer wall against time at heights [m] on the inside face, on a logarithmic time axis."""
    chosen = stations_of(run) if heights is None else list(heights)
    figure = style.new_figure(8.0, 4.8, f"{run.cup.title}: outer wall against time", FREE_WALL)
    axes = style.add_axes(figure, 0.75, 0.8, ROOM_FOR_LABELS, 0.6)
    curves = [style.shown(run.outer_temperature_at(height), "temperature", units) for height in chosen]
    colours = style.shades(len(chosen))
    widths = np.linspace(3.4, 1.2, len(chosen))  # curves that coincide stay seen
    for curve, colour, width in zip(curves, colours, widths, strict=True):
        axes.plot(run.time, curve, color=colour, linewidth=width)
    style.log_time(axes, min(FIRST, 0.1 * run.serving.duration), run.serving.duration)
    style.label_axes(axes, "time after the pour", _outer(units))
    _limit_line(axes, units, "horizontal")
    texts = [f"at {style.quantity(height, 'length', units)}" for height in chosen]
    style.label_right(axes, [float(curve[-1]) for curve in curves], texts, colours)
    return figure


def profile_times(run: Run) -> list[float]:
    """Times [s] of the profiles."""
    end = run.serving.duration
    return [*(time for time in TIMES if time < 0.9 * end), end]


def wall_profile(run: Run, times: Sequence[float] | None = None, units: Units = "si") -> Figure:
    """Free outer wall against height at times [s]; a dash on the right marks the drink's level of each."""
    chosen = profile_times(run) if times is None else list(times)
    figure = style.new_figure(6.4, 6.0, f"{run.cup.title}: outer wall against height", FREE_WALL)
    axes = style.add_axes(figure, 0.75, 0.8, 0.95, 0.6)
    heights = style.shown(run.faces.outer_height, "length", units)
    profiles = [style.shown(_at(run, time), "temperature", units) for time in chosen]
    colours = style.shades(len(chosen))
    for profile, colour in zip(profiles, colours, strict=True):
        axes.plot(profile, heights, color=colour, linewidth=1.7)
    axes.margins(x=0.08)
    axes.set_ylim(0.0, style.shown(run.meridian.height, "length", units))
    style.label_axes(axes, _outer(units), f"height on the inside face [{style.unit_sign('length', units)}]")
    _limit_line(axes, units, "vertical")
    _label_profiles(axes, heights, profiles, [style.clock(time) for time in chosen], colours)
    _level_marks(axes, run, chosen, colours, units)
    return figure


def wall_map(run: Run, units: Units = "si") -> Figure:
    """Free outer wall over time and height, with the drink's level and the isotherm of 40 degC."""
    figure = style.new_figure(8.0, 4.6, f"{run.cup.title}: outer wall over time and height", FREE_WALL)
    axes = style.add_axes(figure, 0.75, 0.8, 1.2, 0.6)
    first = min(FIRST, 0.1 * run.serving.duration)
    late = run.time >= first * (1 - 1e-9)
    values = style.shown(run.series.outer_temperature[late].T, "temperature", units)
    low, high = (
        float(run.series.outer_temperature[late].min()),
        float(run.series.outer_temperature[late].max()),
    )
    edges, colours, norm = style.bands(low, high, units)
    heights = style.shown(run.faces.outer_height, "length", units)
    axes.contourf(run.time[late], heights, values, levels=edges, cmap=colours, norm=norm)
    limit = style.shown(COMFORT, "temperature", units)
    if values.min() < limit < values.max():
        for colour, width in (("black", 2.6), ("white", 1.3)):
            axes.contour(run.time[late], heights, values, levels=[limit], colors=colour, linewidths=width)
    level = style.shown(run.series.drink_level, "length", units)
    axes.plot(run.time, level, color="white", linewidth=2.6)
    axes.plot(run.time, level, color=style.DRINK, linewidth=1.5)
    axes.set_ylim(0.0, float(heights[-1]))
    style.log_time(axes, first, run.serving.duration)
    axes.grid(False)
    style.label_axes(
        axes, "time after the pour", f"height on the inside face [{style.unit_sign('length', units)}]"
    )
    bar = figure.colorbar(ScalarMappable(norm, colours), cax=figure.add_axes((0.885, 0.174, 0.018, 0.69)))
    bar.ax.tick_params(labelsize=style.SMALL, length=2)
    bar.ax.set_title(style.unit_sign("temperature", units), y=1.0, size=style.NORMAL)
    figure.text(
        0.985, 0.08 / 4.6, f"double line: {style.degrees(COMFORT, units)};  blue: level of the drink",
        size=style.SMALL, color=style.QUIET, ha="right", va="bottom",
    )  # fmt: skip
    return figure


def _outer(units: Units) -> str:
    return f"free outer wall [{style.unit_sign('temperature', units)}]"


def _at(run: Run, time: float) -> Floats:
    """Outer face `[p]` at a time, linear between the times of the series."""
    index = int(np.clip(np.searchsorted(run.time, time), 1, len(run.time) - 1))
    share = (time - run.time[index - 1]) / (run.time[index] - run.time[index - 1])
    values = run.series.outer_temperature
    return np.asarray((1.0 - share) * values[index - 1] + share * values[index])


def _limit_line(axes: Axes, units: Units, direction: str) -> None:
    limit, text = style.shown(COMFORT, "temperature", units), style.degrees(COMFORT, units)
    if direction == "horizontal":
        axes.axhline(limit, color=style.ALERT, linewidth=1.0, dashes=(5, 3), gid="limit")
        axes.text(
            0.01, limit, f" {text}", color=style.ALERT, size=style.SMALL, va="bottom",
            transform=axes.get_yaxis_transform(),
        )  # fmt: skip
        return
    axes.axvline(limit, color=style.ALERT, linewidth=1.0, dashes=(5, 3), gid="limit")
    axes.text(
        limit, 1.005, text, color=style.ALERT, size=style.SMALL, ha="center", va="bottom",
        transform=axes.get_xaxis_transform(),
    )  # fmt: skip


def _label_profiles(
    axes: Axes, heights: Floats, profiles: Sequence[Floats], texts: Sequence[str], colours: Sequence[object]
) -> None:
    """Labels on the curves, each at a height of its own so that they do not meet."""
    shares = np.linspace(0.28, 0.72, len(profiles))
    for profile, text, colour, share in zip(profiles, texts, colours, shares, strict=True):
        place = int(np.argmin(np.abs(heights - share * heights[-1])))
        box = {"facecolor": "white", "edgecolor": "none", "pad": 1.0}
        axes.text(
            profile[place],
            heights[place],
            text,
            size=style.SMALL,
            color=colour,
            ha="center",
            va="center",
            bbox=box,
        )


def _level_marks(
    axes: Axes, run: Run, times: Sequence[float], colours: Sequence[object], units: Units
) -> None:
    levels = np.interp(times, run.time, run.series.drink_level)
    shown = style.shown(levels, "length", units)
    for level, colour in zip(shown, colours, strict=True):
        axes.plot([0.97, 1.03], [level, level], color=colour, linewidth=2.2, clip_on=False,
                  transform=axes.get_yaxis_transform(), gid="level")  # fmt: skip
    known = shown[~np.isnan(shown)]
    if len(known):
        axes.text(1.05, float(known[0]), "level", size=style.SMALL, color=style.DRINK, va="center",
                  transform=axes.get_yaxis_transform())  # fmt: skip
