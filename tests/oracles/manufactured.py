"""A manufactured transient in (r, z) with a full conductivity tensor; its source is derived by SymPy.

Source of the method: K. Salari, P. Knupp, Code Verification by the Method of Manufactured Solutions,
SAND2000-1444, 2000.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import cached_property

import numpy as np
import sympy as sp  # type: ignore[import-untyped]
from numpy.typing import ArrayLike

from ._series import Array

Field = Callable[..., Array]


@dataclass(frozen=True)
class ManufacturedCylinder:
    """T = 20 + 60 exp(-t/tau) (1 - r^2/(3 R^2)) cos(pi z/(2H)) in a medium K = [[k_rr, k_rz], [k_rz, k_zz]].

    `source` is rho c dT/dt - div(K grad T) [W/m3] with the axisymmetric divergence; with k_rz other than 0 it
    grows as 1/r at the axis, so stay away from r = 0 there.
    """

    k_rr: float = 0.12
    k_rz: float = 0.03
    k_zz: float = 0.30
    heat_capacity: float = 9.38e5  # J/(m3 K)
    radius: float = 0.04
    height: float = 0.1
    tau: float = 600.0

    @cached_property
    def _fields(self) -> dict[str, Field]:
        r, z, t = sp.symbols("r z t", real=True)
        shape = (1 - r**2 / (3 * self.radius**2)) * sp.cos(sp.pi * z / (2 * self.height))
        temperature = 20 + 60 * sp.exp(-t / self.tau) * shape
        flux_r = -(self.k_rr * sp.diff(temperature, r) + self.k_rz * sp.diff(temperature, z))
        flux_z = -(self.k_rz * sp.diff(temperature, r) + self.k_zz * sp.diff(temperature, z))
        divergence = sp.diff(r * flux_r, r) / r + sp.diff(flux_z, z)
        source = self.heat_capacity * sp.diff(temperature, t) + sp.expand(divergence)
        expressions = {"temperature": temperature, "flux_r": flux_r, "flux_z": flux_z, "source": source}
        return {name: sp.lambdify((r, z, t), value, "numpy") for name, value in expressions.items()}

    def _evaluate(self, name: str, r: ArrayLike, z: ArrayLike, time: ArrayLike) -> Array:
        r, z, time = (np.asarray(x, dtype=float) for x in np.broadcast_arrays(r, z, time))
        return np.asarray(self._fields[name](r, z, time))

    def temperature(self, r: ArrayLike, z: ArrayLike, time: ArrayLike) -> Array:
        """Temperature [C]."""
        return self._evaluate("temperature", r, z, time)

    def source(self, r: ArrayLike, z: ArrayLike, time: ArrayLike) -> Array:
        """Volumetric source [W/m3]."""
        return self._evaluate("source", r, z, time)

    def flux(self, r: ArrayLike, z: ArrayLike, time: ArrayLike) -> tuple[Array, Array]:
        """Heat flux (q_r, q_z) [W/m2], -K grad T."""
        return self._evaluate("flux_r", r, z, time), self._evaluate("flux_z", r, z, time)
