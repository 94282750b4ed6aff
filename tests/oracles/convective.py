"""Slab, long cylinder and sphere that start uniform and meet a fluid: the full Fourier series.

Source: Incropera, DeWitt, Bergman, Lavine, Fundamentals of Heat and Mass Transfer, 6th ed. 2007, sec. 5.5 and
5.6; its Table 5.1 rounds the first eigenvalues and coefficients. biot = h L/k with L the half thickness (or
the thickness of a slab insulated on one face), or h R/k; fourier = alpha t/L^2. biot = inf holds the face.
theta = (T - T_fluid)/(T_start - T_fluid). position is x/L or r/R.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike
from scipy.special import j0, j1

from ._series import Array, bisected, j0_zeros, j1_zeros, modes


@dataclass(frozen=True)
class Shape:
    """What differs between the bodies; `held`, `free`: eigenvalues with a held and an insulated face."""

    held: Callable[[int], Array]
    free: Callable[[int], Array]
    condition: Callable[[Array, float], Array]
    coefficient: Callable[[Array], Array]
    mode: Callable[[Array], Array]
    mean: Callable[[Array], Array]


def _sphere_mean(z: Array) -> Array:
    return np.asarray(3 * (np.sin(z) - z * np.cos(z)) / z**3)


SLAB = Shape(
    held=lambda n: np.asarray((np.arange(n) + 0.5) * np.pi),
    free=lambda n: np.asarray(np.arange(n) * np.pi),
    condition=lambda z, biot: z * np.sin(z) - biot * np.cos(z),
    coefficient=lambda z: 4 * np.sin(z) / (2 * z + np.sin(2 * z)),
    mode=np.cos,
    mean=lambda z: np.sin(z) / z,
)
CYLINDER = Shape(
    held=j0_zeros,
    free=lambda n: np.concatenate([[0.0], j1_zeros(n - 1)]),
    condition=lambda z, biot: z * j1(z) - biot * j0(z),
    coefficient=lambda z: 2 / z * j1(z) / (j0(z) ** 2 + j1(z) ** 2),
    mode=j0,
    mean=lambda z: 2 * j1(z) / z,
)
SPHERE = Shape(
    held=lambda n: np.asarray(np.arange(1, n + 1) * np.pi),
    free=lambda n: np.concatenate([[1e-6], np.pi * np.arange(1.0, n)]),
    condition=lambda z, biot: z * np.cos(z) - (1 - biot) * np.sin(z),
    coefficient=lambda z: 4 * (np.sin(z) - z * np.cos(z)) / (2 * z - np.sin(2 * z)),
    mode=lambda x: np.sinc(x / np.pi),
    mean=_sphere_mean,
)


def eigenvalues(shape: Shape, biot: float, terms: int = 60) -> Array:
    """The first `terms` eigenvalues zeta_n."""
    held = shape.held(terms)
    if np.isinf(biot):
        return held
    return bisected(lambda z: shape.condition(z, biot), shape.free(terms), held)


def theta(shape: Shape, biot: float, fourier: ArrayLike, position: ArrayLike, terms: int = 60) -> Array:
    """Dimensionless temperature; fourier and position broadcast."""
    fourier, position = modes(fourier, position)
    z = eigenvalues(shape, biot, terms)
    series = shape.coefficient(z) * shape.mode(z * position) * np.exp(-(z**2) * fourier)
    return np.asarray(series.sum(axis=-1))


def theta_mean(shape: Shape, biot: float, fourier: ArrayLike, terms: int = 60) -> Array:
    """Volume mean of `theta`."""
    (fourier,) = modes(fourier)
    z = eigenvalues(shape, biot, terms)
    return np.asarray((shape.coefficient(z) * shape.mean(z) * np.exp(-(z**2) * fourier)).sum(axis=-1))


def short_cylinder(
    r: ArrayLike,
    z: ArrayLike,
    time: ArrayLike,
    size: tuple[float, float],
    conductivity: tuple[float, float],
    heat_capacity: float,
    film: float,
) -> Array:
    """theta of a cylinder of `size` (radius, half height) [m] with a film all round: product of two bodies.

    conductivity (k_r, k_z) [W/(m K)]; z from mid-height. Source of the product rule: Kreith, Manglik, Bohn,
    Principles of Heat Transfer, 7th ed., Example 2.14 (isotropic); with principal axes r and z each factor
    takes its own conductivity.
    """
    return _product((CYLINDER, SLAB), (r, z), time, size, conductivity, heat_capacity, film)


def rectangular_bar(
    x: ArrayLike,
    y: ArrayLike,
    time: ArrayLike,
    size: tuple[float, float],
    conductivity: tuple[float, float],
    heat_capacity: float,
    film: float,
) -> Array:
    """theta of a long bar of half sizes `size` [m]; film on all four sides, held faces if it is inf."""
    return _product((SLAB, SLAB), (x, y), time, size, conductivity, heat_capacity, film)


def _product(
    shapes: tuple[Shape, Shape],
    place: tuple[ArrayLike, ArrayLike],
    time: ArrayLike,
    size: tuple[float, float],
    conductivity: tuple[float, float],
    heat_capacity: float,
    film: float,
) -> Array:
    answer: Array = np.array(1.0)
    for shape, x, length, k in zip(shapes, place, size, conductivity, strict=True):
        fourier = k / heat_capacity * np.asarray(time, dtype=float) / length**2
        answer = answer * theta(shape, film * length / k, fourier, np.asarray(x, dtype=float) / length)
    return answer
