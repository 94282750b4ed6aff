"""A run as the table that a notebook shows."""

from __future__ import annotations

from html import escape
from typing import TYPE_CHECKING

from cupfem.run import headline

if TYPE_CHECKING:
    from cupfem.run.result import Run


def html(run: Run) -> str:
    """Headline figures, verdict, uncertainties and caution as HTML."""
    rows = "".join(
        f"<tr><td>{escape(what.strip())}</td><td>{escape(value)}</td></tr>"
        for what, value in headline.rows(run, run.figures())
    )
    lines = [
        *(headline.verdict_line(verdict) for verdict in headline.verdicts(run)),
        *headline.uncertainty_lines(run),
        *([headline.FREE_WALL] if run.touch is None else []),
        headline.CAUTION,
    ]
    title = escape(f"{run.cup.title} - {run.serving.title}")
    return f"<b>{title}</b><table>{rows}</table>" + "".join(f"<p>{escape(line)}</p>" for line in lines)
