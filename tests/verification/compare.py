"""A found value against its target; the error is printed, so that `pytest -s` gives the table."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike


def within(what: str, found: ArrayLike, target: ArrayLike, tolerance: float) -> None:
    """Assert that all values agree within an absolute tolerance, in the values' own unit."""
    _compare(what, found, target, tolerance, np.ones_like(np.asarray(target, dtype=float)), "")


def within_share(what: str, found: ArrayLike, target: ArrayLike, tolerance: float) -> None:
    """Assert that all values agree within a share of the target."""
    _compare(what, found, target, tolerance, np.abs(np.asarray(target, dtype=float)), "relative ")


def _compare(
    what: str, found: ArrayLike, target: ArrayLike, tolerance: float, scale: np.ndarray, kind: str
) -> None:
    found, target = np.asarray(found, dtype=float), np.asarray(target, dtype=float)
    assert found.shape == target.shape, f"{what}: {found.shape} values, {target.shape} targets"
    error = np.abs(found - target) / scale
    worst = np.unravel_index(np.argmax(error), error.shape)
    line = (
        f"{what}: found {found[worst]:.9g}, target {target[worst]:.9g}, "
        f"{kind}error {error[worst]:.2e}, allowed {tolerance:.0e}"
    )
    print("\n" + line, end="")
    assert np.all(error <= tolerance), line
