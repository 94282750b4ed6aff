"""What the commands `draw` and `pour` do."""

from __future__ import annotations

import csv
import json
import sys
import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from pathlib import Path

from rich.console import Console
from rich.progress import BarColumn, Progress, TaskProgressColumn, TextColumn

from cupfem.cli.show import show_drawing, show_folder, show_run
from cupfem.cup import Cup, load_cup
from cupfem.drawing import Drawing, survey
from cupfem.errors import ConvergenceError
from cupfem.exchange import check_place, write_incomplete, write_run
from cupfem.exchange.place import write_numbered, write_whole
from cupfem.inputs import resolved_toml
from cupfem.pour import pour
from cupfem.quantities import Units
from cupfem.run import Run
from cupfem.serving import Serving, load_serving

COMMAND = "pour"


def draw_cup(path: str, out: str | None, *, force: bool, quiet: bool, fineness: float, units: Units) -> None:
    """Survey a cup, write picture and table, print them."""
    cup = load_cup(path)
    if out is not None:
        check_place(out, force)
    drawing = survey(cup, fineness)

    def fill(place: Path) -> None:
        _write_drawing(drawing, place, units)

    if out is None:
        folder = write_numbered(Path(), "draw", fill)
    else:
        folder = write_whole(Path(out), fill, force=force)
    console = Console(highlight=False)
    if not quiet:
        show_drawing(console, drawing, units)
    show_folder(console, folder, quiet)


def _write_drawing(drawing: Drawing, place: Path, units: Units) -> None:
    from cupfem.figures import write_drawing

    write_drawing(drawing, place / "section.png", units)
    (place / "summary.json").write_text(json.dumps(drawing.figures(), indent=2) + "\n", encoding="utf-8")
    (place / "cup.toml").write_text(resolved_toml(drawing.cup), encoding="utf-8")
    with (place / "fill.csv").open("w", encoding="utf-8", newline="") as file:
        table = csv.writer(file)
        table.writerow(["level_mm", "volume_ml"])
        for level, volume in zip(drawing.levels, drawing.volumes, strict=True):
            table.writerow([f"{1e3 * level:.6g}", f"{1e6 * volume:.6g}"])


def pour_cup(
    path: str,
    serving_path: str | None,
    out: str | None,
    *,
    force: bool,
    quiet: bool,
    duration: str | None,
    fineness: float,
    units: Units,
    report: bool,
) -> None:
    """Run a serving, write its folder, print the headline figures."""
    started = time.perf_counter()
    cup, serving = load_cup(path), _serving(serving_path, duration)
    if out is not None:
        check_place(out, force)
    loaded = time.perf_counter()
    run = _run(cup, serving, fineness, out, quiet)
    timings = {"load": loaded - started, "run": time.perf_counter() - loaded}
    folder = write_run(run, out, name=COMMAND, force=force, figures=_pictures(units, report), timings=timings)
    console = Console(highlight=False)
    if not quiet:
        show_run(console, run, units)
    show_folder(console, folder, quiet)


def _serving(path: str | None, duration: str | None) -> Serving:
    """The serving with another duration, if one is given; checked as if its file had said so."""
    serving = Serving() if path is None else load_serving(path)
    if duration is None:
        return serving
    given = serving.model_dump(mode="json", by_alias=True, exclude_unset=True)
    return Serving(**{**given, "duration": duration})


def _run(cup: Cup, serving: Serving, fineness: float, out: str | None, quiet: bool) -> Run:
    try:
        with _progress(serving.duration, quiet) as tell:
            return pour(cup, serving, fineness=fineness, progress=tell)
    except ConvergenceError as error:
        folder = write_incomplete(cup, serving, error, out, name=COMMAND)
        raise ConvergenceError(f"{error}; the inputs are in {folder}") from error


def _pictures(units: Units, report: bool) -> Callable[[Run, Path], None]:
    from cupfem.figures import write_figures

    def write(run: Run, place: Path) -> None:
        write_figures(run, place, units)
        if report:
            from cupfem.report import write_report

            write_report(run, place / "report.html", units)

    return write


@contextmanager
def _progress(duration: float, quiet: bool) -> Iterator[Callable[[float], None] | None]:
    """A bar on standard error; none where that is no terminal."""
    if quiet or not sys.stderr.isatty():
        yield None
        return
    columns = (TextColumn("{task.description}"), BarColumn(), TaskProgressColumn())
    with Progress(*columns, console=Console(stderr=True), transient=True) as progress:
        task = progress.add_task("march", total=duration)
        yield lambda reached: progress.update(task, completed=reached)
