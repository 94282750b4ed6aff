"""The command `vary`: run a plan of many cases, or go on with one that was stopped."""

from __future__ import annotations

import sys
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import TYPE_CHECKING, Annotated

import typer

from cupfem.cli.app import Quiet, app

if TYPE_CHECKING:
    from cupfem.vary import Outcome, Plan, Progress

STORE = "cases.sqlite"


@app.command(epilog="Example: cupfem vary geometries/plan_gap_and_board.toml")
def vary(
    plan: Annotated[
        str, typer.Argument(metavar="PLAN", help="Plan file, such as geometries/plan_tolerances.toml.")
    ],
    out: Annotated[
        str | None,
        typer.Option(metavar="DIR", help="Folder to write or go on with; left out: named after the plan."),
    ] = None,
    workers: Annotated[
        int | None, typer.Option(metavar="NUMBER", help="Processes; left out: one for each core.")
    ] = None,
    scheduler: Annotated[
        str | None, typer.Option(metavar="ADDRESS", help="Run on the Dask cluster of this scheduler.")
    ] = None,
    parquet: Annotated[bool, typer.Option("--parquet", help="Write the table as Parquet too.")] = False,
    quiet: Quiet = False,
) -> None:
    """Run many cases: table, pictures, what moves each figure, the best ten. Run it again to go on."""
    from cupfem.vary import load_plan
    from cupfem.vary.job import prepared
    from cupfem.vary.job import vary as run

    given = load_plan(plan)
    prepared(given, Path(plan).parent)  # what is refused is refused before there is a folder
    folder = _folder(plan, out)
    store = folder / STORE
    try:
        with _shown(quiet) as tell:
            outcome = run(
                given,
                folder=Path(plan).parent,
                store=store,
                workers=workers,
                scheduler=scheduler,
                progress=tell,
            )
    except KeyboardInterrupt:
        typer.echo(f"what finished is kept in {store}: the same command goes on from there", err=True)
        raise
    text = _write(outcome, given, folder, parquet)
    typer.echo(str(folder) if quiet else f"{text}\nWritten to\n{folder}")


def _folder(plan: str, out: str | None) -> Path:
    """The folder of a plan: a new one, or one that holds its store."""
    from cupfem.errors import InputError
    from cupfem.exchange.files import explained, shown

    folder = Path(out or f"{Path(plan).stem}-cases")
    if folder.exists() and not (folder / STORE).is_file():
        raise InputError("--out", shown(folder), f"it exists and holds no {STORE}", "choose another name")
    with explained(folder, "--out"):
        folder.mkdir(exist_ok=True)
    return folder


def _write(outcome: Outcome, plan: Plan, folder: Path, parquet: bool) -> str:
    from cupfem.figures.vary import write_outcome_figures
    from cupfem.report.outcome import write_outcome
    from cupfem.vary import write_csv, write_parquet
    from cupfem.vary.text import outcome_text

    write_csv(outcome, folder / "cases.csv")
    if parquet:
        write_parquet(outcome, folder / "cases.parquet")
    aim = None if plan.best is None else plan.best.aim
    text = outcome_text(outcome, aim)
    (folder / "outcome.txt").write_text(text, encoding="utf-8")
    write_outcome_figures(outcome, folder)
    write_outcome(outcome, folder / "outcome.html", aim)
    return text


@contextmanager
def _shown(quiet: bool) -> Iterator[Callable[[Progress], None] | None]:
    """Cases, rate and time left on standard error; nothing where that is no terminal."""
    if quiet or not sys.stderr.isatty():
        yield None
        return
    from rich.console import Console
    from rich.progress import BarColumn, TextColumn
    from rich.progress import Progress as Bar

    columns = (BarColumn(), TextColumn("{task.completed}/{task.total} {task.description}"))
    with Bar(*columns, console=Console(stderr=True), transient=True) as bar:
        task = bar.add_task("", total=None)

        def tell(now: Progress) -> None:
            bar.update(task, completed=now.done, total=now.total, description=progress_text(now))

        yield tell


def progress_text(now: Progress) -> str:
    """Rate, time left, and what failed or was there before."""
    parts = [f"{now.rate:.2g} a second" if now.rate else "starting"]
    if now.left is not None:
        parts.append(f"{now.left:.0f} s left" if now.left < 120 else f"{now.left / 60:.0f} min left")
    parts += [
        f"{count} {word}" for count, word in ((now.resumed, "taken up"), (now.failed, "failed")) if count
    ]
    return ", ".join(parts)
