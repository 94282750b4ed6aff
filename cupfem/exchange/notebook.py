"""Runs and maps of hold times as what a notebook works with: pandas tables and xarray datasets.

Neither package is needed by anything else; a call that lacks one says so. Array shapes: t times, p places of
the outer face, u pick-ups, h heights.
"""

from __future__ import annotations

import csv
import io
from importlib import import_module
from typing import Any

from cupfem.errors import InputError
from cupfem.exchange.hold_map import hold_csv
from cupfem.exchange.summary import series_csv
from cupfem.run import Run
from cupfem.touch.holding import Hold

WORDS = ("decided_by", "decided_by_thick_skin")
"""Columns of `hold.csv` that are no numbers."""


def to_pandas(result: Run | Hold) -> Any:
    """A `pandas.DataFrame` with the rows and headings of `series.csv`, or of `hold.csv`.

    Raises
    ------
    InputError
        If pandas is not installed.
    """
    pandas = _needed("pandas")
    text = series_csv(result) if isinstance(result, Run) else hold_csv(result)
    heads, *rows = csv.reader(io.StringIO(text))
    columns = {
        head: list(cells) if head in WORDS else [float(cell) if cell else float("nan") for cell in cells]
        for head, cells in zip(heads, zip(*rows, strict=True), strict=True)
    }
    return pandas.DataFrame(columns)


def to_xarray(result: Run | Hold) -> Any:
    """An `xarray.Dataset`: a run over `time_s` and `height_mm`, hold times over `pick_up_s` and `height_mm`.

    Raises
    ------
    InputError
        If xarray is not installed.
    """
    xarray = _needed("xarray")
    data, coordinates = _run(result) if isinstance(result, Run) else _hold(result)
    return xarray.Dataset(data, coordinates)


def _run(run: Run) -> tuple[dict[str, Any], dict[str, Any]]:
    """Variables (dimensions, values) and coordinates of a run."""
    series = run.series
    data: dict[str, Any] = {
        "drink_temperature_degC": ("time_s", series.drink_temperature),
        "drink_level_mm": ("time_s", 1e3 * series.drink_level),
        "outer_degC": (("time_s", "height_mm"), series.outer_temperature),
    }
    flows = {f"{name.replace(' ', '_')}_W": ("time_s", power) for name, power in series.powers.items()}
    return data | flows, {"time_s": run.time, "height_mm": 1e3 * run.faces.outer_height}


def _hold(hold: Hold) -> tuple[dict[str, Any], dict[str, Any]]:
    """Variables (dimensions, values) and coordinates of a map; a time that was not reached is infinite."""
    both, times = ("pick_up_s", "height_mm"), hold.times
    data = {
        "hold_time_s": (both, times.thin),
        "hold_time_thick_skin_s": (both, times.thick),
        "injury_time_s": (both, times.injury),
        "at_least_s": (both, times.at_least),
    }
    return data, {"pick_up_s": hold.pick_ups, "height_mm": 1e3 * hold.heights}


def _needed(name: str) -> Any:
    try:
        return import_module(name)
    except ImportError:
        raise InputError(
            name, None, "this package is not installed, and only this call needs it", f"pip install {name}"
        ) from None
