"""Evacuated, tapered and reflective gaps through the mesh, against exact flows; embossed hollows."""

import numpy as np
import pytest
from verification.bodies import SOLID, solid, steady, system

import cupfem
from cupfem.conduction import FixedTemperature, GasLayer
from cupfem.cup import Cup
from cupfem.fluids import STANDARD_PRESSURE
from cupfem.gaps import Gap
from cupfem.materials import get_material
from cupfem.meridian import LayerBand, Meridian, Profile
from cupfem.mesh import build

AIR = get_material("air")
LENGTH = 0.1
SKIN = 1e-7  # m; shells of a conductivity at which they do not count
KELVIN = 273.15
SIGMA = 5.670374419 / 5.67  # CODATA 2018 over the rounded constant of the textbook


def shells(radii, gaps, temperatures):
    """Heat [W/m] between concentric tubes at given temperatures [K], with gaps between their faces' radii."""
    layers, given = [LayerBand("tube0", SOLID, SKIN, 0.0, LENGTH)], {"tube0": solid(0.1)}
    for number, gap in enumerate(gaps):
        width = radii[number + 1] - radii[number]
        layers += [
            LayerBand(f"gap{number}", AIR, width - (SKIN if number else 0.0), 0.0, LENGTH),
            LayerBand(f"tube{number + 1}", SOLID, SKIN, 0.0, LENGTH),
        ]
        given |= {f"gap{number}": GasLayer(gap, 1.0), f"tube{number + 1}": solid(0.1)}
    profile = Profile(np.array([0.0, LENGTH]), np.full(2, radii[0] - SKIN))
    mesh = build(Meridian(profile, tuple(layers)), 4.0, stations=np.array([0.0, 0.5, 1.0]) * LENGTH)
    first, last = (value - KELVIN for value in temperatures)
    body = system(mesh, given, FixedTemperature("inside", first), FixedTemperature("outside", last))
    state = steady(body, start=0.5 * (first + last))
    return float(body.conducted(state)[np.unique(mesh.edges["inside"])].sum()) / LENGTH


def vacuum(inner, outer):
    return Gap(inner, outer, pressure=0.0)


def test_tubes_with_an_evacuated_gap():
    """Incropera et al., 6th ed. 2007, Ex. 13.5 p. 834: 0.50 W/m; recomputed .498812, of 5.67e-8 W/(m2 K4)."""
    found = -shells([0.01, 0.025], [vacuum(0.02, 0.05)], (77.0, 300.0))
    assert found == pytest.approx(0.498812 * SIGMA, rel=5e-6)


def test_a_radiation_shield_halves_it():
    """Same example with a shield of 35 mm, emissivity .02 on both sides: .251653 W/m (book: -49.55 %)."""
    gaps = [vacuum(0.02, 0.02), vacuum(0.02, 0.05)]
    assert -shells([0.01, 0.0175, 0.025], gaps, (77.0, 300.0)) == pytest.approx(0.251653 * SIGMA, rel=1e-5)


def test_walls_of_an_evacuated_mug():
    """35 and 38 mm, 85 and 25 degC, emissivity .07: 18.282666 W/m2; .03: 7.682967 (Eq. 13.20, recomputed)."""
    for emissivity, target in ((0.07, 18.282666), (0.03, 7.682967)):
        found = shells([0.035, 0.038], [vacuum(emissivity, emissivity)], (85.0 + KELVIN, 25.0 + KELVIN))
        assert found / (2 * np.pi * 0.035) == pytest.approx(target, rel=2e-6)


JUMP = [
    # pressure [Pa], conductance [W/(m2 K)] of 3 mm of air at 330 K, accommodation 1; Smoluchowski 1898,
    # Kennard 1938
    (1e5, 9.525),
    (1e4, 9.517793),
    (1e3, 9.445535),
    (100.0, 8.779035),
    (10.0, 5.147110),
    (1.0, 1.001960),
    (0.1, 0.1106728),
    (0.01, 0.01118422),
]


@pytest.mark.parametrize(("pressure", "target"), JUMP)
def test_gas_of_a_thin_pressure_through_the_mesh(pressure, target):
    """Flat gap (large radius), mirrors on both sides so that only the gas counts."""
    gap = Gap(0.0, 0.0, pressure=pressure, accommodation=1.0)
    radius = 40.0
    found = shells([radius, radius + 3e-3], [gap], (330.5, 329.5)) / (2 * np.pi * radius)
    assert found == pytest.approx(target, rel=2e-3)


def test_pressure_at_which_half_is_left():
    """Half the flow where both jumps are as long as the gap; from the value at 10 Pa above: 8.51 Pa."""

    def conductance(pressure):
        gap = Gap(0.0, 0.0, pressure=pressure, accommodation=1.0)
        return shells([40.0, 40.003], [gap], (330.5, 329.5)) / (2 * np.pi * 40.0)

    full = conductance(STANDARD_PRESSURE)
    low, high = 1.0, 100.0
    for _ in range(30):
        middle = np.sqrt(low * high)
        low, high = (low, middle) if conductance(middle) > 0.5 * full else (middle, high)
    conductivity = 9.525 * 3e-3  # of the full pressure: jumps of 0.6 um
    at_ten = conductivity / 5.147110 - 3e-3
    assert low == pytest.approx(10.0 * at_ten / 3e-3, rel=2e-3)


CUP = """
[cup]
height = "95 mm"
inner_top_diameter = "78 mm"
inner_foot_diameter = "55 mm"
[[layer]]
name = "inner"
material = "stainless steel"
thickness = "0.5 mm"
[[layer]]
name = "gap"
material = "air"
thickness = "3 mm"
from = "14 mm"
to = "88 mm"
{gap}
[[layer]]
name = "outer"
material = "stainless steel"
thickness = "0.5 mm"
{outer}
[base]
material = "stainless steel"
thickness = "0.5 mm"
recess = "8 mm"
"""
SERVING = cupfem.Serving(duration="60 s")


@pytest.mark.parametrize(
    "keys",
    [
        {"gap": 'pressure = "0 Pa"'},
        {"gap": "contact_fraction = 0.2"},
        {"outer": "inner_emissivity = 0.9"},
        {"outer": "outer_emissivity = 0.95"},
        {"gap": 'blend = "5 mm"'},
        {"gap": 'contact = "200 W/(m^2 K)"'},
    ],
)
def test_each_key_of_a_gap_changes_the_answer(keys):
    def heat(**given):
        run = cupfem.pour(
            Cup.from_text(CUP.format(**{"gap": "", "outer": "", **given})), SERVING, fineness=0.5
        )
        return float(run.series.drink_temperature[-1])

    assert abs(heat(**keys) - heat()) > 1e-4
