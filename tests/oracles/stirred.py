"""A slab whose one face is in perfect contact with a well-stirred fluid of limited heat capacity.

Source: J. Crank, The Mathematics of Diffusion, 2nd ed. 1975, sec. 4.3.5 (numbering from memory, not
re-checked). The other face is insulated; `ratio` is a = fluid capacity / slab capacity [-]; Fourier number =
alpha t / l^2.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike

from ._series import Array, bisected, modes


def stirred_eigenvalues(ratio: float, terms: int = 400) -> Array:
    """Non-zero positive roots of tan q = -a q."""
    n = np.arange(1, terms + 1) * np.pi
    return bisected(lambda q: np.sin(q) + ratio * q * np.cos(q), n - np.pi / 2, n)


def stirred_uptake(ratio: float, fourier: ArrayLike, terms: int = 400) -> Array:
    """Heat taken up over heat taken up in the end [-]."""
    (fourier,) = modes(fourier)
    q = stirred_eigenvalues(ratio, terms)
    series = 2 * ratio * (1 + ratio) / (1 + ratio + (ratio * q) ** 2) * np.exp(-(q**2) * fourier)
    return np.asarray(1 - series.sum(axis=-1))


def stirred_slab(ratio: float, fourier: ArrayLike, depth: ArrayLike, terms: int = 400) -> Array:
    """Slab temperature [-], 0 at the start, 1 in the end; depth 0 at the insulated face, 1 at the fluid."""
    fourier, depth = modes(fourier, depth)
    q = stirred_eigenvalues(ratio, terms)
    weight = 2 * (1 + ratio) / (1 + ratio + (ratio * q) ** 2) / np.cos(q)
    return np.asarray(1 + (weight * np.cos(q * depth) * np.exp(-(q**2) * fourier)).sum(axis=-1))


def poured_cup_fluid(
    time: ArrayLike,
    thickness: float,
    conductivity: float,
    heat_capacity: float,
    area: float,
    fluid_capacity: float,
    temperatures: tuple[float, float],
) -> Array:
    """Fluid temperature [C] after `time` [s] in contact with a plane wall of `area` [m2] that starts colder.

    heat_capacity [J/(m3 K)] and thickness [m] of the wall, fluid_capacity [J/K], temperatures (fluid, wall)
    [C].
    """
    wall_capacity = area * thickness * heat_capacity
    fluid, wall = temperatures
    mixed = (fluid_capacity * fluid + wall_capacity * wall) / (fluid_capacity + wall_capacity)
    fourier = conductivity / heat_capacity * np.asarray(time, dtype=float) / thickness**2
    return np.asarray(fluid - (fluid - mixed) * stirred_uptake(fluid_capacity / wall_capacity, fourier))
