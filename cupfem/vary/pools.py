"""Where cases run: processes of this computer, or a Dask cluster. Both are executors of the standard kind."""

from __future__ import annotations

import multiprocessing
import os
import signal
import sys
import threading
from collections.abc import Iterator
from concurrent.futures import Executor, Future, ProcessPoolExecutor
from concurrent.futures.process import BrokenProcessPool
from contextlib import contextmanager
from importlib import import_module
from typing import Any, Protocol

from cupfem.errors import InputError
from cupfem.vary.worker import THREADS, start_worker

AHEAD = 2
"""Chunks per worker that are submitted at a time: one that runs, one that waits for it."""

PRELOADED = "cupfem.vary.recorded"
"""What the server imports once, so that no worker has to."""


class Pool(Protocol):
    """Something to submit chunks to."""

    @property
    def slots(self) -> int:
        """Chunks to have under way."""

    @property
    def executor(self) -> Executor:
        """The executor, started at first use."""

    def restart(self) -> None:
        """Replace an executor that broke."""

    def close(self) -> None:
        """End it, waiting for what runs."""


class LocalPool:
    """Processes of this computer, one thread of linear algebra each.

    They are started by a small server ("forkserver"), where the system has one, else afresh ("spawn"): a
    plain fork would copy threads and locks of the linear-algebra library.
    """

    def __init__(self, workers: int | None = None) -> None:
        if workers is not None and workers < 1:
            raise InputError("workers", workers, "no process would do the work", "write 1 or more")
        self._workers = workers or available_cores()
        self._executor: ProcessPoolExecutor | None = None

    @property
    def slots(self) -> int:
        """Chunks to have under way."""
        return AHEAD * self._workers

    @property
    def executor(self) -> Executor:
        """The process pool."""
        if self._executor is None:
            kind = "spawn" if sys.platform == "win32" else "forkserver"
            context = multiprocessing.get_context(kind)
            context.set_forkserver_preload([PRELOADED])
            self._executor = ProcessPoolExecutor(self._workers, context, start_worker)
            # processes take environment and signals as they are when they start: all of them start now
            with _one_thread(), _deaf_to_ctrl_c():
                _wait_for([self._executor.submit(os.getpid) for _ in range(self._workers)])
        return self._executor

    def restart(self) -> None:
        """Replace a pool that lost a process."""
        self.close()

    def close(self) -> None:
        """End the processes once they have done what they are at."""
        if self._executor is not None:
            self._executor.shutdown(wait=True, cancel_futures=True)
            self._executor = None


class ClusterPool:
    """Workers of a Dask cluster, by the address of its scheduler. Dask itself replaces workers that die."""

    def __init__(self, address: str) -> None:
        self._client = _dask_client(address)
        self._executor: Executor | None = None

    @property
    def slots(self) -> int:
        """Chunks to have under way: for all threads that the cluster has now."""
        return AHEAD * max(int(sum(self._client.nthreads().values())), 1)

    @property
    def executor(self) -> Executor:
        """Dask's own executor of the standard kind."""
        if self._executor is None:
            self._executor = self._client.get_executor()
        assert self._executor is not None
        return self._executor

    def restart(self) -> None:
        """Nothing: the cluster keeps itself."""

    def close(self) -> None:
        """Leave the cluster."""
        self._client.close()


def _wait_for(started: list[Future[int]]) -> None:
    try:
        for future in started:
            future.result()
    except BrokenProcessPool:
        why = "the worker processes could not start"
        instead = 'in a script, call this below a line if __name__ == "__main__":'
        raise InputError("workers", None, why, instead) from None


def available_cores() -> int:
    """Cores that this process may use."""
    if hasattr(os, "sched_getaffinity"):
        return len(os.sched_getaffinity(0))
    return os.cpu_count() or 1


def _dask_client(address: str) -> Any:
    try:
        distributed = import_module("distributed")
    except ModuleNotFoundError:
        why = 'a cluster needs the extra "cluster"'
        raise InputError("scheduler", address, why, 'install it with pip install "cupfem[cluster]"') from None
    try:
        return distributed.Client(address, timeout="10s", set_as_default=False)
    except (OSError, ValueError, TimeoutError) as problem:
        why = f"no scheduler answers there ({type(problem).__name__})"
        raise InputError("scheduler", address, why, 'write it as in "tcp://192.0.2.1:8786"') from None


@contextmanager
def _deaf_to_ctrl_c() -> Iterator[None]:
    """Ctrl-C goes to every process of the terminal; what starts here leaves it to the starter from birth."""
    if threading.current_thread() is not threading.main_thread():
        yield  # only the main thread may set what a signal does
        return
    before = signal.signal(signal.SIGINT, signal.SIG_IGN)
    try:
        yield
    finally:
        signal.signal(signal.SIGINT, before)


@contextmanager
def _one_thread() -> Iterator[None]:
    before = {name: os.environ.get(name) for name in THREADS}
    os.environ.update(dict.fromkeys(THREADS, "1"))
    try:
        yield
    finally:
        for name, value in before.items():
            if value is None:
                del os.environ[name]
            else:
                os.environ[name] = value
