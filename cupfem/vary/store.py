"""Figures of finished cases in one sqlite file, so that a plan that was stopped goes on where it was.

Only the process that started the plan writes to it. What was committed outlives a kill of the process
(write-ahead log; sqlite.org, "Write-Ahead Logging").
"""

from __future__ import annotations

import json
import sqlite3
from collections.abc import Iterable
from dataclasses import dataclass, field
from pathlib import Path
from types import TracebackType
from typing import Self

from cupfem.errors import InputError
from cupfem.vary.cases import Figures

WAIT = 30.0
"""How long [s] to wait for another plan that writes to the same file."""
_TABLE = """create table if not exists results
(key text primary key, figures text not null, error text not null, seconds real not null) without rowid"""


@dataclass(frozen=True)
class Result:
    """What a case gave; `seconds` is how long it took, and no part of the outcome."""

    figures: Figures
    error: str = ""
    seconds: float = field(default=0.0, compare=False)


class Store:
    """Results by the key of their case; without a path they are kept in memory only."""

    def __init__(self, path: str | Path | None = None) -> None:
        self._results: dict[str, Result] = {}
        try:
            self._file = sqlite3.connect(":memory:" if path is None else str(path), timeout=WAIT)
            self._file.execute("pragma journal_mode = wal")
            self._file.execute("pragma synchronous = normal")
            self._file.execute(_TABLE)
            for key, figures, error, seconds in self._file.execute("select * from results"):
                self._results[key] = Result(json.loads(figures), error, seconds)
        except sqlite3.Error as problem:
            why = f"cannot be used as the store of a plan ({problem})"
            raise InputError(str(path), None, why, "name another file, or remove this one") from None

    def __enter__(self) -> Self:
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        self._file.close()

    def __contains__(self, key: str) -> bool:
        return key in self._results

    def __getitem__(self, key: str) -> Result:
        return self._results[key]

    def __len__(self) -> int:
        return len(self._results)

    def add(self, results: Iterable[tuple[str, Result]]) -> None:
        """Keep results; they are on the disk when this returns."""
        new = list(results)
        rows = [(key, json.dumps(dict(r.figures)), r.error, r.seconds) for key, r in new]
        with self._file:
            self._file.executemany("insert or ignore into results values (?, ?, ?, ?)", rows)
        self._results |= new
