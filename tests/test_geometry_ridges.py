"""Ring-shaped ridges: closed forms of their volume, valid cells, and heat as of the fins of the textbooks."""

from dataclasses import replace

import numpy as np
import pytest
from scipy.special import i0, i1, k0, k1
from verification.bodies import SOLID, film, solid, steady, system

from cupfem.axisymmetry import EdgeQuadrature, Measure, volume_moments
from cupfem.conduction import FixedTemperature
from cupfem.cup import Cup
from cupfem.errors import InputError
from cupfem.meridian import LayerBand, Meridian, Profile, Rings
from cupfem.meridian import build as build_meridian
from cupfem.mesh import build

CUP = """
[cup]
height = "95 mm"
inner_top_diameter = "{top}"
inner_foot_diameter = "56 mm"
[[layer]]
name = "wall"
material = "polypropylene"
thickness = "0.6 mm"
[[layer]]
name = "ridges"
material = "polypropylene"
[layer.ridge]
height = "2 mm"
crest_width = "1 mm"
{more}
[base]
material = "polypropylene"
thickness = "0.6 mm"
recess = "5 mm"
"""
ROW = 'first = "30 mm"\npitch = "6 mm"\ncount = 7\n'


def cup(more="", row=ROW, top="78 mm"):
    return Cup.from_text(CUP.format(more=more + row, top=top))


def mesh_of(drawn, fineness=1.0):
    return build(build_meridian(drawn), fineness)


def least_corner(mesh):
    """Smallest product of sides and sine of the angle at a corner of a cell [m2]."""
    corner = mesh.grid.p[:, mesh.grid.t]
    found = []
    for n in range(4):
        before, after = corner[:, n - 1] - corner[:, n], corner[:, (n + 1) % 4] - corner[:, n]
        found.append(after[0] * before[1] - after[1] * before[0])
    return np.min(found)


# -- shape ---------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("angle", [0.0, 20.0, 45.0])
def test_volume_of_a_trapezoid_by_pappus(angle):
    """Pappus-Guldin: area of the section times the way of its centroid; centroid of a trapezoid: handbook."""
    drawn = cup(f'flank_angle = "{angle} deg"\n')
    mesh = mesh_of(drawn)
    run, lean = 2e-3 * np.tan(np.radians(angle)), drawn.half_taper_angle
    foot, crest = 1e-3 + 2 * run, 1e-3
    area = 0.5 * (foot + crest) * 2e-3
    out = 0.6e-3 + 2e-3 / 3 * (foot + 2 * crest) / (foot + crest)
    radii = [drawn.inner_radius(z) + out * np.cos(lean) for z in drawn.layer[1].ridge.middles]
    volume, _ = volume_moments(mesh, mesh.regions["ridges"], Measure())
    assert volume == pytest.approx(2 * np.pi * area * sum(radii), rel=1e-9)


def test_volume_of_a_rounded_ridge_converges_with_order():
    """A half round on a cylinder, flanks along the normal: rectangle and half disc, by Pappus-Guldin."""
    drawn = cup('crest = "rounded"\n', 'at = ["50 mm"]\n', top="56 mm")
    rectangle, disc = 1e-3 * 1.5e-3, 0.5 * np.pi * 0.25e-6
    start = 28e-3 + 0.6e-3
    way = rectangle * (start + 0.75e-3) + disc * (start + 1.5e-3 + 4 * 0.5e-3 / (3 * np.pi))
    exact = 2 * np.pi * way
    errors = []
    for fineness in (2.0, 4.0, 8.0):
        mesh = mesh_of(drawn, fineness)
        errors.append(abs(volume_moments(mesh, mesh.regions["ridges"], Measure())[0] - exact) / exact)
    orders = np.log2(np.array(errors[:-1]) / errors[1:])
    assert errors[-1] < 1e-3
    assert orders == pytest.approx([2.0, 2.0], abs=0.1)


@pytest.mark.parametrize(
    "more", ["", 'flank_angle = "60 deg"\n', 'crest = "rounded"\nflank_angle = "30 deg"\n']
)
@pytest.mark.parametrize("fineness", [1.0, 3.0])
def test_cells_of_ridges_are_valid_and_the_band_is_kept(more, fineness):
    mesh = mesh_of(cup(more, 'first = "30 mm"\npitch = "9 mm"\ncount = 4\n'), fineness)
    assert least_corner(mesh) > 0
    assert mesh.half_bandwidth <= 3 * mesh.nodes_across
    assert {"wall", "ridges", "base"} == set(mesh.regions)
    assert np.array_equal(np.unique(mesh.element_dofs), np.arange(mesh.size))


def test_outside_goes_over_the_ridges():
    drawn = cup('flank_angle = "20 deg"\n')
    mesh = mesh_of(drawn)
    points = mesh.points[:, mesh.edges["outside"][:2]]
    length = np.hypot(*(points[:, 1] - points[:, 0])).sum()
    slant = 95e-3 / np.cos(drawn.half_taper_angle)
    flank = 2e-3 / np.cos(np.radians(20.0))
    foot = 1e-3 + 4e-3 * np.tan(np.radians(20.0))
    assert length == pytest.approx(slant + 7 * (2 * flank + 1e-3 - foot), rel=1e-9)


def test_several_packs_of_ridges_on_one_wall():
    text = CUP.format(more='at = ["30 mm", "36 mm"]\n', top="78 mm")
    second = text[text.index('[[layer]]\nname = "ridges"') : text.index("[base]")]
    second = second.replace('"ridges"', '"ribs"').replace('["30 mm", "36 mm"]', '["60 mm"]')
    second = second.replace("polypropylene", "silicone rubber").replace('"2 mm"', '"1 mm"')
    mesh = mesh_of(Cup.from_text(text.replace("[base]", second + "[base]")))
    volumes = {name: volume_moments(mesh, mesh.regions[name], Measure())[0] for name in ("ridges", "ribs")}
    assert volumes["ridges"] > 3.5 * volumes["ribs"] > 0
    assert {"outside.ridges", "outside.ribs", "outside.wall"} <= set(mesh.edges)


def test_an_embossed_ridge_bends_the_layer_outside_over_a_hollow():
    text = CUP.format(more=ROW + 'flank_angle = "45 deg"\n', top="78 mm")
    text = text.replace('name = "ridges"\nmaterial = "polypropylene"', 'name = "hollow"\nmaterial = "air"')
    text = text.replace('height = "2 mm"', 'height = "1 mm"')
    skin = '[[layer]]\nname = "skin"\nmaterial = "cupstock board"\nthickness = "0.3 mm"\n'
    drawn = Cup.from_text(text.replace("[base]", skin + "[base]"))
    shape = build_meridian(drawn)
    mesh = build(shape)
    assert least_corner(mesh) > 0
    assert shape.outer_offset_at(36e-3) == pytest.approx(0.6e-3 + 1e-3 + 0.3e-3)
    assert shape.outer_offset_at(33e-3) == pytest.approx(0.9e-3)
    # one ring: crest and two smooth steps, each of half the area of its rectangle
    lean = np.cos(drawn.half_taper_angle)
    per_ring = 1e-3 * 1e-3 + 2 * 0.5 * 1e-3 * 1e-3 / lean
    volume, centroid = volume_moments(mesh, mesh.regions["hollow"], Measure())
    assert volume == pytest.approx(7 * 2 * np.pi * centroid[0] * per_ring, rel=0.02)
    assert mesh.half_bandwidth <= 3 * mesh.nodes_across


# -- heat ----------------------------------------------------------------------------------------------------


def fin(radius, thickness, length, conductivity, coefficient):
    """Fin on a cylinder at 1 degC in 0 degC: its efficiency and the temperature of its tip."""
    height = 4 * thickness
    rings = Rings(np.array([0.5 * (height - thickness)]), np.array([0.5 * (height + thickness)]))
    layers = (
        LayerBand("wall", SOLID, 0.05 * thickness, 0.0, height),
        LayerBand("fin", SOLID, length, float(rings.low[0]), float(rings.high[0]), rings=rings),
    )
    body = Meridian(Profile(np.array([0.0, height]), np.full(2, radius)), layers)
    lines = 1.0 - (1.0 - np.linspace(0.0, 1.0, 41)) ** 1.5
    mesh = build(body, fractions={"fin": lines})
    facets = mesh.edges["outside.fin"]
    r = mesh.points[0, facets[:2]]
    mesh = replace(mesh, edges={**mesh.edges, "flanks": facets[:, np.ptp(r, axis=0) > 1e-9]})
    held = FixedTemperature("inside", 1.0)
    solids = {"wall": solid(1e6), "fin": solid(conductivity)}
    run = system(mesh, solids, held, film("flanks", coefficient, 0.0))
    state = steady(run)
    area = EdgeQuadrature(mesh, mesh.edges["flanks"], Measure()).whole().area
    heat = float(run.conducted(state)[np.unique(mesh.edges["inside"])].sum())
    tip = state[np.abs(mesh.points[0] - (radius * 1.0 + 0.05 * thickness + length)) < 1e-12].mean()
    return heat / (coefficient * area), float(tip)


def kern_kraus(m, inner, outer):
    """Efficiency of an annular fin, adiabatic tip; Kern and Kraus, Extended Surface Heat Transfer, 1972."""
    a, b = m * inner, m * outer
    share = (k1(a) * i1(b) - i1(a) * k1(b)) / (k0(a) * i1(b) + i0(a) * k1(b))
    return 2.0 * inner / (m * (outer**2 - inner**2)) * share


@pytest.mark.parametrize(
    ("case", "efficiency", "tip"),
    [
        # library ht, fin_efficiency_Kern_Kraus, example of its documentation
        ((0.0127, 0.38e-3, 0.015875, 200.0, 58.0), 0.8412588620, 0.7911322379),
        # ridges of a cup, recomputed with the form of Kern and Kraus 1972
        ((0.040, 1e-3, 2e-3, 0.22, 10.0), 0.89181986, 0.83998428),
        ((0.040, 0.4e-3, 2e-3, 0.12, 10.0), 0.66020868, 0.50713935),
        ((0.040, 1e-3, 5e-3, 0.22, 10.0), 0.58698576, 0.41222976),
    ],
)
def test_a_ridge_is_an_annular_fin(case, efficiency, tip):
    found = fin(*case)
    radius, thickness, length, conductivity, coefficient = case
    m = np.sqrt(2 * coefficient / (conductivity * thickness))
    assert kern_kraus(m, radius, radius + length) == pytest.approx(efficiency, rel=1e-6)
    print(f"ridge {length * 1e3:g} mm: {found}, as a fin {efficiency}, {tip}")
    # half a percent, but one where the length is no more than twice the thickness: it is hardly a fin
    assert found == pytest.approx((efficiency, tip), rel=5e-3 if length > 3 * thickness else 1e-2)


def test_a_thick_ridge_is_no_fin():
    """Biot number h t / 2k = 0.45: fin theory takes the temperature across as even: 3 % off or more."""
    m = np.sqrt(2 * 200.0 / (0.22 * 1e-3))
    found, _ = fin(0.040, 1e-3, 2e-3, 0.22, 200.0)
    exact_of_fins = kern_kraus(m, 0.040, 0.042)
    print(f"thick ridge: {found:.5f}, as a fin {exact_of_fins:.5f}")
    assert abs(found / exact_of_fins - 1.0) > 0.03


@pytest.mark.parametrize(
    ("ratio", "efficiencies"),
    [
        # m L = 0.25, 0.5, 1, 1.5, 2; r2/r1 = 1.05 and 1.5 (Kern and Kraus 1972 form, recomputed)
        (1.05, (0.97918199, 0.92250390, 0.75712310, 0.59755823, 0.47589874)),
        (1.5, (0.97515760, 0.90852731, 0.72213084, 0.55285518, 0.43024018)),
        (2.0, (0.97137253, 0.89563591, 0.69153977, 0.51555396, 0.39332132)),
    ],
)
def test_efficiency_over_the_whole_range(ratio, efficiencies):
    radius = 0.04
    length = (ratio - 1.0) * radius
    thickness = length / 40.0
    for ml, target in zip((0.25, 0.5, 1.0, 1.5, 2.0), efficiencies, strict=True):
        coefficient = (ml / length) ** 2 * 0.2 * thickness / 2.0
        assert fin(radius, thickness, length, 0.2, coefficient)[0] == pytest.approx(target, rel=5e-3)


def test_a_straight_fin_is_nearly_that_of_a_large_ring():
    """Incropera et al., 6th ed. 2007, Table 3.4 case B: tanh(mL)/mL .76159416, tip .64805427 at mL = 1."""
    length, thickness = 2e-3, 5e-5
    found = fin(4.0, thickness, length, 0.2, (1.0 / length) ** 2 * 0.2 * thickness / 2.0)
    assert found == pytest.approx((0.76159416, 0.64805427), rel=5e-3)


# -- refusals ------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("more", "row", "message"),
    [
        ("", 'first = "30 mm"\npitch = "0.8 mm"\ncount = 7\n', r"rings meet.*larger pitch"),
        ("", 'first = "90 mm"\npitch = "6 mm"\ncount = 2\n', r"leaves the wall"),
        ("", 'first = "30 mm"\ncount = 7\n', r"layer\.ridges\.ridge\.pitch: missing"),
        ("", 'at = ["30 mm"]\ncount = 7\n', r"count.*given together with at"),
        ("", 'at = ["40 mm", "30 mm"]\n', r"do not rise"),
        ('flank_angle = "70 deg"\n', ROW, r"flank_angle.*0 deg to 60 deg"),
        ('crest = "rounded"\nheight = "0.2 mm"\n', ROW, r"arc over the crest"),
        ('crest = "pointed"\n', ROW, r"crest"),
    ],
)
def test_refused_ridges(more, row, message):
    text = CUP.format(more=more + row, top="78 mm")
    if "height" in more:
        text = text.replace('height = "2 mm"\n', "", 1)
    with pytest.raises(InputError, match=message) as caught:
        Cup.from_text(text)
    assert "\n" not in str(caught.value)


@pytest.mark.parametrize(
    ("layer", "message"),
    [
        ('name = "skin"\nmaterial = "cupstock board"\nthickness = "0.3 mm"', "not outermost"),
        (
            'name = "skin"\nmaterial = "cupstock board"\nthickness = "0.3 mm"\nto = "42 mm"',
            "stands where|not outermost",
        ),
    ],
)
def test_a_ridge_under_or_across_another_layer_is_refused(layer, message):
    text = CUP.format(more=ROW, top="78 mm")
    over = text.replace("[base]", f"[[layer]]\n{layer}\n[base]")
    with pytest.raises(InputError, match="not outermost"):
        Cup.from_text(over)
    under = text.replace('[[layer]]\nname = "ridges"', f'[[layer]]\n{layer}\n[[layer]]\nname = "ridges"')
    if "to =" in layer:
        with pytest.raises(InputError, match="stands where"):
            Cup.from_text(under)
    else:
        assert Cup.from_text(under).layer[2].name == "ridges"


def test_steep_embossing_is_refused():
    text = CUP.format(more=ROW + 'flank_angle = "10 deg"\n', top="78 mm")
    text = text.replace('name = "ridges"\nmaterial = "polypropylene"', 'name = "hollow"\nmaterial = "air"')
    skin = '[[layer]]\nname = "skin"\nmaterial = "cupstock board"\nthickness = "0.3 mm"\n'
    with pytest.raises(InputError, match=r"flank_angle.*steeper than 30 degrees"):
        Cup.from_text(text.replace("[base]", skin + "[base]"))
