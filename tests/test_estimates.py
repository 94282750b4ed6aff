"""Hand estimates against the handbooks they come from: properties, networks, time scales, touch."""

import math

import numpy as np
import pytest
from oracles import lumped, walls

from cupfem.cup import Cup
from cupfem.errors import InputError
from cupfem.estimates import (
    SKIN_EFFUSIVITY,
    Effective,
    Face,
    HalfSpace,
    Station,
    TwoNode,
    WallLayer,
    contact_temperature,
    effective,
    effusivity,
    effusivity_of,
    lumped_cooling,
    lumped_time,
    parallel_conductivity,
    slab_estimate,
    station,
    steady,
    time_scales,
    touched_surface,
    two_node,
    volume_mean,
    wiener_bounds,
)
from cupfem.films import FilmSum, FixedFilm, NaturalConvectionPlate, Radiation
from cupfem.gaps import Gap
from cupfem.materials import get_material
from cupfem.serving import Serving

HELD = FixedFilm(1e13)  # W/(m2 K); holds a face to 1e-9 K


def solid(thickness, conductivity, heat_capacity=1.0):
    return WallLayer("solid", thickness, conductivity, heat_capacity)


def wall(layers, inside, outside, radius=0.04):
    """A station between (film, temperature) on either side."""
    radii = [radius]
    for layer in layers:
        radii.append(radii[-1] + layer.thickness)
    (inner, hot), (outer, cold) = inside, outside
    faces = Face({"inner": inner}), Face({"outer": outer}, cold)
    return Station(0.05, tuple(radii), tuple(layers), *faces, start_temperature=cold, drink_temperature=hot)


# -- effective properties ------------------------------------------------------------------------------------


def test_wiener_bounds_of_a_laminate():
    """O. Wiener, 1912: layers attain both bounds; two fifths of air in board."""
    low, high = wiener_bounds([0.6, 0.4], [0.12, 0.026])
    assert low == pytest.approx(0.04905660, abs=5e-9)
    assert high == pytest.approx(0.08240000, abs=5e-9)
    assert (low, high) == pytest.approx(walls.laminate_conductivity(0.12, 0.026, 0.4), rel=1e-13)


def test_struts_bridge_a_gap_by_their_share():
    assert parallel_conductivity([1.0, 9.0], [0.12, 0.026]) == pytest.approx(0.1 * 0.12 + 0.9 * 0.026)
    assert volume_mean([1.0, 3.0], [8e5, 1e3]) == pytest.approx(0.25 * 8e5 + 0.75 * 1e3)


@pytest.mark.parametrize("shares", [[0.0, 0.0], [-0.2, 1.2]])
def test_shares_that_are_none_are_refused(shares):
    with pytest.raises(InputError, match="must not be negative, nor all zero"):
        wiener_bounds(shares, [0.1, 0.2])


def test_time_scale_of_one_solid_is_thickness_squared_over_diffusivity():
    place = wall([solid(4e-3, 1.4, 2.25e6)], (FixedFilm(400.0), 85.0), (FixedFilm(12.0), 22.0))
    found = effective(place, [80.0, 70.0])
    assert found.time_scale == pytest.approx(4e-3**2 * 2.25e6 / 1.4, rel=1e-12)
    assert found.conductance == pytest.approx(1.4 / 4e-3, rel=1e-12)


def test_a_stack_is_one_slab_by_series_and_volume():
    """Black parallel plates without gas pass sigma (Ta + Tb)(Ta^2 + Tb^2); Incropera, 6th ed., Eq. 13.19."""
    gap = WallLayer("gap", 1e-3, 0.028, 1100.0, Gap(1.0, 1.0, pressure=0.0))
    layers = [solid(0.3e-3, 0.09, 9e5), gap, solid(0.6e-3, 0.09, 9e5)]
    place = wall(layers, (HELD, 85.0), (HELD, 22.0), radius=1e6)
    a, b = 350.0, 330.0
    radiation = 5.670374419e-8 * (a + b) * (a * a + b * b)
    found = effective(place, [80.0, a - 273.15, b - 273.15, 50.0])
    assert found.conductance == pytest.approx(1.0 / (0.9e-3 / 0.09 + 1.0 / radiation), rel=1e-9)
    assert found.heat_capacity == pytest.approx((0.9e-3 * 9e5 + 1e-3 * 1100.0) / 1.9e-3, rel=1e-12)
    assert found.thickness == pytest.approx(1.9e-3)


# -- steady network ------------------------------------------------------------------------------------------


def test_plane_wall_with_a_film():
    """AFNOR/SFM, Guide de validation, 1990, TPLL01: 400 W/m2, 126.67 degC."""
    place = wall([solid(0.05, 0.75)], (FixedFilm(30.0), 140.0), (HELD, 100.0))
    found = steady(place, plane=True)
    assert found.heat_flux == pytest.approx(400.0, rel=1e-8)
    assert found.temperature[0] == pytest.approx(126.6666667, abs=1e-7)
    assert found.heat_flux == pytest.approx(walls.wall_to_fluid(0.05, 0.75, 100.0, 30.0, 140.0)[0], rel=1e-8)


def test_composite_cylinder():
    """Resistances in series of Incropera, 6th ed. 2007, sec. 3.3, for a wall like a cup's; recomputed."""
    layers = [solid(0.4e-3, 0.12), solid(1.0e-3, 0.0285), solid(0.5e-3, 0.06)]
    found = steady(wall(layers, (FixedFilm(300.0), 80.0), (FixedFilm(10.0), 20.0)))
    assert found.heat_flow_per_length == pytest.approx(104.40355, rel=1e-7)
    assert found.temperature == pytest.approx([78.61530, 77.23749, 62.98178, 59.65714], abs=1e-5)
    assert found.overall_coefficient == pytest.approx(6.92347550, rel=1e-8)
    per_length = found.resistance / (2.0 * math.pi * 0.04)
    expected = [0.01326291, 0.01319704, 0.13654431, 0.03184411, 0.37984473]
    assert per_length == pytest.approx(expected, rel=1e-6)
    assert found.outer_coefficient == pytest.approx(10.0, rel=1e-9)
    assert found.inner_coefficient == pytest.approx(300.0, rel=1e-9)
    assert found.outer_heat_flux == pytest.approx(10.0 * (found.temperature[-1] - 20.0), rel=1e-9)


def test_a_plane_network_misses_the_cylinder():
    """The planted fault: without its radii the same wall gives another heat flow."""
    layers = [solid(0.4e-3, 0.12), solid(1.0e-3, 0.0285), solid(0.5e-3, 0.06)]
    place = wall(layers, (FixedFilm(300.0), 80.0), (FixedFilm(10.0), 20.0))
    assert abs(steady(place, plane=True).overall_coefficient / 6.92347550 - 1.0) > 0.01


def test_contact_between_two_slabs():
    """Exact: the gradient is h dT / (k + h L); two halves of 0.99 m in all, k 40, h 80, 100 and 300 degC."""
    contact = WallLayer("contact", 0.0, math.inf, 0.0, contact=80.0)
    layers = [solid(0.495, 40.0), contact, solid(0.495, 40.0)]
    found = steady(wall(layers, (HELD, 100.0), (HELD, 300.0)), plane=True)
    assert found.temperature == pytest.approx([100.0, 166.442953, 233.557047, 300.0], abs=1e-6)


def test_outer_face_with_convection_and_radiation():
    """Incropera, 6th ed. 2007, Example 5.2 (p. 265): bead in gas of 200, walls of 400 degC: 218.7 degC.

    Turned into a wall: the gas film inside, a sheet of no resistance, radiation to the walls outside.
    """
    place = wall([solid(1e-6, 1e6)], (FixedFilm(400.0), 200.0), (Radiation(0.9), 400.0))
    bead = lumped.radiating_bead(400.0, 473.15, 0.9, 673.15) - 273.15
    assert steady(place, plane=True).temperature[-1] == pytest.approx(bead, abs=1e-4)


def test_films_and_gaps_follow_their_temperatures():
    """What enters each interface leaves it, with the coefficients evaluated at the answer."""
    outside = FilmSum((NaturalConvectionPlate(0.095), Radiation(0.92)))
    gap = WallLayer("gap", 1e-3, 0.028, 1100.0, Gap(0.92, 0.92), 0.07)
    place = wall([solid(0.33e-3, 0.09), gap, solid(0.3e-3, 0.09)], (FixedFilm(400.0), 85.0), (outside, 22.0))
    found = steady(place)
    faces, radii = found.temperature, np.array(place.radii)
    passed = gap.gap.conductance(faces[1], faces[2], radii[1], radii[2], 0.07) * (faces[1] - faces[2])
    leaving = outside.heat_flux(faces[3], 22.0, 0.0, 0.0)
    flow = found.heat_flux * radii[0]
    assert [radii[1] * passed, radii[3] * leaving] == pytest.approx([flow, flow], rel=1e-9)


def test_nothing_flows_between_equal_temperatures():
    outside = FilmSum((NaturalConvectionPlate(0.095), Radiation(0.92)))
    found = steady(wall([solid(1e-3, 0.1)], (FixedFilm(400.0), 22.0), (outside, 22.0)))
    assert found.temperature == pytest.approx([22.0, 22.0], abs=1e-9)
    assert found.heat_flux == pytest.approx(0.0, abs=1e-7)
    assert 4.0 < found.outer_coefficient < 12.0


def test_an_insulated_inside_takes_the_room():
    place = Station(0.002, (0.03, 0.031), (solid(1e-3, 0.1),), Face(), Face({"outer": FixedFilm(10.0)}, 22.0))
    found = steady(place)
    assert found.temperature == pytest.approx([22.0, 22.0], abs=1e-9)
    assert found.overall_coefficient == 0.0


# -- time scales ---------------------------------------------------------------------------------------------


def test_thermocouple():
    """Incropera, 6th ed. 2007, Example 5.1 (p. 261): 5.2 s."""
    time_constant = 8500.0 * 400.0 * 0.7058824e-3 / (6.0 * 400.0)
    assert lumped_time(time_constant, 25.0, 199.0, 200.0) == pytest.approx(5.164786, rel=1e-6)
    assert lumped_time(time_constant, 25.0, 201.0, 200.0) == math.inf
    assert lumped_time(time_constant, 25.0, 20.0, 200.0) == 0.0


def test_two_nodes():
    """Exact by the matrix exponential; recomputed, no published value."""
    model = TwoNode((1254.0, 80.0), 3.0, 0.35)
    assert model.time_constants == pytest.approx((22.711979, 4206.716593), rel=1e-6)
    expected = [(57.43042801, 37.30119899), (53.121247, 47.84276015), (24.24273759, 21.83386024)]
    found = model.temperatures([30.0, 300.0, 3600.0], (60.0, 0.0))
    assert found == pytest.approx(np.array(expected), abs=1e-6)
    exact = lumped.two_node(np.array([1.0, 77.0]), (1254.0, 80.0), 3.0, 0.35, (60.0, 0.0))
    assert model.temperatures([1.0, 77.0], (60.0, 0.0)) == pytest.approx(exact, abs=1e-10)


def test_two_nodes_need_positive_values():
    with pytest.raises(InputError, match="must be positive and finite"):
        TwoNode((1254.0, 0.0), 3.0, 0.35)


CUP = """
[cup]
height = "100 mm"
inner_top_diameter = "80 mm"
inner_foot_diameter = "80 mm"
[[layer]]
name = "wall"
material = "plain"
thickness = "4 mm"
[material.plain]
conductivity_through = "1.4 W/(m K)"
density = "2500 kg/m^3"
specific_heat = "900 J/(kg K)"
emissivity = 0.9
surface_class = "glazed"
[base]
material = "plain"
thickness = "4 mm"
recess = "4 mm"
"""
FIXED = """
duration = "10 min"
[drink]
density = "1000 kg/m^3"
specific_heat = "4000 J/(kg K)"
temperature = "80 degC"
level = "88 mm"
[room]
temperature = "20 degC"
[films]
wetted = { coefficient = "400 W/(m^2 K)" }
outside = { coefficient = "12 W/(m^2 K)", surroundings = "20 degC" }
surface = { coefficient = "60 W/(m^2 K)", surroundings = "20 degC" }
"""
AREA = math.pi * 0.08 * 0.08 + math.pi * 0.04**2
CAPACITY = math.pi * 0.04**2 * 0.08 * 4e6
OVERALL = 1.0 / (1 / 400.0 + 0.04 * math.log(1.1) / 1.4 + 1 / (12.0 * 1.1))


def test_lumped_drink_cools_as_an_exponential():
    """With constant coefficients, Incropera, 6th ed. 2007, Eq. 5.6."""
    cup, serving = Cup.from_text(CUP), Serving.from_text(FIXED)
    rate = (AREA * OVERALL + 60.0 * math.pi * 0.04**2) / CAPACITY
    times = np.array([0.0, 60.0, 600.0])
    assert lumped_cooling(cup, serving, times) == pytest.approx(20.0 + 60.0 * np.exp(-rate * times), abs=1e-4)
    closed = 20.0 + 60.0 * np.exp(-AREA * OVERALL / CAPACITY * times)
    assert lumped_cooling(cup, serving, times, evaporation=False) == pytest.approx(closed, abs=1e-4)


def test_time_scales_of_wall_and_drink():
    found = time_scales(Cup.from_text(CUP), Serving.from_text(FIXED))
    loss = AREA * OVERALL + 60.0 * math.pi * 0.04**2
    assert found.wall == pytest.approx(4e-3**2 * 2.25e6 / 1.4, rel=1e-12)
    assert found.drink == pytest.approx(CAPACITY / loss, rel=1e-9)
    assert found.drop == pytest.approx(60.0 * found.wall / found.drink, rel=1e-12)
    assert found.ratio == pytest.approx(found.wall / found.drink, rel=1e-12)


def test_two_nodes_of_a_cup_lose_what_the_network_passes():
    model = two_node(Cup.from_text(CUP), Serving.from_text(FIXED))
    through = 1.0 / (1.0 / model.coupling + 1.0 / model.loss)
    assert through == pytest.approx(AREA * OVERALL, rel=1e-9)
    assert model.capacities == pytest.approx((CAPACITY, AREA * 4e-3 * 2.25e6), rel=1e-9)


def test_slab_estimate_of_a_station():
    """Its steady state is the network's without the inner film; with it, the plane network's."""
    place = station(Cup.from_text(CUP), Serving.from_text(FIXED), 0.05)
    hand, close = slab_estimate(place), slab_estimate(place, inner_film=True)
    biot = 12.0 * 4e-3 / 1.4
    assert (hand.slab.biot, hand.slab.inner_biot) == (pytest.approx(biot), math.inf)
    assert hand.wall == Effective(4e-3, pytest.approx(1.4), pytest.approx(2.25e6))
    assert hand.outside(1e4) == pytest.approx(20.0 + 60.0 / (1.0 + biot), abs=1e-9)
    assert close.outside(1e4) == pytest.approx(float(steady(place, plane=True).temperature[-1]), abs=1e-6)
    assert hand.outside(hand.time_to(40.0)) == pytest.approx(40.0, abs=1e-8)
    assert hand.time_to(40.0) < close.time_to(40.0)
    assert close.outer_heat_flux(1e4) == pytest.approx(steady(place, plane=True).outer_heat_flux, rel=1e-9)


# -- touch ---------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("body", "expected"),
    [
        ((1.5, 2400.0, 1080.0), 49.7009),
        ((1.05, 2500.0, 840.0), 47.8443),
        ((0.22, 905.0, 1900.0), 42.0695),
        ((0.14, 1050.0, 1300.0), 40.1398),
        ((0.12, 700.0, 1340.0), 38.8386),
        ((0.035, 30.0, 1300.0), 33.7962),
        ((14.9, 7900.0, 477.0), 56.2303),
    ],
)
def test_skin_meets_a_wall_of_60_degrees(body, expected):
    """Carslaw and Jaeger, 2nd ed. 1959, sec. 2.14; porcelain, glass, plastics, board, foam, steel."""
    skin = HalfSpace(SKIN_EFFUSIVITY, 33.0)
    assert skin.effusivity == pytest.approx(1215.975, abs=5e-4)
    assert contact_temperature(skin, HalfSpace(effusivity(*body), 60.0)) == pytest.approx(expected, abs=1e-4)


def test_skin_meets_porcelain_through_a_contact():
    """Carslaw and Jaeger, 2nd ed. 1959, sec. 2.14, with a contact resistance; recomputed."""
    skin = HalfSpace(SKIN_EFFUSIVITY, 33.0)
    porcelain = HalfSpace(effusivity(1.5, 2400.0, 1080.0), 60.0)
    times = [0.1, 1.0, 5.0, 10.0, 60.0]
    loose = [36.32575, 40.68135, 44.29290, 45.61076, 47.90372]
    close = [38.69711, 43.82441, 46.68662, 47.51841, 48.79019]
    assert touched_surface(times, skin, porcelain, 500.0) == pytest.approx(loose, abs=1e-4)
    assert touched_surface(times, skin, porcelain, 1000.0) == pytest.approx(close, abs=1e-4)


def test_effusivity_of_a_material_is_that_through_the_wall():
    board = get_material("cupstock board")
    through, density = board.conductivity_through.value, board.density.value
    assert effusivity_of(board) == pytest.approx(math.sqrt(through * density * board.specific_heat.value))
    with pytest.raises(InputError, match='effusivity: "0 W'):
        HalfSpace(0.0, 33.0)
