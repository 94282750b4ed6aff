"""The page as one file."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from pathlib import Path

from jinja2 import Environment, PackageLoader, StrictUndefined

from cupfem.against import ASKED, Candidate
from cupfem.breakdown import Slab
from cupfem.quantities import Units
from cupfem.report.content import content
from cupfem.run import Run

TEMPLATE = "report.html"


def write_report(
    run: Run,
    path: str | Path,
    units: Units = "si",
    *,
    candidates: Sequence[Candidate] = (),
    asked: float = ASKED,
    drawn: Mapping[str, Path] | None = None,
    slab: Slab | None = None,
) -> Path:
    """Write the page of a run; returns its path. A second call writes the same bytes.

    Parameters
    ----------
    candidates:
        The run with its map of hold times, and further cups to set beside it; the first is that of `run`.
    asked:
        Hold time [s] to judge by.
    drawn:
        Pictures that `write_figures` has written, which are then not drawn again.
    slab:
        One-dimensional estimates beside the run.
    """
    place = Path(path)
    text = render(run, units, candidates=candidates, asked=asked, drawn=drawn, slab=slab)
    place.write_text(text, encoding="utf-8")
    return place


def render(
    run: Run,
    units: Units = "si",
    *,
    candidates: Sequence[Candidate] = (),
    asked: float = ASKED,
    drawn: Mapping[str, Path] | None = None,
    slab: Slab | None = None,
) -> str:
    """The page of a run as HTML with everything in it: no other file and no network is needed."""
    environment = Environment(
        loader=PackageLoader("cupfem.report"),
        autoescape=True,
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
    )
    values = content(candidates or [Candidate(run)], asked, units, drawn, slab)
    return environment.get_template(TEMPLATE).render(values)
