"""The table of an outcome as CSV, and as Parquet with the extra: the same cells on every run of a plan."""

from __future__ import annotations

import csv
import io
import re
from collections.abc import Mapping
from importlib import import_module
from pathlib import Path
from typing import Any

from cupfem.errors import InputError
from cupfem.quantities import DIMENSIONS
from cupfem.vary.cases import all_inputs
from cupfem.vary.outcome import Outcome, at_least_key, in_shown_unit, varied_of
from cupfem.vary.values import Value

Cell = str | float | int | bool | None
_QUANTITY = re.compile(r"[-+0-9.e]+ (\S.*)")


def columns_of(outcome: Outcome) -> dict[str, list[Cell]]:
    """Heading -> cells, one per case: what varied, what came out, verdict, error, all other inputs."""
    columns: dict[str, list[Cell]] = {"case": [row.number for row in outcome.rows]}
    for varied in outcome.varied:
        if varied.is_number:
            cells = [in_shown_unit(row.inputs.get(varied.key), varied) for row in outcome.rows]
            columns[varied.heading] = [None if cell != cell else cell for cell in cells]
        else:
            columns[varied.heading] = [row.inputs.get(varied.key) for row in outcome.rows]
    for key in _figure_keys(outcome):
        columns[key] = [row.figures.get(key) for row in outcome.rows]
    if outcome.goals:
        columns["limits"] = list(outcome.verdicts())
    columns["error"] = [row.error or None for row in outcome.rows]
    return columns | _other_inputs(outcome, set(columns))


def csv_text(outcome: Outcome) -> str:
    """The table as CSV; an empty cell where there is no value."""
    columns = columns_of(outcome)
    text = io.StringIO()
    writer = csv.writer(text, lineterminator="\n")
    writer.writerow(columns)
    for cells in zip(*columns.values(), strict=True):
        writer.writerow([_text(cell) for cell in cells])
    return text.getvalue()


def write_csv(outcome: Outcome, path: str | Path) -> None:
    """Write the table as CSV."""
    Path(path).write_text(csv_text(outcome), encoding="utf-8")


def write_parquet(outcome: Outcome, path: str | Path) -> None:
    """Write the table as Parquet; InputError without the extra "parquet"."""
    try:
        arrow, parquet = import_module("pyarrow"), import_module("pyarrow.parquet")
    except ModuleNotFoundError:
        why, instead = 'Parquet needs the extra "parquet"', 'install it with pip install "cupfem[parquet]"'
        raise InputError(str(path), None, why, instead) from None
    columns: dict[str, Any] = {heading: _even(cells) for heading, cells in columns_of(outcome).items()}
    parquet.write_table(arrow.table(columns), path)


def _figure_keys(outcome: Outcome) -> list[str]:
    """Recorded figures, each followed by its least value if that occurs, then the margins of the target."""
    found = {key for row in outcome.rows for key in row.figures}
    keys: list[str] = []
    for key in outcome.recorded:
        keys += [key, *({at_least_key(key)} & found - {key})]
    return list(dict.fromkeys([*keys, *sorted(found - set(keys))]))


def _other_inputs(outcome: Outcome, taken: set[str]) -> dict[str, list[Cell]]:
    """All further inputs of each case, so that a row can be run again by itself."""
    leading = {item.key for item in outcome.varied}
    rows = [{} if row.text.startswith("{") else all_inputs(row.text) for row in outcome.rows]
    keys = dict.fromkeys(key for row in rows for key in row if key not in leading)
    columns: dict[str, list[Cell]] = {}
    for key in keys:
        heading, cells = _column(key, [row.get(key) for row in rows])
        columns[heading] = cells
    return {heading: cells for heading, cells in columns.items() if heading not in taken}


def _column(key: str, values: list[Value | None]) -> tuple[str, list[Cell]]:
    """Heading and cells of an input: its unit goes to the heading if all values have one of a dimension."""
    kinds = {_dimension(value) for value in values if value is not None}
    kind = kinds.pop() if len(kinds) == 1 else ""
    if not kind:
        return key, list(values)
    rows: list[Mapping[str, Value]] = [{} if value is None else {key: value} for value in values]
    varied = varied_of(key, kind, rows)
    return varied.heading, [None if value is None else in_shown_unit(value, varied) for value in values]


def _dimension(value: Value) -> str:
    """The dimension of a text with a unit, else an empty text."""
    match = _QUANTITY.fullmatch(value) if isinstance(value, str) else None
    if match is None:
        return ""
    return next((name for name, dimension in DIMENSIONS.items() if match[1] in dimension.units), "")


def _text(cell: Cell) -> str:
    if cell is None:
        return ""
    return f"{cell:.9g}" if isinstance(cell, float) else str(cell)


def _even(cells: list[Cell]) -> list[Cell]:
    """Cells of one type: numbers, or else text."""
    given = [cell for cell in cells if cell is not None]
    if all(isinstance(cell, int | float) and not isinstance(cell, bool) for cell in given):
        return cells
    return [None if cell is None else _text(cell) for cell in cells]
