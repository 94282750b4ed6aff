"""One-dimensional estimates beside the field: each rung in time, and 2-D minus 1-D over height and time."""

from __future__ import annotations

from pathlib import Path

import numpy as np
from matplotlib import colormaps
from matplotlib.axes import Axes
from matplotlib.cm import ScalarMappable
from matplotlib.colors import BoundaryNorm
from matplotlib.figure import Figure
from numpy.typing import NDArray

from cupfem.breakdown import Comparison
from cupfem.breakdown.map import BOUNDS
from cupfem.breakdown.places import marks
from cupfem.figures import style
from cupfem.figures.files import png
from cupfem.quantities import Units
from cupfem.run import COMFORT, FREE_WALL

Floats = NDArray[np.float64]

FIRST = 0.5
"""Start of the time axis [s]."""
STYLES: dict[str, tuple[float, ...]] = {
    "a": (1, 1),
    "b": (4, 1.5),
    "c1": (2, 2),
    "c": (8, 2),
    "e": (6, 1.5, 1, 1.5),
    "d": (),
}
"""Dashes of the rungs, so that they are not told by colour alone."""
EDGES = (0.0, *BOUNDS, 10.0)
"""Bands of |2-D minus 1-D| [K]; the last is open."""
COLOURS = "YlOrRd"
SCALE: dict[Units, tuple[float, str]] = {"si": (1.0, "K"), "us": (1.8, "degF")}


def ladder_figure(slab: Comparison, place: int | None = None, units: Units = "si") -> Figure:
    """Outer wall at a station by every rung and by the field; left out: the station of the table."""
    place = slab.reference if place is None else place
    run = slab.run
    height = style.quantity(float(slab.heights[place]), "length", units)
    title = f"{run.cup.title}: estimates of the outer wall, {height} high"
    figure = style.new_figure(8.0, 4.8, title, FREE_WALL)
    axes = style.add_axes(figure, 0.75, 0.8, 1.15, 0.6)
    curves = {"field": slab.field(place), **slab.rungs[place].outer}
    colours = [(0.55, 0.57, 0.6, 1.0), *style.shades(len(curves) - 1)[::-1]]
    ends = []
    for (name, curve), colour in zip(curves.items(), colours, strict=True):
        values = style.shown(curve, "temperature", units)
        line = axes.plot(run.time, values, color=colour, linewidth=5.0 if name == "field" else 1.6)[0]
        if STYLES.get(name):
            line.set_dashes(STYLES[name])
        ends.append(float(values[-1]))
    style.log_time(axes, min(FIRST, 0.1 * run.serving.duration), run.serving.duration)
    style.label_axes(axes, "time after the pour", f"outer wall [{style.unit_sign('temperature', units)}]")
    limit = style.shown(COMFORT, "temperature", units)
    axes.axhline(limit, color=style.ALERT, linewidth=1.0, dashes=(5, 3))
    axes.text(
        0.01, limit, f" {style.degrees(COMFORT, units)}", color=style.ALERT, size=style.SMALL, va="bottom",
        transform=axes.get_yaxis_transform(),
    )  # fmt: skip
    style.label_right(axes, ends, [name if name == "field" else f"rung {name}" for name in curves], colours)
    return figure


def difference_figure(slab: Comparison, units: Units = "si") -> Figure:
    """|2-D minus 1-D| of the outer wall over time and height, with the level and the ends on the wall."""
    title = f"{slab.run.cup.title}: 2-D minus 1-D over time and height"
    figure = style.new_figure(8.0, 5.4, title, "rung (d) behind the drink of the field")
    axes = style.add_axes(figure, 0.75, 1.45, 1.75, 0.6)
    norm, colours = BoundaryNorm(EDGES, 256, extend="max"), colormaps[COLOURS]
    first = min(FIRST, 0.1 * slab.run.serving.duration)
    late = slab.map.times >= first * (1 - 1e-9)
    heights = style.shown(slab.map.heights, "length", units)
    off = np.abs(slab.map.difference[late]).T
    levels = [*EDGES, max(float(off.max()) + 1.0, EDGES[-1] + 1.0)]
    axes.contourf(slab.map.times[late], heights, off, levels=levels, cmap=colours, norm=norm)
    axes.plot(slab.run.time, style.shown(slab.run.series.drink_level, "length", units), color=style.DRINK,
              linewidth=1.6)  # fmt: skip
    axes.set_ylim(0.0, float(heights[-1]))
    style.log_time(axes, first, slab.run.serving.duration)
    axes.grid(False)
    label = f"height on the inside face [{style.unit_sign('length', units)}]"
    style.label_axes(axes, "time after the pour", label)
    _bar(figure, norm, units)
    _mark_ends(axes, slab, units)
    return figure


def _bar(figure: Figure, norm: BoundaryNorm, units: Units) -> None:
    """The scale, lying under the axes on the right."""
    scale, unit = SCALE[units]
    place = figure.add_axes((0.5, 0.105, 0.36, 0.02))
    bar = figure.colorbar(
        ScalarMappable(norm, colormaps[COLOURS]), cax=place, extend="max", orientation="horizontal"
    )
    bar.set_ticks(list(EDGES), labels=[f"{scale * edge:.3g}" for edge in EDGES])
    place.tick_params(labelsize=style.SMALL, length=2)
    place.set_title(f"|2-D minus 1-D| [{unit}]", size=style.SMALL, color=style.INK, pad=3.0)


def _mark_ends(axes: Axes, slab: Comparison, units: Units) -> None:
    """A line at each end on the wall, its name on the right; the level too."""
    named: dict[float, str] = {}
    for name, places in marks(slab.run).items():
        for z in places:
            value = round(float(style.shown(z, "length", units)), 6)
            named[value] = f"{named[value]}, {name}" if value in named else name
    for value, name in named.items():
        axes.axhline(value, color=style.QUIET, linewidth=0.7, dashes=(2, 2), gid=name)
    level = slab.run.series.drink_level[-1]
    if np.isfinite(level):
        named[float(style.shown(level, "length", units))] = "level"
    inks = [style.DRINK if name == "level" else style.QUIET for name in named.values()]
    style.label_right(axes, list(named), list(named.values()), inks)


def write_slab(slab: Comparison, folder: str | Path, units: Units = "si") -> list[Path]:
    """Write both pictures as PNG into a folder that exists; returns their paths."""
    paths = []
    pictures = {"ladder": ladder_figure(slab, units=units), "map": difference_figure(slab, units)}
    for name, figure in pictures.items():
        path = Path(folder) / f"{name}.png"
        path.write_bytes(png(figure))
        paths.append(path)
    return paths
