"""Effective properties of a stack and the time scale of conduction through it.

Resistances in series add: Incropera, DeWitt, Bergman, Lavine, Fundamentals of Heat and Mass Transfer, 6th ed.
2007, sec. 3.1.3. Series and parallel are also the bounds of any mixture: O. Wiener, Abh. Saechs. Ges. Wiss.
32 (1912) 509 (from memory, not re-checked).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from cupfem.errors import InputError
from cupfem.estimates.station import Station


def series_conductivity(shares: ArrayLike, conductivities: ArrayLike) -> float:
    """Conductivity across layers [W/(m K)]: 1 / sum(share / k). shares[n] of the thickness, any scale."""
    parts = _shares(shares)
    return float(1.0 / np.sum(parts / np.asarray(conductivities, dtype=float)))


def parallel_conductivity(shares: ArrayLike, conductivities: ArrayLike) -> float:
    """Conductivity along layers [W/(m K)]: sum(share k). shares[n] of the area, any scale.

    Also across a layer that struts or flutes bridge, where each path is taken as straight.
    """
    return float(_shares(shares) @ np.asarray(conductivities, dtype=float))


def wiener_bounds(shares: ArrayLike, conductivities: ArrayLike) -> tuple[float, float]:
    """Lowest and highest conductivity [W/(m K)] of any mixture with these shares of the volume."""
    return series_conductivity(shares, conductivities), parallel_conductivity(shares, conductivities)


def volume_mean(shares: ArrayLike, heat_capacities: ArrayLike) -> float:
    """Heat capacity of a mixture [J/(m3 K)] by shares of the volume."""
    return float(_shares(shares) @ np.asarray(heat_capacities, dtype=float))


@dataclass(frozen=True)
class Effective:
    """A stack as one slab: thickness [m], conductivity [W/(m K)], heat capacity [J/(m3 K)]."""

    thickness: float
    conductivity: float
    heat_capacity: float

    @property
    def diffusivity(self) -> float:
        """alpha = k / (rho c) [m2/s]."""
        return self.conductivity / self.heat_capacity

    @property
    def time_scale(self) -> float:
        """L^2 / alpha [s], the time at which the Fourier number is one."""
        return self.thickness**2 / self.diffusivity

    @property
    def conductance(self) -> float:
        """k / L [W/(m2 K)]."""
        return self.conductivity / self.thickness


def effective(station: Station, temperatures: Sequence[float]) -> Effective:
    """The stack of a station as one slab, plane, with gaps at the given interface temperatures [degC].

    temperatures[n + 1] from inside to outside, as `steady` returns them.
    """
    faces = zip(station.layers, temperatures[:-1], temperatures[1:], station.radii[:-1], strict=True)
    conductances = [float(layer.conductance(a, b, radius, plane=True)) for layer, a, b, radius in faces]
    resistance = sum(1.0 / conductance for conductance in conductances)
    thicknesses = [layer.thickness for layer in station.layers]
    capacity = volume_mean(thicknesses, [layer.heat_capacity for layer in station.layers])
    return Effective(station.thickness, station.thickness / resistance, capacity)


def _shares(shares: ArrayLike) -> NDArray[np.float64]:
    parts = np.asarray(shares, dtype=float).ravel()
    if np.any(parts < 0.0) or not parts.sum() > 0.0:
        raise InputError("shares", parts.tolist(), "must not be negative, nor all zero", "write [0.6, 0.4]")
    return np.asarray(parts / parts.sum())
