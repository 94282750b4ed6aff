"""What all pictures share: units of the axes, colours, time axes, and labels beside their curves."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import matplotlib
import numpy as np
from matplotlib.axes import Axes
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.colors import BoundaryNorm, Colormap
from matplotlib.figure import Figure
from numpy.typing import ArrayLike, NDArray

from cupfem.quantities import Units, format_quantity
from cupfem.quantities.text import in_unit

Floats = NDArray[np.float64]

INK, QUIET, FAINT = "#1f2328", "#6b7280", "#d5d9de"
ALERT = "#b3261e"
"""Of the 40 degC line; beside it always stands a label, so that it is not told by colour alone."""
DRINK = "#0b6e99"
SMALL, NORMAL, LARGE = 8.5, 9.5, 12.0
FIELD_MAP = "inferno"
"""Perceptually even and monotone in grey: it survives a black-and-white print and colour blindness."""

AXIS_UNIT: dict[Units, dict[str, str]] = {
    "si": {"length": "mm", "temperature": "degC", "volume": "ml", "heat_flow": "W", "energy": "kJ"},
    "us": {"length": "in", "temperature": "degF", "volume": "fl_oz", "heat_flow": "Btu/h", "energy": "Btu"},
}
SIGN = {"degC": "°C", "degF": "°F", "fl_oz": "fl oz"}
BAND: dict[Units, float] = {"si": 5.0, "us": 10.0}
"""Width of the temperature bands of a field, in the unit that is shown."""
TICK_TIMES = np.array([0.1, 0.2, 0.5, 1, 2, 5, 10, 20, 30, 60, 120, 300, 600, 1200, 1800, 3600, 7200, 14400,
                       28800, 86400, 172800])  # fmt: skip


LEAST_TICK = 0.06
"""Smallest distance of two ticks of a logarithmic time axis as a share of its length."""


def shown(values: ArrayLike, dimension: str, units: Units) -> Any:
    """SI values (temperature: degC) in the unit of the axes; a scalar stays one."""
    return in_unit(values, AXIS_UNIT[units][dimension], dimension)  # type: ignore[arg-type]


def unit_sign(dimension: str, units: Units) -> str:
    """The unit as it is printed on an axis: "°C", "mm"."""
    unit = AXIS_UNIT[units][dimension]
    return SIGN.get(unit, unit)


def degrees(value: float, units: Units) -> str:
    """A temperature as a label: "40 °C"."""
    return f"{shown(value, 'temperature', units):.3g} {unit_sign('temperature', units)}"


def quantity(value: float, dimension: str, units: Units) -> str:
    """A quantity as a label: "250 ml", "8.5 fl oz"."""
    number, _, unit = format_quantity(value, dimension, units).partition(" ")
    return f"{number} {SIGN.get(unit, unit)}"


def clock(seconds: float) -> str:
    """A time as a label: "20 s", "5 min", "1.5 h"."""
    if seconds < 60:
        return f"{seconds:g} s"
    return f"{seconds / 60:.3g} min" if seconds < 7200 else f"{seconds / 3600:.3g} h"


def new_figure(width: float, height: float, title: str, note: str = "") -> Figure:
    """An empty figure [inches] with its title at the top left and a note at the bottom."""
    figure = Figure(figsize=(width, height), facecolor="white")
    FigureCanvasAgg(figure)
    inch = 1.0 / height
    figure.text(0.15 / width, 1 - 0.13 * inch, title, size=LARGE, weight="bold", color=INK, va="top")
    if note:
        figure.text(0.15 / width, 0.08 * inch, note, size=SMALL, color=QUIET, va="bottom")
    return figure


def add_axes(figure: Figure, left: float, bottom: float, right: float, top: float) -> Axes:
    """Axes by their distances from the edges of the figure [inches]."""
    width, height = figure.get_size_inches()
    box = (left / width, bottom / height, 1 - (left + right) / width, 1 - (bottom + top) / height)
    axes = figure.add_axes(box)
    plain(axes)
    return axes


def inches(axes: Axes) -> tuple[float, float]:
    """Width and height of the whole figure that the axes are in."""
    figure = axes.get_figure(root=True)
    assert figure is not None
    width, height = figure.get_size_inches()
    return float(width), float(height)


def plain(axes: Axes) -> None:
    """Light axes: two spines, small ticks, a faint grid behind."""
    axes.set_title("", y=1.0)  # a fixed place: finding a free one measures all ticks, a tenth of the time
    axes.tick_params(labelsize=SMALL, colors=INK, length=3)
    for side in ("top", "right"):
        axes.spines[side].set_visible(False)
    for side in ("left", "bottom"):
        axes.spines[side].set_color(QUIET)
    axes.grid(True, color=FAINT, linewidth=0.6)
    axes.set_axisbelow(True)


def label_axes(axes: Axes, x: str, y: str) -> None:
    """Labels of both axes."""
    axes.set_xlabel(x, size=NORMAL, color=INK)
    axes.set_ylabel(y, size=NORMAL, color=INK)


def log_time(axes: Axes, start: float, end: float, least: float = LEAST_TICK) -> None:
    """A logarithmic time axis with ticks at times that people name, `least` of its length apart."""
    axes.set_xscale("log")
    ticks: list[float] = []
    for time in TICK_TIMES[(start <= TICK_TIMES) & (end * (1 + 1e-9) >= TICK_TIMES)][::-1]:
        if not ticks or np.log(ticks[-1] / time) > least * np.log(end / start):
            ticks.append(float(time))
    axes.set_xticks(ticks, [clock(time) for time in ticks])
    axes.set_xticks([], minor=True)
    axes.set_xlim(start, end)


def even_time(axes: Axes, end: float, most: int = 7) -> None:
    """An even time axis from the pour, with at most so many steps."""
    step = next((step for step in TICK_TIMES if end / step <= most), TICK_TIMES[-1])
    ticks = np.arange(0.0, end * (1 + 1e-9), step)
    axes.set_xticks(ticks, [clock(float(time)) for time in ticks])
    axes.set_xlim(0.0, end)


def spread(values: Sequence[float], gap: float, low: float, high: float) -> list[float]:
    """Places near the values, in the same order, at least `gap` apart: labels that would overlap share their
    room evenly about their mean, between `low` and `high` as far as there is room."""
    order = np.argsort(values, kind="stable")
    groups: list[tuple[list[int], float]] = []
    for index in order:
        members, centre = [int(index)], float(values[index])
        while groups and centre - groups[-1][1] < 0.5 * gap * (len(members) + len(groups[-1][0])):
            members = groups.pop()[0] + members
            centre = float(np.mean([values[member] for member in members]))
        groups.append((members, centre))
    places = [0.0] * len(values)
    for members, centre in groups:
        half = 0.5 * gap * (len(members) - 1)
        centre = max(min(centre, high - half), low + half)
        for rank, member in enumerate(members):
            places[member] = centre + gap * (rank - 0.5 * (len(members) - 1))
    return places


def label_right(axes: Axes, values: Sequence[float], texts: Sequence[str], colours: Sequence[Any]) -> None:
    """Labels to the right of curves that end at `values`, moved apart where they would overlap."""
    low, high = axes.get_ylim()
    height = inches(axes)[1] * axes.get_position().height
    places = spread(values, 0.16 * (high - low) / height, low + 0.03 * (high - low), high)
    for value, place, text, colour in zip(values, places, texts, colours, strict=True):
        axes.annotate(
            text,
            (1.0, value),
            (1.025, place),
            xycoords=("axes fraction", "data"),
            textcoords=("axes fraction", "data"),
            size=SMALL,
            color=colour,
            va="center",
            annotation_clip=False,
            arrowprops={
                "arrowstyle": "-",
                "color": colour,
                "linewidth": 0.6,
                "shrinkA": 0,
                "shrinkB": 0,
                "relpos": (0, 0.5),
            },
        )


def shades(count: int) -> list[tuple[float, float, float, float]]:
    """Colours of ordered curves, dark to light but none too pale to read on white."""
    colours = matplotlib.colormaps["viridis"](np.linspace(0.0, 0.78, max(count, 2)))[:count]
    return [(float(red), float(green), float(blue), 1.0) for red, green, blue, _ in colours]


def bands(low: float, high: float, units: Units) -> tuple[Floats, Colormap, BoundaryNorm]:
    """Edges of even temperature bands [shown unit] that hold everything between `low` and `high` [degC]."""
    step = BAND[units]
    first, last = (shown(value, "temperature", units) / step for value in (low, high))
    edges = step * np.arange(np.floor(first + 1e-9), max(np.ceil(last - 1e-9), np.floor(first) + 1) + 1)
    colours = matplotlib.colormaps[FIELD_MAP].resampled(256)
    return edges, colours, BoundaryNorm(edges, colours.N)
