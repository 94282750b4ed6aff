"""Layers that lie loosely on what is inside them, against thermal resistances in closed form."""

import numpy as np
import pytest
from verification.bodies import SOLID, solid, steady, system

from cupfem.conduction import FixedTemperature
from cupfem.cup import Cup
from cupfem.errors import InputError
from cupfem.meridian import LayerBand, Meridian, Profile
from cupfem.meridian import build as build_meridian
from cupfem.mesh import build

INNER, BETWEEN, OUTER, HEIGHT = 0.040, 0.0404, 0.0424, 0.1
PROFILE = Profile(np.array([0.0, HEIGHT]), np.full(2, INNER))


def two_cylinders(conductance, low=0.0, high=HEIGHT):
    wall = LayerBand("wall", SOLID, BETWEEN - INNER, 0.0, HEIGHT)
    sleeve = LayerBand("sleeve", SOLID, OUTER - BETWEEN, low, high, inner_conductance=conductance)
    return Meridian(PROFILE, (wall, sleeve))


def heat_flow(mesh, wall=0.12, sleeve=0.05):
    """Heat [W] from the inside at 80 to the outside at 20 degC, and the temperatures."""
    held = FixedTemperature("inside", 80.0), FixedTemperature("outside.sleeve", 20.0)
    body = system(mesh, {"wall": solid(wall), "sleeve": solid(sleeve)}, *held)
    state = steady(body)
    return float(body.conducted(state)[np.unique(mesh.edges["inside"])].sum()), state


def resistance_of_contact(conductance):
    """Resistance [K/W], cylinders and contact in series; Incropera, 6th ed. 2007, secs. 3.1, 3.3."""
    shells = np.log(BETWEEN / INNER) / 0.12 + np.log(OUTER / BETWEEN) / 0.05
    return (shells + 1.0 / (conductance * BETWEEN)) / (2.0 * np.pi * HEIGHT)


@pytest.mark.parametrize("conductance", [5.0, 350.0, 1e5])
def test_loose_cylinders_against_thermal_resistances(conductance):
    # allowed 1e-8: the logarithm is not a polynomial, and forty quadratic cells across hold it that well
    mesh = build(two_cylinders(conductance), 4.0, stations=np.array([0.0, 0.5, 1.0]) * HEIGHT)
    flow, _ = heat_flow(mesh)
    assert flow == pytest.approx(60.0 / resistance_of_contact(conductance), rel=1e-8)


def test_a_perfect_contact_shares_its_nodes():
    glued, loose = build(two_cylinders(np.inf)), build(two_cylinders(1e9))
    assert not glued.contacts
    assert len(loose.contacts) == 1
    assert loose.size - glued.size == 2 * (len(np.unique(glued.wall_coordinates[0].round(9))) // 2) + 1
    assert heat_flow(loose)[0] == pytest.approx(heat_flow(glued)[0], rel=1e-6)


def test_conductance_along_the_height_is_that_of_each_place():
    """No conduction along the wall: each height has its own series of resistances (Incropera, as above)."""

    def conductance(z):
        return 50.0 + 3000.0 * z

    stations = np.linspace(0.0, HEIGHT, 41)
    mesh = build(two_cylinders(conductance), stations=stations)
    held = FixedTemperature("inside", 80.0), FixedTemperature("outside.sleeve", 20.0)
    across = {name: solid(k) for name, k in (("wall", 0.12), ("sleeve", 0.05))}
    across = {name: type(given)(given.through, 1e-12, 1.0) for name, given in across.items()}
    body = system(mesh, across, *held)
    state = steady(body)
    inner = np.unique(mesh.edges["inside"])
    middles = 0.5 * (stations[:-1] + stations[1:])
    per_height = [60.0 / resistance_of_contact(conductance(z)) / HEIGHT for z in middles]
    exact = float(np.sum(per_height) * HEIGHT / 40)
    # each facet has one conductance, that of its middle, and the field is continuous: allowed 1e-4
    assert float(body.conducted(state)[inner].sum()) == pytest.approx(exact, rel=1e-4)
    assert exact != pytest.approx(60.0 / resistance_of_contact(200.0), rel=2e-3)


@pytest.mark.parametrize("fineness", [1.0, 2.0])
def test_a_sleeve_with_cut_ends_keeps_band_and_edges(fineness):
    mesh = build(two_cylinders(350.0, 0.03, 0.08), fineness)
    assert mesh.half_bandwidth <= 3 * mesh.nodes_across
    contact = mesh.contacts[0]
    assert np.allclose(mesh.points[:, contact.inner], mesh.points[:, contact.outer], atol=1e-15)
    assert not np.intersect1d(contact.inner, contact.outer).size
    z = mesh.points[1, contact.inner]
    assert (z.min(), z.max()) == pytest.approx((0.03, 0.08))
    outside = mesh.edges["outside"]
    length = np.hypot(*(mesh.points[:, outside[1]] - mesh.points[:, outside[0]])).sum()
    assert length == pytest.approx(HEIGHT + 2 * (OUTER - BETWEEN), rel=1e-12)


CUP = """
[cup]
height = "95 mm"
inner_top_diameter = "78 mm"
inner_foot_diameter = "55 mm"
[[layer]]
name = "wall"
material = "cupstock board"
thickness = "0.35 mm"
[[layer]]
name = "sleeve"
material = "corrugated board"
thickness = "1.5 mm"
from = "28 mm"
to = "82 mm"
{fit}
[base]
material = "cupstock board"
thickness = "0.35 mm"
recess = "8 mm"
"""


SECOND_SLEEVE = """
[[layer]]
name = "gap"
material = "air"
thickness = "1 mm"
from = "28 mm"
to = "82 mm"
[[layer]]
name = "second"
material = "corrugated board"
thickness = "1 mm"
from = "28 mm"
to = "82 mm"
fit = "350 W/(m^2 K)"
[base]"""


GAP_WITH_FIT = SECOND_SLEEVE.replace('air"', 'air"\nfit = "9 W/(m^2 K)"').replace(
    '\nfit = "350 W/(m^2 K)"', ""
)


def test_the_key_of_a_loose_fit_makes_the_contact():
    cup = Cup.from_text(CUP.format(fit='fit = "350 W/(m^2 K)"'))
    assert cup.layer[1].fit == 350.0
    mesh = build(build_meridian(cup))
    assert np.all(np.asarray(mesh.contacts[0].conductance) == 350.0)
    assert mesh.half_bandwidth <= 3 * mesh.nodes_across
    assert not build(build_meridian(Cup.from_text(CUP.format(fit="")))).contacts


@pytest.mark.parametrize(
    ("old", "new", "message"),
    [
        (
            'thickness = "0.35 mm"\n[[',
            'thickness = "0.35 mm"\nfit = "350 W/(m^2 K)"\n[[',
            r"layer\.wall\.fit.*innermost",
        ),
        ("[base]", SECOND_SLEEVE, r"layer\.second\.fit.*a gas, which has no contact"),
        ("[base]", GAP_WITH_FIT, r"layer\.gap\.fit.*lies close"),
        ("350 W/(m^2 K)", "0 W/(m^2 K)", r"layer\.sleeve\.fit.*more than zero"),
    ],
)
def test_a_fit_that_means_nothing_is_refused(old, new, message):
    text = CUP.format(fit='fit = "350 W/(m^2 K)"')
    assert old in text
    with pytest.raises(InputError, match=message):
        Cup.from_text(text.replace(old, new, 1))
