"""Exact steady temperatures in the half section (r, z) of a cylinder: Fourier and Bessel series.

Lengths in m, conductivities in W/(m K), fluxes in W/m2, temperatures in C. r and z broadcast; the result has
their shape. `terms` is the length of the series: on an edge where the flux jumps the terms fall only as
1/n^2.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike
from scipy.special import i0e, i1e, j0, j1, k0e, k1e

from ._series import Array, bisected, j0_zeros, j1_zeros, modes, sinh_ratio


def hollow_cylinder_wall_flux(r: ArrayLike, z: ArrayLike, terms: int = 4000) -> Array:
    """Hollow cylinder (NAFEMS, axisymmetric, wall flux): .02 < r < .10 m, 0 < z < .14 m, k 52 W/(m K).

    0 C at r = .10, z = 0 and z = .14; at r = .02 a flux of 5e5 W/m2 enters for .04 < z < .10, the rest is
    insulated. Source: A.D. Cameron, J.A. Casey, G.B. Simpson, Benchmark Tests for Thermal Analysis, NAFEMS
    (published target T(.04, .04) = 332.97 K = 59.82 C). The sine series in z with modified Bessel functions
    in r is recomputed.
    """
    ri, ro, height, k, flux = 0.02, 0.10, 0.14, 52.0, 5e5
    r, z = modes(r, z)
    m = np.arange(1, terms + 1) * np.pi / height
    q = 2 * flux / (m * height) * (np.cos(m * 0.04) - np.cos(m * 0.10))
    radial = k0e(m * r) * i0e(m * ro) * np.exp(-m * (r - ri))
    radial -= i0e(m * r) * k0e(m * ro) * np.exp(-m * (2 * ro - r - ri))
    slope = m * (k1e(m * ri) * i0e(m * ro) + i1e(m * ri) * k0e(m * ro) * np.exp(-2 * m * (ro - ri)))
    return np.asarray((q / k * radial / slope * np.sin(m * z)).sum(axis=-1))


def solid_cylinder_side_flux(r: ArrayLike, z: ArrayLike, terms: int = 4000) -> Array:
    """Solid cylinder r < .1 m, 0 < z < .05 m, k 52 W/(m K): NAFEMS thermal test No 15(i).

    0 C at z = 0; z = .05 insulated; at r = .1 insulated below z = .03, above it a flux of 5e5 W/m2 enters.
    Source: NAFEMS, Benchmark Tests for Thermal Analyses (Summary), No 15(i) (published target T(.1, .03) =
    213.60 C). The series of sin((2n+1) pi z/2H) with I0 in r is recomputed.
    """
    radius, height, k, flux = 0.1, 0.05, 52.0, 5e5
    r, z = modes(r, z)
    m = (np.arange(terms) + 0.5) * np.pi / height
    q = 2 * flux / (m * height) * np.cos(m * 0.03)
    radial = i0e(m * r) / i1e(m * radius) * np.exp(-m * (radius - r))
    return np.asarray((q / (k * m) * radial * np.sin(m * z)).sum(axis=-1))


def rod_with_side_flux(r: ArrayLike, z: ArrayLike, terms: int = 200) -> Array:
    """Rod r < .01 m, 0 < z < 1 m, k 33.33 W/(m K), with 200 W/m2 out through the side.

    0 C at z = 0, 500 C at z = 1. Source: AFNOR/SFM, Guide de validation des progiciels de calcul de
    structures, 1990, TPLA05, which gives the one-dimensional parabola (see `rod_with_side_flux_1d`). The
    exact field adds (R^2/4 - r^2/2) q/(kR) and end layers in the zeros of J1; recomputed.
    """
    radius, length, k, flux = 0.01, 1.0, 33.33, 200.0
    a = flux / (k * radius)
    core = rod_with_side_flux_1d(z) + a * (radius**2 / 4 - np.asarray(r, dtype=float) ** 2 / 2)
    r, z = modes(r, z)
    m = j1_zeros(terms)
    ends = np.exp(-m * z / radius) + np.exp(-m * (length - z) / radius)
    layer = 2 * a * radius**2 * j0(m * r / radius) / (m**2 * j0(m)) * ends
    return np.asarray(core + layer.sum(axis=-1))


def rod_with_side_flux_1d(z: ArrayLike) -> Array:
    """The one-dimensional form of `rod_with_side_flux`: T'' = 2 q/(kR). Source: the same, TPLA05."""
    z = np.asarray(z, dtype=float)
    a = 200.0 / (33.33 * 0.01)
    return np.asarray(a * z**2 + (500.0 - a) * z)


def rod_as_fin(r: ArrayLike, z: ArrayLike, terms: int = 60) -> Array:
    """Rod r < .01 m, 0 < z < 1 m, k 33.33 W/(m K), with h 10 W/(m2 K) to 0 C at the side.

    0 C at z = 0, 500 C at z = 1. Source: AFNOR/SFM, Guide de validation, 1990, TPLA06, which gives the
    one-dimensional fin. Exact Bessel series in the roots of m J1(m) = Bi J0(m); recomputed.
    """
    radius, length, biot = 0.01, 1.0, 10 * 0.01 / 33.33
    r, z = modes(r, z)
    upper = j0_zeros(terms)
    lower = np.concatenate([[0.0], j1_zeros(terms - 1)])
    m = bisected(lambda x: x * j1(x) - biot * j0(x), lower, upper)
    coefficient = 1000.0 / m * j1(m) / (j0(m) ** 2 + j1(m) ** 2)
    along = sinh_ratio(m * z / radius, m * length / radius)
    return np.asarray((coefficient * j0(m * r / radius) * along).sum(axis=-1))


def rod_as_fin_1d(z: ArrayLike) -> Array:
    """The one-dimensional form of `rod_as_fin`: 500 sinh(mz)/sinh(mL), m^2 = 2h/(kR).

    Source: the same, TPLA06.
    """
    m = np.sqrt(2 * 10 / (33.33 * 0.01))
    return np.asarray(500.0 * sinh_ratio(m * np.asarray(z, dtype=float), m))


def orthotropic_cylinder(r: ArrayLike, z: ArrayLike, k_r: float, k_z: float, terms: int = 400) -> Array:
    """Steady cylinder of radius 1 and height 1: bottom at 1, side and top at 0, principal axes r and z.

    Source: H.S. Carslaw, J.C. Jaeger, Conduction of Heat in Solids, 2nd ed. 1959, sec. 8.3, with z scaled by
    sqrt(k_r/k_z); recomputed.
    """
    r, z = modes(r, z)
    m = j0_zeros(terms)
    along = m * np.sqrt(k_r / k_z)
    return np.asarray((2 / (m * j1(m)) * j0(m * r) * sinh_ratio(along * (1 - z), along)).sum(axis=-1))


def flux_tube_constriction(ratio: float, terms: int = 200_000) -> float:
    """Constriction 4 k a R [-] of a disk of radius a with uniform flux on the end of a cylinder of radius b.

    ratio = a/b; R is from the mean temperature of the disk to the far cylinder, less the cylinder's own
    resistance. Source: the flux-tube series of B.B. Mikic and M.M. Yovanovich (the original page not seen;
    recomputed): 16/(pi ratio) sum J1(m ratio)^2/(m^3 J0(m)^2) over the zeros m of J1.
    """
    m = j1_zeros(terms)
    return float(16 / (np.pi * ratio) * np.sum(j1(m * ratio) ** 2 / (m**3 * j0(m) ** 2)))


def half_space_constriction() -> dict[str, float]:
    """Constriction k a R [-] of a disk of radius a on a half-space: isothermal or uniform flux.

    Source: Carslaw & Jaeger, 2nd ed. 1959, sec. 8.2: 1/4, 8/(3 pi^2), 1/pi.
    """
    return {"isothermal": 0.25, "isoflux_mean": 8 / (3 * np.pi**2), "isoflux_max": 1 / np.pi}
