"""The layered radial estimate against exact transients, and the stations that it takes from a cup."""

import math

import numpy as np
import pytest
from oracles import hollow_transient, lumped, stirred

from cupfem.estimates import (
    Face,
    LumpedDrink,
    RadialWall,
    Station,
    WallLayer,
    steady,
    surface_loss,
    transient,
)
from cupfem.estimates.rosenbrock import Path, Step, step
from cupfem.films import (
    FilmSum,
    FixedFilm,
    NaturalConvectionPlate,
    Radiation,
)
from cupfem.fluids import constant_liquid
from cupfem.gaps import Gap
from cupfem.serving import Serving

HELD = FixedFilm(1e9)  # W/(m2 K); holds the face of any wall here to 1e-4 K and better


def wall(layers, inside, outside, radius, start=None):
    """A station between (film, temperature) on either side."""
    radii = [radius]
    for layer in layers:
        radii.append(radii[-1] + layer.thickness)
    (inner, hot), (outer, cold) = inside, outside
    faces = Face({"inner": inner}), Face({"outer": outer}, cold)
    first = cold if start is None else start
    return Station(0.05, tuple(radii), tuple(layers), *faces, start_temperature=first, drink_temperature=hot)


def cup_wall():
    """Board, air, board with films that follow their temperatures."""
    outside = FilmSum((NaturalConvectionPlate(0.095), Radiation(0.92)))
    gap = WallLayer("gap", 1e-3, 0.028, 1100.0, Gap(0.92, 0.92, contact_fraction=0.02), 0.07)
    board = WallLayer("board", 0.33e-3, 0.09, 8.68e5)
    return wall([board, gap, board], (FixedFilm(400.0), 85.0), (outside, 22.0), 0.034)


# -- the scheme in time --------------------------------------------------------------------------------------


class Falling:
    """2 y' = -4 t y^2, y = 1 / (1 + t^2): not linear, and its slopes change in time."""

    band = 0
    mass = banded_mass = np.array([[2.0]])

    def rates(self, time, state):
        return -4.0 * time * state**2

    def slopes(self, time, state):
        return np.array([-8.0 * time * state])

    def time_slopes(self, time, state):
        return -4.0 * state**2


def errors_of(steps):
    """Largest errors with equal steps to t = 3: at the ends of the steps, and in their middles."""
    length, state, taken = 3.0 / steps, np.ones(1), []
    for n in range(steps):
        coefficients, state, _ = step(Falling(), n * length, state, length)
        taken.append(Step(n * length, length, coefficients))
    path, ends = Path(tuple(taken)), length * np.arange(1, steps + 1)
    return [np.abs(path(t)[:, 0] - 1.0 / (1.0 + t * t)).max() for t in (ends, ends - 0.5 * length)]


def test_order_in_time():
    """Hairer and Wanner, Solving Ordinary Differential Equations II, 1996, sec. IV.7: 4, and 3 between."""
    errors = np.array([errors_of(steps) for steps in (80, 160, 320)])
    rates = np.log2(errors[:-1] / errors[1:])
    assert rates[:, 0] == pytest.approx(4.0, abs=0.2)
    assert np.all(rates[:, 1] > 2.9)


# -- exact transients ----------------------------------------------------------------------------------------

# r 1, 1.25, 1.5 of a wall a = 1, b = 1.5, h_i a/k = 2, h_o/k = 0.5. Carslaw and Jaeger, Conduction of Heat in
# Solids, 2nd ed. 1959, secs. 7.10 and 13 (form); recomputed. Start 1 and fluids at 0; start 0, inner fluid 1.
COOLED = {
    0.01: (0.81613220, 0.94433957),
    0.1: (0.53664628, 0.70151592),
    0.5: (0.12017513, 0.15741751),
}
POURED = {
    0.05: (0.33200183, 0.03782942),
    0.1: (0.41625792, 0.12558880),
    0.5: (0.69607706, 0.48999415),
}


@pytest.mark.parametrize(("table", "start", "inside"), [(COOLED, 100.0, 0.0), (POURED, 0.0, 100.0)])
def test_hollow_cylinder_with_films(table, start, inside):
    """Temperatures a hundred times those of the table, to a thousandth of a kelvin."""
    layer = WallLayer("wall", 0.5, 1.0, 1.0)
    place = wall([layer], (FixedFilm(2.0), inside), (FixedFilm(0.5), 0.0), 1.0, start)
    found = transient(place, 1.0).interfaces(list(table))
    assert found == pytest.approx(100.0 * np.array(list(table.values())), abs=1e-3)


def test_two_layers_of_one_material_are_one():
    """The same figures with the wall cut into two layers: nodes are shared."""
    half = WallLayer("half", 0.25, 1.0, 1.0)
    place = wall([half, half], (FixedFilm(2.0), 100.0), (FixedFilm(0.5), 0.0), 1.0)
    found = transient(place, 1.0).interfaces(list(POURED))
    assert found[:, [0, 2]] == pytest.approx(100.0 * np.array(list(POURED.values())), abs=1e-3)


def test_board_of_a_cup_from_the_first_hundredth_of_a_second():
    """Carslaw and Jaeger as above, board 0.35 mm: within a thousandth of a kelvin at all times."""
    inner, outer, k, heat_capacity = 0.035, 0.03535, 0.09, 8.68e5
    exact = hollow_transient.HollowCylinder(inner, outer, 400.0 / k, 11.5 / k, k / heat_capacity)
    layer = WallLayer("board", outer - inner, k, heat_capacity)
    found = transient(wall([layer], (FixedFilm(400.0), 85.0), (FixedFilm(11.5), 22.0), inner), 60.0)
    for time in (0.01, 0.03, 0.1, 0.3, 1.0, 3.0, 10.0, 60.0):
        field = exact.temperature(np.array([inner, outer]), time, 22.0, 85.0, 22.0)
        assert found.interfaces(time) == pytest.approx(field, abs=1e-3)


def test_time_to_a_temperature_outside():
    exact = hollow_transient.HollowCylinder(1.0, 1.5, 2.0, 0.5)
    layer = WallLayer("wall", 0.5, 1.0, 1.0)
    found = transient(wall([layer], (FixedFilm(2.0), 100.0), (FixedFilm(0.5), 0.0), 1.0), 2.0)
    time = found.time_to(40.0)
    assert exact.temperature(1.5, time, 0.0, 1.0, 0.0) == pytest.approx(0.4, abs=1e-5)
    assert found.time_to(99.0) == math.inf


def test_a_composite_cylinder_at_last():
    """Resistances in series, Incropera et al., 6th ed. 2007, sec. 3.3; recomputed."""
    layers = [
        WallLayer("inner", 0.4e-3, 0.12, 1e6),
        WallLayer("middle", 1.0e-3, 0.0285, 1e4),
        WallLayer("outer", 0.5e-3, 0.06, 5e5),
    ]
    found = transient(wall(layers, (FixedFilm(300.0), 80.0), (FixedFilm(10.0), 20.0), 0.04), 3600.0)
    assert found.interfaces(3600.0) == pytest.approx([78.61530, 77.23749, 62.98178, 59.65714], abs=1e-4)


def test_films_and_gaps_settle_in_the_steady_network():
    """Two solvers of ours that share nothing but films and gaps."""
    found = transient(cup_wall(), 600.0)
    assert found.interfaces(600.0) == pytest.approx(steady(cup_wall()).temperature, abs=1e-3)
    assert found.drink([0.0, 5.0]) == pytest.approx([85.0, 85.0])


@pytest.mark.parametrize("time", [0.3, 3.0, 12.0, 40.0])
def test_a_cup_wall_does_not_depend_on_elements_and_steps(time):
    """A thousandth of a kelvin of its own resolution, with films and gaps that follow their temperatures."""
    fine = transient(cup_wall(), 60.0, elements=40, tolerance=1e-6)
    assert transient(cup_wall(), 60.0).interfaces(time) == pytest.approx(fine.interfaces(time), abs=1e-3)


def test_a_contact_is_a_step_of_temperature():
    """Exact in the steady state: h dT / (k + h L), k 40, h 80, two halves of 0.99 m, 100 and 300 degC."""
    half = WallLayer("half", 0.495, 40.0, 1e3)
    contact = WallLayer("contact", 0.0, math.inf, 0.0, contact=80.0)
    place = wall([half, contact, half], (HELD, 100.0), (HELD, 300.0), 1e5)
    found = transient(place, 1e3).interfaces(1e3)
    assert found == pytest.approx([100.0, 166.442953, 233.557047, 300.0], abs=2e-3)


def test_the_wall_stores_what_its_volume_holds():
    """Sum of the mass matrix, per radian and length: rho c (r_out^2 - r_in^2) / 2 of all layers."""
    place = cup_wall()
    square = np.diff(np.square(place.radii))
    expected = 0.5 * sum(layer.heat_capacity * part for layer, part in zip(place.layers, square, strict=True))
    assert RadialWall(place, 85.0).mass.sum() == pytest.approx(expected, rel=1e-12)


# -- the drink -----------------------------------------------------------------------------------------------


def drink(volume, area, loss=0.0):
    liquid = constant_liquid(density=970.0, specific_heat=4190.0)
    return LumpedDrink(liquid, lambda time: volume, lambda time: area, lambda time, temperature: loss)


def test_porcelain_takes_the_heat_of_the_drink():
    """Slab against a well-stirred fluid: Crank, The Mathematics of Diffusion, 2nd ed. 1975, sec. 4.3.5."""
    porcelain = WallLayer("body", 5e-3, 1.5, 2.592e6)
    inner = Face({"inner": FixedFilm(1e7)})
    place = Station(0.05, (1e4, 1e4 + 5e-3), (porcelain,), inner, Face({}, 25.0), 25.0, 85.0)
    times, capacity = np.array([1.0, 2.0, 5.0, 10.0, 20.0]), 250e-6 * 970.0 * 4190.0
    exact = stirred.poured_cup_fluid(times, 5e-3, 1.5, 2.592e6, 0.02364, capacity, (85.0, 25.0))
    assert exact == pytest.approx(
        [82.016062, 80.848214, 78.640720, 76.336096, 73.689279], abs=3e-4
    )  # printed with the area rounded
    assert transient(place, 30.0, drink(250e-6, 0.02364)).drink(times) == pytest.approx(exact, abs=2e-3)


def test_a_drink_that_loses_heat_at_its_surface():
    """Behind an insulating wall only the loss cools: m c dT/dt = -loss."""
    layer = WallLayer("wall", 1e-3, 1.0, 1e-3)
    place = Station(
        0.05, (0.04, 0.041), (layer,), Face({"inner": FixedFilm(400.0)}), Face({}, 22.0), 85.0, 85.0
    )
    found = transient(place, 100.0, drink(250e-6, 0.02, loss=30.0))
    assert found.drink(100.0) == pytest.approx(85.0 - 3000.0 / (250e-6 * 970.0 * 4190.0), abs=1e-3)
    assert found.outside(100.0) < 85.0


def test_an_open_surface_loses_vapour_warmth_and_radiation():
    """M. M. Shah, HVAC&R Research 8 (2002) 125: 5603 W/m2 latent at 80 in 20 degC, 50 %.

    Times the freeboard factor 0.75; the warmth by the closure, the radiation of 0.96 is Stefan's law.
    """
    serving = Serving.from_text('[room]\ntemperature = "20 degC"\nhumidity = 0.5')
    flux = surface_loss(serving)(0.04, 80.0) / (math.pi * 0.04**2)
    radiation = 0.96 * 5.670374419e-8 * (353.15**4 - 293.15**4)
    warmth = flux - radiation - 0.75 * 5603.0
    assert 0.75 * 300.0 < warmth < 0.75 * 600.0
    assert surface_loss(serving)(0.02, 80.0) < 0.3 * surface_loss(serving)(0.04, 80.0)


def test_a_falling_level_warms_the_rest_less():
    """Cylinder that is drunk evenly, heat through wetted side and base; own derivation."""
    liquid = constant_liquid(density=1000.0, specific_heat=4100.0)
    section, side = math.pi * 0.04**2, 2.0 * math.pi * 0.04

    def level(time):
        return 0.08 * (1.0 - time / 1800.0)

    node = LumpedDrink(
        liquid,
        lambda time: section * level(time),
        lambda time: section + side * level(time),
        lambda time, temperature: 0.0,
    )
    place = wall([WallLayer("wall", 1e-6, 1e3, 1.0)], (FixedFilm(10.0), 100.0), (HELD, 0.0), 1e3)
    times = np.array([300.0, 900.0, 1500.0])
    exact = 100.0 * lumped.draining_cylinder(times, 0.04, 0.08, 1800.0, 10.0, 4.1e6)
    assert transient(place, 1500.0, node).drink(times) == pytest.approx(exact, abs=2e-3)
    assert exact == pytest.approx([95.44778737, 86.26082227, 75.48357577], abs=1e-6)


def test_a_drink_given_as_a_function_of_time():
    """A ramp under a wall without heat capacity: the face follows its share of the drink."""
    layer = WallLayer("wall", 1e-3, 1.0, 10.0)
    place = wall([layer], (FixedFilm(100.0), 80.0), (FixedFilm(10.0), 20.0), 1e3)
    found = transient(place, 100.0, lambda time: 80.0 - 0.2 * time)
    share = 0.1 / (0.01 + 0.001 + 0.1)
    assert found.outside(50.0) == pytest.approx(20.0 + share * 50.0, abs=1e-3)
    assert found.drink(50.0) == pytest.approx(70.0)
