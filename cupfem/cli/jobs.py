"""What the commands `draw`, `pour` and `hold` do."""

from __future__ import annotations

import csv
import json
import sys
import time
from collections.abc import Callable, Iterator, Sequence
from contextlib import contextmanager
from pathlib import Path

from rich.console import Console
from rich.progress import BarColumn, Progress, TaskProgressColumn, TextColumn

from cupfem.against import Candidate, check_number
from cupfem.cli.outcome import asked_of, brief_map, write_log, write_pictures
from cupfem.cli.show import show_against, show_drawing, show_folder, show_hold, show_log, show_run
from cupfem.cup import Cup, load_cup
from cupfem.drawing import Drawing, survey
from cupfem.errors import ConvergenceError, InputError
from cupfem.exchange import check_place, write_incomplete, write_run
from cupfem.exchange.place import write_numbered, write_whole
from cupfem.hold import hold
from cupfem.inputs import resolved_toml
from cupfem.pour import pour
from cupfem.quantities import Units, parse_quantity
from cupfem.run import Run
from cupfem.run.log import read_log
from cupfem.serving import Serving, load_serving

COMMAND, HOLD = "pour", "hold"


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
    accuracy: str | None,
    units: Units,
    report: bool,
    against: Sequence[str],
    log_path: str | None = None,
) -> None:
    """Run a serving, write its folder, print the headline figures; beside other cups if there are any."""
    started = time.perf_counter()
    check_number(against)
    log = None if log_path is None else read_log(log_path)
    cups, serving = [load_cup(each) for each in (path, *against)], serving_of(serving_path, duration)
    kelvins = None if accuracy is None else accuracy_of(accuracy)
    if out is not None:
        check_place(out, force)
    loaded = time.perf_counter()
    candidates = [Candidate(run_of(cup, serving, fineness, out, quiet, COMMAND, kelvins)) for cup in cups]
    poured = time.perf_counter()
    if report:
        candidates = [Candidate(each.run, brief_map(each.run)) for each in candidates]
    timings = {"load": loaded - started, "run": poured - loaded, "hold": time.perf_counter() - poured}
    asked = asked_of(serving)

    def pictures(_: Run, place: Path) -> None:
        write_pictures(candidates, place, asked, units, report)
        if log is not None:
            write_log(candidates[0].run, log, place, units)

    folder = write_run(candidates[0].run, out, name=COMMAND, force=force, figures=pictures, timings=timings)
    console = Console(highlight=False)
    if not quiet:
        show_run(console, candidates[0].run, units)
        if log is not None:
            show_log(console, candidates[0].run, log)
        show_against(console, candidates, asked, units)
    show_folder(console, folder, quiet)


def hold_cup(
    path: str,
    serving_path: str | None,
    out: str | None,
    *,
    against: Sequence[str],
    asked: str | None,
    longest: str,
    force: bool,
    quiet: bool,
    duration: str | None,
    fineness: float,
    units: Units,
    report: bool,
) -> None:
    """Run a serving, map its hold times, write the folder, print what can be held."""
    started = time.perf_counter()
    check_number(against)
    cups, serving = [load_cup(each) for each in (path, *against)], serving_of(serving_path, duration)
    seconds = asked_of(serving, asked)
    if out is not None:
        check_place(out, force)
    loaded = time.perf_counter()
    runs = [run_of(cup, serving, fineness, out, quiet, HOLD) for cup in cups]
    poured = time.perf_counter()
    candidates = [Candidate(run, hold(run, longest=longest)) for run in runs]
    timings = {"load": loaded - started, "run": poured - loaded, "hold": time.perf_counter() - poured}

    def pictures(_: Run, place: Path) -> None:
        write_pictures(candidates, place, seconds, units, report)

    folder = write_run(runs[0], out, name=HOLD, force=force, figures=pictures, timings=timings)
    console = Console(highlight=False)
    if not quiet:
        show_hold(console, candidates[0], seconds, units)
        show_against(console, candidates, seconds, units)
    show_folder(console, folder, quiet)


def serving_of(path: str | None, duration: str | None) -> Serving:
    """The serving with another duration, if one is given; checked as if its file had said so."""
    serving = Serving() if path is None else load_serving(path)
    if duration is None:
        return serving
    given = serving.model_dump(mode="json", by_alias=True, exclude_unset=True)
    return Serving(**{**given, "duration": duration})


def accuracy_of(text: str) -> float:
    """An asked accuracy [K]; InputError for what is none."""
    try:
        return parse_quantity(text, "temperature_difference")
    except InputError as error:
        raise InputError("accuracy", text, error.why, 'write it as in "0.1 K"') from None


def run_of(
    cup: Cup,
    serving: Serving,
    fineness: float,
    out: str | None,
    quiet: bool,
    name: str,
    accuracy: float | None = None,
) -> Run:
    """The run; one that cannot go on leaves the inputs in a folder of its own."""
    try:
        with _progress(serving.duration, quiet) as tell:
            return pour(cup, serving, fineness=fineness, accuracy=accuracy, progress=tell)
    except ConvergenceError as error:
        folder = write_incomplete(cup, serving, error, out, name=name)
        raise ConvergenceError(f"{error}; the inputs are in {folder}") from error


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
