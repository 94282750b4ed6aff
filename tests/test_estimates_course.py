"""Stations that the estimates take from a cup, and the radial estimate through a whole serving."""

import math

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from cupfem.cup import Cup
from cupfem.errors import InputError
from cupfem.estimates import (
    Face,
    Station,
    WallLayer,
    drink_course,
    follow,
    station,
    steady,
    surface_loss,
    transient,
    volume_at,
    wetted_area,
)
from cupfem.films import DrinkConvection, FixedFilm, MixedConvection
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
contact = "500 W/(m^2 K)"
[[layer]]
name = "outer"
material = "cupstock board"
thickness = "0.3 mm"
[[layer]]
name = "band"
material = "corrugated board"
thickness = "1.5 mm"
from = "40 mm"
to = "60 mm"
fit = "300 W/(m^2 K)"
[base]
material = "cupstock board"
thickness = "0.4 mm"
recess = "8 mm"
"""


@pytest.mark.parametrize(
    ("height", "names"),
    [
        (10.0, ["inner", "gap contact", "outer"]),
        (30.0, ["inner", "gap", "outer"]),
        (50.0, ["inner", "gap", "outer", "band fit", "band"]),
        (95.0, ["inner", "gap contact", "outer"]),
    ],
)
def test_layers_of_a_station(height, names):
    place = station(Cup.from_text(CUP), Serving(), height * 1e-3)
    assert [layer.name for layer in place.layers] == names
    lean = math.atan(0.12)
    assert place.radii[0] == pytest.approx((0.028 + 0.12 * height * 1e-3) / math.cos(lean), rel=1e-12)
    assert np.diff(place.radii) == pytest.approx([layer.thickness for layer in place.layers], abs=1e-12)
    conductances = {layer.name: layer.contact for layer in place.layers if layer.thickness == 0.0}
    assert all(conductances[name] == {"gap contact": 500.0, "band fit": 300.0}[name] for name in conductances)


def test_films_of_a_station():
    cup, serving = Cup.from_text(CUP), Serving()
    wet, dry, heel = (station(cup, serving, height) for height in (0.05, 0.095, 0.004))
    assert isinstance(next(iter(wet.inner.films.values())), DrinkConvection)
    assert (wet.wetted, dry.wetted, heel.wetted) == (True, False, False)
    assert (wet.inside, dry.inside, wet.outside) == (85.0, 22.0, 22.0)
    assert list(dry.inner.films) == ["dry wall convection", "dry wall radiation"]
    assert heel.inner.films == {}
    assert isinstance(wet.outer.films["outside convection"], MixedConvection)
    assert station(cup, serving, 0.05, level=0.04).wetted is False


def test_a_height_off_the_wall_is_refused():
    with pytest.raises(InputError, match=r"station: .*not on the wall, from 0 mm to 100 mm"):
        station(Cup.from_text(CUP), Serving(), 0.101)


def test_heat_through_a_leaning_wall_is_that_of_its_cone():
    """Exact between coaxial cones of one apex (Van Sant, UCRL-52863, type); half-angles 5 and 5.2 degrees."""
    inner, outer = math.radians(5.0), math.radians(5.2)
    slant, k = 0.4, 0.12
    exact = k * 20.0 / (math.log(math.tan(outer / 2.0) / math.tan(inner / 2.0)) * math.sin(inner) * slant)
    radius = slant * math.tan(inner)  # along the normal, to the axis
    thickness, held = slant * math.tan(outer - inner), {"held": FixedFilm(1e9)}
    layers = (WallLayer("wall", thickness, k, 1.0),)
    faces = Face(held), Face(held, 60.0)
    place = Station(0.0, (radius, radius + thickness), layers, *faces, drink_temperature=80.0)
    assert steady(place).heat_flux == pytest.approx(exact, rel=2e-4)
    assert abs(steady(place, plane=True).heat_flux / exact - 1.0) > 0.01


# -- a whole serving -----------------------------------------------------------------------------------------

THIN = """
[cup]
height = "100 mm"
inner_top_diameter = "80 mm"
inner_foot_diameter = "80 mm"
[[layer]]
name = "wall"
material = "light"
thickness = "1 mm"
[base]
material = "light"
thickness = "1 mm"
recess = "9 mm"
[material.light]
conductivity_through = "10 W/(m K)"
density = "1 kg/m^3"
specific_heat = "1 J/(kg K)"
emissivity = 0.9
surface_class = "plastic"
"""
DRUNK = """
duration = "10 min"
[drink]
density = "1000 kg/m^3"
specific_heat = "4000 J/(kg K)"
temperature = "80 degC"
level = "90 mm"
[room]
temperature = [["0 s", "22 degC"], ["5 min", "4 degC"]]
[[event]]
sip = "40 ml"
first = "2 min"
[[event]]
drinking = "250 ml"
from = "3 min"
to = "8 min"
[films]
wetted = { coefficient = "400 W/(m^2 K)" }
dry = { coefficient = "5 W/(m^2 K)", surroundings = "30 degC" }
outside = { coefficient = "12 W/(m^2 K)", surroundings = "20 degC" }
surface = { coefficient = "60 W/(m^2 K)", surroundings = "22 degC" }
"""
SECTION = math.pi * 0.04**2


def poured_volume(time):
    sipped = 40e-6 if time >= 120.0 else 0.0
    return SECTION * 0.08 - sipped - 250e-6 * min(max((time - 180.0) / 300.0, 0.0), 1.0)


def test_volume_and_wetted_area_follow_what_is_drunk():
    cup, serving = Cup.from_text(THIN), Serving.from_text(DRUNK)
    for time in (0.0, 119.9, 120.0, 240.0, 600.0):
        assert volume_at(cup, serving, time) == pytest.approx(poured_volume(time), rel=1e-9)
    assert wetted_area(cup, 0.05) == pytest.approx(SECTION + 2.0 * math.pi * 0.04 * 0.04, rel=1e-12)
    assert wetted_area(Cup.from_text(CUP), 0.05) == pytest.approx(
        math.pi * (0.028 + 0.12 * 0.0084) ** 2
        + math.pi * (0.056 + 0.12 * 0.0584) * 0.0416 * math.hypot(1.0, 0.12),
        rel=1e-9,
    )


def test_drink_of_a_serving_behind_a_wall_without_heat_capacity():
    """Its balance written down again, with the volume by hand, by SciPy's solver."""
    cup, serving = Cup.from_text(THIN), Serving.from_text(DRUNK)
    overall = 1.0 / (1 / 400.0 + 0.04 * math.log(41.0 / 40.0) / 10.0 + 40.0 / (12.0 * 41.0))

    def rate(time, temperature):
        volume = poured_volume(time)
        wetted = SECTION + 2.0 * volume / 0.04
        lost = wetted * overall * (temperature - 20.0) + 60.0 * SECTION * (temperature - 22.0)
        return -lost / (volume * 4e6)

    found, start, before = drink_course(cup, serving), [80.0], 0.0
    for until in (120.0, 180.0, 300.0, 480.0, 600.0):
        span = (before, until - 1e-9)
        start = solve_ivp(rate, span, start, rtol=1e-9, atol=1e-9).y[:, -1]
        assert found(until) == pytest.approx(start[0], abs=2e-3)
        before = until


def test_a_station_runs_dry_when_the_level_passes_it():
    """Wall without heat capacity: at each moment the network of whichever side the drink is on."""
    cup, serving = Cup.from_text(THIN), Serving.from_text(DRUNK)
    passes = 180.0 + 300.0 * (SECTION * 0.04 - 40e-6) / 250e-6  # 50 mm
    found = follow(cup, serving, 0.05, drink=70.0)
    area = 1.025
    wet = 20.0 + 50.0 / (12.0 * area) / (1 / 400.0 + 0.004 * math.log(area) + 1 / (12.0 * area))
    dry = 20.0 + 10.0 / (12.0 * area) / (1 / 5.0 + 0.004 * math.log(area) + 1 / (12.0 * area))
    assert found.outside([passes - 1.0, passes + 1.0]) == pytest.approx([wet, dry], abs=1e-2)
    assert follow(cup, serving, 0.02, drink=70.0).outside(600.0) == pytest.approx(wet, abs=1e-3)


def test_a_serving_without_events_is_one_transient():
    cup, serving = Cup.from_text(CUP), Serving()
    whole = follow(cup, serving, 0.05, drink=85.0)
    alone = transient(station(cup, serving, 0.05), 600.0)
    assert whole.interfaces([5.0, 50.0]) == pytest.approx(alone.interfaces([5.0, 50.0]), abs=1e-6)


def test_the_room_steps_outside():
    """Correlations to the room: after the step the outside is colder than ever before."""
    stepped = DRUNK[: DRUNK.index("[films]")]
    found = follow(Cup.from_text(CUP), Serving.from_text(stepped), 0.02, drink=70.0)
    before, after = found.outside([299.0, 420.0])
    assert before - after > 2.0


REFILLED = """
duration = "4 min"
[drink]
density = "1000 kg/m^3"
specific_heat = "4000 J/(kg K)"
temperature = "80 degC"
level = "40 mm"
[[event]]
refill = "100 ml"
at = "2 min"
temperature = "95 degC"
"""


def test_a_refill_mixes_and_wets_the_wall_higher():
    """Mixed by volume, both of one liquid; a station above the old level is dry before and wet after."""
    cup, serving = Cup.from_text(THIN), Serving.from_text(REFILLED)
    found, volume = drink_course(cup, serving), SECTION * 0.03
    before, after = found([119.999, 120.0])
    assert after == pytest.approx((volume * before + 1e-4 * 95.0) / (volume + 1e-4), abs=1e-3)
    outside = follow(cup, serving, 0.05).outside([110.0, 130.0])
    assert outside[0] < 40.0 < 60.0 < outside[1]


def test_a_lid_keeps_the_heat_of_the_surface_and_the_dry_wall_warm():
    cup, open_cup = Cup.from_text(CUP), Serving()
    lidded = Serving.from_text("[lid]")
    assert surface_loss(open_cup)(0.04, 80.0) > 1.0
    assert surface_loss(lidded)(0.04, 80.0) == 0.0
    assert drink_course(cup, lidded)(600.0) > drink_course(cup, open_cup)(600.0) + 5.0
    dry = [steady(station(cup, serving, 0.095)).temperature[-1] for serving in (open_cup, lidded)]
    assert dry[0] == pytest.approx(22.0, abs=1e-6)
    assert dry[1] > 35.0


def test_a_carrier_takes_the_place_of_the_outside_films():
    carried = Serving.from_text('[carrier]\nheight = "40 mm"\ncoefficient = "25 W/(m^2 K)"')
    below, above = (station(Cup.from_text(CUP), carried, height) for height in (0.03, 0.05))
    assert below.outer == Face({"carrier": FixedFilm(25.0)}, 22.0)
    assert "outside radiation" in above.outer.films
