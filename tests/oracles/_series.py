"""What the exact solutions share: roots by bisection, and the trailing axis over which a series is summed."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy import special

Array = NDArray[np.float64]

STEFAN_BOLTZMANN = 5.670374419e-8  # W/(m2 K4), CODATA 2018
ZERO_CELSIUS = 273.15


def bisected(f: Callable[[Array], Array], lower: ArrayLike, upper: ArrayLike) -> Array:
    """Roots of f, one in each bracket [lower[n], upper[n]], to the last bit or two.

    Raises ValueError where f has one sign at both ends.
    """
    a, b = (np.array(x, dtype=float) for x in np.broadcast_arrays(lower, upper))
    left = np.sign(f(a))
    if np.any(left * np.sign(f(b)) > 0):
        raise ValueError("no sign change in a bracket")
    for _ in range(100):
        middle = 0.5 * (a + b)
        stay = np.sign(f(middle)) == left
        a, b = np.where(stay, middle, a), np.where(stay, b, middle)
    return np.asarray(0.5 * (a + b))


def scanned(f: Callable[[Array], Array], step: float, count: int, start: float = 1e-9) -> Array:
    """The first `count` roots above `start` of an f whose roots lie further apart than `step`."""
    x: Array = start + step * np.arange(20.0 * count + 400)
    sign = np.sign(f(x))
    change = np.flatnonzero(sign[1:] * sign[:-1] < 0)[:count]
    if len(change) < count:
        raise ValueError("step too small for the number of roots asked for")
    return bisected(f, x[change], x[change + 1])


def modes(*values: ArrayLike) -> list[Array]:
    """Broadcast the values against each other; add a last axis of length one, for the terms of a series."""
    return [np.asarray(x, dtype=float)[..., None] for x in np.broadcast_arrays(*values)]


def j1_zeros(count: int) -> Array:
    """Positive zeros of J1: McMahon's expansion (Abramowitz & Stegun 1964, 9.5.12) and Newton's method."""
    b = (np.arange(1, count + 1) + 0.25) * np.pi
    z = b - 3 / (8 * b) + 36 / (3 * (8 * b) ** 3)
    for _ in range(4):
        z = z - special.j1(z) / (special.j0(z) - special.j1(z) / z)
    return np.asarray(z)


def j0_zeros(count: int) -> Array:
    """Positive zeros of J0: McMahon's expansion (Abramowitz & Stegun 1964, 9.5.12) and Newton's method."""
    b = (np.arange(1, count + 1) - 0.25) * np.pi
    z = b + 1 / (8 * b) - 124 / (3 * (8 * b) ** 3)
    for _ in range(4):
        z = z + special.j0(z) / special.j1(z)
    return np.asarray(z)


def sinh_ratio(x: ArrayLike, whole: ArrayLike) -> Array:
    """sinh(x)/sinh(whole) for 0 <= x <= whole, without overflow."""
    x, whole = np.asarray(x, dtype=float), np.asarray(whole, dtype=float)
    return np.asarray(np.exp(x - whole) * np.expm1(-2 * x) / np.expm1(-2 * whole))
