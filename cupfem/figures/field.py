"""The temperature field at chosen times: section in true proportion, and the wall unrolled and stretched."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from matplotlib.axes import Axes
from matplotlib.cm import ScalarMappable
from matplotlib.collections import TriMesh
from matplotlib.colors import BoundaryNorm, Colormap
from matplotlib.figure import Figure
from matplotlib.patches import PathPatch
from matplotlib.path import Path
from matplotlib.ticker import MaxNLocator
from matplotlib.tri import Triangulation
from numpy.typing import NDArray

from cupfem.figures import outline, style
from cupfem.quantities import Units
from cupfem.run import COMFORT, Run

Floats = NDArray[np.float64]
Ints = NDArray[np.int_]

TIMES = (10.0, 60.0, 300.0)
"""Times [s] that are drawn, beside the last."""
BOTTOM, TOP, SIDE = -0.01, 1.03, 1.06
"""Ends of the axes as shares of the cup's height and of its largest radius."""


@dataclass(frozen=True, eq=False)
class _Canvas:
    """What all panels share; coordinates in the unit that is shown."""

    run: Run
    units: Units
    edges: Floats
    colours: Colormap
    norm: BoundaryNorm
    whole: Triangulation
    strip: Triangulation
    strip_dofs: Ints
    strip_lines: Path

    @property
    def reach(self) -> float:
        """Largest radius [shown unit]."""
        return float(self.whole.x.max())

    @property
    def top(self) -> float:
        """Height of the brim [shown unit]."""
        return float(self.whole.y.max())


def field_times(run: Run, wanted: Sequence[float] = TIMES) -> list[float]:
    """Snapshot times [s] nearest to the wanted ones, and the last; each once."""
    stored = run.snapshot_times
    chosen = {int(np.argmin(np.abs(stored - time))) for time in (*wanted, float(stored[-1]))}
    return [float(stored[index]) for index in sorted(chosen) if stored[index] > 0 or len(chosen) == 1]


def field_figure(run: Run, times: Sequence[float] | None = None, units: Units = "si") -> Figure:
    """Field at times [s] (the nearest snapshots); the thick line in it is the isotherm of 40 degC."""
    chosen = (
        field_times(run) if times is None else [float(run.snapshot_times[_nearest(run, t)]) for t in times]
    )
    note = "Left: true proportion, drink in its own temperature. Right: the wall unrolled, stretched across."
    return _drawn(_canvas(run, chosen, units), chosen, f"{run.cup.title}: temperature in the wall", note)


def field_frames(run: Run, units: Units = "si", most: int = 12) -> Iterator[tuple[float, Figure]]:
    """Time [s] and picture of the field, for snapshots up to `most`; all on one scale of temperature."""
    stored = run.snapshot_times
    chosen = stored[np.unique(np.round(np.linspace(0, len(stored) - 1, most)).astype(int))]
    canvas = _canvas(run, [float(time) for time in chosen], units)
    for time in chosen:
        yield float(time), _drawn(canvas, [float(time)])


def _drawn(canvas: _Canvas, times: Sequence[float], title: str = "", note: str = "") -> Figure:
    """A panel for each time, and the colour bar."""
    tall = 3.9 / (TOP - BOTTOM) / canvas.top  # inches per shown unit
    broad = SIDE * canvas.reach * tall
    each, left = broad + 1.35, 0.75
    width = left + each * len(times) + 0.6
    figure = style.new_figure(max(width, 7.0) if title else width, 5.4, title, note)
    for number, time in enumerate(times):
        start = left + each * number
        whole, strip = _panel(figure, start, broad), _panel(figure, start + broad + 0.08, 0.92)
        values = canvas.run.snapshots[_nearest(canvas.run, time)]
        field = style.shown(values, "temperature", canvas.units)
        _section(whole, canvas, field, time)
        _strip(strip, canvas, field)
        if number == 0:
            whole.set_ylabel(f"height [{style.unit_sign('length', canvas.units)}]", size=style.NORMAL)
        else:
            whole.tick_params(labelleft=False)
    _colour_bar(figure, _panel(figure, left + each * len(times), 0.12), canvas)
    return figure


def _panel(figure: Figure, start: float, wide: float) -> Axes:
    """Axes at a distance from the left edge and as wide as told [inches]."""
    width, height = figure.get_size_inches()
    return figure.add_axes((start / width, 0.73 / height, wide / width, 3.9 / height))


def _nearest(run: Run, time: float) -> int:
    return int(np.argmin(np.abs(run.snapshot_times - time)))


def _canvas(run: Run, times: Sequence[float], units: Units) -> _Canvas:
    mesh = run.mesh
    fields = run.snapshots[[_nearest(run, time) for time in times]]
    drinks = run.series.drink_temperature[~np.isnan(run.series.drink_temperature)]
    highest = max(float(fields.max()), float(drinks.max(initial=-np.inf)))
    edges, colours, norm = style.bands(min(float(fields.min()), COMFORT - 1.0), highest, units)
    points = style.shown(mesh.points, "length", units)
    unrolled = style.shown(outline.heights_across(mesh, run.meridian), "length", units)
    everything = np.arange(mesh.element_dofs.shape[1])
    strip, dofs = _strip_triangles(run, unrolled)
    return _Canvas(
        run=run,
        units=units,
        edges=edges,
        colours=colours,
        norm=norm,
        whole=Triangulation(points[0], points[1], outline.triangles(mesh, everything)),
        strip=strip,
        strip_dofs=dofs,
        strip_lines=outline.path_of_lines(outline.boundaries(mesh, unrolled)),
    )


def _strip_triangles(run: Run, unrolled: Floats) -> tuple[Triangulation, Ints]:
    found = outline.triangles(run.mesh, outline.wall_elements(run.mesh))
    dofs, renumbered = np.unique(found, return_inverse=True)
    return Triangulation(unrolled[0, dofs], unrolled[1, dofs], renumbered.reshape(found.shape)), dofs


def _section(axes: Axes, canvas: _Canvas, field: Floats, time: float) -> None:
    whole = TriMesh(canvas.whole, array=field, cmap=canvas.colours, norm=canvas.norm)
    axes.add_collection(whole, autolim=False)
    _drink(axes, canvas, time)
    axes.set_title(style.clock(time), y=1.0, size=style.NORMAL, weight="bold", loc="left")
    axes.set_xlim(0.0, SIDE * canvas.reach)
    _upright(axes, canvas)
    axes.xaxis.set_major_locator(MaxNLocator(3, prune="upper"))
    axes.set_xlabel(f"radius [{style.unit_sign('length', canvas.units)}]", size=style.SMALL)


def _drink(axes: Axes, canvas: _Canvas, time: float) -> None:
    """The drink as an area in the colour of its temperature."""
    series, meridian = canvas.run.series, canvas.run.meridian
    temperature = float(np.interp(time, series.time, series.drink_temperature))
    level = float(np.interp(time, series.time, series.drink_level))
    if np.isnan(temperature) or level <= meridian.floor:
        return
    z = np.array([meridian.floor, level])
    r = style.shown(meridian.profile.radius_at(z), "length", canvas.units)
    z = style.shown(z, "length", canvas.units)
    hot = style.shown(temperature, "temperature", canvas.units)
    axes.fill(
        [0, r[0], r[1], 0], [z[0], z[0], z[1], z[1]], color=canvas.colours(canvas.norm(hot)), linewidth=0
    )
    pale = canvas.norm(hot) > 0.6 * canvas.colours.N
    text = f"drink\n{hot:.1f} {style.unit_sign('temperature', canvas.units)}"
    middle: dict[str, Any] = {"ha": "center", "va": "center"}
    axes.text(0.42 * r[1], z.mean(), text, size=style.SMALL, color="black" if pale else "white", **middle)


def _strip(axes: Axes, canvas: _Canvas, field: Floats) -> None:
    values = field[canvas.strip_dofs]
    axes.tricontourf(canvas.strip, values, levels=canvas.edges, cmap=canvas.colours, norm=canvas.norm)
    axes.add_artist(PathPatch(canvas.strip_lines, fill=False, edgecolor="#9aa3ad", linewidth=0.5))
    limit = style.shown(COMFORT, "temperature", canvas.units)
    if values.min() < limit < values.max():
        for colour, width in (("black", 2.6), ("white", 1.3)):
            axes.tricontour(canvas.strip, values, levels=[limit], colors=colour, linewidths=width)
    axes.set_xlim(0.0, float(canvas.strip.x.max()))
    _upright(axes, canvas)
    axes.tick_params(labelleft=False)
    axes.xaxis.set_major_locator(MaxNLocator(2, prune="lower"))
    axes.set_xlabel(f"across [{style.unit_sign('length', canvas.units)}]", size=style.SMALL)


def _upright(axes: Axes, canvas: _Canvas) -> None:
    axes.set_ylim(BOTTOM * canvas.top, TOP * canvas.top)
    style.plain(axes)
    axes.grid(False)


def _colour_bar(figure: Figure, axes: Axes, canvas: _Canvas) -> None:
    bar = figure.colorbar(ScalarMappable(canvas.norm, canvas.colours), cax=axes, spacing="proportional")
    bar.set_ticks(list(canvas.edges[:: 1 if len(canvas.edges) < 12 else 2]))
    bar.ax.tick_params(labelsize=style.SMALL, length=2)
    bar.ax.set_title(style.unit_sign("temperature", canvas.units), y=1.0, size=style.NORMAL)
    limit = style.shown(COMFORT, "temperature", canvas.units)
    bar.ax.axhline(limit, color="black", linewidth=2.6)
    bar.ax.axhline(limit, color="white", linewidth=1.3)
