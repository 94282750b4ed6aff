"""Which film stands on which edge, and the view factor of the dry wall to the mouth."""

import math

import numpy as np
import pytest
from scipy.integrate import dblquad

from cupfem import edges
from cupfem.cup import Cup
from cupfem.films import (
    CavityAir,
    DrinkConvection,
    FixedFilm,
    MixedConvection,
    NaturalConvectionPlate,
    Radiation,
    Recessed,
)
from cupfem.serving import Serving

CUP = """
[cup]
height = "100 mm"
inner_top_diameter = "80 mm"
inner_foot_diameter = "56 mm"
[[layer]]
name = "inner"
material = "cupstock board"
thickness = "0.4 mm"
[[layer]]
name = "gap"
material = "air"
thickness = "1 mm"
from = "20 mm"
to = "80 mm"
contact_fraction = 0.02
contact_conductance = "80 W/(m^2 K)"
[[layer]]
name = "outer"
material = "shiny"
thickness = "0.3 mm"
from = "10 mm"
to = "90 mm"
[base]
material = "cupstock board"
thickness = "0.4 mm"
recess = "8 mm"
[material.shiny]
like = "cupstock board"
emissivity = 0.2
"""
FIXED = """
[films]
wetted = { coefficient = "400 W/(m^2 K)" }
dry = { coefficient = "5 W/(m^2 K)", surroundings = "40 degC" }
surface = { coefficient = "60 W/(m^2 K)", surroundings = "21 degC" }
outside = { coefficient = "11.5 W/(m^2 K)", surroundings = "20 degC" }
underside = { coefficient = "9 W/(m^2 K)", surroundings = "19 degC" }
heel = { coefficient = "30 W/(m^2 K)", surroundings = "18 degC" }
"""
TAPER = math.atan(12.0 / 100.0)


@pytest.fixture(scope="module")
def cup():
    return Cup.from_text(CUP)


@pytest.fixture(scope="module")
def serving():
    return Serving()


@pytest.fixture(scope="module")
def fixed():
    return Serving.from_text(FIXED)


def seen_by_ring(radius, below, mouth):
    """View factor of a ring of a cylinder, `below` under the mouth: cos cos / (pi s^2), integrated."""

    def kernel(turn, r):
        towards_axis = radius - r * math.cos(turn)
        square = radius**2 + r**2 - 2.0 * radius * r * math.cos(turn) + below**2
        return 2.0 * r * towards_axis * below / (math.pi * square**2)

    return dblquad(kernel, 0.0, mouth, 0.0, math.pi, epsabs=1e-9)[0]


def test_view_factors_of_a_tube_as_long_as_wide():
    """Incropera et al., 6th ed. 2007, Example 13.1: end to end 0.17, side to end 0.21."""
    assert round(edges.disk_to_disk(1.0, 1.0, 2.0), 2) == 0.17
    assert round(edges.wall_to_mouth(1.0, 1.0, 2.0), 2) == 0.21


def test_view_factor_of_the_wall_is_the_mean_of_its_rings():
    """Against the definition (Incropera, 6th ed. 2007, Eq. 13.1), integrated numerically."""
    nodes, weights = np.polynomial.legendre.leggauss(8)
    depths = 0.5 * 1.2 * (nodes + 1.0)
    mean = 0.5 * sum(w * seen_by_ring(1.0, below, 1.0) for w, below in zip(weights, depths, strict=True))
    assert edges.wall_to_mouth(1.0, 1.0, 1.2) == pytest.approx(mean, abs=2e-5)


def test_a_shallow_wall_sees_the_mouth_by_half():
    assert edges.wall_to_mouth(0.039, 0.039, 1e-6) == pytest.approx(0.5, abs=1e-3)


def test_a_wall_that_opens_flat_sees_the_mouth_alone():
    """A wall that is nearly the rim of a plate: everything it sees is above it."""
    assert edges.wall_to_mouth(0.02, 0.04, 1e-5) == pytest.approx(1.0, abs=1e-3)


def test_outside_is_mixed_convection_over_the_slant_height(cup, serving):
    films = edges.outside_films(cup, serving, emissivity=0.9)
    assert list(films) == ["outside convection", "outside radiation"]
    assert films["outside radiation"] == Radiation(0.9)
    convection = films["outside convection"]
    assert isinstance(convection, MixedConvection)
    assert convection.natural.length == pytest.approx(math.hypot(0.1, 0.012), rel=1e-12)
    assert convection.natural.lean == pytest.approx(TAPER, rel=1e-12)
    assert convection.forced.air_speed == 0.1
    wall = 0.4e-3 + 0.6 * 1e-3 + 0.8 * 0.3e-3
    assert convection.forced.diameter == pytest.approx(0.068 + 2.0 * wall * math.cos(TAPER), rel=1e-9)


def test_without_an_air_stream_the_outside_is_natural_convection(cup):
    still = Serving.from_text('[room]\nair_speed = "0 m/s"')
    assert isinstance(edges.outside_films(cup, still)["outside convection"], NaturalConvectionPlate)


def test_outside_radiates_as_the_outermost_layer_at_each_height(cup, serving):
    film = edges.outside_films(cup, serving)["outside radiation"]
    height = np.array([0.005, 0.0098, 0.011, 0.05, 0.0897, 0.091])
    flux = film.heat_flux(60.0, 20.0, height, 0.0)
    board, shiny = (Radiation(e).heat_flux(60.0, 20.0, 0.0, 0.0) for e in (0.92, 0.2))
    assert flux == pytest.approx([board, board, shiny, shiny, shiny, board], rel=1e-12)


def test_one_outermost_emissivity_is_plain_radiation(serving):
    plain = Cup.from_text(CUP.replace("emissivity = 0.2", "emissivity = 0.92"))
    assert edges.outside_films(plain, serving)["outside radiation"] == Radiation(0.92)


def test_drink_films_have_the_wetted_slant_and_a_quarter_of_the_floor(cup, serving):
    wall = edges.wetted_films(cup, serving, 0.0684)[edges.TO_DRINK]
    floor = edges.floor_films(cup, serving)[edges.TO_DRINK]
    assert isinstance(wall, DrinkConvection)
    assert (wall.place, floor.place) == ("wall", "base")
    assert wall.length == pytest.approx(0.06 / math.cos(TAPER), rel=1e-12)
    assert floor.length == pytest.approx((0.056 + 0.024 * 0.084) / 4.0, rel=1e-12)


@pytest.mark.parametrize("level", [-math.inf, 0.0, 0.0084, 0.1])
def test_films_stay_finite_where_wetted_or_dry_wall_vanishes(cup, serving, level):
    films = edges.wetted_films(cup, serving, level) | edges.dry_films(cup, serving, level)
    flux = [film.heat_flux(60.0, 50.0, 0.05, 0.0) for film in films.values()]
    assert np.all(np.isfinite(flux))
    assert min(flux) > 0.0


def test_dry_wall_radiates_through_the_mouth(cup, serving):
    films = edges.dry_films(cup, serving, 0.08)
    share = edges.wall_to_mouth(0.0376, 0.04, 0.02)
    assert films["dry wall radiation"].emissivity == pytest.approx(0.92 * share, rel=1e-12)
    assert films["dry wall convection"].length == pytest.approx(0.02 / math.cos(TAPER), rel=1e-12)


def test_underside_is_the_recess_with_the_emissivity_of_the_base(cup, serving):
    assert edges.underside_films(cup, serving) == {"underside": CavityAir(0.008, base_emissivity=0.92)}


def test_an_open_tube_has_no_underside(serving):
    below = CUP.index("[base]")
    tube = Cup.from_text('base = "none"\n' + CUP[:below] + CUP[CUP.index("[material.shiny]") :])
    assert edges.underside_films(tube, serving) == {}


def test_surface_is_a_closure_below_a_rim_with_radiation(serving):
    assert isinstance(edges.surface_closure(serving), Recessed)
    assert edges.surface_closure(serving).closure.label == "Shah"
    assert edges.surface_films(serving) == {"surface radiation": Radiation(0.96)}
    other = Serving.from_text('[films]\nsurface = { correlation = "Bower-Saylor" }')
    assert edges.surface_closure(other).closure.label == "Bower-Saylor"


def test_fixed_films_replace_all_on_their_edge(cup, fixed):
    assert edges.outside_films(cup, fixed) == {"outside": FixedFilm(11.5)}
    assert edges.wetted_films(cup, fixed, 0.05) == {edges.TO_DRINK: FixedFilm(400.0)}
    assert edges.floor_films(cup, fixed) == {edges.TO_DRINK: FixedFilm(400.0)}
    assert edges.dry_films(cup, fixed, 0.05) == {"dry wall": FixedFilm(5.0)}
    assert edges.underside_films(cup, fixed) == {"underside": FixedFilm(9.0)}
    assert edges.surface_films(fixed) == {"surface": FixedFilm(60.0)}
    assert edges.surface_closure(fixed) is None
    assert edges.heel_films(cup, fixed) == {"heel": FixedFilm(30.0)}
    assert edges.brim_films(fixed) == {}


def test_fixed_films_lead_to_their_own_surroundings(serving, fixed):
    names = ("wetted", "dry", "surface", "outside", "underside", "heel", "brim")
    told = [edges.surroundings_of(fixed, name) for name in names]
    assert told == [None, 40.0, 21.0, 20.0, 19.0, 18.0, None]
    assert [edges.surroundings_of(serving, name) for name in names] == [None] * 7


def test_a_gap_takes_the_emissivities_of_its_neighbours(cup):
    gap = edges.gap_of(cup, 1)
    assert (gap.emissivity_inner, gap.emissivity_outer) == (0.92, 0.2)
    assert (gap.contact_fraction, gap.contact_conductance, gap.pressure) == (0.02, 80.0, 101325.0)
    assert edges.gap_height(cup, 1) == pytest.approx(0.06 / math.cos(TAPER), rel=1e-12)
    thin = Cup.from_text(CUP.replace('contact_fraction = 0.02', 'pressure = "1 Pa"').replace(
        'contact_conductance = "80 W/(m^2 K)"\n', ""))  # fmt: skip
    assert edges.gap_of(thin, 1).pressure == 1.0


def test_a_face_of_its_own_emissivity_goes_before_the_material():
    """A foil on the outer ply's inner face, and a lacquer on its outer face."""
    name = 'name = "outer"'
    coated = Cup.from_text(CUP.replace(name, name + "\ninner_emissivity = 0.05\nouter_emissivity = 0.8"))
    gap = edges.gap_of(coated, 1)
    assert (gap.emissivity_inner, gap.emissivity_outer) == (0.92, 0.05)
    assert edges.wall_radiation(coated).emissivities == (0.92, 0.8, 0.92)


def test_lengths_of_a_bent_wall_follow_its_inside_face(serving):
    """A cone on a cylinder; the length of each is exact."""
    bent = CUP.replace('inner_top_diameter = "80 mm"\ninner_foot_diameter = "56 mm"',
        'inner_profile = [["0 mm", "60 mm"], ["60 mm", "60 mm"], ["100 mm", "80 mm"]]')  # fmt: skip
    cup = Cup.from_text(bent)
    slant = math.hypot(0.04, 0.01)
    assert edges.outside_convection(cup, serving).natural.length == pytest.approx(0.06 + slant, rel=1e-12)
    wall = edges.wetted_films(cup, serving, 0.08)[edges.TO_DRINK]
    assert wall.length == pytest.approx(0.0516 + 0.5 * slant, rel=1e-12)
    assert edges.dry_films(cup, serving, 0.08)["dry wall convection"].length == pytest.approx(0.5 * slant)
    assert edges.gap_height(cup, 1) == pytest.approx(0.04 + 0.5 * slant, rel=1e-12)
    wall_thickness = 0.4e-3 + 0.6 * 1e-3 + 0.8 * 0.3e-3
    mean = 0.6 * 0.06 + 0.4 * 0.07 + 2.0 * wall_thickness * math.cos(math.atan(0.1))
    assert edges.mean_outside_diameter(cup) == pytest.approx(mean, rel=1e-9)


def test_a_cup_in_the_air_has_a_plate_below(cup, serving):
    film = edges.underside_films(cup, serving, on_table=False)["underside"]
    assert film.label == "natural convection, horizontal face + radiation"
    touching = Serving(films={"heel": {"correlation": "contact with the table"}})
    assert edges.heel_films(cup, touching, on_table=False) == {}
    assert list(edges.heel_films(cup, touching)) == ["heel"]


def test_a_table_of_a_material_warms_from_when_the_cup_stands_there(cup):
    """Wood of 0.15 W/(m K) or so; the library tells it."""
    wood = Serving.from_text('[table]\nmaterial = "wood"')
    table = edges.underside_films(cup, wood, True, 60.0)["underside"].table_resistance
    assert table.since == 60.0
    assert table.radius == pytest.approx(0.028)
    assert table.resistance(61.0) < table.resistance(600.0)


def test_lid_by_conductance_or_by_material(cup):
    given = Serving.from_text('[lid]\nconductance = "8 W/(m^2 K)"')
    assert edges.lid_films(cup, given) == {"lid": FixedFilm(8.0)}
    assert edges.lid_resistance(cup, given) == 0.0
    plain = Serving.from_text('[lid]\nmaterial = "polystyrene"\nthickness = "0.5 mm"\nvent = "4 mm^2"')
    assert list(edges.lid_films(cup, plain)) == ["lid convection", "lid radiation"]
    assert edges.lid_resistance(cup, plain) == pytest.approx(0.5e-3 / 0.15, rel=0.07)  # k 0.14 to 0.16
    assert [hole.area for hole in edges.lid_holes(plain)] == [pytest.approx(4e-6)]


def test_altitude_reaches_every_film(cup):
    high = Serving.from_text('[room]\naltitude = "3 km"')
    pressure = high.room.pressure
    assert pressure == pytest.approx(70109.0, abs=5.0)  # ISO 2533:1975, table for 3000 m
    assert edges.outside_films(cup, high, 0.9)["outside convection"].natural.pressure == pressure
    assert edges.dry_films(cup, high, 0.05)["dry wall convection"].pressure == pressure
    assert edges.underside_films(cup, high)["underside"].pressure == pressure
    assert edges.gap_of(cup, 1, pressure=pressure).pressure == pressure


def test_view_factors_under_a_lid_leave_nothing_out(cup):
    """What a dry wall sees is drink, lid and itself: F_drink + F_lid < 1, and drink to lid by reciprocity."""
    lidded = Serving.from_text("[lid]")

    class Inside:
        level, present, temperature, vapour_pressure, lid = 0.06, True, 70.0, 2e4, 50.0

    found = edges.lidded_films(cup, lidded, Inside(), 1.0)
    to_drink = found[edges.DRY_TO_DRINK].factor / edges.WATER_EMISSIVITY
    to_lid = found[edges.DRY_TO_LID].factor / edges.lid_emissivity(cup, lidded)
    lower, upper, depth = cup.inner_radius(0.06), cup.inner_radius(0.1), 0.04
    wall = math.pi * (lower + upper) * math.hypot(depth, upper - lower)
    drink_to_lid = edges.disk_to_disk(lower, upper, depth)
    assert wall * to_drink == pytest.approx(math.pi * lower**2 * (1.0 - drink_to_lid), rel=1e-12)
    lid_to_drink = drink_to_lid * lower**2 / upper**2
    assert wall * to_lid == pytest.approx(math.pi * upper**2 * (1.0 - lid_to_drink), rel=1e-9)
