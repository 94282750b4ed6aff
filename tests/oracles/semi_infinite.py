"""Semi-infinite solids. Depths in m, times in s, temperatures in C; arguments broadcast."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike
from scipy.special import erfc, erfcinv, erfcx

from ._series import Array


def film_theta(eta: ArrayLike, beta: ArrayLike) -> Array:
    """(T - T_start)/(T_fluid - T_start) with a film: eta = x/(2 sqrt(alpha t)), beta = h sqrt(alpha t)/k.

    Source: Incropera et al., 6th ed. 2007, eq. 5.60; Carslaw & Jaeger, 2nd ed. 1959, sec. 2.7.
    """
    eta, beta = np.asarray(eta, dtype=float), np.asarray(beta, dtype=float)
    return np.asarray(erfc(eta) - np.exp(-(eta**2)) * erfcx(eta + beta))


def step_depth(theta: float, diffusivity: float, time: float) -> float:
    """Depth [m] at which (T - T_start)/(T_face - T_start) = theta after a step of the face temperature.

    Source: Incropera et al., 6th ed. 2007, eq. 5.57.
    """
    return float(2 * np.sqrt(diffusivity * time) * erfcinv(theta))


def flux_rise(
    depth: ArrayLike, time: ArrayLike, flux: float, conductivity: float, diffusivity: float
) -> Array:
    """Rise [K] under a constant heat flux [W/m2]. Source: Incropera et al., 6th ed. 2007, eq. 5.59."""
    depth, time = np.asarray(depth, dtype=float), np.asarray(time, dtype=float)
    reach = np.sqrt(diffusivity * time)
    wave = 2 * reach / np.sqrt(np.pi) * np.exp(-(depth**2) / (4 * reach**2))
    return np.asarray(flux / conductivity * (wave - depth * erfc(depth / (2 * reach))))


def effusivity(conductivity: float, density: float, specific_heat: float) -> float:
    """sqrt(k rho c) [W s^0.5/(m2 K)]."""
    return float(np.sqrt(conductivity * density * specific_heat))


def contact_temperature(first: tuple[float, float], second: tuple[float, float]) -> float:
    """Interface temperature of two half-spaces in perfect contact, each (effusivity, start temperature).

    Source: Carslaw & Jaeger, 2nd ed. 1959, sec. 2.14; W.R. Van Sant, UCRL-52863, 1980, 6.1.9.
    """
    (e1, t1), (e2, t2) = first, second
    return (e1 * t1 + e2 * t2) / (e1 + e2)


def touched_surface(
    time: ArrayLike, skin: tuple[float, float], body: tuple[float, float], conductance: float
) -> Array:
    """Face of a half-space touched by a second through a contact conductance [W/(m2 K)].

    Each is (effusivity, start temperature). Source: Carslaw & Jaeger, 2nd ed. 1959, sec. 2.14 (the form with
    a contact resistance).
    """
    (es, ts), (eb, tb) = skin, body
    a = conductance * (1 / es + 1 / eb)
    return np.asarray(
        ts + (tb - ts) * eb / (eb + es) * (1 - erfcx(a * np.sqrt(np.asarray(time, dtype=float))))
    )
