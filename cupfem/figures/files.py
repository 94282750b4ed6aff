"""Pictures as files."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from io import BytesIO
from pathlib import Path

from matplotlib.figure import Figure

from cupfem.figures.field import field_figure
from cupfem.figures.heat import drink_figure, heat_figure
from cupfem.figures.hold import hold_figure
from cupfem.figures.section import Drawn, section_figure
from cupfem.figures.wall import wall_history, wall_map, wall_profile
from cupfem.quantities import Units
from cupfem.run import Run
from cupfem.touch.holding import Hold

DPI = 110
COMPRESSION = 3
"""Of PNG: the default of 6 takes three times as long for a tenth less."""

Picture = Callable[[Run, Units], Figure]
PICTURES: Mapping[str, Picture] = {
    "section": lambda run, units: section_figure(run, units),
    "field": lambda run, units: field_figure(run, units=units),
    "wall_history": lambda run, units: wall_history(run, units=units),
    "wall_profile": lambda run, units: wall_profile(run, units=units),
    "wall_map": lambda run, units: wall_map(run, units=units),
    "drink": lambda run, units: drink_figure(run, units),
    "heat": lambda run, units: heat_figure(run, units),
}
"""File name without its ending -> the picture."""


def write_figures(
    run: Run, folder: str | Path, units: Units = "si", *, hold: Hold | None = None, asked: float = 30.0
) -> dict[str, Path]:
    """Write all pictures of a run as PNG into a folder that exists, and with `hold` that of hold times.

    `asked` is the hold time [s] that is marked. Returns the paths by the names of the pictures.
    """
    paths = {name: Path(folder) / f"{name}.png" for name in (*PICTURES, *(["hold"] if hold else []))}
    for name, picture in PICTURES.items():
        paths[name].write_bytes(png(picture(run, units)))
    if hold is not None:
        paths["hold"].write_bytes(png(hold_figure(hold, asked, units)))
    return paths


def write_drawing(drawn: Drawn, path: str | Path, units: Units = "si") -> Path:
    """Write the section of a drawing as PNG."""
    place = Path(path)
    place.write_bytes(png(section_figure(drawn, units)))
    return place


def png(figure: Figure, dpi: float = DPI) -> bytes:
    """A figure as PNG. No date is written, so that a second run gives the same bytes."""
    stream = BytesIO()
    figure.savefig(
        stream, format="png", dpi=dpi, metadata={"Software": None}, pil_kwargs={"compress_level": COMPRESSION}
    )
    return stream.getvalue()


def svg(figure: Figure) -> str:
    """A figure as SVG text, without a date."""
    stream = BytesIO()
    figure.savefig(stream, format="svg", metadata={"Date": None})
    return stream.getvalue().decode("utf-8")
