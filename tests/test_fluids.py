"""Properties of water, air and drinks against CoolProp, handbooks and standards."""

import math
import pickle
import timeit

import numpy as np
import pytest
from CoolProp.CoolProp import PropsSI
from CoolProp.HumidAirProp import HAPropsSI
from hypothesis import given
from hypothesis import strategies as st

from cupfem import fluids
from cupfem.errors import InputError
from cupfem.fluids.pure_water import WATER_RANGE
from cupfem.quantities import ZERO_CELSIUS

ATMOSPHERE = 101325.0
TEMPERATURES = np.array([0.02, 5.0, 10.0, 20.0, 30.0, 40.0, 50.0, 60.0, 70.0, 80.0, 90.0, 99.9])
PROPERTY = 2e-3  # asked for of every property of water and dry air; the fits are closer


def water_of_coolprop(key: str) -> np.ndarray:
    return np.array([PropsSI(key, "T", t + ZERO_CELSIUS, "P", ATMOSPHERE, "Water") for t in TEMPERATURES])


def saturated(key: str, quality: float) -> np.ndarray:
    return np.array([PropsSI(key, "T", t + ZERO_CELSIUS, "Q", quality, "Water") for t in TEMPERATURES])


def air_of_coolprop(key: str, temperatures: np.ndarray, pressure: float = ATMOSPHERE) -> np.ndarray:
    return np.array([PropsSI(key, "T", t + ZERO_CELSIUS, "P", pressure, "Air") for t in temperatures])


@pytest.mark.parametrize(
    ("function", "key", "tolerance"),
    [
        (fluids.water_density, "D", 2e-5),
        (fluids.water_specific_heat, "C", 2e-4),
        (fluids.water_conductivity, "L", 5e-4),
        (fluids.water_viscosity, "V", 2e-4),
    ],
)
def test_water_agrees_with_iapws(function, key: str, tolerance: float) -> None:
    assert tolerance <= PROPERTY
    np.testing.assert_allclose(function(TEMPERATURES), water_of_coolprop(key), rtol=tolerance)


def test_saturation_pressure_agrees_with_iapws() -> None:
    np.testing.assert_allclose(fluids.water_saturation_pressure(TEMPERATURES), saturated("P", 0), rtol=2e-4)


def test_latent_heat_agrees_with_iapws() -> None:
    expected = saturated("H", 1) - saturated("H", 0)
    np.testing.assert_allclose(fluids.water_latent_heat(TEMPERATURES), expected, rtol=1e-4)


def test_enthalpy_agrees_with_iapws() -> None:
    expected = water_of_coolprop("H") - PropsSI("H", "T", ZERO_CELSIUS + 0.02, "P", ATMOSPHERE, "Water")
    assert fluids.water_enthalpy(TEMPERATURES) == pytest.approx(expected + 0.02 * 4219.0, rel=1e-4, abs=1.0)


def test_expansion_agrees_with_iapws() -> None:
    expected = water_of_coolprop("isobaric_expansion_coefficient")
    np.testing.assert_allclose(fluids.water_expansion(TEMPERATURES), expected, rtol=5e-3, atol=4e-6)
    assert fluids.water_expansion(2.0) < 0.0 < fluids.water_expansion(6.0)  # density is largest at 3.98 degC


def test_water_against_a_textbook() -> None:
    # T. L. Bergman et al., Fundamentals of Heat and Mass Transfer, 7th ed., 2011, table A.6, row 350 K
    row = 350.0 - ZERO_CELSIUS
    assert fluids.water_density(row) == pytest.approx(1 / 1.027e-3, rel=1e-3)
    assert fluids.water_specific_heat(row) == pytest.approx(4195.0, rel=1e-3)
    # the book rounds an older formulation, 0.5 % above that of 2011
    assert fluids.water_conductivity(row) == pytest.approx(0.668, rel=7e-3)
    assert fluids.water_viscosity(row) == pytest.approx(365e-6, rel=1e-2)
    assert fluids.water_saturation_pressure(row) == pytest.approx(0.4163e5, rel=2e-3)
    assert fluids.water_latent_heat(row) == pytest.approx(2317e3, rel=1e-3)


@given(st.floats(0.0, 110.0))
def test_enthalpy_and_temperature_are_inverse(temperature: float) -> None:
    back = fluids.water_temperature(fluids.water_enthalpy(temperature))
    assert back == pytest.approx(temperature, abs=1e-10)


def test_specific_heat_is_the_slope_of_enthalpy() -> None:
    step = 1e-3
    above, below = fluids.water_enthalpy(TEMPERATURES + step), fluids.water_enthalpy(TEMPERATURES - step)
    slope = (above - below) / (2 * step)
    np.testing.assert_allclose(slope, fluids.water_specific_heat(TEMPERATURES), rtol=1e-7)


@pytest.mark.parametrize("pressure", [611.7, 1228.0, 20e3, 70e3, ATMOSPHERE, 120e3])
def test_boiling_point_agrees_with_iapws(pressure: float) -> None:
    expected = PropsSI("T", "P", pressure, "Q", 0, "Water") - ZERO_CELSIUS
    assert fluids.boiling_point(pressure) == pytest.approx(expected, abs=0.005)
    back = fluids.water_saturation_pressure(fluids.boiling_point(pressure))
    assert back == pytest.approx(pressure, rel=1e-12)


@pytest.mark.parametrize(
    ("function", "key"),
    [(fluids.air_conductivity, "L"), (fluids.air_viscosity, "V"), (fluids.air_specific_heat, "C")],
)
@pytest.mark.parametrize("pressure", [70e3, ATMOSPHERE])
def test_air_agrees_with_lemmon(function, key: str, pressure: float) -> None:
    temperatures = np.linspace(-30.0, 140.0, 18)
    expected = air_of_coolprop(key, temperatures, pressure)
    np.testing.assert_allclose(function(temperatures), expected, rtol=1e-3)


@pytest.mark.parametrize("pressure", [70e3, ATMOSPHERE])
def test_air_density_agrees_with_lemmon(pressure: float) -> None:
    temperatures = np.linspace(-30.0, 140.0, 18)  # at -30 degC the ideal gas is 0.12 % too light
    expected = air_of_coolprop("D", temperatures, pressure)
    np.testing.assert_allclose(fluids.air_density(temperatures, pressure), expected, rtol=PROPERTY)


def test_air_against_a_textbook() -> None:
    # Bergman et al., as above, table A.4, row 350 K
    row = 350.0 - ZERO_CELSIUS
    assert fluids.air_conductivity(row) == pytest.approx(30.0e-3, rel=5e-3)
    assert fluids.air_viscosity(row) == pytest.approx(208.2e-7, rel=5e-3)
    assert fluids.air_specific_heat(row) == pytest.approx(1009.0, rel=1e-3)
    assert fluids.air_density(row) == pytest.approx(0.9950, rel=1.5e-2)
    assert fluids.air_prandtl(row) == pytest.approx(0.700, rel=1e-2)


@pytest.mark.parametrize(
    ("altitude", "pressure"), [(0, 101325.0), (1000, 89874.6), (2000, 79495.2), (5000, 54019.9)]
)
def test_standard_atmosphere(altitude: float, pressure: float) -> None:
    # ISO 2533:1975, table of pressure against geopotential altitude
    assert fluids.standard_pressure(altitude) == pytest.approx(pressure, rel=1e-5)


@pytest.mark.parametrize("temperature", [5.0, 22.0, 35.0, 60.0])
@pytest.mark.parametrize("humidity", [0.2, 0.45, 0.9])
def test_humid_air_agrees_with_ashrae(temperature: float, humidity: float) -> None:
    # CoolProp's humid air: ASHRAE RP-1485, S. Herrmann et al., HVAC&R Research 15, 961-986 (2009), real gas
    state = ("T", temperature + ZERO_CELSIUS, "P", ATMOSPHERE, "R", humidity)
    vapour = fluids.vapour_pressure(temperature, humidity)
    # the enhancement factor of real moist air, left out here, is 1.004 to 1.005 at atmospheric pressure
    assert vapour == pytest.approx(HAPropsSI("P_w", *state), rel=6e-3)
    density = (1.0 + HAPropsSI("W", *state)) / HAPropsSI("V", *state)
    assert fluids.moist_air_density(temperature, vapour) == pytest.approx(density, rel=1.5e-3)
    if fluids.dew_point(temperature, humidity) > 0.0:  # below, the reference has frost
        dew = HAPropsSI("D", *state) - ZERO_CELSIUS
        assert fluids.dew_point(temperature, humidity) == pytest.approx(dew, abs=0.03)
    if fluids.wet_bulb(temperature, humidity) > 0.0:
        wet = HAPropsSI("B", *state) - ZERO_CELSIUS
        assert fluids.wet_bulb(temperature, humidity) == pytest.approx(wet, abs=0.06)


def test_wet_bulb_of_saturated_air_is_the_dry_bulb() -> None:
    assert fluids.wet_bulb(20.0, 1.0) == pytest.approx(20.0, abs=1e-6)


def test_vapour_diffusivity_against_a_textbook() -> None:
    # Bergman et al., as above, table A.8: water vapour in air at 298 K and 1 atm 0.26e-4 m2/s
    assert fluids.vapour_diffusivity(298.0 - ZERO_CELSIUS) == pytest.approx(0.26e-4, rel=0.03)
    assert fluids.vapour_diffusivity(25.0, 50662.5) == pytest.approx(2 * fluids.vapour_diffusivity(25.0))


@pytest.mark.parametrize("name", sorted(fluids.LIQUIDS))
def test_every_drink_has_inverse_enthalpy_and_is_picklable(name: str) -> None:
    drink = pickle.loads(pickle.dumps(fluids.get_liquid(name)))
    assert drink.source
    assert drink.enthalpy(0.0) == 0.0
    np.testing.assert_allclose(drink.temperature(drink.enthalpy(TEMPERATURES)), TEMPERATURES, atol=1e-10)


def test_water_as_a_drink_is_water() -> None:
    drink = fluids.water()
    for name in ("density", "specific_heat", "conductivity", "viscosity", "expansion", "enthalpy"):
        expected = getattr(fluids, f"water_{name}")(TEMPERATURES)
        np.testing.assert_array_equal(getattr(drink, name)(TEMPERATURES), expected)


def test_drinks_lie_in_the_usual_ranges() -> None:
    # handbook ranges from memory, not re-checked: milk drinks 3900-4050 J/(kg K), cream soups 3700-3900
    milk, soup = fluids.get_liquid("milk drink"), fluids.get_liquid("thick soup")
    assert 3900 < milk.specific_heat(60.0) < 4050
    assert 1015 < milk.density(20.0) < 1030
    assert 1.5 < milk.viscosity(60.0) / fluids.water_viscosity(60.0) < 2.0
    assert 3700 < soup.specific_heat(60.0) < 3900
    assert 20 < soup.viscosity(60.0) / fluids.water_viscosity(60.0) < 500


def test_constants_replace_properties() -> None:
    oil = fluids.constant_liquid(density=970.0, specific_heat=4190.0)
    assert (oil.density(20.0), oil.density(80.0), oil.specific_heat(50.0)) == (970.0, 970.0, 4190.0)
    assert oil.enthalpy(10.0) == 41900.0
    assert oil.temperature(41900.0) == 10.0
    assert oil.viscosity(50.0) == fluids.water_viscosity(50.0)
    assert oil.expansion(50.0) == fluids.water_expansion(50.0)
    thin = fluids.get_liquid("thick soup").with_constants(viscosity=2e-3, vapour_factor=0.98)
    assert (thin.viscosity(50.0), thin.vapour_factor, thin.mark) == (pytest.approx(2e-3), 0.98, "user")
    assert thin.specific_heat(50.0) == fluids.get_liquid("thick soup").specific_heat(50.0)


def test_bad_liquids_are_refused() -> None:
    with pytest.raises(InputError, match=r'drink\.kind: "cofee": no such drink\. Did you mean "coffee"\?'):
        fluids.get_liquid("cofee")
    for value in (0.0, -1.0, math.nan, math.inf):
        with pytest.raises(InputError, match=r"density: .* must be positive"):
            fluids.constant_liquid(density=value, specific_heat=4000.0)


def test_a_float_in_is_a_float_out_and_an_array_keeps_its_shape() -> None:
    pure = (fluids.water_density, fluids.water_viscosity, fluids.water_saturation_pressure)
    for function in (*pure, fluids.boiling_point, fluids.air_conductivity, fluids.air_density):
        assert isinstance(function(50.0), float)
        assert function(np.full((2, 3), 50.0)).shape == (2, 3)


def test_scalars_are_fast() -> None:
    enthalpy = fluids.water_enthalpy(70.0)
    runs = 2000
    best = min(timeit.repeat(lambda: fluids.water_temperature(enthalpy), number=runs, repeat=5)) / runs
    assert best < 50e-6  # a root finder of scipy takes longer; a few microseconds here


def test_fits_state_their_range() -> None:
    low, high = WATER_RANGE
    edge = PropsSI("D", "T", high + ZERO_CELSIUS, "Q", 0, "Water")
    assert low == 0.0
    assert fluids.water_density(high) == pytest.approx(edge, rel=1e-4)


def test_properties_taken_together_are_those_taken_one_by_one() -> None:
    """The films ask for all at once; the single functions are those that CoolProp checks."""
    temperature = np.linspace(5.0, 95.0, 7)
    single = (fluids.air_conductivity, fluids.air_viscosity, fluids.air_specific_heat)
    one_by_one = np.array([function(temperature) for function in single])
    assert np.array(fluids.air_transport(temperature)) == pytest.approx(one_by_one, rel=1e-13)
    assert fluids.air_transport(50.0) == tuple(function(50.0) for function in single)
    for liquid in fluids.LIQUIDS.values():
        names = ("density", "specific_heat", "conductivity", "viscosity", "expansion")
        expected = np.array([getattr(liquid, name)(temperature) for name in names])
        assert np.array(liquid.transport(temperature)) == pytest.approx(expected, rel=1e-12)
