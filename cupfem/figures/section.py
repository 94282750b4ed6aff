"""The half section in true proportion, dimensioned, with details of the wall magnified."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Protocol

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.patches import PathPatch, Rectangle
from matplotlib.path import Path
from numpy.typing import NDArray

from cupfem.cup import Cup
from cupfem.figures import outline, style
from cupfem.meridian import LayerBand, Meridian
from cupfem.mesh import SectionMesh
from cupfem.quantities import Units
from cupfem.run import Run

Floats = NDArray[np.float64]

ARROWS = {"arrowstyle": "<|-|>", "color": style.INK, "linewidth": 0.8, "shrinkA": 0, "shrinkB": 0}


class Drawn(Protocol):
    """What a section picture needs: a `Drawing` has it."""

    @property
    def cup(self) -> Cup: ...
    @property
    def meridian(self) -> Meridian: ...
    @property
    def mesh(self) -> SectionMesh: ...
    @property
    def fill_level(self) -> float: ...


@dataclass(frozen=True, eq=False)
class _Sheet:
    """A section in the unit of the drawing: cells by region, boundary lines, and the level."""

    meridian: Meridian
    title: str
    units: Units
    level: float
    fills: list[tuple[Path, str]]
    lines: Path
    reach: float

    def length(self, value: float) -> float:
        return float(style.shown(value, "length", self.units))

    def text(self, value: float) -> str:
        return style.quantity(value, "length", self.units)


def section_figure(drawn: Drawn | Run, units: Units = "si") -> Figure:
    """Section of a drawing or of a run: in true proportion at the left, details at the right."""
    sheet = _sheet(drawn, units)
    figure = style.new_figure(11.0, 7.2, sheet.title, "Half section; the curl of the brim is not modelled.")
    axes = figure.add_axes((0.01, 0.06, 0.5, 0.86))
    _whole(axes, sheet)
    for number, (letter, what, box) in enumerate(_details(sheet)):
        detail = figure.add_axes((0.53, 0.655 - 0.295 * number, 0.22, 0.255))
        _detail(detail, sheet, box)
        _mark(axes, letter, box)
        ratio = _scale(detail) / _scale(axes)
        detail.set_title(f"{letter}  {what}, {ratio:.0f} times larger", y=1.0, size=style.NORMAL, loc="left")
    _layer_list(figure, sheet)
    return figure


def _sheet(drawn: Drawn | Run, units: Units) -> _Sheet:
    mesh, meridian = drawn.mesh, drawn.meridian
    points = style.shown(mesh.points, "length", units)
    colour = outline.region_colours(mesh, meridian)
    level = float(drawn.series.drink_level[0]) if isinstance(drawn, Run) else drawn.fill_level
    corners = points[:, mesh.element_dofs[:4]].transpose(2, 1, 0)
    fills = [(outline.path_of_cells(corners[cells]), colour[name]) for name, cells in mesh.regions.items()]
    lines = outline.path_of_lines(outline.boundaries(mesh, points))
    return _Sheet(meridian, drawn.cup.title, units, level, fills, lines, float(corners[:, :, 0].max()))


def _cut(axes: Axes, sheet: _Sheet, width: float) -> None:
    for path, colour in sheet.fills:
        axes.add_artist(PathPatch(path, facecolor=colour, linewidth=0, antialiased=False))
    axes.add_artist(PathPatch(sheet.lines, fill=False, edgecolor=style.INK, linewidth=width))


def _whole(axes: Axes, sheet: _Sheet) -> None:
    meridian = sheet.meridian
    heights = np.linspace(0.0, meridian.height, 200)
    outer = style.shown(meridian.outer_radius_at(heights), "length", sheet.units)
    z = style.shown(heights, "length", sheet.units)
    axes.fill_betweenx(z, -outer, 0.0, color="#f3eee4", linewidth=0)
    axes.plot(np.r_[0, -outer, 0], np.r_[z[0], z, z[-1]], color=style.INK, linewidth=1.0)
    _cut(axes, sheet, 0.5)
    top, reach = sheet.length(meridian.height), sheet.reach
    axes.plot([0, 0], [-0.04 * top, 1.04 * top], color=style.QUIET, linewidth=0.8, dashes=(12, 3, 2, 3))
    axes.plot([-1.15 * reach, 1.15 * reach], [0, 0], color=style.INK, linewidth=1.0)
    _dimensions(axes, sheet)
    axes.set_aspect("equal")
    axes.set_xlim(-1.4 * reach, 1.4 * reach)
    axes.set_ylim(-0.16 * top, 1.16 * top)
    axes.set_axis_off()


def _dimensions(axes: Axes, sheet: _Sheet) -> None:
    meridian, reach = sheet.meridian, sheet.reach
    top = sheet.length(meridian.height)
    _across(axes, sheet, meridian.height, 1.08 * top)
    _across(axes, sheet, 0.0, -0.08 * top)
    _upright(axes, sheet, meridian.height, -1.25 * reach, reach)
    level, radius = sheet.length(sheet.level), sheet.length(float(meridian.profile.radius_at(sheet.level)))
    axes.plot([0, radius], [level, level], color=style.DRINK, linewidth=1.2)
    volume = style.quantity(meridian.volume(sheet.level), "volume", sheet.units)
    axes.text(0.06 * radius, level, f"level, {volume}", color=style.DRINK, size=style.SMALL, va="bottom")
    _upright(axes, sheet, sheet.level, 1.2 * reach, -radius)
    if meridian.base is not None:
        recess, floor = sheet.length(meridian.base.recess), sheet.length(meridian.floor)
        y = 0.45 * recess if recess > 0.05 * top else floor + 0.025 * top
        text = f"recess {sheet.text(meridian.base.recess)}"
        axes.text(0.05 * reach, y, text, size=style.SMALL, va="center", color=style.INK)


def _across(axes: Axes, sheet: _Sheet, height: float, place: float) -> None:
    """Inside diameter at a height."""
    radius = float(sheet.meridian.profile.radius_at(height))
    shown, z = sheet.length(radius), sheet.length(height)
    for side in (-shown, shown):
        axes.plot([side, side], [z, place], color=style.QUIET, linewidth=0.6)
    axes.annotate("", (-shown, place), (shown, place), arrowprops=ARROWS)
    _on_line(axes, 0.0, place, f"Ø {sheet.text(2 * radius)} inside")


def _upright(axes: Axes, sheet: _Sheet, height: float, place: float, edge: float) -> None:
    """A height above the table."""
    z = sheet.length(height)
    axes.plot([-edge, place], [z, z], color=style.QUIET, linewidth=0.6)
    axes.annotate("", (place, 0.0), (place, z), arrowprops=ARROWS)
    _on_line(axes, place, 0.5 * z, sheet.text(height), 90)


def _on_line(axes: Axes, x: float, y: float, text: str, rotation: float = 0.0) -> None:
    box = {"facecolor": "white", "edgecolor": "none", "pad": 1.5}
    axes.text(x, y, text, size=style.NORMAL, ha="center", va="center", rotation=rotation, bbox=box)


Box = tuple[float, float, float, float]
"""Left, bottom, width and height [shown unit]."""


def _details(sheet: _Sheet) -> list[tuple[str, str, Box]]:
    """Letter, title and place of each detail, from the brim down."""
    meridian = sheet.meridian
    middle = _fullest_height(meridian)
    wall = float(meridian.outer_offset_at(middle))
    end = max(6.0 * wall, 0.1 * meridian.height)
    ends = sorted(layer.high for layer in meridian.layers if layer.high < meridian.height - 1e-9)
    upper = ends[-1] if ends else meridian.height - 0.4 * end
    foot = max(end, 1.4 * meridian.floor)
    return [
        ("A", "upper end of a layer" if ends else "brim", _box(sheet, upper, end)),
        ("B", f"wall at {sheet.text(middle)}", _box(sheet, middle, 1.9 * wall)),
        ("C", "foot and base", _box(sheet, 0.4 * foot, foot)),
    ]


def _fullest_height(meridian: Meridian) -> float:
    """Middle of the longest piece of wall in which most layers lie."""
    ends = np.unique([*(end for layer in meridian.layers for end in layer.reach), 0.0, meridian.height])
    middles, lengths = 0.5 * (ends[1:] + ends[:-1]), np.diff(ends)
    counts = [sum(_has(layer, float(z)) for layer in meridian.layers) for z in middles]
    return float(middles[np.lexsort((lengths, np.array(counts)))[-1]])


def _has(layer: LayerBand, height: float) -> bool:
    return layer.low <= height <= layer.high


def _box(sheet: _Sheet, height: float, size: float) -> Box:
    """A square about the middle of the wall at a height."""
    meridian = sheet.meridian
    inner = np.array([float(meridian.profile.radius_at(height)), height])
    middle = inner + 0.5 * float(meridian.outer_offset_at(height)) * meridian.profile.normal_at(height)
    left, bottom, width = (sheet.length(x) for x in (middle[0] - size / 2, middle[1] - size / 2, size))
    return left, bottom, width, width


def _detail(axes: Axes, sheet: _Sheet, box: Box) -> None:
    left, bottom, width, height = box
    _cut(axes, sheet, 0.9)
    axes.set_xlim(left, left + width)
    axes.set_ylim(bottom, bottom + height)
    axes.set_aspect("equal", anchor="W")
    axes.set_xticks([])
    axes.set_yticks([])
    axes.set_facecolor("white")
    level, radius = (
        sheet.length(sheet.level),
        sheet.length(float(sheet.meridian.profile.radius_at(sheet.level))),
    )
    axes.plot([0, radius], [level, level], color=style.DRINK, linewidth=1.2)
    axes.axhline(0.0, color=style.INK, linewidth=1.2)


def _mark(axes: Axes, letter: str, box: Box) -> None:
    left, bottom, width, height = box
    axes.add_patch(Rectangle((left, bottom), width, height, fill=False, edgecolor=style.ALERT, linewidth=0.9))
    axes.text(left + width, bottom + height, f" {letter}", size=style.NORMAL, color=style.ALERT, va="bottom")


def _scale(axes: Axes) -> float:
    """Inches on paper per shown unit, with the equal aspect applied."""
    width, height = style.inches(axes)
    box = axes.get_position(original=True)
    (left, right), (bottom, top) = axes.get_xlim(), axes.get_ylim()
    return float(min(box.width * width / (right - left), box.height * height / (top - bottom)))


def _layer_list(figure: Figure, sheet: _Sheet) -> None:
    """Layers inside to outside and base, with material, thickness and heights."""
    meridian, top = sheet.meridian, 0.90
    figure.text(0.77, top, "Inside to outside", size=style.NORMAL, weight="bold", color=style.INK)
    colours = outline.layer_colours(meridian)
    entries = [
        (layer.name, layer.material.name, layer.thickness, _span(sheet, layer)) for layer in meridian.layers
    ]
    if meridian.base is not None:
        entries.append(("base", meridian.base.material.name, meridian.base.thickness, "disc"))
    for number, (name, material, thickness, span) in enumerate(entries):
        y = top - 0.065 * (number + 1)
        box = Rectangle(
            (0.77, y - 0.012), 0.018, 0.032, facecolor=colours[name], edgecolor=style.INK, linewidth=0.7
        )
        box.set_transform(figure.transFigure)
        figure.add_artist(box)
        figure.text(0.797, y + 0.008, f"{name}  {sheet.text(thickness)}", size=style.NORMAL, color=style.INK)
        figure.text(0.797, y - 0.014, f"{material}, {span}", size=style.SMALL, color=style.QUIET)
    total = sheet.text(sum(layer.thickness for layer in meridian.layers))
    y = top - 0.065 * (len(entries) + 1)
    figure.text(0.797, y, f"all layers of the wall: {total}", size=style.NORMAL, color=style.INK)


def _span(sheet: _Sheet, layer: LayerBand) -> str:
    if layer.low <= 1e-9 and layer.high >= sheet.meridian.height - 1e-9:
        return "whole height"
    return f"{sheet.text(layer.low).partition(' ')[0]} to {sheet.text(layer.high)}"
