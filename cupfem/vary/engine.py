"""Running cases: what is in the store is taken from it, the rest is run in chunks and stored as it comes."""

from __future__ import annotations

import time
from collections import Counter
from collections.abc import Callable, Iterable, Iterator
from concurrent.futures import FIRST_COMPLETED, Future, wait
from concurrent.futures.process import BrokenProcessPool
from dataclasses import dataclass
from itertools import islice
from typing import Any

from cupfem.errors import CupfemError
from cupfem.vary.cases import Case, Evaluate
from cupfem.vary.pools import Pool
from cupfem.vary.store import Result, Store
from cupfem.vary.worker import run_chunk

CHUNK = 0.05
"""Work of a chunk [s]: a hundred times the cost of sending it. Of cases that are shorter a kill can lose so
much finished work per worker; of longer ones, of which a chunk has one, nothing that finished."""
LARGEST_CHUNK = 256
DEATHS = 3
"""How often a case may be under way when a worker dies, before it is given up."""
DIED = "the worker process died while this case ran (out of memory?)"

Chunk = list[tuple[str, Any]]


@dataclass(frozen=True)
class Progress:
    """How far a plan is: cases that are done, of them taken from the store, failed; rate [1/s]; left [s]."""

    done: int
    total: int
    resumed: int
    failed: int
    rate: float
    left: float | None


class Engine:
    """Runs cases by one function, through one pool, into one store."""

    def __init__(
        self,
        evaluate: Evaluate,
        store: Store,
        pool: Pool,
        progress: Callable[[Progress], None] | None = None,
    ) -> None:
        self._evaluate, self._store, self._pool, self._progress = evaluate, store, pool, progress
        self._pending: dict[Future[list[tuple[str, Result]]], Chunk] = {}
        self._asked: Counter[str] = Counter()
        self._deaths: Counter[str] = Counter()
        self._given_up: dict[str, Result] = {}
        self._again: Chunk = []
        self._per_case = CHUNK
        self._start = time.perf_counter()
        self._ran: set[str] = set()
        self._done = self._resumed = self._failed = self._total = 0

    def run(self, cases: Iterable[Case], total: int) -> list[tuple[Case, Result]]:
        """The results of cases, in their order.

        On KeyboardInterrupt what is under way is finished and stored before it goes on up.
        """
        self._total += total
        seen: list[Case] = []
        waiting = self._new(cases, seen)
        try:
            while self._fill(waiting) or self._pending:
                self._collect()
        except KeyboardInterrupt:
            self._drain()
            raise
        self._tell()
        return [(case, self._result(case)) for case in seen]

    def _new(self, cases: Iterable[Case], seen: list[Case]) -> Iterator[tuple[str, Any]]:
        """Key and payload of each case that has to be run, once; all cases go to `seen`."""
        for case in cases:
            seen.append(case)
            if case.error or case.key in self._store or case.key in self._given_up:
                self._done += 1
                self._failed += bool(self._result(case).error)
                self._resumed += not case.error and case.key not in self._ran
                continue
            self._asked[case.key] += 1
            if self._asked[case.key] == 1:
                yield case.key, case.payload

    def _result(self, case: Case) -> Result:
        if case.error:
            return Result({}, case.error)
        return self._given_up.get(case.key) or self._store[case.key]

    def _fill(self, waiting: Iterator[tuple[str, Any]]) -> bool:
        """Submit chunks while there is room; whether anything was submitted."""
        submitted = False
        while len(self._pending) < self._room() and (chunk := self._next_chunk(waiting)):
            self._submit(chunk)
            submitted = True
        return submitted

    def _room(self) -> int:
        """Cases that were under way when a worker died go alone: only the guilty one can die again."""
        return 1 if self._again else self._pool.slots

    def _next_chunk(self, waiting: Iterator[tuple[str, Any]]) -> Chunk:
        if self._again:
            return [self._again.pop()]
        size = max(1, min(LARGEST_CHUNK, int(CHUNK / max(self._per_case, 1e-6))))
        return list(islice(waiting, size))

    def _submit(self, chunk: Chunk) -> None:
        try:
            future = self._pool.executor.submit(run_chunk, self._evaluate, chunk)
        except BrokenProcessPool:  # it broke since the last answer; what is pending will say so too
            self._again += chunk
            return
        self._pending[future] = chunk

    def _collect(self) -> None:
        if not self._pending:
            self._pool.restart()
            return
        done, _ = wait(self._pending, return_when=FIRST_COMPLETED)
        finished: list[tuple[str, Result]] = []
        broken = False
        for future in done:
            chunk = self._pending.pop(future)
            problem = _problem(future)
            if isinstance(problem, BrokenProcessPool) or type(problem).__name__ == "KilledWorker":
                broken = broken or isinstance(problem, BrokenProcessPool)
                self._mourn(chunk)
            elif problem is not None:
                self._keep(finished)
                raise problem
            else:
                finished += future.result()
        self._keep(finished)
        if broken:
            self._restart()

    def _restart(self) -> None:
        """After a death all that was under way is lost with the pool."""
        for chunk in self._pending.values():
            self._mourn(chunk)
        self._pending.clear()
        self._pool.restart()

    def _mourn(self, chunk: Chunk) -> None:
        for key, payload in chunk:
            self._deaths[key] += 1
            if self._deaths[key] < DEATHS:
                self._again.append((key, payload))
            else:
                self._given_up[key] = Result({}, DIED)
                self._count(key, failed=True)

    def _keep(self, finished: list[tuple[str, Result]]) -> None:
        if not finished:
            return
        self._store.add(finished)
        for key, result in finished:
            self._ran.add(key)
            self._count(key, failed=bool(result.error))
        mean = sum(result.seconds for _, result in finished) / len(finished)
        self._per_case = mean if self._per_case == CHUNK else 0.5 * (self._per_case + mean)
        self._tell()

    def _count(self, key: str, failed: bool) -> None:
        cases = self._asked.pop(key, 0)
        self._done += cases
        self._failed += cases * failed

    def _drain(self) -> None:
        """Finish and keep what is under way."""
        for future in list(self._pending):
            if future.cancel():
                del self._pending[future]
        while self._pending:
            self._collect()

    def _tell(self) -> None:
        if self._progress is not None:
            self._progress(self.state())

    def state(self) -> Progress:
        """How far the cases are."""
        spent = time.perf_counter() - self._start
        rate = len(self._ran) / spent if spent > 0.0 else 0.0
        left = (self._total - self._done) / rate if rate > 0.0 else None
        return Progress(self._done, self._total, self._resumed, self._failed, rate, left)


def _problem(future: Future[list[tuple[str, Result]]]) -> BaseException | None:
    if future.cancelled():
        return CupfemError("the scheduler dropped the cases under way; run the plan again to go on")
    return future.exception()
