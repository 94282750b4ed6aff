"""Exact transients of a hollow cylinder, a < r < b: cross-product Bessel eigenfunctions.

Source: H.S. Carslaw, J.C. Jaeger, Conduction of Heat in Solids, 2nd ed. 1959, sec. 7.10 and 13.4 for the
method. A face is described by its Biot number per length H = h/k [1/m]; H = inf holds the face at its fluid's
temperature, H = 0 insulates it.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike
from scipy.special import j0, j1, y0, y1

from ._series import Array, modes, scanned


@dataclass(frozen=True)
class HollowCylinder:
    """A wall between radii a and b [m] with H_a, H_b = h/k [1/m] on its faces and a diffusivity [m2/s]."""

    a: float
    b: float
    H_a: float
    H_b: float
    diffusivity: float = 1.0
    terms: int = 80

    def _inner_pair(self, m: Array) -> tuple[Array, Array]:
        """The inner condition applied to J0(mr) and Y0(mr): phi' - H_a phi, or phi alone for a held face."""
        x = m * self.a
        if np.isinf(self.H_a):
            return j0(x), y0(x)
        return -m * j1(x) - self.H_a * j0(x), -m * y1(x) - self.H_a * y0(x)

    def eigenfunction(self, m: Array, r: ArrayLike) -> tuple[Array, Array]:
        """phi(r) and dphi/dr of the eigenvalues m, which meet the inner condition for any m."""
        on_j, on_y = self._inner_pair(m)
        x = m * np.asarray(r, dtype=float)
        return j0(x) * on_y - y0(x) * on_j, -m * (j1(x) * on_y - y1(x) * on_j)

    def _outer_residual(self, m: Array) -> Array:
        phi, slope = self.eigenfunction(m, self.b)
        return phi if np.isinf(self.H_b) else slope + self.H_b * phi

    def eigenvalues(self) -> Array:
        """Positive eigenvalues [1/m]; they lie about pi/(b - a) apart."""
        step = np.pi / (self.b - self.a) / 20
        return scanned(self._outer_residual, step, self.terms, start=1e-6 * step)

    def _steady(self, inside: float, outside: float) -> tuple[float, float]:
        """A and B of the steady profile A + B ln(r/a) between two fluids."""
        length = np.log(self.b / self.a)
        films = [0.0 if np.isinf(H) else 1 / (r * H) for r, H in ((self.a, self.H_a), (self.b, self.H_b))]
        slope = (outside - inside) / (films[0] + length + films[1])
        return inside + slope * films[0], slope

    def _start_integral(self, m: Array, level: float, slope: float) -> Array:
        """Integral of r (level + slope ln(r/a)) phi dr; a harmonic profile leaves only its ends (Green)."""
        ends = []
        for r in (self.a, self.b):
            phi, derivative = self.eigenfunction(m, r)
            ends.append(r * derivative * (level + slope * np.log(r / self.a)) - slope * phi)
        return np.asarray((ends[0] - ends[1]) / m**2)

    def _norm(self, m: Array) -> Array:
        """Integral of r phi^2 dr."""
        ends = []
        for r in (self.a, self.b):
            phi, derivative = self.eigenfunction(m, r)
            ends.append(r**2 / 2 * (phi**2 + (derivative / m) ** 2))
        return np.asarray(ends[1] - ends[0])

    def temperature(
        self, r: ArrayLike, time: ArrayLike, start: float = 1.0, inside: float = 0.0, outside: float = 0.0
    ) -> Array:
        """Temperature after `time` [s] from a uniform start with the fluids at `inside` and `outside`.

        At least one face must be open (H > 0). r and time broadcast.
        """
        r, time = modes(r, time)
        m = self.eigenvalues()
        level, slope = self._steady(inside, outside)
        coefficient = self._start_integral(m, start - level, -slope) / self._norm(m)
        phi, _ = self.eigenfunction(m, r)
        decay = np.exp(-self.diffusivity * m**2 * time)
        return np.asarray(
            level + slope * np.log(r[..., 0] / self.a) + (coefficient * phi * decay).sum(axis=-1)
        )
