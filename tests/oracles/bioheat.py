"""Exact solutions of the bioheat equation of Pennes. Depths in m, times in s, temperatures in C."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike
from scipy.special import erfc, erfcx

from ._series import Array


def inverse_length(perfusion: float, conductivity: float) -> float:
    """m = sqrt(w/k) [1/m]. Source: Incropera et al., 6th ed. 2007, eq. 3.110."""
    return float(np.sqrt(perfusion / conductivity))


def slab(
    depth: ArrayLike, thickness: float, conductivity: float, perfusion: float, surface: float, core: float
) -> tuple[Array, float]:
    """Steady temperature, and flux into the surface [W/m2], of tissue whose deep face is at core temperature.

    theta = (T_surface - T_core) sinh(m (L - x))/sinh(m L). Source: Incropera et al., 6th ed. 2007, sec. 3.7.1
    (the general solution; the two conditions are ours).
    """
    m = inverse_length(perfusion, conductivity)
    x = np.asarray(depth, dtype=float)
    excess = (surface - core) * np.sinh(m * (thickness - x)) / np.sinh(m * thickness)
    flux = conductivity * m * (surface - core) / np.tanh(m * thickness)
    return np.asarray(core + excess), float(flux)


def skin_on_tissue(
    tissue: tuple[float, float],
    skin: tuple[float, float],
    perfusion: float,
    metabolic: float,
    core: float,
    film: tuple[float, float],
) -> tuple[float, float]:
    """Temperature between muscle and skin, and flux lost [W/m2], of a body with a film.

    `tissue` and `skin` are (thickness, conductivity), `film` (coefficient, surroundings). With theta = T -
    T_core - metabolic/perfusion, k m (theta_core - theta cosh(mL))/sinh(mL) = (T - T_around)/R. Source:
    Incropera et al., 6th ed. 2007, Ex. 3.12, p. 163.
    """
    length, k = tissue
    m = inverse_length(perfusion, k)
    shift = metabolic / perfusion
    resistance = skin[0] / skin[1] + 1.0 / film[0]
    lead = k * m / np.sinh(m * length)
    gain = lead * np.cosh(m * length) + 1.0 / resistance
    inner = core + shift + (-lead * shift + (film[1] - core - shift) / resistance) / gain
    return float(inner), float((inner - film[1]) / resistance)


def half_space_theta(depth: ArrayLike, time: ArrayLike, diffusivity: float, rate: float) -> Array:
    """(T - T_core)/(T_surface - T_core) of perfused tissue whose surface is held from t = 0.

    `rate` is w/(rho c) [1/s]. Source: Carslaw and Jaeger, 2nd ed. 1959, sec. 4.2 (rod with surface loss).
    """
    x, t = np.asarray(depth, dtype=float), np.asarray(time, dtype=float)
    bx = x * np.sqrt(rate / diffusivity)
    eta, tau = x / (2 * np.sqrt(diffusivity * t)), np.sqrt(rate * t)
    rising = np.exp(-(eta**2) - tau**2) * erfcx(eta + tau)
    return np.asarray(0.5 * (np.exp(-bx) * erfc(eta - tau) + rising))
