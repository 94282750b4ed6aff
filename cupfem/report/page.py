"""The page as one file."""

from __future__ import annotations

from pathlib import Path

from jinja2 import Environment, PackageLoader, StrictUndefined

from cupfem.quantities import Units
from cupfem.report.content import content
from cupfem.run import Run

TEMPLATE = "report.html"


def write_report(run: Run, path: str | Path, units: Units = "si") -> Path:
    """Write the page of a run; returns its path. A second call writes the same bytes."""
    place = Path(path)
    place.write_text(render(run, units), encoding="utf-8")
    return place


def render(run: Run, units: Units = "si") -> str:
    """The page of a run as HTML with everything in it: no other file and no network is needed."""
    environment = Environment(
        loader=PackageLoader("cupfem.report"),
        autoescape=True,
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
    )
    return environment.get_template(TEMPLATE).render(content(run, units))
