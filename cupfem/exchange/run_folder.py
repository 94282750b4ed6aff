"""The folder that a run leaves behind."""

from __future__ import annotations

import platform
import sys
import time
from collections.abc import Callable, Mapping
from importlib.metadata import version
from pathlib import Path

from cupfem.cup import Cup
from cupfem.errors import ConvergenceError
from cupfem.exchange.fields import write_fields
from cupfem.exchange.place import INCOMPLETE, write_numbered, write_whole
from cupfem.exchange.summary import json_text, series_csv, summary_json
from cupfem.inputs import resolved_toml
from cupfem.run import Run, save_run
from cupfem.serving import Serving

LIBRARIES = ("numpy", "scipy", "scikit-fem", "pydantic", "pint")
"""What the figures of a run depend on."""


def write_run(
    run: Run,
    folder: str | Path | None = None,
    *,
    name: str = "pour",
    force: bool = False,
    figures: Callable[[Run, Path], None] | None = None,
    timings: Mapping[str, float] | None = None,
) -> Path:
    """Write all that a run leaves behind into one folder, which appears whole or not at all.

    `summary.json`, `series.csv`, `fields.pvd` with `fields/*.vtu`, `cup.toml` and `serving.toml` as resolved,
    `run.npz` (for `load_run`), `versions.json`, `timings.json` (with the numbers of steps), and what
    `figures` adds.

    Parameters
    ----------
    folder:
        Where to; left out: `<name>-001` in the current folder, or the next free number.
    force:
        Replace an existing run folder.
    figures:
        Called with the run and the folder that is being filled; may add files.
    timings:
        Seconds by name; the time taken here is added as `write`.

    Returns
    -------
    Path
        The folder.

    Raises
    ------
    InputError
        If the folder exists and is not to be replaced, or the place cannot be written to or is full.
    """

    def fill(place: Path) -> None:
        _fill(run, place, figures, dict(timings or {}))

    if folder is None:
        return write_numbered(Path(), name, fill)
    return write_whole(Path(folder), fill, force=force)


def write_incomplete(
    cup: Cup,
    serving: Serving,
    error: ConvergenceError,
    folder: str | Path | None = None,
    *,
    name: str = "pour",
) -> Path:
    """Leave the inputs of a run that could not go on, and `incomplete.txt` that says where it stopped.

    The folder is `<folder>-incomplete`, or `<name>-001-incomplete` with the next free number. An incomplete
    folder of an earlier try is replaced.
    """

    def fill(place: Path) -> None:
        _write_inputs(cup, serving, place)
        (place / "incomplete.txt").write_text(f"{error}\n", encoding="utf-8")

    if folder is None:
        return write_numbered(Path(), name, fill, INCOMPLETE)
    folder = Path(folder)
    return write_whole(folder.with_name(folder.name + INCOMPLETE), fill, force=True)


def _fill(
    run: Run, place: Path, figures: Callable[[Run, Path], None] | None, timings: dict[str, float]
) -> None:
    started = time.perf_counter()
    (place / "summary.json").write_text(summary_json(run), encoding="utf-8")
    (place / "series.csv").write_text(series_csv(run), encoding="utf-8")
    write_fields(run, place / "fields.pvd")
    save_run(run, place)
    _write_inputs(run.cup, run.serving, place)
    if figures is not None:
        figures(run, place)
    timings["write"] = time.perf_counter() - started
    told = {f"{name}_s": round(taken, 4) for name, taken in timings.items()}
    (place / "timings.json").write_text(json_text({**told, **run.counters}), encoding="utf-8")


def _write_inputs(cup: Cup, serving: Serving, place: Path) -> None:
    (place / "cup.toml").write_text(resolved_toml(cup), encoding="utf-8")
    (place / "serving.toml").write_text(resolved_toml(serving), encoding="utf-8")
    (place / "versions.json").write_text(json_text(versions()), encoding="utf-8")


def versions() -> dict[str, str]:
    """Releases of Python and of the libraries that the figures depend on."""
    own: str = sys.modules[__name__.partition(".")[0]].__version__
    told = {"cupfem": own, "python": platform.python_version()}
    return told | {library: version(library) for library in LIBRARIES}
