"""What `pour` and `hold` add to the folder of a run: pictures, map of hold times, side-by-side, page."""

from __future__ import annotations

import csv
from collections.abc import Sequence
from pathlib import Path

from cupfem.against import ASKED, Candidate, side_by_side
from cupfem.errors import InputError
from cupfem.exchange.hold_map import hold_csv, hold_json
from cupfem.exchange.summary import summary_json
from cupfem.inputs import resolved_toml
from cupfem.quantities import Units, parse_quantity
from cupfem.run import Run
from cupfem.run.log import MeasuredLog, misfits
from cupfem.serving import Serving
from cupfem.touch.holding import DEFAULT_PAD, Hold, default_heights, default_pick_ups, hold_map


def asked_of(serving: Serving, wanted: str | None = None) -> float:
    """The hold time [s] that is asked for: the command's, the target's, or a usual one."""
    if wanted is not None:
        try:
            seconds = parse_quantity(wanted, "time")
        except InputError as error:
            raise InputError("--asked", wanted, error.why, error.instead) from None
        if seconds <= 0.0:
            raise InputError("--asked", wanted, "no time to hold a cup for", 'write a time such as "30 s"')
        return seconds
    target = serving.target
    return ASKED if target is None or target.hold_time is None else target.hold_time


def brief_map(run: Run) -> Hold:
    """A coarse map for the page of `pour`: a third of the heights and half of the pick-ups."""
    heights = default_heights(run, DEFAULT_PAD.width)[::3]
    return hold_map(run, heights, default_pick_ups(run.serving.duration)[::-2][::-1], sections=1)


def write_pictures(
    candidates: Sequence[Candidate], place: Path, asked: float, units: Units, report: bool
) -> None:
    """Pictures, the map's table, the side-by-side and the page into a folder that is being filled."""
    from cupfem.figures import write_figures

    first = candidates[0]
    drawn = write_figures(first.run, place, units, hold=first.hold, asked=asked)
    if first.hold is not None:
        (place / "hold.csv").write_text(hold_csv(first.hold), encoding="utf-8")
        (place / "hold.json").write_text(hold_json(first.hold, asked), encoding="utf-8")
    if len(candidates) > 1:
        _write_against(candidates, place, asked, units)
    if report:
        from cupfem.breakdown import slab
        from cupfem.report import write_report

        write_report(
            first.run,
            place / "report.html",
            units,
            candidates=candidates,
            asked=asked,
            drawn=drawn,
            slab=slab(first.run),
        )


def write_log(run: Run, log: MeasuredLog, place: Path, units: Units) -> None:
    """Picture of a measured log over the run, and how far they are apart."""
    from cupfem.figures import log_figure, png

    (place / "log.png").write_bytes(png(log_figure(run, log, units)))
    with (place / "log.csv").open("w", encoding="utf-8", newline="") as file:
        table = csv.writer(file)
        table.writerow(["column", "points", "rmse_K", "mean_K", "largest_K"])
        for misfit in misfits(run, log):
            numbers = (misfit.root_mean_square, misfit.mean, misfit.largest)
            table.writerow([misfit.column, misfit.points, *(f"{value:.4g}" for value in numbers)])


def _write_against(candidates: Sequence[Candidate], place: Path, asked: float, units: Units) -> None:
    """The table, the picture, and for each further cup its drawing and its figures."""
    from cupfem.figures import against_figure, png

    with (place / "against.csv").open("w", encoding="utf-8", newline="") as file:
        table = csv.writer(file)
        table.writerow(["", *(each.title for each in candidates)])
        table.writerows([what.strip(), *cells] for what, cells in side_by_side(candidates, asked, units))
    (place / "against.png").write_bytes(png(against_figure(candidates, units)))
    for number, each in enumerate(candidates[1:], 1):
        (place / f"against_{number}.toml").write_text(resolved_toml(each.run.cup), encoding="utf-8")
        (place / f"against_{number}.json").write_text(summary_json(each.run), encoding="utf-8")
        if each.hold is not None:
            (place / f"against_{number}_hold.json").write_text(hold_json(each.hold, asked), encoding="utf-8")
