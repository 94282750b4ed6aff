"""The command `slab`: one-dimensional estimates beside the finite-element answer, in one folder."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Annotated

import typer

from cupfem.cli.app import CupFile, Fineness, Force, Out, Quiet, Report, UnitSystem, app

if TYPE_CHECKING:
    from cupfem.breakdown import Slab
    from cupfem.cup import Cup
    from cupfem.quantities import Units
    from cupfem.run import Run
    from cupfem.serving import Serving


@app.command(epilog="Example: cupfem slab geometries/double_wall.toml --units us")
def slab(
    cup: CupFile,
    serving: Annotated[
        str | None, typer.Argument(metavar="SERVING", help="Serving file; left out: the default serving.")
    ] = None,
    out: Out = None,
    force: Force = False,
    quiet: Quiet = False,
    fineness: Fineness = 1.0,
    units: UnitSystem = "si",
    report: Report = False,
) -> None:
    """Set hand estimates beside the field: table, where and when each fails, map, one sentence."""
    from rich.console import Console

    from cupfem.breakdown import slab as compare
    from cupfem.cli.show import show_folder
    from cupfem.cup import load_cup
    from cupfem.exchange import check_place
    from cupfem.exchange.place import write_numbered, write_whole
    from cupfem.serving import Serving, load_serving

    drawn, given = load_cup(cup), Serving() if serving is None else load_serving(serving)
    if out is not None:
        check_place(out, force)
    found = compare(_march(drawn, given, fineness, out))

    def fill(place: Path) -> None:
        _write(found, place, units)
        if report:
            from cupfem.report import write_report

            write_report(found.run, place / "report.html", units, slab=found)

    folder = (
        write_numbered(Path(), "slab", fill) if out is None else write_whole(Path(out), fill, force=force)
    )
    if not quiet:
        typer.echo(found.table(units))
    show_folder(Console(highlight=False), folder, quiet)


def _march(cup: Cup, serving: Serving, fineness: float, out: str | None) -> Run:
    """The run; one that cannot go on leaves its inputs in a folder of its own."""
    from cupfem.errors import ConvergenceError
    from cupfem.exchange import write_incomplete
    from cupfem.pour import pour

    try:
        return pour(cup, serving, fineness=fineness, companion=False, hold=False)
    except ConvergenceError as error:
        folder = write_incomplete(cup, serving, error, out, name="slab")
        raise ConvergenceError(f"{error}; the inputs are in {folder}") from error


def _write(found: Slab, place: Path, units: Units) -> None:
    from cupfem.exchange.summary import json_text
    from cupfem.figures.breakdown import write_slab
    from cupfem.inputs import resolved_toml

    (place / "table.txt").write_text(found.table(units) + "\n", encoding="utf-8")
    (place / "slab.csv").write_text(found.csv(), encoding="utf-8")
    (place / "summary.json").write_text(json_text(found.figures()), encoding="utf-8")
    (place / "cup.toml").write_text(resolved_toml(found.run.cup), encoding="utf-8")
    (place / "serving.toml").write_text(resolved_toml(found.run.serving), encoding="utf-8")
    write_slab(found, place, units)
