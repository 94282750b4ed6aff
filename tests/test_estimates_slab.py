"""Series of the convective slab against tables, other exact solutions and a worked example."""

import math

import numpy as np
import pytest
from oracles import convective, hollow_transient, semi_infinite

from cupfem.errors import InputError
from cupfem.estimates import Heated, Quenched, time_to

# Bi: zeta_1, C_1 of a slab. Recomputed to nine digits; Incropera, DeWitt, Bergman, Lavine, Fundamentals of
# Heat and Mass Transfer, 6th ed. 2007, Table 5.1, prints four (1.0: 0.8603, 1.1191), from memory.
SLAB = {
    0.01: (0.09983364, 1.00166084),
    0.1: (0.31105285, 1.01609422),
    0.2: (0.43284072, 1.03108765),
    0.5: (0.65327119, 1.07012814),
    1.0: (0.86033359, 1.11913201),
    2.0: (1.07687399, 1.17845579),
    5.0: (1.31383772, 1.24024931),
    10.0: (1.42887001, 1.26196259),
    100.0: (1.55524513, 1.27308762),
}
# Bi, zeta_1 of a sphere, 1 - zeta cot zeta = Bi; same table. A wall with a held face: zeta cot zeta = -Bi.
SPHERE = {1.0: 1.57079633, 2.0: 2.02875784, 5.0: 2.57043156, 10.0: 2.83630039, 100.0: 3.11018695}
# Bi, Fo: middle, surface, mean; recomputed from the series (Incropera, 6th ed. 2007, Eq. 5.39).
SERIES = {
    (0.1, 0.2): (0.99399850, 0.95141985, 0.98065349),
    (0.1, 1.0): (0.92238857, 0.87812649, 0.90758708),
    (1.0, 0.05): (0.99975096, 0.79037676, 0.95730998),
    (1.0, 0.2): (0.95064178, 0.64339078, 0.85159546),
    (1.0, 1.0): (0.53385940, 0.34817685, 0.47039725),
    (10.0, 0.1): (0.96842421, 0.17057381, 0.72611772),
    (10.0, 0.5): (0.45464056, 0.06432896, 0.31501627),
}


@pytest.mark.parametrize("biot", SLAB)
def test_first_eigenvalue_and_coefficient_of_a_slab(biot):
    slab = Quenched(biot)
    assert slab.eigenvalues[0] == pytest.approx(SLAB[biot][0], abs=5e-9)
    assert slab.coefficients[0] == pytest.approx(SLAB[biot][1], abs=5e-9)


@pytest.mark.parametrize("biot", [1e-6, 0.3, 1.0, 30.0, 1e4])
def test_eigenvalues_meet_their_condition_to_the_last_digits(biot):
    z = Quenched(biot).eigenvalues
    assert np.abs(z * np.sin(z) - biot * np.cos(z)) / np.hypot(z, biot) == pytest.approx(0.0, abs=1e-12)
    assert z == pytest.approx(convective.eigenvalues(convective.SLAB, biot), abs=1e-12)


@pytest.mark.parametrize(("biot", "fourier"), SERIES)
def test_temperatures_of_a_slab(biot, fourier):
    slab = Quenched(biot)
    found = [*slab.temperature(fourier, [0.0, 1.0]), slab.mean(fourier)]
    assert found == pytest.approx(SERIES[biot, fourier], abs=1e-8)
    assert slab.heat_flux(fourier) == pytest.approx(biot * SERIES[biot, fourier][1], abs=1e-7)


def test_slabs_with_held_and_with_insulated_face():
    position = np.array([0.0, 0.4, 0.9])
    exact = convective.theta(convective.SLAB, math.inf, 0.15, position)
    assert Quenched(math.inf).temperature(0.15, position) == pytest.approx(exact, abs=1e-12)
    assert Quenched(0.0).temperature(3.0, position) == pytest.approx(1.0, abs=1e-12)


def test_pipe_wall_as_a_plane_wall():
    """Incropera, 6th ed. 2007, Example 5.4 (p. 278), one term: 42.9 degC, -7400 W/m2, -2.73e7 J/m."""
    diffusivity, slab = 63.9 / (7832.0 * 434.0), Quenched(500.0 * 0.04 / 63.9)
    fourier = diffusivity * 480.0 / 0.04**2
    assert slab.biot == pytest.approx(0.312989, abs=5e-7)
    outer, inner = 60.0 - 80.0 * slab.temperature(fourier, [0.0, 1.0])
    assert [outer, inner] == pytest.approx([43.0162, 45.3625], abs=1e-4)
    assert -80.0 * 63.9 / 0.04 * slab.heat_flux(fourier) == pytest.approx(-7318.75, abs=0.01)
    heat = 7832.0 * 434.0 * 0.04 * math.pi * 80.0 * (1.0 - slab.mean(fourier))
    assert heat == pytest.approx(2.725413e7, rel=1e-6)
    one_term = 60.0 - 80.0 * float(slab.temperature(fourier, 0.0, terms=1))
    assert one_term == pytest.approx(42.92, abs=0.2)


@pytest.mark.parametrize("biot", SPHERE)
def test_first_eigenvalue_of_a_wall_with_a_held_face(biot):
    """zeta cot zeta = -Bi is the sphere's condition with Bi + 1."""
    assert Heated(biot - 1.0).eigenvalues[0] == pytest.approx(SPHERE[biot], abs=5e-9)


def test_heated_wall_that_loses_nothing_is_a_quenched_slab():
    position, fourier = np.array([0.0, 0.3, 1.0]), 0.2
    exact = 1.0 - convective.theta(convective.SLAB, math.inf, fourier, 1.0 - position)
    assert Heated(0.0).temperature(fourier, position) == pytest.approx(exact, abs=1e-11)


@pytest.mark.parametrize("inner_biot", [0.3, 3.0, 50.0])
def test_heated_wall_is_half_infinite_at_first(inner_biot):
    """Incropera, 6th ed. 2007, Eq. 5.60, until the far face feels anything (Fo = 0.01)."""
    position, fourier = np.array([0.0, 0.1, 0.25]), 0.01
    exact = semi_infinite.film_theta(position / (2.0 * math.sqrt(fourier)), inner_biot * math.sqrt(fourier))
    found = Heated(0.7, inner_biot).temperature(fourier, position)
    assert found == pytest.approx(exact, abs=1e-9)


@pytest.mark.parametrize("inner_biot", [math.inf, 1.55])
@pytest.mark.parametrize("start", [0.0, 0.3])
def test_heated_wall_is_a_hollow_cylinder_of_large_radius(inner_biot, start):
    """Carslaw and Jaeger, 2nd ed. 1959, secs. 7.10 and 13.4; radius 2000 times the thickness."""
    exact = hollow_transient.HollowCylinder(2000.0, 2001.0, inner_biot, 0.05)
    for fourier in (0.1, 0.5, 2.0):
        field = exact.temperature(np.array([2000.0, 2000.5, 2001.0]), fourier, start, 1.0, 0.0)
        found = Heated(0.05, inner_biot, start).temperature(fourier, [0.0, 0.5, 1.0])
        assert found == pytest.approx(field, abs=3e-4)


def test_heat_fluxes_of_a_heated_wall_meet_in_the_steady_state():
    slab = Heated(0.4, 5.0)
    assert slab.outer_heat_flux(30.0) == pytest.approx(0.4 / (1.0 + 0.4 + 0.4 / 5.0), rel=1e-9)
    assert slab.inner_heat_flux(30.0) == pytest.approx(float(slab.outer_heat_flux(30.0)), rel=1e-9)
    steps = 0.05 + 0.35 * (np.arange(4000) + 0.5) / 4000.0
    stored = 0.35 * np.mean(slab.inner_heat_flux(steps) - slab.outer_heat_flux(steps))
    place = (np.arange(2000) + 0.5) / 2000.0
    before, after = (slab.temperature(fourier, place).mean() for fourier in (0.05, 0.4))
    assert after - before == pytest.approx(stored, rel=1e-5)


def test_time_to_a_temperature_outside():
    """A wall that loses nothing is half way at Fo = 0.379 (Carslaw and Jaeger, 2nd ed. 1959, sec. 3.3)."""
    assert Heated(0.0).fourier_to(0.5) == pytest.approx(0.379, abs=5e-4)
    exact = 1.0 - convective.theta(convective.SLAB, math.inf, Heated(0.0).fourier_to(0.2), 0.0)
    assert exact == pytest.approx(0.2, abs=1e-10)


def test_time_to_is_infinite_above_the_steady_state_and_zero_at_the_start():
    slab = Heated(1.0)
    assert time_to(slab, 40.0, 85.0, 22.0, 5.0) == pytest.approx(5.0 * slab.fourier_to(18.0 / 63.0))
    assert time_to(slab, 53.6, 85.0, 22.0, 5.0) == math.inf
    assert time_to(slab, 22.0, 85.0, 22.0, 5.0) == 0.0


def test_one_term_is_close_only_late():
    """Incropera, 6th ed. 2007, sec. 5.5.2: one term serves for Fo above 0.2."""
    slab = Quenched(1.0)
    early, late = (abs(slab.temperature(fo, 1.0, 1) - slab.temperature(fo, 1.0)) for fo in (0.02, 0.3))
    assert late < 0.005 < 0.05 < early


@pytest.mark.parametrize("given", [{"biot": -1.0}, {"biot": math.inf}, {"biot": 1.0, "inner_biot": 0.0}])
def test_slabs_that_are_none_are_refused(given):
    with pytest.raises(InputError, match="Biot number"):
        Heated(**given)
