"""Evaporation closures against published tables, hand values, and each other.

Hand values: a free surface of 80 mm, air of 20 degC and 50 %, vapour pressures and latent heat by CoolProp
(IAPWS-95), worked apart from the project from the published forms.
"""

import numpy as np
import pytest
from CoolProp.CoolProp import PropsSI

from cupfem import films
from cupfem.errors import InputError
from cupfem.films import FREEBOARD_RANGE, Recessed, SurfaceState, closure
from cupfem.fluids import vapour_pressure, water_latent_heat, water_saturation_pressure

PRESSURE = 101325.0
ROOM = (20.0, 0.5 * 2339.3182, PRESSURE, 0.08)  # air temperature, vapour pressure, pressure, diameter
every_closure = pytest.mark.parametrize("name", films.CLOSURES)


def latent_flux(name, water):
    latent = PropsSI("H", "T", water + 273.15, "Q", 1, "Water") - PropsSI(
        "H", "T", water + 273.15, "Q", 0, "Water"
    )
    return closure(name).mass_flux(water, *ROOM) * latent


# Shah, ASHRAE Transactions 120(2), 2014, look-up table for unoccupied pools, 50 % humidity [kg/(m2 h)]
SHAH_TABLE = [
    (28.0, 28.0, 0.1360),
    (28.0, 29.0, 0.1171),
    (28.0, 30.0, 0.0968),
    (29.0, 28.0, 0.1651),
    (29.0, 29.0, 0.1463),
    (29.0, 30.0, 0.1268),
    (30.0, 28.0, 0.1959),
    (30.0, 29.0, 0.1771),
    (30.0, 30.0, 0.1575),
]


@pytest.mark.parametrize(("water", "air", "target"), SHAH_TABLE)
def test_shah_look_up_table(water, air, target):
    """The table as quoted in a public program; 0.3 %: its rounding, and the rounded join of the two rates."""
    flux = films.Shah().mass_flux(water, air, vapour_pressure(air, 0.5), PRESSURE, 10.0)
    assert flux * 3600.0 == pytest.approx(target, rel=3e-3)


def test_wrong_density_would_be_seen_in_the_table():
    """Planted fault: with the density of the moist air, not of its dry part, a quarter is missing."""
    surface, room = water_saturation_pressure(28.0), vapour_pressure(28.0, 0.5)
    state = SurfaceState(28.0, 28.0, surface, room, PRESSURE, 10.0)
    at_surface, in_room = state.moist_densities
    vapour_at_surface, _ = state.vapour_densities
    dry = at_surface - vapour_at_surface
    ratio = 0.62197 * (surface / (PRESSURE - surface) - room / (PRESSURE - room))
    assert 35.0 * dry * (in_room - at_surface) ** (1 / 3) * ratio < 0.75 * 0.1360


@pytest.mark.parametrize(
    ("water", "shah", "harleman", "low_flux", "stefan"),
    [
        (60.0, 1975.0, 2044.0, 4.37498, 5.30203),
        (70.0, 3403.0, 3686.0, 7.47667, 9.91694),
        (80.0, 5603.0, 6399.0, 12.25623, 18.83271),
        (90.0, 8897.0, 10852.0, 19.46595, 39.51921),
    ],
)
def test_hot_drink(water, shah, harleman, low_flux, stefan):
    """Shah, Ryan-Harleman [W/m2]; Chilton-Colburn with and without Stefan flow [kg/(m2 h)]."""
    assert latent_flux("Shah", water) == pytest.approx(shah, rel=1e-3)
    assert latent_flux("Ryan-Harleman", water) == pytest.approx(harleman, rel=1e-3)
    assert closure("Chilton-Colburn").mass_flux(water, *ROOM) * 3600.0 == pytest.approx(low_flux, rel=1e-3)
    assert closure("Chilton-Colburn with Stefan flow").mass_flux(water, *ROOM) * 3600.0 == pytest.approx(
        stefan, rel=1e-3
    )


@pytest.mark.parametrize(
    ("water", "coefficient", "velocity"),
    [(60.0, 10.33519, 1.003676e-2), (70.0, 11.17905, 1.102565e-2), (90.0, 12.96984, 1.318525e-2)],
)
def test_chilton_colburn_coefficients(water, coefficient, velocity):
    """Incropera, 6th ed. 2007, Eq. 9.30 with the moist densities, and Eq. 6.60, with CoolProp's air."""
    analogy = films.ChiltonColburn()
    state = SurfaceState(water, 20.0, water_saturation_pressure(water), ROOM[1], PRESSURE, 0.08)
    assert analogy.heat_transfer_coefficient(water, *ROOM) == pytest.approx(coefficient, rel=5e-4)
    assert analogy.transfer_velocity(state) == pytest.approx(velocity, rel=5e-4)


def test_two_independent_fits_agree_on_a_tank():
    """Bower and Saylor's tanks (0.3 m, water of 40 degC) and Shah's pools: within 25 %."""
    air = (22.0, vapour_pressure(22.0, 0.4), PRESSURE, 0.3)
    ratio = closure("Bower-Saylor").mass_flux(40.0, *air) / closure("Shah").mass_flux(40.0, *air)
    assert 0.75 < ratio < 1.25


def test_ryan_harleman_with_wind():
    """From 1 m/s of wind 3.1 W/(m2 mbar) more."""
    still, windy = films.RyanHarleman(), films.RyanHarleman(wind=1.0)
    extra = (windy.mass_flux(60.0, *ROOM) - still.mass_flux(60.0, *ROOM)) * water_latent_heat(60.0)
    assert extra == pytest.approx(3.1 * (water_saturation_pressure(60.0) - ROOM[1]) / 100.0, rel=1e-9)


@every_closure
def test_bowen_ratio(name):
    """Sensible over latent flux follows Bowen's 0.46 mmHg/K (Phys. Rev. 27 (1926) 779); the analogy has
    Le^(2/3) = 0.9 where he has 1. Low fluxes only."""
    water, air = 32.0, (25.0, vapour_pressure(25.0, 0.5), PRESSURE, 0.3)
    sensible = closure(name).heat_transfer_coefficient(water, *air) * (water - air[0])
    latent = closure(name).mass_flux(water, *air) * water_latent_heat(water)
    mmhg = (water_saturation_pressure(water) - air[1]) / 133.322
    assert 0.40 < sensible / latent * mmhg / (water - air[0]) < 0.48


# zero, sign, smoothness


@every_closure
def test_no_vapour_at_equal_pressure(name):
    assert closure(name).mass_flux(30.0, 30.0, water_saturation_pressure(30.0), PRESSURE, 0.08) == 0.0


@every_closure
def test_cold_drink_takes_vapour(name):
    """A drink below the dew point of the room, below its temperature too: the stable branch of each."""
    flux = closure(name).mass_flux(5.0, 25.0, vapour_pressure(25.0, 0.6), PRESSURE, 0.08)
    assert flux < 0.0


@every_closure
@pytest.mark.parametrize("humidity", [0.3, 1.0])
def test_flux_is_smooth_in_the_water_temperature(name, humidity):
    """From colder than the air to hotter, through equal densities and, at 100 %, equal vapour pressures."""
    water = np.arange(5.0, 40.0, 0.0025)
    flux = closure(name).mass_flux(water, 25.0, vapour_pressure(25.0, humidity), PRESSURE, 0.08)
    slope = np.diff(flux)
    assert np.max(np.abs(np.diff(slope))) < 0.02 * np.max(np.abs(slope))


@every_closure
def test_more_with_hotter_water_and_drier_air(name):
    water = np.linspace(30.0, 95.0, 40)
    damp = closure(name).mass_flux(water, 20.0, vapour_pressure(20.0, 0.9), PRESSURE, 0.08)
    dry = closure(name).mass_flux(water, 20.0, vapour_pressure(20.0, 0.2), PRESSURE, 0.08)
    assert np.all(np.diff(damp) > 0.0)
    assert np.all(dry > damp)


def test_stefan_flow_stays_finite_at_boiling():
    flux = closure("Chilton-Colburn with Stefan flow").mass_flux(np.array([99.9, 100.0, 100.5]), *ROOM)
    assert np.all(np.isfinite(flux))


def test_open_plate_gives_more_than_pools():
    """What the choice of the closure is worth: for a drink of 80 degC a factor of about two."""
    assert 2.0 < latent_flux("Chilton-Colburn with Stefan flow", 80.0) / latent_flux("Shah", 80.0) < 2.3


# drink and rim


@every_closure
def test_water_activity_scales_the_vapour_pressure(name):
    """A drink of activity a at the room's vapour pressure a psat neither gains nor loses."""
    pressure = 0.95 * water_saturation_pressure(30.0)
    assert closure(name).mass_flux(30.0, 30.0, pressure, PRESSURE, 0.08, 0.95) == pytest.approx(
        0.0, abs=1e-15
    )


def test_freeboard_factor():
    recessed = Recessed(films.Shah())
    assert FREEBOARD_RANGE[0] < recessed.factor < FREEBOARD_RANGE[1]
    assert recessed.mass_flux(70.0, *ROOM) == pytest.approx(
        0.75 * films.Shah().mass_flux(70.0, *ROOM), rel=1e-14
    )
    assert recessed.heat_transfer_coefficient(70.0, *ROOM) == pytest.approx(
        0.75 * films.Shah().heat_transfer_coefficient(70.0, *ROOM), rel=1e-14
    )
    assert "no source" in recessed.source


# names and ranges


def test_default_closure():
    assert isinstance(closure(), films.Shah)


def test_unknown_closure():
    with pytest.raises(
        InputError, match=r'evaporation closure: "Shaw": no such closure; .*Did you mean "Shah"'
    ):
        closure("Shaw")


@pytest.mark.parametrize(
    ("make", "message"),
    [
        (lambda: Recessed(films.Shah(), 0.0), "freeboard factor: 0.0: must be above 0 and up to 1"),
        (lambda: films.RyanHarleman(wind=-1.0), "wind: .*-1 m/s"),
    ],
)
def test_bad_input(make, message):
    with pytest.raises(InputError, match=message):
        make()


def test_a_cup_is_outside_shahs_pools():
    cup = SurfaceState(80.0, 20.0, water_saturation_pressure(80.0), ROOM[1], PRESSURE, 0.08)
    outside = [entry.validity.quantity for entry in films.Shah().applied(cup) if not entry.inside]
    assert outside == ["free surface [m2]"]


@every_closure
def test_closure_says_what_it_is(name):
    assert closure(name).label in name
    assert closure(name).source


def test_foam_multiplies_what_the_rim_leaves():
    plain, covered = Recessed(films.Shah()), Recessed(films.Shah(), foam=0.2)
    assert covered.mass_flux(70.0, *ROOM) == pytest.approx(0.2 * plain.mass_flux(70.0, *ROOM), rel=1e-14)
    with pytest.raises(InputError, match=r"foam factor: 0\.0: must be above 0 and up to 1"):
        Recessed(films.Shah(), foam=0.0)
