"""Settings for every test: figures without a screen, one BLAS thread (the matrices are narrow bands, which
more threads only slow down), and the same examples on every run. Tests that need a program of the system are
left out where it is missing."""

import os
import shutil

os.environ["MPLBACKEND"] = "Agg"
os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")

import pytest
from browser import chromium
from hypothesis import settings

settings.register_profile("repeatable", derandomize=True, deadline=None)
settings.load_profile("repeatable")

NEEDS = {"chromium": chromium, "paraview": lambda: shutil.which("pvpython")}
"""Mark of a test -> what gives the path of the program that it needs."""


def pytest_collection_modifyitems(config: pytest.Config, items: list[pytest.Item]) -> None:
    """Leave out the tests of programs that are not installed; pytest tells how many were left out."""
    missing = [mark for mark, find in NEEDS.items() if find() is None]
    left_out = [item for item in items if any(item.get_closest_marker(mark) for mark in missing)]
    if left_out:
        config.hook.pytest_deselected(items=left_out)
        items[:] = [item for item in items if item not in left_out]
