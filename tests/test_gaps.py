"""Gaps against the textbook's tubes, kinetic theory, published correlations and exact limits.

Temperatures of the sources are in kelvin and are turned into degC with 273.15.
"""

import math
from dataclasses import replace

import numpy as np
import pytest

from cupfem import gaps
from cupfem.errors import InputError
from cupfem.fluids import air_conductivity, air_specific_heat
from cupfem.gaps import Gap, exchange_factor, gas_conductance, radiation_conductance

K = 273.15
WALL = 1e3  # m; a radius so large that the annulus is a plane gap
SIGMA = 5.670374419e-8


# radiation


def test_cryogenic_tubes_and_their_shield():
    """Incropera, 6th ed., Ex. 13.5, p. 834: 20 mm at 77 K (0.02) in 50 mm at 300 K (0.05): 0.50 W/m; with a
    shield of 35 mm (0.02 on both sides) 0.25 W/m, 49.5 % less. The book has sigma = 5.67e-8."""
    bare = exchange_factor(0.02, 0.05, 0.020 / 0.050) * math.pi * 0.020
    inner = exchange_factor(0.02, 0.02, 0.020 / 0.035) * math.pi * 0.020
    outer = exchange_factor(0.02, 0.05, 0.035 / 0.050) * math.pi * 0.035
    shielded = 1.0 / (1.0 / inner + 1.0 / outer)
    drive = 5.67e-8 * (300.0**4 - 77.0**4)
    assert bare * drive == pytest.approx(0.498812, rel=2e-6)
    assert shielded * drive == pytest.approx(0.251653, rel=2e-6)
    assert shielded / bare - 1.0 == pytest.approx(-0.495495, abs=1e-6)


@pytest.mark.parametrize(
    ("radii", "emissivities", "faces", "factor", "conductance"),
    [
        pytest.param((35.0, 38.0), (0.07, 0.07), (85.0, 25.0), 0.03770376, 0.304711, id="steel vacuum mug"),
        pytest.param((35.0, 38.0), (0.03, 0.03), (85.0, 25.0), 0.01584434, 0.128049, id="silvered"),
        pytest.param((40.0, 43.0), (0.9, 0.9), (70.0, 45.0), 0.82340426, None, id="paper sleeve"),
        pytest.param((40.0, 43.0), (0.9, 0.05), (70.0, 45.0), 0.05323246, None, id="foil inside the sleeve"),
        pytest.param((1.0, 1.0), (0.07, 0.07), (85.0, 25.0), 0.03626943, None, id="plates"),
    ],
)
def test_concentric_gray_faces(radii, emissivities, faces, factor, conductance):
    """1/E = 1/e1 + (1 - e2)/e2 r1/r2 and E sigma (Ta + Tb)(Ta^2 + Tb^2), worked by hand to seven digits."""
    computed = exchange_factor(*emissivities, radii[0] / radii[1])
    assert computed == pytest.approx(factor, abs=6e-9)
    if conductance is not None:
        assert radiation_conductance(*faces, computed) == pytest.approx(conductance, abs=6e-7)


def test_radiation_conductance_is_exact():
    flux = SIGMA * ((85.0 + K) ** 4 - (25.0 + K) ** 4)
    assert radiation_conductance(85.0, 25.0, 0.3) * 60.0 == pytest.approx(0.3 * flux, rel=1e-10)


@pytest.mark.parametrize("emissivities", [(0.0, 0.9), (0.9, 0.0)])
def test_mirror_passes_no_radiation(emissivities):
    assert exchange_factor(*emissivities, 0.9) == 0.0


# thin gas


@pytest.mark.parametrize(("kelvin", "target"), [(300.0, 1.170704), (330.0, 1.116223)])
def test_free_molecular_air(kelvin, target):
    """Knudsen: (g + 1)/(g - 1) sqrt(R / (8 pi M T)) per Pa."""
    assert gaps.free_molecular_conductance(kelvin - K, 1.0) == pytest.approx(target, rel=2e-6)


@pytest.mark.parametrize(
    ("pressure", "accommodation", "target"),
    [
        (1e4, 1.0, 9.517793),
        (1e3, 1.0, 9.445535),
        (100.0, 1.0, 8.779035),
        (10.0, 1.0, 5.147110),
        (1.0, 1.0, 1.001960),
        (0.1, 1.0, 0.1106728),
        (0.01, 1.0, 0.01118422),
        (1e-3, 1.0, 1.119605e-3),
        (10.0, 0.87, 4.525437),
        (1.0, 0.87, 0.7905527),
    ],
)
def test_temperature_jump(pressure, accommodation, target):
    """Air at 330 K (CoolProp: k 0.0285777, mu 1.995361e-5, Pr 0.703689), plane gap of 3 mm: k/(d + 2 g)."""
    computed = gas_conductance(330.0 - K, WALL, WALL + 3e-3, pressure, accommodation)
    assert computed == pytest.approx(target, rel=3e-5)


def test_thin_gas_ends_in_the_free_molecular_limit():
    """Two formulas of kinetic theory meet as p goes to 0, up to c_p over 7/2 R, which the second assumes."""
    temperature = 330.0 - K
    thin = gas_conductance(temperature, WALL, WALL + 3e-3, 1e-6, 1.0)
    excess = air_specific_heat(temperature) / (3.5 * gaps.GAS_CONSTANT_AIR)
    assert thin == pytest.approx(gaps.free_molecular_conductance(temperature, 1e-6) * excess, rel=1e-5)


def test_dense_gas_is_the_cylindrical_shell():
    """k / (r1 ln(r2/r1)); the jump of 0.3 um leaves 5e-4 of 1 mm."""
    target = air_conductivity(50.0) / (0.04 * math.log(41.0 / 40.0))
    assert gas_conductance(50.0, 0.040, 0.041) == pytest.approx(target, rel=7e-4)


# convection


RAYLEIGH = np.array([1e3, 5e3, 1e4, 2e4, 1e5, 1e6])


def test_elsherbiny():
    """ElSherbiny, Raithby and Hollands 1982 at A = 40, evaluated from the published form."""
    target = [1.000070, 1.047785, 1.303433, 1.692441, 3.002376, 6.050000]
    np.testing.assert_allclose(gaps.nusselt_tall_cavity(RAYLEIGH, 40.0), target, rtol=1e-6)


def test_iso15099():
    """ISO 15099 at A = 40, evaluated from the form in the open library Modelica Buildings."""
    target = [1.001383, 1.055901, 1.275000, 1.688830, 3.127679, 6.738380]
    np.testing.assert_allclose(gaps.nusselt_tall_cavity_iso15099(RAYLEIGH, 40.0), target, rtol=1e-6)


def test_the_two_forms_agree():
    """Two fits to different tests, within 12 % from conduction to Ra = 1e6."""
    rayleigh = np.logspace(1.0, 6.0, 200)
    first = gaps.nusselt_tall_cavity(rayleigh, 40.0)
    np.testing.assert_allclose(first, gaps.nusselt_tall_cavity_iso15099(rayleigh, 40.0), rtol=0.12)


@pytest.mark.parametrize(
    ("millimetres", "target"),
    [(1.0, 28.624), (3.0, 9.5415), (6.0, 4.7707), (10.0, 2.8637), (15.0, 2.7996), (20.0, 2.8713)],
)
def test_still_gap_and_wide_gap(millimetres, target):
    """Gas alone, 70 and 45 degC, 0.1 m high, without jump: conduction up to 10 mm, then the boundary layers
    of ElSherbiny's third branch. The jump at 1 mm is 3e-4."""
    gap = Gap(0.0, 0.0)
    width = millimetres * 1e-3
    assert gap.conductance(70.0, 45.0, WALL, WALL + width, 0.1) == pytest.approx(target, rel=5e-4)


def test_convection_switches_on():
    rayleigh = gaps.gap_rayleigh(70.0, 45.0, np.array([8e-3, 15e-3]), 101325.0)
    np.testing.assert_allclose(rayleigh, [762.0, 5026.0], rtol=1e-3)
    still, moving = gaps.nusselt_tall_cavity(rayleigh, 0.1 / np.array([8e-3, 15e-3]))
    assert still == pytest.approx(1.0, abs=1e-3)
    assert moving == pytest.approx(1.467, abs=1e-3)


def test_still_gas_is_cut_off_without_a_step():
    below, above = gaps.STILL_GAS * (1.0 - 1e-9), gaps.STILL_GAS * (1.0 + 1e-9)
    assert gaps.nusselt_tall_cavity(above, 40.0) - gaps.nusselt_tall_cavity(below, 40.0) < 1e-8


def test_range_of_the_convection():
    """A squat wide gap is said to be outside; a narrow one is not, since its convection does not count."""
    (line,) = Gap(0.9, 0.9).out_of_range(70.0, 45.0, 0.04, 0.07, 0.1)
    assert line == "height over width (gap) reached 3.33 to 3.33, tested from 5 to 110"
    assert Gap(0.9, 0.9).out_of_range(70.0, 45.0, 0.04, 0.0405, 0.1) == []
    (line,) = Gap(0.9, 0.9).out_of_range(90.0, 10.0, 0.04, 0.29, 2.0)
    assert line.startswith("Rayleigh number (gap) reached 8.")
    assert line.endswith("e+07, tested up to 2e+07")


# the gap as a whole

SLEEVE = Gap(0.9, 0.9)
FACES = (70.0, 45.0, 0.040, 0.041, 0.1)


def test_parts_add_by_area():
    """(1 - f)(gas + radiation) + f contact, each part by its own formula."""
    gas = air_conductivity(57.5) / (0.04 * math.log(41.0 / 40.0))
    a, b = 70.0 + K, 45.0 + K
    radiation = SIGMA * (a + b) * (a * a + b * b) / (1.0 / 0.9 + 0.1 / 0.9 * 40.0 / 41.0)
    gap = replace(SLEEVE, contact_fraction=0.02, contact_conductance=100.0)
    assert gap.conductance(*FACES) == pytest.approx(0.98 * (gas + radiation) + 0.02 * 100.0, rel=5e-4)


def test_conductivity_of_the_cells_returns_the_conductance():
    """A cylindrical shell of k = h r1 ln(r2/r1) has the conductance h inside (Incropera Eq. 3.28)."""
    k = SLEEVE.through_conductivity(*FACES)
    assert k / (0.04 * math.log(41.0 / 40.0)) == pytest.approx(SLEEVE.conductance(*FACES), rel=1e-12)


def test_vacuum_between_mirrors_insulates():
    assert Gap(0.0, 0.0, pressure=0.0).through_conductivity(*FACES) == 0.0
    assert Gap(0.0, 0.0, pressure=0.0).along_conductivity(50.0) == 0.0


def test_vacuum_leaves_radiation():
    """Steel vacuum mug, 35 and 38 mm, 0.07 on both faces, 85 and 25 degC: 18.28 W/m2 (by hand)."""
    mug = Gap(0.07, 0.07, pressure=0.0)
    assert mug.conductance(85.0, 25.0, 0.035, 0.038, 0.1) * 60.0 == pytest.approx(18.282666, rel=2e-6)
    good = replace(mug, pressure=1e-3).through_conductivity(85.0, 25.0, 0.035, 0.038, 0.1)
    assert 0.0 < good - mug.through_conductivity(85.0, 25.0, 0.035, 0.038, 0.1) < 1e-5


def test_touching_everywhere_is_a_contact():
    glued = replace(SLEEVE, contact_fraction=1.0, contact_conductance=250.0)
    assert glued.conductance(*FACES) == pytest.approx(250.0, rel=1e-14)


def test_thinner_than_thin_is_a_contact():
    thin = SLEEVE.conductance(70.0, 45.0, 0.04, 0.04 + np.array([0.049e-3, 0.051e-3]), 0.1)
    assert thin[0] == pytest.approx(SLEEVE.contact_conductance, rel=1e-14)
    assert thin[1] > 500.0  # 0.05 mm of air


def test_pressed_gap_has_half_the_resistance():
    assert SLEEVE.pressed(0.5).conductance(*FACES) == pytest.approx(
        2.0 * SLEEVE.conductance(*FACES), rel=1e-14
    )


def test_along_the_gap_the_gas_alone():
    """Neither radiation nor contact; a thin gas is slowed by its walls across the width."""
    gap = replace(SLEEVE, contact_fraction=0.5)
    assert gap.along_conductivity(50.0) == pytest.approx(air_conductivity(50.0), rel=1e-14)
    thin = replace(gap, pressure=0.1).along_conductivity(50.0, 3e-3)
    assert thin == pytest.approx(
        gas_conductance(50.0, WALL, WALL + 3e-3, 0.1, gap.accommodation) * 3e-3, rel=1e-5
    )


def test_columns_go_through():
    inner, outer = np.linspace(80.0, 60.0, 5), np.linspace(50.0, 40.0, 5)
    r_in = np.linspace(0.03, 0.04, 5)
    r_out = r_in + 1e-3
    together = SLEEVE.through_conductivity(inner, outer, r_in, r_out, 0.09)
    apart = [
        SLEEVE.through_conductivity(*column, 0.09) for column in zip(inner, outer, r_in, r_out, strict=True)
    ]
    np.testing.assert_allclose(together, apart, rtol=1e-12)


def test_conductivity_is_smooth_through_equal_faces():
    """Slope of the heat flow through zero difference; 15 mm, where convection has begun elsewhere."""
    difference = np.arange(-400, 401) * 5e-4
    flow = difference * SLEEVE.conductance(50.0 + difference, 50.0 + 0.0 * difference, 0.04, 0.055, 0.1)
    slope = np.diff(flow) / 5e-4
    assert np.max(np.abs(np.diff(slope))) < 1e-3 * np.max(slope)


@pytest.mark.parametrize(
    ("change", "message"),
    [
        ({"contact_fraction": 1.2}, "contact fraction: 1.2: must be from 0 to 1"),
        ({"emissivity_inner": -0.1}, "emissivity inner: -0.1"),
        ({"pressure": -5.0}, "gap pressure: .*-5 Pa.*must be zero or positive"),
        ({"accommodation": 0.0}, "accommodation: 0.0"),
        ({"resistance_factor": 0.0}, "resistance factor: 0.0"),
        ({"contact_conductance": math.nan}, "contact conductance: .*nan"),
    ],
)
def test_bad_input(change, message):
    with pytest.raises(InputError, match=message):
        replace(SLEEVE, **change)
