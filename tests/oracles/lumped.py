"""Exact answers of bodies without inner gradients.

Capacities in J/K, conductances in W/K, times in s, temperatures in C."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike
from scipy.linalg import expm
from scipy.optimize import brentq

from ._series import STEFAN_BOLTZMANN, Array


def lumped_time(time_constant: float, start: float, end: float, fluid: float) -> float:
    """Time from `start` to `end` in a fluid. Source: Incropera et al., 6th ed. 2007, sec. 5.1."""
    return float(time_constant * np.log((start - fluid) / (end - fluid)))


def radiating_bead(
    film: float, gas: float, emissivity: float, walls: float, stefan_boltzmann: float = STEFAN_BOLTZMANN
) -> float:
    """Steady temperature [K] of a bead in gas [K] that exchanges radiation with walls [K].

    Source: Incropera et al., 6th ed. 2007, Example 5.2 (p. 265).
    """

    def balance(bead: float) -> float:
        return film * (gas - bead) + emissivity * stefan_boltzmann * (walls**4 - bead**4)

    return float(brentq(balance, min(gas, walls), max(gas, walls), xtol=1e-12))


def draining_cylinder(
    time: ArrayLike, radius: float, level: float, duration: float, film: float, heat_capacity: float
) -> Array:
    """Dimensionless drink temperature in a cylinder whose level falls evenly from `level` to 0 in `duration`.

    Heat leaves with `film` [W/(m2 K)] through the wetted side and the base only; the drink that leaves has
    the mixed temperature; heat_capacity [J/(m3 K)]. With s the fall of the level [m/s], dT/dt = -film (2/R +
    1/L(t)) T / heat_capacity gives exp(-2 U t/(c R)) (1 - s t/L0)^(U/(c s)). Source: own derivation, no
    published value.
    """
    time = np.asarray(time, dtype=float)
    fall = level / duration
    side = np.exp(-2 * film * time / (heat_capacity * radius))
    return np.asarray(side * (1 - fall * time / level) ** (film / (heat_capacity * fall)))


def _two_node_matrix(capacities: tuple[float, float], coupling: float, loss: float) -> Array:
    """Rate matrix [1/s] of (liquid, wall), joined by `coupling`; the wall loses `loss` to 0 C."""
    liquid, wall = capacities
    return np.array([[-coupling / liquid, coupling / liquid], [coupling / wall, -(coupling + loss) / wall]])


def two_node_time_constants(capacities: tuple[float, float], coupling: float, loss: float) -> Array:
    """The two time constants [s], short one first, of `two_node`."""
    return np.asarray(np.sort(-1 / np.linalg.eigvals(_two_node_matrix(capacities, coupling, loss))))


def two_node(
    time: ArrayLike, capacities: tuple[float, float], coupling: float, loss: float, start: tuple[float, float]
) -> Array:
    """Liquid and wall temperature above the surroundings, shape time.shape + (2,), by the matrix exponential.

    Source: linear systems theory; no published value.
    """
    time = np.asarray(time, dtype=float)[..., None, None]
    return np.asarray(expm(time * _two_node_matrix(capacities, coupling, loss)) @ np.array(start))
