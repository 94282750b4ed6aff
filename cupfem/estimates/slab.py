"""The plane slab with a convective face: eigenvalue series, all terms or the first.

Two problems that practitioners use, in x* = x/L, Fo = alpha t / L^2 and Bi = h L / k:

- `Quenched`: a slab that starts at one temperature and meets a fluid on one face, the other insulated (or
  both faces, L the half thickness). Incropera, DeWitt, Bergman, Lavine, Fundamentals of Heat and Mass
  Transfer, 6th ed. 2007, sec. 5.5, Eqs. 5.39 to 5.41.
- `Heated`: a wall that starts at the temperature of the room; at once its inner face takes the temperature of
  the drink (or meets it through an inner film), and the outer face gives off heat to the room through a film.
  Steady profile plus series, by separation of variables: H. S. Carslaw and J. C. Jaeger, Conduction of Heat
  in Solids, 2nd ed. 1959, sec. 3.11 for the method (section number from memory, not re-checked); the
  coefficients are derived here.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.optimize import brentq

from cupfem.errors import InputError

Floats = NDArray[np.float64]

TERMS = 60
ROOT_TOLERANCE = 1e-14
INSULATED = 1e-12  # a smaller Biot number cannot be told from zero in the eigenvalues
SMALLEST_FOURIER = 1e-3  # before this the far face has seen nothing: erfc(1 / (2 Fo^(1/2))) is below 1e-100
ONE_TERM_FOURIER = 0.2  # above it one term is within about 2 %; Incropera, 6th ed. 2007, sec. 5.5.2


@dataclass(frozen=True)
class Quenched:
    """theta = (T - T_fluid) / (T_start - T_fluid); x* = 0 is the insulated face or the middle.

    Parameters: biot [-], not negative; terms of the series. Eigenvalues: zeta tan zeta = Bi.
    """

    biot: float
    terms: int = TERMS

    def __post_init__(self) -> None:
        _check_biot("Biot number", self.biot)

    @cached_property
    def eigenvalues(self) -> Floats:
        """zeta_n, one in each ((n - 1) pi, (n - 1/2) pi)."""
        free: Floats = np.arange(self.terms, dtype=float) * math.pi
        held = np.asarray(free + 0.5 * math.pi)
        if math.isinf(self.biot):
            return held
        if self.biot < INSULATED:
            return free
        return _roots(lambda z: z * math.sin(z) - self.biot * math.cos(z), free, held)

    @cached_property
    def coefficients(self) -> Floats:
        """C_n = 4 sin zeta / (2 zeta + sin 2 zeta)."""
        z = self.eigenvalues
        return np.asarray(2.0 * _sinc(z) / (1.0 + _sinc(2.0 * z)))

    def temperature(self, fourier: ArrayLike, position: ArrayLike, terms: int | None = None) -> Floats:
        """theta at Fourier numbers and positions x*, which broadcast; `terms` = 1 for one term."""
        z, c = self.eigenvalues[:terms], self.coefficients[:terms]
        fo, x = _with_modes(fourier, position)
        return np.asarray(np.sum(c * np.cos(z * x) * np.exp(-z * z * fo), axis=-1))

    def mean(self, fourier: ArrayLike, terms: int | None = None) -> Floats:
        """Mean theta of the slab; one minus it is the share of the heat given off."""
        z, c = self.eigenvalues[:terms], self.coefficients[:terms]
        (fo,) = _with_modes(fourier)
        return np.asarray(np.sum(c * _sinc(z) * np.exp(-z * z * fo), axis=-1))

    def heat_flux(self, fourier: ArrayLike, terms: int | None = None) -> Floats:
        """q* = q L / (k (T_start - T_fluid)) that leaves the convective face: Bi theta(1)."""
        return self.biot * self.temperature(fourier, 1.0, terms)


@dataclass(frozen=True)
class Heated:
    """theta = (T - T_room) / (T_drink - T_room); x* = 0 is the inner face, 1 the outer.

    theta = theta_steady - sum D_n phi_n(x*) exp(-zeta_n^2 Fo), phi = sin(zeta x*) + zeta/Bi_in cos(zeta x*).
    Parameters: biot of the outer film; inner_biot of the inner one, infinite where the inner face is at the
    temperature of the drink; start: theta at the beginning; terms.
    Eigenvalues: zeta (1 + Bi/Bi_in) cos zeta + (Bi - zeta^2/Bi_in) sin zeta = 0; for a held inner face
    zeta cot zeta = -Bi. Coefficients: D_n = (1/zeta_n - start I_n) / N_n, I and N the integrals of phi and
    phi^2 from 0 to 1; for a held face and a start at the room D_n = 4 / (2 zeta_n - sin 2 zeta_n).
    """

    biot: float
    inner_biot: float = math.inf
    start: float = 0.0
    terms: int = TERMS

    def __post_init__(self) -> None:
        _check_biot("Biot number", self.biot)
        _check_biot("inner Biot number", self.inner_biot)
        if math.isinf(self.biot):
            why = "a held outer face needs no estimate of its temperature"
            raise InputError("Biot number", self.biot, why, "write a finite number")
        if self.inner_biot == 0.0:
            raise InputError("inner Biot number", 0.0, "no heat enters", "write a number above 0")

    @property
    def steady_outside(self) -> float:
        """theta of the outer face at last: 1 / (1 + Bi + Bi/Bi_in)."""
        return 1.0 / (1.0 + self.biot + self.biot / self.inner_biot)

    @cached_property
    def eigenvalues(self) -> Floats:
        """zeta_n, one in each ((n - 1) pi, n pi)."""
        bi, inverse = self.biot, 1.0 / self.inner_biot

        def condition(z: float) -> float:
            return z * (1.0 + bi * inverse) * math.cos(z) + (bi - z * z * inverse) * math.sin(z)

        low: Floats = np.arange(self.terms, dtype=float) * math.pi
        high = np.asarray(low + math.pi)
        low[0] = 1e-9  # zero itself is no eigenvalue; the first lies above it
        return _roots(condition, low, high)

    @cached_property
    def coefficients(self) -> Floats:
        """D_n."""
        z, a = self.eigenvalues, self.eigenvalues / self.inner_biot
        sine = 0.5 * _sinc(2.0 * z)
        norm = (0.5 - sine) + a * a * (0.5 + sine) + a * np.sin(z) ** 2 / z
        level = (1.0 - np.cos(z)) / z + a * _sinc(z)
        return np.asarray((1.0 / z - self.start * level) / norm)

    def temperature(self, fourier: ArrayLike, position: ArrayLike, terms: int | None = None) -> Floats:
        """theta at Fourier numbers and positions x*, which broadcast; `terms` = 1 for one term."""
        fo, x = _with_modes(fourier, position)
        z, d = self.eigenvalues[:terms], self.coefficients[:terms]
        modes = np.sin(z * x) + z / self.inner_biot * np.cos(z * x)
        steady = 1.0 - self.biot * self.steady_outside * (x[..., 0] + 1.0 / self.inner_biot)
        return np.asarray(steady - np.sum(d * modes * np.exp(-z * z * fo), axis=-1))

    def outer_heat_flux(self, fourier: ArrayLike, terms: int | None = None) -> Floats:
        """q* = q L / (k (T_drink - T_room)) that leaves the outer face: Bi theta(1)."""
        return self.biot * self.temperature(fourier, 1.0, terms)

    def inner_heat_flux(self, fourier: ArrayLike, terms: int | None = None) -> Floats:
        """q* that enters the inner face: minus the slope of theta there."""
        (fo,) = _with_modes(fourier)
        z, d = self.eigenvalues[:terms], self.coefficients[:terms]
        series = np.sum(d * z * np.exp(-z * z * fo), axis=-1)
        return np.asarray(self.biot * self.steady_outside + series)

    def fourier_to(self, theta: float, terms: int | None = None) -> float:
        """Fourier number at which the outer face passes theta; infinite if it never does."""
        if theta <= self.start:
            return 0.0
        if theta >= self.steady_outside:
            return math.inf

        def excess(fourier: float) -> float:
            return float(self.temperature(fourier, 1.0, terms)) - theta

        if excess(SMALLEST_FOURIER) >= 0.0:
            return 0.0  # as one term alone may start above theta
        longest = 1.0
        while excess(longest) < 0.0:
            longest *= 2.0
        return float(brentq(excess, SMALLEST_FOURIER, longest, xtol=1e-13, rtol=1e-12))


def time_to(
    slab: Heated, target: float, drink: float, room: float, time_scale: float, terms: int | None = None
) -> float:
    """Time [s] at which the outer face reaches a target [degC], by root finding on the series.

    drink and room [degC] are constant, time_scale is L^2/alpha [s]; infinite if it never does.
    """
    return time_scale * slab.fourier_to((target - room) / (drink - room), terms)


def _roots(condition: Callable[[float], float], low: Floats, high: Floats) -> Floats:
    """One root in each bracket, to the last digits, by Brent's method."""
    found = [brentq(condition, a, b, xtol=ROOT_TOLERANCE, rtol=1e-15) for a, b in zip(low, high, strict=True)]
    return np.array(found)


def _with_modes(*values: ArrayLike) -> list[Floats]:
    return [np.asarray(x, dtype=float)[..., None] for x in np.broadcast_arrays(*values)]


def _sinc(x: Floats) -> Floats:
    return np.sinc(x / math.pi)


def _check_biot(what: str, value: float) -> None:
    if not value >= 0.0:
        raise InputError(what, value, "must not be negative", "write 0.5")
