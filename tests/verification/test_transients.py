"""Transients of plain bodies against exact series: steps, moving ends, films, orthotropic bars and
cylinders, thick walls.

The exact solutions and their sources are in `oracles`. March tolerances are chosen so that time is not what
limits a case; the allowed errors leave room for the jump at the start, which the mesh resolves only after
some steps.
"""

import numpy as np
import pytest
from oracles import convective, planar, semi_infinite
from oracles.hollow_transient import HollowCylinder

from cupfem.conduction import FixedTemperature, Solid
from verification.bodies import film, graded, marched, nodes, pieces, section, solid, system, uniform
from verification.compare import within, within_share

ONE_CELL = [0.0, 0.1]  # heights [m] of the two stations of a body that is uniform along the axis


def test_bar_with_oscillating_end():
    """NAFEMS, The Standard NAFEMS Benchmarks, rev. 3, 1990, T3: printed T(.08, 32 s) = 36.60 C; exact
    36.603116.

    Ten quadratic elements; allowed .02 K.
    """
    mesh = section(np.linspace(0.0, 0.1, 11), ONE_CELL)
    swing = FixedTemperature("outside", lambda r, z, t: np.full(r.shape, 100.0 * np.sin(np.pi * t / 40.0)))
    body = system(mesh, solid(35.0, 440.5 * 7200.0), FixedTemperature("inside", 0.0), swing, plane=True)
    x = [0.02, 0.04, 0.06, 0.08]
    found = marched(body, uniform(body, 0.0), [32.0], 1e-3)[0, nodes(mesh, [(place, 0.0) for place in x])]
    within("T3", found, planar.bar_with_oscillating_end(x, 32.0), 0.02)
    within("T3, against the printed 36.60", found[-1], 36.60, 0.02)


def test_thermal_shock():
    """AFNOR/SFM, Guide de validation, 1990, TTLL01: wall of 2 m, k and rho c 1, both faces stepped from 0
    to 100 C.

    Exact T(.2) and T(.8): 65.477697, 8.092863 at t .1; 93.004999, 78.471624 at .7. Allowed .05 K.
    """
    mesh = section(np.linspace(0.0, 2.0, 21), ONE_CELL)
    body = system(
        mesh, solid(1.0), *(FixedTemperature(edge, 100.0) for edge in ("inside", "outside")), plane=True
    )
    times, x = [0.1, 0.2, 0.7, 2.0], np.array([0.2, 0.8])
    found = marched(body, uniform(body, 0.0), times, 1e-3)[:, nodes(mesh, [(place, 0.0) for place in x])]
    theta = convective.theta(convective.SLAB, np.inf, np.array(times)[:, None], 1.0 - x)
    within("TTLL01", found, 100.0 * (1.0 - theta), 0.05)


def test_pipe_wall_that_warms():
    """Incropera et al., 6th ed. 2007, Example 5.4, p. 278: pipe wall taken as plane, h 500 to 60 C inside,
    from -20 C, 480 s.

    The series gives 43.0162 C outside, 45.3625 C inside, 2.725413e7 J/m (D = 1 m); the book, with one term
    of it, 42.92 C. Allowed 1e-5 of the 80 K between fluid and start.
    """
    mesh = section(np.linspace(0.0, 0.04, 9), ONE_CELL)
    body = system(mesh, solid(63.9, 7832.0 * 434.0), film("inside", 500.0, 60.0), plane=True)
    state = marched(body, uniform(body, -20.0), [480.0])[0]
    biot, fourier = 500.0 * 0.04 / 63.9, 63.9 / (7832.0 * 434.0) * 480.0 / 0.04**2
    exact = 60.0 - 80.0 * convective.theta(convective.SLAB, biot, fourier, [0.0, 1.0])
    within("pipe wall, outside and inside", state[nodes(mesh, [(0.04, 0.0), (0.0, 0.0)])], exact, 8e-4)
    gained = (body.stored(state)["wall"] - body.stored(uniform(body, -20.0))["wall"]) / 0.1 * np.pi
    within_share("pipe wall, heat gained per metre", gained, 2.725413e7, 1e-5)


@pytest.mark.parametrize("shape", ["slab", "cylinder"])
@pytest.mark.parametrize("biot", [0.1, 1.0, 10.0])
def test_body_in_a_fluid(shape, biot):
    """Incropera et al., 6th ed. 2007, sec. 5.5 and 5.6: slab and cylinder with a film, 60 terms of the
    series.

    theta at centre and surface for Fo .05 to 1. Allowed 1e-4, as for 20 quadratic elements.
    """
    mesh = section(np.linspace(0.0, 1.0, 21), ONE_CELL)
    body = system(mesh, solid(1.0), film("outside", biot, 0.0), plane=shape == "slab")
    times, places = [0.05, 0.2, 1.0], [0.0, 1.0]
    found = marched(body, uniform(body, 1.0), times, 1e-5)[:, nodes(mesh, [(r, 0.0) for r in places])]
    kind = convective.SLAB if shape == "slab" else convective.CYLINDER
    exact = convective.theta(kind, biot, np.array(times)[:, None], np.array(places))
    within(f"{shape}, Bi {biot:g}", found, exact, 1e-4)


def test_thick_wall_with_a_film():
    """Incropera et al., 6th ed. 2007, eq. 5.60; Carslaw and Jaeger, 2nd ed. 1959, sec. 2.7: semi-infinite
    solid with a film.

    theta(eta, beta) with eta = x/2 sqrt(at), beta = h sqrt(at)/k: (0, .5) .38430966, (.5, .5) .14649770,
    (0, 1) .57241642, (1, 1) .06334439, (0, 2) .74460432. k, rho c and h are 1, so beta = sqrt t. Allowed
    1e-4; 16 m deep, 4 sqrt(t) at the end.
    """
    mesh = section(pieces(np.linspace(0.0, 2.0, 41), graded(2.0, 16.0, 20, 1.1)), ONE_CELL)
    body = system(mesh, solid(1.0), film("inside", 1.0, 1.0), plane=True)
    times, depths = np.array([0.25, 1.0, 4.0]), np.array([0.0, 0.5, 1.0, 2.0])
    found = marched(body, uniform(body, 0.0), list(times), 1e-5)[:, nodes(mesh, [(x, 0.0) for x in depths])]
    root = np.sqrt(times)[:, None]
    within(
        "semi-infinite solid with a film", found, semi_infinite.film_theta(depths / (2 * root), root), 1e-4
    )


def test_short_cylinder():
    """Kreith, Manglik, Bohn, Principles of Heat Transfer, 7th ed., Example 2.14: R .05, L .16, 20 C in 500
    C, h 30, 1800 s.

    Exact (product of two series) 297.94821 C in the centre, 440.10584 at the end, 429.82507 at the side,
    479.19807 at the rim; the book's charts give 297 C. Allowed .05 K of 480 K.
    """
    mesh = section(np.linspace(0.0, 0.05, 11), np.linspace(0.0, 0.08, 13))
    body = system(mesh, solid(0.5, 1e6), film("outside", 30.0, 500.0), film("brim", 30.0, 500.0))
    r, z = np.array([0.0, 0.0, 0.05, 0.05]), np.array([0.0, 0.08, 0.0, 0.08])
    found = marched(body, uniform(body, 20.0), [1800.0], 1e-3)[0, nodes(mesh, list(zip(r, z, strict=True)))]
    exact = convective.short_cylinder(r, z, 1800.0, (0.05, 0.08), (0.5, 0.5), 1e6, 30.0)
    within("short cylinder", found, 500.0 - 480.0 * exact, 0.05)
    within("short cylinder, against the charts' 297 C", found[0], 297.0, 1.0)


def test_orthotropic_short_cylinder():
    """The same product with k_r .12 and k_z .30 in their own factors: R .04, half height .05, rho c 9.38e5,
    h 10.

    theta .99385777 .47714056 .63429067 .30451622 after 600 s. Allowed 1e-4.
    """
    mesh = section(np.linspace(0.0, 0.04, 13), np.linspace(0.0, 0.05, 13))
    body = system(mesh, Solid(0.12, 0.30, 9.38e5), film("outside", 10.0, 0.0), film("brim", 10.0, 0.0))
    r, z = np.array([0.0, 0.04, 0.0, 0.04]), np.array([0.0, 0.0, 0.05, 0.05])
    times = np.array([600.0, 3600.0])
    found = marched(body, uniform(body, 1.0), list(times), 1e-5)[:, nodes(mesh, list(zip(r, z, strict=True)))]
    exact = convective.short_cylinder(r, z, times[:, None], (0.04, 0.05), (0.12, 0.30), 9.38e5, 10.0)
    within("orthotropic short cylinder", found, exact, 1e-4)


def test_orthotropic_slab():
    """TTLP304 (a case of the same collection; recomputed): 2.7 x 5.4 m, k 2.638 and .633, rho c 1899.1,
    4320 s.

    From -1.111 C with -17.778 C on three sides and the fourth insulated: printed -15.6151 C at its middle;
    exact -15.615293. Allowed .001 K.
    """
    mesh = section(np.linspace(0.0, 2.7, 17), np.linspace(0.0, 5.4, 25))
    cold = [FixedTemperature(edge, -17.778) for edge in ("heel", "outside", "brim")]
    body = system(mesh, Solid(2.638, 0.633, 1899.1), *cold, plane=True)
    x, y = np.array([0.0, 1.35 / 8 * 8, 0.0]), np.array([2.7, 2.7, 4.05])
    found = marched(body, uniform(body, -1.111), [4320.0], 1e-4)[0, nodes(mesh, list(zip(x, y, strict=True)))]
    exact = convective.rectangular_bar(x, y - 2.7, 4320.0, (2.7, 2.7), (2.638, 0.633), 1899.1, np.inf)
    within("TTLP304", found, -17.778 + 16.667 * exact, 1e-3)


@pytest.mark.parametrize("lean", [0.0, 30.0])
def test_orthotropic_bar_with_films(lean):
    """TTLP300 (half sizes .0508 and .0254 m inferred from charts): k 34.614 and 6.237, rho c 2.4168e5, 260
    C in 37.78 C, 3 s.

    h 1362.71 all round. Exact 239.0211 C in the middle, 66.1310 in a corner. The bar is built once upright
    and once leaning by 30 degrees, so that its axes are not those of the section. Allowed .05 K.
    """
    angle = np.radians(lean)
    mesh = section(np.linspace(0.0, 0.0508, 11), np.linspace(0.0, 0.1016, 21) * np.cos(angle), lean=angle)
    edges = ("inside", "outside", "heel", "brim")
    body = system(
        mesh, Solid(6.237, 34.614, 2.4168e5), *(film(edge, 1362.71, 37.78) for edge in edges), plane=True
    )
    along, across = np.array([0.0508, 0.0, 0.0508, 0.0]), np.array([0.0254, 0.0254, 0.0, 0.0])
    r = along * np.sin(angle) + across * np.cos(angle)
    z = along * np.cos(angle) - across * np.sin(angle)
    found = marched(body, uniform(body, 260.0), [3.0], 1e-3)[0, nodes(mesh, list(zip(r, z, strict=True)))]
    place = along - 0.0508, across - 0.0254
    exact = convective.rectangular_bar(*place, 3.0, (0.0508, 0.0254), (34.614, 6.237), 2.4168e5, 1362.71)
    within(f"TTLP300, leaning {lean:g} degrees", found, 37.78 + 222.22 * exact, 0.05)


class TestHollowCylinder:
    """Carslaw and Jaeger, Conduction of Heat in Solids, 2nd ed. 1959, sec. 7.10 and 13.4."""

    def test_faces_held(self):
        """a 1, b 2, diffusivity 1, start 1, faces 0: U(1.5) .99919699 .77471365 .47869724 .18052195 at t
        .01 .05 .1 .2.

        Allowed 1e-4: faces that jump at the start.
        """
        mesh = section(np.linspace(1.0, 2.0, 21), ONE_CELL)
        body = system(mesh, solid(1.0), *(FixedTemperature(edge, 0.0) for edge in ("inside", "outside")))
        times = [0.01, 0.05, 0.1, 0.2]
        found = marched(body, uniform(body, 1.0), times, 1e-5, 1e-5)[:, nodes(mesh, [(1.5, 0.0)])[0]]
        exact = HollowCylinder(1.0, 2.0, np.inf, np.inf).temperature(1.5, times)
        within("hollow cylinder, faces held", found, exact, 1e-4)

    @pytest.mark.parametrize(("name", "start", "inside"), [("cooling", 1.0, 0.0), ("pouring", 0.0, 1.0)])
    def test_films_on_both_faces(self, name, start, inside):
        """a 1, b 1.5, h_i a/k 2, h_o/k .5. Cooling from 1: .53664628 .70897581 .70151592 at t .1 and r 1,
        1.25, 1.5.

        Pouring, from 0 with an inner fluid at 1: .41625792 .20147885 .12558880. Allowed 1e-4.
        """
        mesh = section(np.linspace(1.0, 1.5, 17), ONE_CELL)
        body = system(mesh, solid(1.0), film("inside", 2.0, inside), film("outside", 0.5, 0.0))
        times, radii = np.array([0.05, 0.1, 0.5]), np.array([1.0, 1.25, 1.5])
        found = marched(body, uniform(body, start), list(times), 1e-5, 1e-5)
        exact = HollowCylinder(1.0, 1.5, 2.0, 0.5).temperature(radii, times[:, None], start, inside)
        within(f"hollow cylinder, {name}", found[:, nodes(mesh, [(r, 0.0) for r in radii])], exact, 1e-4)
