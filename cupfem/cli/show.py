"""What the commands print."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from pathlib import Path

from rich.console import Console
from rich.markup import escape
from rich.table import Table

from cupfem.against import Candidate, hold_answers, hold_grounds, hold_heads, hold_rows, side_by_side
from cupfem.drawing import Drawing
from cupfem.pour.ranges import LEFT
from cupfem.quantities import Units
from cupfem.run import CAUTION, FREE_WALL, Run, headline
from cupfem.run.log import MeasuredLog, misfits


def show_run(console: Console, run: Run, units: Units) -> None:
    """Headline figures, verdict, the two uncertainties apart, defaults and the caution."""
    console.print(f"[bold]{escape(run.cup.title)} - {escape(run.serving.title)}[/bold]")
    if run.touch is None:
        console.print(f"[italic]{FREE_WALL}[/italic]")
    console.print()
    console.print(_table(headline.rows(run, run.figures(), units)))
    for verdict in headline.verdicts(run):
        colour = "green" if verdict.passed else "red"
        console.print(f"[bold {colour}]{escape(headline.verdict_line(verdict, units))}[/bold {colour}]")
    _section(console, "Uncertainty", headline.uncertainty_lines(run))
    left = [line.removeprefix(LEFT) for line in run.ranges if line.startswith(LEFT)]
    _section(console, "Correlations outside their range", left)
    _section(console, "Defaults used", ["; ".join(run.defaults)] if run.defaults else [])
    console.print(f"\n[bold]Caution[/bold]\n{CAUTION}")


def show_hold(console: Console, candidate: Candidate, asked: float, units: Units) -> None:
    """What can be held: a part of the map, the band that cannot, the first comfortable moment, notes."""
    run, hold = candidate.run, candidate.hold
    assert hold is not None
    console.print(f"[bold]{escape(run.cup.title)} - {escape(run.serving.title)}[/bold]\n")
    console.print("[bold]Hold time in s, thin to thick skin, by height and pick-up[/bold]")
    console.print(_table(hold_rows(hold, units), hold_heads(hold, units)))
    console.print()
    console.print(_table(hold_answers(hold, asked, units)))
    for verdict in headline.verdicts(run):
        colour = "green" if verdict.passed else "red"
        console.print(f"[bold {colour}]{escape(headline.verdict_line(verdict, units))}[/bold {colour}]")
    _section(console, "Rests on", [*hold_grounds(hold), *headline.uncertainty_lines(run)])
    console.print(f"\n[bold]Caution[/bold]\n{CAUTION}")


def show_against(console: Console, candidates: Sequence[Candidate], asked: float, units: Units) -> None:
    """The cups side by side; nothing for one alone."""
    if len(candidates) < 2:
        return
    console.print("\n[bold]Side by side[/bold]")
    heads = ["", *(each.title for each in candidates)]
    console.print(_table([(what, *cells) for what, cells in side_by_side(candidates, asked, units)], heads))


def show_log(console: Console, run: Run, log: MeasuredLog) -> None:
    """How far the run is from each column of a measured log."""
    _section(console, "Measured log (run minus log)", [misfit.line() for misfit in misfits(run, log)])


def show_drawing(console: Console, drawing: Drawing, units: Units) -> None:
    """Capacity and mass, layers, mesh quality, volume against level."""
    heads = ("layer", "material", "thickness", "volume", "mass", "cells across")
    console.print(f"[bold]{escape(drawing.cup.title)}[/bold]\n")
    console.print(_table(drawing.headline_rows(units)))
    for rows, titles in (
        (drawing.part_rows(units), heads),
        (drawing.quality_rows(), ()),
        (drawing.fill_rows(units), ("level", "volume")),
    ):
        console.print()
        console.print(_table(rows, titles))


def show_folder(console: Console, folder: Path, quiet: bool) -> None:
    """Where the files are; alone on its line where nothing else is printed, so that a script can read it."""
    if not quiet:
        console.print("\n[bold]Written to[/bold]")
    console.print(escape(str(folder)), soft_wrap=True)


def _table(rows: Iterable[Sequence[str]], heads: Sequence[str] = ()) -> Table:
    table = Table(*heads, box=None, pad_edge=False, show_header=bool(heads), padding=(0, 2, 0, 0))
    for row in rows:
        # A range may break after its dots on a narrow terminal; a figure is never cut or broken within.
        table.add_row(*(escape(cell.replace("..", ".. ")) for cell in row))
    for column in table.columns:
        column.overflow = "fold"
    return table


def _section(console: Console, title: str, lines: Sequence[str]) -> None:
    if lines:
        console.print(f"\n[bold]{title}[/bold]")
    for line in lines:
        console.print(escape(line))
