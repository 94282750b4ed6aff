"""Exact steady temperatures through cylinder walls, functions of r alone (one also of z).

Lengths in m, conductivities in W/(m K), film coefficients in W/(m2 K), fluxes in W/m2, temperatures in C. r
broadcasts.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike
from scipy.optimize import brentq

from ._series import STEFAN_BOLTZMANN, ZERO_CELSIUS, Array


@dataclass(frozen=True)
class CompositeCylinder:
    """Steady heat flow through a layered cylinder.

    resistance[n]: inside film, layers from inside to outside, outside film [m K/W]; temperature[n]: at each
    face from inside to outside [C]; heat_flow_per_length [W/m].
    """

    resistance: Array
    temperature: Array
    heat_flow_per_length: float

    def overall_coefficient(self, radius: float) -> float:
        """Overall coefficient U [W/(m2 K)] referred to the area at `radius` [m]."""
        return float(1 / (2 * np.pi * radius * self.resistance.sum()))


def composite_cylinder(
    radii: ArrayLike, conductivity: ArrayLike, inside: tuple[float, float], outside: tuple[float, float]
) -> CompositeCylinder:
    """Layered cylinder between two fluids; `inside` and `outside` are (film coefficient, temperature).

    Source: Incropera, DeWitt, Bergman, Lavine, Fundamentals of Heat and Mass Transfer, 6th ed. 2007, sec.
    3.3.
    """
    radii = np.asarray(radii, dtype=float)
    films = [1 / (2 * np.pi * radii[0] * inside[0]), 1 / (2 * np.pi * radii[-1] * outside[0])]
    layers = np.log(radii[1:] / radii[:-1]) / (2 * np.pi * np.asarray(conductivity))
    resistance = np.concatenate([films[:1], layers, films[1:]])
    flow = (inside[1] - outside[1]) / resistance.sum()
    return CompositeCylinder(resistance, inside[1] - flow * np.cumsum(resistance[:-1]), float(flow))


def hollow_cylinder(
    r: ArrayLike,
    radii: tuple[float, float],
    faces: tuple[float, float],
    k: tuple[float, float],
    source: float = 0.0,
) -> tuple[Array, Array]:
    """Temperature and outward heat flux in a hollow cylinder with fixed face temperatures.

    k = (k0, k1): conductivity k0 + k1 T, T in C; `source` [W/m3]. By Kirchhoff's transform theta = k0 T + k1
    T^2/2 the profile is theta = -source r^2/4 + A ln r + B. Source of the transform: Carslaw & Jaeger,
    Conduction of Heat in Solids, 2nd ed. 1959, sec. 1.6 (from memory, not re-checked). Cases of this form: A.
    Toptan et al., CASL-U-2020-1939-000 = SAND2020-3887R, 2020, doi 10.2172/1614683, II.1 to II.3; AFNOR/SFM,
    Guide de validation, 1990, TPLA01 and TPLA04; TPNA300.
    """
    r = np.asarray(r, dtype=float)
    (ri, ro), (k0, k1) = radii, k
    inner, outer = (k0 * t + k1 * t**2 / 2 + source * x**2 / 4 for t, x in zip(faces, radii, strict=True))
    a = (outer - inner) / np.log(ro / ri)
    theta = inner + a * np.log(r / ri) - source * r**2 / 4
    # The positive root of k1 T^2/2 + k0 T = theta, in the form that also holds for k1 = 0.
    temperature = 2 * theta / (k0 + np.sqrt(k0**2 + 2 * k1 * theta))
    return np.asarray(temperature), np.asarray(source * r / 2 - a / r)


def hollow_cylinder_film_outside(
    r: ArrayLike,
    radii: tuple[float, float],
    k: float,
    inner_flux: float,
    outside: tuple[float, float],
    source: float = 0.0,
) -> Array:
    """Hollow cylinder with a flux in at the inner face, a film outside and a uniform source.

    Source: Toptan et al., SAND2020-3887R, 2020, II.4 (source 1200 W/m3); AFNOR/SFM, Guide de validation,
    1990, TPLA01 (no source).
    """
    r = np.asarray(r, dtype=float)
    (ri, ro), (h, fluid) = radii, outside
    flow = inner_flux * ri - source * ri**2 / 2  # r q(r) - source r^2/2, the same at every r
    outer = fluid + (flow / ro + source * ro / 2) / h
    return np.asarray(outer + source * (ro**2 - r**2) / (4 * k) + flow / k * np.log(ro / r))


def cylinder_graded_source(r: ArrayLike) -> Array:
    """Solid cylinder of radius 1, k 1, source 1200 (1 - 0.1 r), 300 at r = 1.

    Source: Toptan et al., SAND2020-3887R, 2020, II.5.
    """
    r = np.asarray(r, dtype=float)
    return np.asarray(300.0 + 1200.0 * ((1 - r**2) / 4 - 0.1 * (1 - r**3) / 9))


@dataclass(frozen=True)
class OrthotropicHollowCylinder:
    """T = a ln r + slope z + b between two films whose fluids warm along z with the same slope.

    Source: AFNOR/SFM, Guide de validation, 1990, TPLA07: k_r 2.89, k_z 40; inside 377 W/(m2 K) to 130 + 12.5
    z, outside 339.3 W/(m2 K) to 20 + 12.5 z, 500 W/m2 in at the top and out at the bottom. The radii .030 and
    .050 m and the height .4 m are inferred from the published flux balance, not read.
    """

    radii: tuple[float, float] = (0.030, 0.050)
    k_r: float = 2.89
    k_z: float = 40.0
    inside: tuple[float, float] = (377.0, 130.0)
    outside: tuple[float, float] = (339.3, 20.0)
    slope: float = 12.5

    def constants(self) -> tuple[float, float]:
        """a and b of the profile [K, C], from the two film conditions."""
        (ri, ro), (hi, ti), (ho, to) = self.radii, self.inside, self.outside
        matrix = np.array([[self.k_r / ri - hi * np.log(ri), -hi], [self.k_r / ro + ho * np.log(ro), ho]])
        a, b = np.linalg.solve(matrix, [-hi * ti, ho * to])
        return float(a), float(b)

    def temperature(self, r: ArrayLike, z: ArrayLike) -> Array:
        a, b = self.constants()
        return np.asarray(a * np.log(r) + self.slope * np.asarray(z, dtype=float) + b)

    def radial_flux(self, r: ArrayLike) -> Array:
        """Outward heat flux [W/m2]."""
        return np.asarray(-self.k_r * self.constants()[0] / np.asarray(r, dtype=float))


def radiating_hollow_cylinder(
    r: ArrayLike, stefan_boltzmann: float = STEFAN_BOLTZMANN
) -> tuple[Array, tuple[float, float]]:
    """Hollow cylinder .300 / .391 m, k 40: radiation from 500 C on the inner face, film outside.

    Emissivity .6; outside 142 W/(m2 K) to 20 C. Returns the temperature and the heat fluxes at the inner and
    outer face. Source: AFNOR/SFM, Guide de validation, 1990, TPNA01, which takes sigma = 5.73e-8 and 273.15 K
    at 0 C.
    """
    r = np.asarray(r, dtype=float)
    ri, ro, k, h, room = 0.300, 0.391, 40.0, 142.0, 20.0
    resistance = ri * np.log(ro / ri) / k + ri / (ro * h)  # referred to the inner face

    def received(face: float) -> float:
        hot, cold = 500.0 + ZERO_CELSIUS, face + ZERO_CELSIUS
        return 0.6 * stefan_boltzmann * (hot**4 - cold**4)

    inner = float(brentq(lambda t: received(t) - (t - room) / resistance, room, 500.0, xtol=1e-12))
    flux = received(inner)
    return np.asarray(inner - flux * ri / k * np.log(r / ri)), (flux, flux * ri / ro)
