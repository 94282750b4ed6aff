"""A plan on a Dask cluster of two local workers, one of them killed half-way: the rows of a local run."""

import os
import re
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest
import vary_functions

from cupfem.errors import InputError
from cupfem.vary import FunctionModel, Plan, csv_text, vary

HERE = Path(__file__).parent
ROOT = HERE.parents[1]
CASES = 60
WORKER = ["-m", "distributed.cli.dask_worker", "--nthreads", "1", "--no-nanny", "--no-dashboard"]
SCHEDULER = ["-m", "distributed.cli.dask_scheduler", "--host", "127.0.0.1", "--port", "0", "--no-dashboard"]
pytestmark = pytest.mark.slow


@pytest.fixture
def cluster(tmp_path):
    """Address of a scheduler, and the processes of its two workers."""
    path = os.pathsep.join([str(ROOT), str(HERE.parent)])
    surroundings = os.environ | {
        "PYTHONPATH": path, "VARY_LOG": str(tmp_path / "log"), "VARY_SECONDS": "0.05",
        "OPENBLAS_NUM_THREADS": "1", "DASK_DISTRIBUTED__ADMIN__TICK__LIMIT": "60s",
    }  # fmt: skip
    started = []

    def start(*arguments, until):
        """Start a process and read what it tells until it says that it is ready."""
        process = subprocess.Popen(
            [sys.executable, *arguments], cwd=tmp_path, env=surroundings,
            stderr=subprocess.STDOUT, stdout=subprocess.PIPE, text=True,
        )  # fmt: skip
        started.append(process)
        for line in process.stdout:
            if found := re.search(until, line):
                return process, found
        raise RuntimeError("it ended before it was ready")

    scheduler = [
        "-m",
        "distributed.cli.dask_scheduler",
        "--host",
        "127.0.0.1",
        "--port",
        "0",
        "--no-dashboard",
    ]
    _, found = start(*scheduler, until=r"Scheduler at:\s+(tcp://\S+)")
    address = found[1]
    workers = [start(*WORKER, address, until="Registered to")[0] for _ in range(2)]
    yield address, workers
    for process in reversed(started):
        process.kill()
        process.wait()
        process.stdout.close()


def plan_of(cases):
    """A plan of so many cases."""
    return Plan.from_data({"vary": [{"key": "x", "list": list(range(cases))}]})


def test_rows_are_those_of_a_local_run_though_a_worker_is_killed(cluster, tmp_path, monkeypatch):
    address, workers = cluster
    killed = []

    def kill_one(progress):
        if progress.done >= CASES // 3 and not killed:
            workers[0].send_signal(signal.SIGKILL)
            killed.append(progress.done)

    model = FunctionModel(vary_functions.logged, ("x",))
    outcome = vary(
        plan_of(CASES), model=model, scheduler=address, store=tmp_path / "s.sqlite", progress=kill_one
    )
    assert killed and killed[0] < CASES
    assert workers[0].wait(timeout=10) == -signal.SIGKILL
    assert workers[1].poll() is None
    assert outcome.errors == ()
    local = vary(plan_of(CASES), model=FunctionModel(vary_functions.squared, ("x",)), workers=2)
    assert csv_text(outcome) == csv_text(local)


def test_no_scheduler_is_one_line():
    start = time.monotonic()
    with pytest.raises(InputError, match=r"scheduler: .*no scheduler answers there"):
        vary(plan_of(1), model=FunctionModel(vary_functions.logged, ("x",)), scheduler="tcp://127.0.0.1:9")
    assert time.monotonic() - start < 30.0


def test_workers_belong_to_a_local_run():
    with pytest.raises(InputError, match="workers: 2: the cluster has its own"):
        vary(plan_of(1), model=FunctionModel(vary_functions.logged, ("x",)), workers=2, scheduler="tcp://x:1")
