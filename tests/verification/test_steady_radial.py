"""Steady heat flow through cylinder walls and plane layers: films, sources, k(T), radiation, fins.

The published figures stand beside the exact values; the exact solutions and their sources are in `oracles`.
"""

import numpy as np
import pytest
from oracles import planar, radial, walls
from scipy import special

from cupfem.conduction import Exchange, FixedFlux, FixedTemperature, Solid
from cupfem.films import FluxFunction
from cupfem.march import System
from verification.bodies import film, nodes, section, solid, steady, system
from verification.compare import within, within_share

ONE_CELL = [0.0, 0.1]  # heights [m] of the two stations of a body that is uniform along the axis


def annulus(inner: float, outer: float, cells: int):
    """A ring one cell high."""
    return section(np.linspace(inner, outer, cells + 1), ONE_CELL)


def on_bottom(mesh, radii):
    """The unknowns at radii on the lower end."""
    return nodes(mesh, [(r, 0.0) for r in radii])


def power(body: System, state: np.ndarray, name: str) -> float:
    """Heat that leaves over an edge [W]."""
    return body.loads(state, 0.0)[1][name]


class TestHollowCylinder:
    """AFNOR/SFM, Guide de validation des progiciels de calcul de structures, 1990."""

    @pytest.mark.parametrize("inner", ["temperature", "flux"])
    def test_film_outside(self, inner):
        """TPLA01: printed T(.32) 66.506 C, fluxes 1729.91 and 1482.78 W/m2. Allowed 1e-5: only ln r is
        approximated.
        """
        mesh = annulus(0.30, 0.35, 10)
        held = FixedTemperature("inside", 100.0) if inner == "temperature" else FixedFlux("inside", 1729.9091)
        body = system(mesh, solid(1.0, 2.0), held, film("outside", 500.0, 17.03444))
        state = steady(body)
        exact = radial.hollow_cylinder_film_outside(0.32, (0.30, 0.35), 1.0, 1729.9091, (500.0, 17.03444))
        within_share(f"TPLA01, inner {inner}", state[on_bottom(mesh, [0.32])], [exact], 1e-5)
        area = 2 * np.pi * 0.35 * 0.1
        within_share("TPLA01, outer flux", power(body, state, "outside") / area, 1482.779244, 1e-5)

    def test_source(self):
        """TPLA04 (radii inferred): printed T 28.73 (r 1.2), 32.62 (1.5); exact 28.72758044, 32.62218755.
        Allowed 1e-5.
        """
        mesh = annulus(1.0, 2.0, 20)
        held = [FixedTemperature(edge, 20.0) for edge in ("inside", "outside")]
        found = steady(system(mesh, solid(1.0), *held, sources={"wall": 100.0}))[on_bottom(mesh, [1.2, 1.5])]
        exact, _ = radial.hollow_cylinder([1.2, 1.5], (1.0, 2.0), (20.0, 20.0), (1.0, 0.0), 100.0)
        within_share("TPLA04", found, exact, 1e-5)

    def test_conductivity_that_rises_with_temperature(self):
        """TPNA300 (radii read from a mesh): k = 21.461 + .234 T, source 1.035e7 W/m3, faces at -17.78 C.

        Printed -5 2.22 5.56 6.67 5.56 2.78 -1.67 -8.89 at eight even radii, which the Kirchhoff transform
        misses by up to .3 K; allowed .01 K against the transform: k is taken at the mean of each cell, so
        the error falls with the cell squared.
        """
        mesh = annulus(6.35e-3, 25.4e-3, 90)
        k = lambda temperature: 21.461 + 0.234 * temperature  # noqa: E731
        held = [FixedTemperature(edge, -17.78) for edge in ("inside", "outside")]
        body = system(mesh, Solid(k, k, 1.0), *held, sources={"wall": 1.035e7})
        radii = np.linspace(6.35e-3, 25.4e-3, 10)[1:-1]
        found = steady(body)[on_bottom(mesh, radii)]
        exact, _ = radial.hollow_cylinder(
            radii, (6.35e-3, 25.4e-3), (-17.78, -17.78), (21.461, 0.234), 1.035e7
        )
        within("TPNA300", found, exact, 0.01)
        within(
            "TPNA300, against the printed figures",
            found,
            [-5, 2.22, 5.56, 6.67, 5.56, 2.78, -1.67, -8.89],
            0.3,
        )

    def test_radiation_inside(self):
        """TPNA01: radiation from 500 C (emissivity .6, sigma 5.73e-8 as printed) inside, film outside.

        Printed 105.55 99.21 93.30 87.76 82.56 C at five even radii. Allowed .01 K, the printed figures'
        last digit.
        """
        mesh = annulus(0.300, 0.391, 8)
        received = FluxFunction(
            lambda surface, around, z, t: 0.6 * 5.73e-8 * ((surface + 273.15) ** 4 - (around + 273.15) ** 4)
        )
        body = system(
            mesh,
            solid(40.0),
            Exchange("inside", {"radiation": received}, 500.0),
            film("outside", 142.0, 20.0),
        )
        radii = np.linspace(0.300, 0.391, 5)
        found = steady(body, 100.0)[on_bottom(mesh, radii)]
        within("TPNA01", found, radial.radiating_hollow_cylinder(radii, 5.73e-8)[0], 0.01)
        within("TPNA01, against the printed figures", found, [105.55, 99.21, 93.30, 87.76, 82.56], 0.012)


class TestPublishedManufacturedCylinders:
    """A. Toptan et al., CASL-U-2020-1939-000 = SAND2020-3887R, 2020, doi 10.2172/1614683, cases II.1 to
    II.5.

    Allowed 1e-6 relative where quadratic elements only miss ln r, 1e-5 where k follows the temperature of
    each cell.
    """

    def test_fixed_faces(self):
        """II.1: k 5, faces 300 and 0: T(.6) = 95.21814165."""
        mesh = annulus(0.2, 1.0, 40)
        held = FixedTemperature("inside", 300.0), FixedTemperature("outside", 0.0)
        exact, _ = radial.hollow_cylinder([0.6], (0.2, 1.0), (300.0, 0.0), (5.0, 0.0))
        within_share(
            "CASL II.1", steady(system(mesh, solid(5.0), *held))[on_bottom(mesh, [0.6])], exact, 1e-6
        )

    @pytest.mark.parametrize(
        ("name", "k", "faces", "source"),
        [("CASL II.2", (5.0, 1e-3), (300.0, 0.0), 0.0), ("CASL II.3", (1.0, 1e-3), (0.0, 0.0), 1200.0)],
    )
    def test_conductivity_that_rises_with_temperature(self, name, k, faces, source):
        """II.2: k 5 + 1e-3 T, T(.6) = 97.13123816; II.3: k 1 + 1e-3 T with source 1200, T(.6) =
        95.98410938.
        """
        mesh = annulus(0.2, 1.0, 160)
        conductivity = lambda temperature: k[0] + k[1] * temperature  # noqa: E731
        held = FixedTemperature("inside", faces[0]), FixedTemperature("outside", faces[1])
        body = system(mesh, Solid(conductivity, conductivity, 1.0), *held, sources={"wall": source})
        exact, _ = radial.hollow_cylinder([0.6], (0.2, 1.0), faces, k, source)
        within_share(name, steady(body)[on_bottom(mesh, [0.6])], exact, 1e-5)

    def test_flux_inside_film_outside(self):
        """II.4: source 1200, k 1, flux 100 in, h 10 to 100 C: 441.16224835, 349.55669750, 159.6 at r .2,
        .6, 1.
        """
        mesh, radii = annulus(0.2, 1.0, 40), [0.2, 0.6, 1.0]
        body = system(
            mesh,
            solid(1.0),
            FixedFlux("inside", 100.0),
            film("outside", 10.0, 100.0),
            sources={"wall": 1200.0},
        )
        exact = radial.hollow_cylinder_film_outside(radii, (0.2, 1.0), 1.0, 100.0, (10.0, 100.0), 1200.0)
        within_share("CASL II.4", steady(body)[on_bottom(mesh, radii)], exact, 1e-6)

    def test_solid_cylinder_with_graded_source(self):
        """II.5: source 1200 (1 - .1 r), k 1, T(1) = 300: 586.66666667 at the axis, 513.33333333 at .5."""
        mesh = annulus(0.0, 1.0, 40)
        source = {"wall": lambda r, z: 1200.0 * (1.0 - 0.1 * r)}
        body = system(mesh, solid(1.0), FixedTemperature("outside", 300.0), sources=source)
        exact = radial.cylinder_graded_source([0.0, 0.5])
        within_share("CASL II.5", steady(body)[on_bottom(mesh, [0.0, 0.5])], exact, 1e-6)


def test_composite_cylinder():
    """Incropera et al., 6th ed. 2007, sec. 3.3: three layers between two films; recomputed to 8 digits.

    A wall like a cup's (invented): r 40.0/40.4/41.4/41.9 mm, k .12/.0285/.06, 80 C with h 300 inside, 20 C
    with h 10 outside. Allowed 1e-6: thin layers, so ln r is nearly quadratic over a cell.
    """
    radii, k = np.array([40.0, 40.4, 41.4, 41.9]) * 1e-3, [0.12, 0.0285, 0.06]
    lines = {f"layer {n}": np.linspace(radii[n], radii[n + 1], 5) for n in range(3)}
    mesh = section(lines, ONE_CELL)
    solids = {f"layer {n}": solid(k[n]) for n in range(3)}
    body = system(mesh, solids, film("inside", 300.0, 80.0), film("outside", 10.0, 20.0))
    state = steady(body)
    exact = radial.composite_cylinder(radii, k, (300.0, 80.0), (10.0, 20.0))
    within_share("composite cylinder, faces", state[on_bottom(mesh, radii)], exact.temperature, 1e-6)
    within_share(
        "composite cylinder, W/m", power(body, state, "outside") / 0.1, exact.heat_flow_per_length, 1e-6
    )


def test_bar_radiating_at_its_end():
    """NAFEMS, The Standard NAFEMS Benchmarks, rev. 3, 1990, T2: printed 927.0 K; exact 927.0076 K. Allowed
    .01 K.
    """
    mesh = section(np.linspace(0.0, 0.1, 5), ONE_CELL)
    lost = FluxFunction(
        lambda surface, around, z, t: 0.98 * 5.67e-8 * ((surface + 273.15) ** 4 - (around + 273.15) ** 4)
    )
    hot = FixedTemperature("inside", 1000.0 - 273.15)
    body = system(
        mesh, solid(55.6), hot, Exchange("outside", {"radiation": lost}, 300.0 - 273.15), plane=True
    )
    end = steady(body, 700.0)[on_bottom(mesh, [0.1])] + 273.15
    within("T2", end, [planar.bar_radiating_at_end()], 0.01)


def test_plane_wall_to_fluid():
    """AFNOR/SFM, Guide de validation, 1990, TPLL01: L .05, k .75, 100 C to h 30 at 140 C: 400 W/m2, face
    126.6667 C.

    Allowed 1e-8: the profile is linear, which the elements hold exactly.
    """
    mesh = section([0.0, 0.025, 0.05], ONE_CELL)
    body = system(
        mesh, solid(0.75), FixedTemperature("inside", 100.0), film("outside", 30.0, 140.0), plane=True
    )
    state = steady(body)
    flux, face = walls.wall_to_fluid(0.05, 0.75, 100.0, 30.0, 140.0)
    within_share("TPLL01, face", state[on_bottom(mesh, [0.05])], [face], 1e-8)
    within_share("TPLL01, flux", -power(body, state, "outside") / 0.1, flux, 1e-8)


def annular_fin(inner: float, outer: float, thickness: float, k: float, h: float) -> tuple[float, float]:
    """Efficiency and dimensionless tip temperature of an annular fin with an insulated tip.

    D.Q. Kern, A.D. Kraus, Extended Surface Heat Transfer, 1972 (form from memory); Incropera et al., 6th
    ed. 2007, eq. 3.91.
    """
    m = np.sqrt(2 * h / (k * thickness))
    i0, i1, k0, k1 = (f(m * inner) for f in (special.i0, special.i1, special.k0, special.k1))
    i1o, k1o, i0o, k0o = (f(m * outer) for f in (special.i1, special.k1, special.i0, special.k0))
    below = i0 * k1o + k0 * i1o
    efficiency = 2 * inner / (m * (outer**2 - inner**2)) * (k1 * i1o - i1 * k1o) / below
    return efficiency, (i0o * k1o + k0o * i1o) / below


@pytest.mark.parametrize(
    ("name", "inner", "outer", "thickness", "k", "h", "printed"),
    [
        ("Incropera Example 3.10", 0.025, 0.048, 6e-3, 186.0, 50.0, 0.97855220),
        ("Kern and Kraus form", 0.0127, 0.028575, 0.38e-3, 200.0, 58.0, 0.8412588620),
        ("polypropylene ridge of a cup", 0.040, 0.042, 1e-3, 0.22, 10.0, 0.89181986),
    ],
)
def test_annular_fin(name, inner, outer, thickness, k, h, printed):
    """Annular fins: the efficiency printed to 8 digits is the Bessel form's, recomputed.

    The form takes the temperature as uniform across the fin; a conductivity along the axis of 1e4 k makes
    it so. Allowed 1e-5.
    """
    mesh = section(np.linspace(inner, outer, 21), [0.0, 0.5 * thickness, thickness])
    films = film("heel", h, 0.0), film("brim", h, 0.0)
    body = system(mesh, Solid(k, 1e4 * k, 1.0), FixedTemperature("inside", 1.0), *films)
    state = steady(body)
    ideal = 2 * np.pi * (outer**2 - inner**2) * h
    efficiency, tip = annular_fin(inner, outer, thickness, k, h)
    within(f"{name}, formula against recomputed figure", efficiency, printed, 1e-8)
    within_share(
        f"{name}, efficiency",
        (power(body, state, "heel") + power(body, state, "brim")) / ideal,
        efficiency,
        1e-5,
    )
    within_share(f"{name}, tip", state[on_bottom(mesh, [outer])], [tip], 1e-5)
