"""Bent inside faces, thickness along the wall, grammage, reflective faces: shapes and exact heat flows."""

import numpy as np
import pytest
from verification.bodies import SOLID, solid, steady, system

from cupfem.axisymmetry import EdgeQuadrature, Measure, volume_moments
from cupfem.conduction import FixedTemperature
from cupfem.cup import Cup, spline
from cupfem.edges import gap_of
from cupfem.errors import InputError
from cupfem.gaps import exchange_factor
from cupfem.inputs import resolved_toml
from cupfem.meridian import LayerBand, Meridian, Profile
from cupfem.meridian import build as build_meridian
from cupfem.mesh import build

CUP = """
[cup]
height = "95 mm"
{shape}
[[layer]]
name = "wall"
material = "cupstock board"
{thickness}
{more}
[base]
material = "cupstock board"
thickness = "0.35 mm"
recess = "8 mm"
"""
CONE = 'inner_top_diameter = "78 mm"\ninner_foot_diameter = "55 mm"'
BENT = 'inner_profile = [["0 mm", "50 mm"], ["20 mm", "62 mm"], ["60 mm", "66 mm"], ["95 mm", "80 mm"]]'
GAP = """
[[layer]]
name = "gap"
material = "air"
{gap}
[[layer]]
name = "outer"
material = "cupstock board"
thickness = "0.3 mm"
{outer}
"""


def cup(shape=CONE, thickness='thickness = "0.35 mm"', more=""):
    return Cup.from_text(CUP.format(shape=shape, thickness=thickness, more=more))


def frustum(height, lower, upper):
    return np.pi / 3 * height * (lower**2 + lower * upper + upper**2)


# -- inside face ---------------------------------------------------------------------------------------------


def test_volume_in_straight_pieces_is_a_sum_of_frusta():
    """Euclid, Elements, XII.10 (frustum of a cone)."""
    drawn = cup(BENT)
    floor = 8.35e-3
    at_floor = 25e-3 + (31e-3 - 25e-3) * floor / 20e-3
    exact = frustum(20e-3 - floor, at_floor, 31e-3) + frustum(40e-3, 31e-3, 33e-3)
    exact += frustum(10e-3, 33e-3, 35e-3)
    level = 70e-3
    assert drawn.volume(level) == pytest.approx(exact, rel=1e-12)
    assert drawn.level(exact) == pytest.approx(level, abs=1e-12)
    mesh = build(build_meridian(drawn))
    area = EdgeQuadrature(mesh, mesh.edges["inside"], Measure()).between(20e-3, 60e-3).area
    assert area == pytest.approx(np.pi * 64e-3 * np.hypot(40e-3, 2e-3), rel=1e-9)


def test_a_layer_keeps_its_thickness_around_a_corner():
    """Distance from the outer corner to both straight pieces of the inside face: analytic geometry."""
    drawn = cup(BENT, 'thickness = "2 mm"')
    mesh = build(build_meridian(drawn))
    corner = mesh.points[
        :, np.isclose(mesh.points[1], 0.02, atol=2e-3) & (mesh.wall_coordinates[1] > 1.999e-3)
    ]
    s = build_meridian(drawn).profile.arc_length_at(0.02)
    outer = [
        p
        for p, c in zip(mesh.points.T, mesh.wall_coordinates.T, strict=True)
        if abs(c[0] - s) < 1e-9 and c[1] > 1.999e-3
    ]
    assert corner.shape[1] > 0
    for low, high in (((25e-3, 0.0), (31e-3, 20e-3)), ((31e-3, 20e-3), (33e-3, 60e-3))):
        along = np.subtract(high, low) / np.hypot(*np.subtract(high, low))
        away = np.subtract(outer[0], low)
        assert abs(along[0] * away[1] - along[1] * away[0]) == pytest.approx(2e-3, rel=1e-9)


def barrel(z):
    """Radius of a barrel: an arc of a circle."""
    return 0.03 + np.sqrt(0.2**2 - (np.asarray(z) - 0.05) ** 2) - 0.2


def test_a_spline_converges_to_the_curve_it_is_drawn_through():
    """Barrel of 200 mm radius, its volume by quadrature; a spline converges with order 4 (de Boor 1978)."""
    z = np.linspace(0.0, 0.1, 20001)
    exact = np.trapezoid(np.pi * barrel(z) ** 2, z)
    errors = []
    for points in (5, 9, 17):
        knots = np.linspace(0.0, 0.1, points)
        errors.append(abs(spline(knots, barrel(knots)).volume_below(0.1) / exact - 1.0))
    # natural ends lower the order there: 3 at least
    assert np.all(np.log2(np.array(errors[:-1]) / errors[1:]) > 2.7)
    assert errors[-1] < 1e-4


def test_the_mesh_of_a_bent_face_converges_with_order_two():
    """Straight sides on a curve: area and volume of the wall with order 2, against a very fine mesh's."""
    knots = np.linspace(0.0, 0.1, 41)
    layer = LayerBand("wall", SOLID, 2e-3, 0.0, 0.1)
    body = Meridian(spline(knots, barrel(knots)), (layer,))
    z = np.linspace(0.0, 0.1, 400001)
    slope = np.gradient(barrel(z), z)
    exact = np.trapezoid(2 * np.pi * barrel(z) * np.hypot(1.0, slope), z)
    errors = []
    for cells in (8, 16, 32):
        mesh = build(body, stations=np.linspace(0.0, 0.1, cells + 1))
        errors.append(abs(EdgeQuadrature(mesh, mesh.edges["inside"], Measure()).whole().area / exact - 1.0))
    assert np.log2(np.array(errors[:-1]) / errors[1:]) == pytest.approx([2.0, 2.0], abs=0.1)


def test_a_spline_cup_is_meshed():
    drawn = cup(BENT + '\ninner_curve = "spline"', more=GAP.format(gap='thickness = "1 mm"', outer=""))
    straight = cup(BENT, more=GAP.format(gap='thickness = "1 mm"', outer=""))
    mesh = build(build_meridian(drawn))
    assert mesh.half_bandwidth <= 3 * mesh.nodes_across
    assert abs(drawn.brimful_capacity / straight.brimful_capacity - 1.0) > 1e-3
    # passes through its points
    assert drawn.inner_radius(20e-3) == pytest.approx(31e-3, abs=1e-8)


def test_points_of_a_file_of_two_columns(tmp_path):
    (tmp_path / "inside.csv").write_text(
        "height_mm,diameter_mm\n0,50\n20,62\n60,66\n95,80\n", encoding="utf-8"
    )
    text = CUP.format(shape='inner_profile = "inside.csv"', thickness='thickness = "0.35 mm"', more="")
    (tmp_path / "cup.toml").write_text(text, encoding="utf-8")
    drawn = Cup.load(tmp_path / "cup.toml")
    assert drawn.volume(0.07) == pytest.approx(cup(BENT).volume(0.07), rel=1e-12)
    assert Cup.from_text(resolved_toml(drawn)) == drawn
    for content, message in (
        ("0,50\n95,80\n", "does not name the columns"),
        ("height_mm,diameter_mm\n0,50,3\n", "two columns"),
        ("height_mm,diameter_mm\n0,fifty\n95,80", "inner_profile"),
    ):
        (tmp_path / "inside.csv").write_text(content, encoding="utf-8")
        with pytest.raises(InputError, match=message):
            Cup.load(tmp_path / "cup.toml")
    (tmp_path / "inside.csv").unlink()
    with pytest.raises(InputError, match="cannot be read"):
        Cup.load(tmp_path / "cup.toml")


# -- thickness -----------------------------------------------------------------------------------------------


def cones(inner, outer, low, high, fineness):
    """Shell between two coaxial cones with common apex (angles in degrees, distances from the apex in m)."""
    lean, opening = np.radians(inner), np.radians(outer - inner)
    z = np.array([low, high]) * np.cos(lean)
    profile = Profile(z - z[0], np.array([low, high]) * np.sin(lean))
    along = (z - z[0], np.array([low, high]) * np.tan(opening))
    layer = LayerBand("wall", SOLID, float(along[1].mean()), 0.0, float(z[1] - z[0]), along=along)
    return build(Meridian(profile, (layer,)), fineness)


@pytest.mark.parametrize(
    ("case", "conductivity", "temperatures", "target", "tolerance"),
    [
        # Q = 2 pi k (rho2 - rho1) dT / ln[tan(t2/2)/tan(t1/2)], classical (separation in the cone's angle)
        ((5.0, 5.2, 0.35, 0.45), 0.12, (80.0, 60.0), 38.3974207362, 1e-4),
        # a thick shell: its ends are cut straight instead of along the sphere, which is worth a permille
        ((10.0, 14.0, 0.2, 0.3), 1.0, (1.0, 0.0), 1.8538732365, 5e-3),
    ],
)
def test_shell_between_coaxial_cones(case, conductivity, temperatures, target, tolerance):
    mesh = cones(*case, 2.0)
    held = FixedTemperature("inside", temperatures[0]), FixedTemperature("outside", temperatures[1])
    body = system(mesh, {"wall": solid(conductivity)}, *held)
    state = steady(body)
    heat = float(body.conducted(state)[np.unique(mesh.edges["inside"])].sum())
    print(f"coaxial cones {case}: {heat:.7f} W, exact {target:.7f}, {heat / target - 1.0:.1e}")
    assert heat == pytest.approx(target, rel=tolerance)


def test_thickness_along_the_wall_is_that_of_the_drawing():
    """Volume of a wall whose outer face is a cone too: difference of two frusta, for a cylinder inside."""
    drawn = cup(
        'inner_top_diameter = "60 mm"\ninner_foot_diameter = "60 mm"',
        'thickness_along = [["0 mm", "3 mm"], ["95 mm", "1 mm"]]',
    )
    mesh = build(build_meridian(drawn))
    volume, _ = volume_moments(mesh, mesh.regions["wall"], Measure())
    assert volume == pytest.approx(frustum(95e-3, 33e-3, 31e-3) - np.pi * 30e-3**2 * 95e-3, rel=1e-9)
    assert drawn.layer[0].thickness == pytest.approx(2e-3)
    assert drawn.layer[0].thickness_at(23.75e-3) == pytest.approx(2.5e-3)
    assert Cup.from_text(resolved_toml(drawn)) == drawn


def test_a_tapered_gap():
    """Unequal tapers: the gap is 0.5 mm at its lower end and 2 mm at its upper."""
    gap = 'from = "14 mm"\nto = "88 mm"\nthickness_along = [["14 mm", "0.5 mm"], ["88 mm", "2 mm"]]'
    shape = build_meridian(cup(more=GAP.format(gap=gap, outer="")))
    assert shape.layers[1].thickness_at([14e-3, 51e-3, 88e-3]) == pytest.approx([0.5e-3, 1.25e-3, 2e-3])
    mesh = build(shape)
    assert mesh.half_bandwidth <= 3 * mesh.nodes_across
    faces = mesh.gaps["gap"]
    width = mesh.points[0, faces.outer].mean(axis=0) - mesh.points[0, faces.inner].mean(axis=0)
    assert width.max() > 1.9e-3
    assert width[width > 0.1e-3].min() < 0.6e-3


def test_grammage_and_density_are_a_thickness():
    # 620 kg/m3 is the library's density of the board: 217 g/m2 are 0.35 mm
    drawn = cup(thickness='grammage = "217 g/m^2"')
    assert drawn.layer[0].thickness == pytest.approx(0.35e-3, rel=1e-12)
    assert drawn.brimful_capacity == cup().brimful_capacity
    again = Cup.from_text(resolved_toml(drawn))
    assert again == drawn
    assert 'grammage = "217 g/m^2"' in resolved_toml(drawn)
    pounds = cup(thickness='grammage = "44.45 lb/3000 ft^2"').layer[0].thickness
    assert pounds == pytest.approx(44.45 * 0.45359237 / (3000 * 0.3048**2) / 620.0, rel=1e-9)


# -- emissivity ----------------------------------------------------------------------------------------------


def test_reflective_face_of_a_gap():
    """Paper against foil, 40 and 43 mm: exchange factor .05323246 (Incropera, 6th ed. 2007, Eq. 13.20)."""
    shape = 'inner_top_diameter = "79.3 mm"\ninner_foot_diameter = "79.3 mm"'
    own = '[material."paper"]\nlike = "cupstock board"\nemissivity = 0.9\n'
    text = CUP.format(
        shape=shape,
        thickness='thickness = "0.35 mm"',
        more=GAP.format(gap='thickness = "3 mm"', outer="inner_emissivity = 0.05"),
    )
    drawn = Cup.from_text(text.replace('material = "cupstock board"', 'material = "paper"') + own)
    gap = gap_of(drawn, 1)
    assert (gap.emissivity_inner, gap.emissivity_outer) == (0.9, 0.05)
    factor = exchange_factor(gap.emissivity_inner, gap.emissivity_outer, 40.0 / 43.0)
    assert factor == pytest.approx(0.05323246, abs=5e-9)


# -- refusals ------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("old", "new", "message"),
    [
        (
            CONE,
            BENT + '\ninner_top_diameter = "78 mm"',
            r"inner_top_diameter.*given together with inner_profile",
        ),
        (CONE, CONE + '\ninner_curve = "spline"', r"inner_curve.*change nothing"),
        (
            CONE,
            'inner_profile = [["0 mm", "50 mm"], ["90 mm", "80 mm"]]',
            r"inner_profile.*and the wall from",
        ),
        (CONE, 'inner_profile = [["0 mm", "50 mm"]]', r"two or more heights"),
        (CONE, 'inner_profile = [["0 mm", "50 mm"], ["5 mm", "80 mm"], ["95 mm", "80 mm"]]', r"leans by 71"),
        ('thickness = "0.35 mm"', "", r"layer\.wall\.thickness: missing; write thickness"),
        (
            'thickness = "0.35 mm"',
            'thickness = "0.35 mm"\ngrammage = "200 g/m^2"',
            r"grammage.*given together",
        ),
        (
            'thickness = "0.35 mm"',
            'thickness_along = [["0 mm", "0.3 mm"], ["50 mm", "0.4 mm"]]',
            r"thickness_along.*reach over the whole layer",
        ),
        ('thickness = "0.35 mm"', 'thickness_along = [["0 mm", "0.3 mm"]]', r"two or more heights"),
        (
            'thickness = "0.35 mm"',
            'thickness_along = [["0 mm", "0 mm"], ["95 mm", "1 mm"]]',
            r"more than zero",
        ),
    ],
)
def test_refused_shapes(old, new, message):
    text = CUP.format(shape=CONE, thickness='thickness = "0.35 mm"', more="")
    with pytest.raises(InputError, match=message) as caught:
        Cup.from_text(text.replace(old, new, 1))
    assert "\n" not in str(caught.value)


def test_an_emissivity_that_no_face_shows_is_refused():
    two = (
        '[[layer]]\nname = "second"\nmaterial = "kraft liner"\nthickness = "0.3 mm"\ninner_emissivity = 0.1\n'
    )
    with pytest.raises(InputError, match=r"layer\.second\.inner_emissivity.*no gas, room or inside"):
        cup(more=two)
    assert cup(more=two.replace("inner_emissivity", "outer_emissivity")).layer[1].outer_emissivity == 0.1
