"""Exact temperatures in plane bars and rectangles.

Lengths in m, times in s, temperatures in C; arguments broadcast."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike
from scipy.optimize import brentq

from ._series import Array, bisected, modes


def bar_with_oscillating_end(x: ArrayLike, time: ArrayLike, terms: int = 2000) -> Array:
    """NAFEMS T3: bar of .1 m with an end that swings.

    k 35, c 440.5, rho 7200; 0 C at x = 0 and 100 sin(pi t/40) C at x = .1; 0 C at the start. Source: NAFEMS,
    The Standard NAFEMS Benchmarks, rev. 3, 1990, T3 (published target T(.08 m, 32 s) = 36.60 C). The series
    follows from Duhamel's theorem; recomputed.
    """
    length, amplitude, omega = 0.1, 100.0, np.pi / 40
    diffusivity = 35.0 / (440.5 * 7200.0)
    x, time = modes(x, time)
    n = np.arange(1, terms + 1)
    decay = diffusivity * (n * np.pi / length) ** 2
    lag = decay * np.cos(omega * time) + omega * np.sin(omega * time) - decay * np.exp(-decay * time)
    weight = 2 * (-1.0) ** n / (n * np.pi) * amplitude * omega / (decay**2 + omega**2)
    series = (weight * lag * np.sin(n * np.pi * x / length)).sum(axis=-1)
    return np.asarray(x[..., 0] / length * amplitude * np.sin(omega * time[..., 0]) + series)


def rectangle_with_films(x: ArrayLike, y: ArrayLike, terms: int = 2000) -> Array:
    """NAFEMS T4: rectangle .6 x 1.0 m with two film edges.

    k 52; 100 C on y = 0, insulated x = 0, h 750 W/(m2 K) to 0 C on x = .6 and y = 1. Source: NAFEMS, The
    Standard NAFEMS Benchmarks, rev. 3, 1990, T4 (published target T(.6, .2) = 18.25 C). Cosine series in the
    roots of m a tan(m a) = h a/k; recomputed. The corner (.6, 0) is singular.
    """
    a, b, ratio = 0.6, 1.0, 750.0 / 52.0
    x, y = modes(x, y)
    n = np.arange(terms)
    m = bisected(lambda u: u * np.sin(u) - ratio * a * np.cos(u), n * np.pi, (n + 0.5) * np.pi) / a
    coefficient = 100 * np.sin(m * a) / m / (a / 2 + np.sin(2 * m * a) / (4 * m))
    shift = (m - ratio) / (m + ratio)
    along = np.exp(-m * y) * (1 + shift * np.exp(-2 * m * (b - y))) / (1 + shift * np.exp(-2 * m * b))
    return np.asarray((coefficient * np.cos(m * x) * along).sum(axis=-1))


def bar_radiating_at_end(conductivity: float = 55.6) -> float:
    """NAFEMS T2: end temperature [K] of a bar of .1 m, 1000 K at one end, radiating to 300 K at the other.

    Emissivity .98, sigma 5.67e-8 W/(m2 K4). Source: NAFEMS, The Standard NAFEMS Benchmarks, rev. 3, 1990, T2
    (published target 927.0 K); some copies print a conductivity of 55.563.
    """

    def balance(end: float) -> float:
        return conductivity * (1000.0 - end) / 0.1 - 0.98 * 5.67e-8 * (end**4 - 300.0**4)

    return float(brentq(balance, 300.0, 1000.0, xtol=1e-12))


def two_slabs_with_contact(
    x: ArrayLike, conductivity: float, contact_conductance: float, length: float, ends: tuple[float, float]
) -> Array:
    """Two equal slabs of `length` together, fixed end temperatures, a contact conductance at mid-length.

    x runs over the solid only; x = length/2 is taken on the first slab. Source: series resistances; analytic.
    """
    x = np.asarray(x, dtype=float)
    h, k = contact_conductance, conductivity
    gradient = h * (ends[1] - ends[0]) / (k + h * length)
    first = ends[0] + gradient * x
    second = ends[1] - gradient * (length - x)
    return np.asarray(np.where(x <= length / 2, first, second))
