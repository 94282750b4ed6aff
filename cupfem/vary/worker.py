"""What runs in a worker process."""

from __future__ import annotations

import multiprocessing
import multiprocessing.connection
import os
import signal
import threading
import time
from collections.abc import Sequence
from typing import Any

from cupfem.errors import CupfemError
from cupfem.vary.cases import Evaluate
from cupfem.vary.store import Result

THREADS = ("OPENBLAS_NUM_THREADS", "OMP_NUM_THREADS", "MKL_NUM_THREADS", "VECLIB_MAXIMUM_THREADS")
"""Variables that tell linear-algebra libraries their number of threads, read when numpy is imported."""
FAILURES = (CupfemError, ArithmeticError, ValueError)
"""What makes a case a row with an error: refused input, no convergence, numbers out of range. Anything else
is a fault of the program, and stops the plan."""


def start_worker() -> None:
    """Prepare a worker of a local pool: Ctrl-C is the starter's business; a worker ends with its starter."""
    signal.signal(signal.SIGINT, signal.SIG_IGN)
    starter = multiprocessing.parent_process()
    if starter is not None:
        threading.Thread(target=_end_with, args=(starter.sentinel,), daemon=True).start()


def _end_with(sentinel: int) -> None:
    multiprocessing.connection.wait([sentinel])
    os._exit(1)


def run_chunk(evaluate: Evaluate, chunk: Sequence[tuple[str, Any]]) -> list[tuple[str, Result]]:
    """Run cases, given as key and payload; returns key and result of each."""
    return [(key, _run(evaluate, payload)) for key, payload in chunk]


def _run(evaluate: Evaluate, payload: Any) -> Result:
    start = time.perf_counter()
    try:
        figures, error = dict(evaluate(payload)), ""
    except FAILURES as problem:
        figures, error = {}, _text(problem)
    return Result(figures, error, time.perf_counter() - start)


def _text(problem: Exception) -> str:
    if isinstance(problem, CupfemError):
        return str(problem)
    return " ".join(f"{type(problem).__name__}: {problem}".split())
