"""Sleeves as files of their own, their loose fit, and a cup in a second cup."""

import json
from pathlib import Path

import numpy as np
import pytest

from cupfem.axisymmetry import Measure, volume_moments
from cupfem.cup import Cup, Sleeve, load_cup, load_sleeve, sleeve_schema
from cupfem.errors import InputError
from cupfem.fluids import air_conductivity
from cupfem.gaps import exchange_factor, radiation_conductance
from cupfem.inputs import resolved_toml
from cupfem.meridian import build as build_meridian
from cupfem.mesh import build

CUP = """
title = "Plain cup"
{sleeve}
[cup]
height = "95 mm"
inner_top_diameter = "78 mm"
inner_foot_diameter = "55 mm"
[[layer]]
name = "wall"
material = "cupstock board"
thickness = "0.35 mm"
[base]
material = "cupstock board"
thickness = "0.35 mm"
recess = "8 mm"
"""
SLEEVE = """
title = "Felt sleeve"
height = "55 mm"
bottom = "28 mm"
fit = "350 W/(m^2 K)"
[[layer]]
name = "felt"
material = "wool felt"
thickness = "2 mm"
"""
LOOSE = SLEEVE.replace(
    'bottom = "28 mm"', 'bottom_inside_diameter = "{bottom}"\ntop_inside_diameter = "{top}"'
)


def plain():
    return Cup.from_text(CUP.format(sleeve=""))


def worn(text=SLEEVE, cup=None):
    return (cup or plain()).wearing(Sleeve.from_text(text))


def test_a_sleeve_becomes_the_outermost_layer():
    cup = worn()
    felt = cup.layer[-1]
    assert (felt.name, felt.from_, felt.fit) == ("felt", 0.028, 350.0)
    assert felt.to == pytest.approx(0.083)
    assert cup.sleeve is None
    mesh = build(build_meridian(cup))
    slant = 55e-3 / np.cos(cup.half_taper_angle)
    volume, _ = volume_moments(mesh, mesh.regions["felt"], Measure())
    # Pappus-Guldin: a rectangle turned about the axis
    middle = cup.inner_radius(55.5e-3) + (0.35e-3 + 1e-3) * np.cos(cup.half_taper_angle)
    assert volume == pytest.approx(2 * np.pi * middle * slant * 2e-3, rel=1e-9)
    assert mesh.half_bandwidth <= 3 * mesh.nodes_across


def test_file_key_and_method_give_the_same_cup(tmp_path):
    (tmp_path / "felt.toml").write_text(SLEEVE, encoding="utf-8")
    (tmp_path / "cup.toml").write_text(CUP.format(sleeve='sleeve = "felt.toml"'), encoding="utf-8")
    cup = load_cup(tmp_path / "cup.toml")
    assert cup == worn()
    assert cup == plain().wearing(tmp_path / "felt.toml") == plain().wearing(str(tmp_path / "felt.toml"))
    assert load_sleeve(tmp_path / "felt.toml") == Sleeve.from_text(SLEEVE)
    # the resolved file stands alone
    assert Cup.from_text(resolved_toml(cup)) == cup
    assert "sleeve =" not in resolved_toml(cup)


def test_a_sleeve_as_a_table_of_the_cup_file():
    table = "[sleeve]\n" + SLEEVE.strip().replace("[[layer]]", "[[sleeve.layer]]")
    assert Cup.from_text(CUP.format(sleeve="") + table) == worn()


def test_its_own_materials_come_with_it():
    own = (
        SLEEVE.replace("wool felt", "wadding")
        + '[material."wadding"]\nlike = "wool felt"\ndensity = "90 kg/m^3"\n'
    )
    cup = worn(own)
    assert cup.material("wadding").density.value == 90.0
    clash = CUP.format(sleeve="") + '[material."wadding"]\nlike = "wool felt"\n'
    with pytest.raises(InputError, match=r"wadding.*not alike"):
        worn(own, Cup.from_text(clash))


def test_ridges_of_a_sleeve_count_from_its_lower_end():
    ribs = SLEEVE + (
        '[[layer]]\nname = "ribs"\nmaterial = "silicone rubber"\n[layer.ridge]\nheight = "1 mm"\n'
        'crest_width = "1 mm"\nat = ["10 mm", "20 mm"]\n'
    )
    cup = worn(ribs)
    assert cup.layer[-1].ridge.middles == pytest.approx((0.038, 0.048))
    mesh = build(build_meridian(cup))
    assert len(mesh.regions["ribs"]) > 0


def test_names_that_meet_are_told_apart():
    assert worn(SLEEVE.replace('"felt"', '"wall"')).layer[-1].name == "sleeve-wall"


def test_a_looser_taper_stands_off_where_the_drawing_says():
    """Gap at both ends: radius of the sleeve less that of the cup, along the normal (trigonometry)."""
    text = LOOSE.format(bottom="64 mm", top="78 mm").replace("height =", 'bottom = "30 mm"\nheight =')
    cup = worn(text)
    lean = np.cos(cup.half_taper_angle)
    outer = [27.5e-3 + 11.5e-3 * z / 95e-3 + 0.35e-3 / lean for z in (30e-3, 85e-3)]
    expected = [(r - o) * lean for r, o in zip((32e-3, 39e-3), outer, strict=True)]
    assert cup.layer[-1].fit_gap == pytest.approx(expected, rel=1e-9)
    # conductance: air of that thickness and what lies between touching faces, with radiation (in parallel)
    contact = build_meridian(cup).layers[-1]
    radiation = radiation_conductance(
        50.0, 50.0, exchange_factor(0.92, cup.material("wool felt").emissivity.value)
    )
    air = air_conductivity(50.0)
    for height, gap in zip((30e-3, 85e-3), expected, strict=True):
        by_hand = air / (gap + air / (350.0 - radiation)) + radiation
        assert contact.inner_conductance_at(height) == pytest.approx(by_hand, rel=1e-9)
    # touching, it is the fit alone
    assert contact.inner_conductance.__call__(np.array(30e-3)) < 350.0


def test_without_a_place_it_stands_where_it_grips():
    cup = worn(LOOSE.format(bottom="64 mm", top="78 mm"))
    felt = cup.layer[-1]
    assert min(felt.fit_gap) == pytest.approx(0.0, abs=1e-9)
    assert max(felt.fit_gap) > 1e-5
    low = felt.from_
    touching = cup.inner_radius(low) + 0.35e-3 / np.cos(cup.half_taper_angle)
    upper = cup.inner_radius(low + 55e-3) + 0.35e-3 / np.cos(cup.half_taper_angle)
    assert min(32e-3 - touching, 39e-3 - upper) == pytest.approx(0.0, abs=1e-9)
    assert Cup.from_text(resolved_toml(cup)).layer[-1].fit_gap == pytest.approx(felt.fit_gap, abs=1e-12)


def test_a_cup_in_a_second_cup(tmp_path):
    """Two equal cups: the heel of one stands on the base of the other, 8.35 mm higher."""
    cup = plain().wearing(plain())
    second = cup.layer[-1]
    assert second.name == "sleeve-wall"
    assert (second.from_, second.to) == (0.0, pytest.approx(95e-3 - 8.35e-3))
    lean = cup.half_taper_angle
    apart = (8.35e-3 * np.tan(lean) - 0.35e-3 / np.cos(lean)) * np.cos(lean)
    assert second.fit_gap == pytest.approx((apart, apart), rel=1e-9)
    mesh = build(build_meridian(cup))
    assert mesh.half_bandwidth <= 3 * mesh.nodes_across
    (tmp_path / "outer.toml").write_text(CUP.format(sleeve=""), encoding="utf-8")
    assert plain().wearing(tmp_path / "outer.toml") == cup


@pytest.mark.parametrize(
    ("old", "new", "message"),
    [
        ('height = "55 mm"', 'height = "70 mm"', r"sleeve\.height.*overhangs the brim by 3 mm"),
        ('bottom = "28 mm"\n', "", r"bottom: missing"),
        ('height = "55 mm"\n', "", r"height: missing"),
        ("[[layer]]", 'top_inside_diameter = "70 mm"\n[[layer]]', r"bottom_inside_diameter: missing"),
        (
            "[[layer]]",
            'bottom_inside_diameter = "60 mm"\ntop_inside_diameter = "74 mm"\n[[layer]]',
            r"sleeve\.bottom.*overlaps the cup by 1\.\d+ mm",
        ),
        ("wool felt", "air", r"layer\.felt.*outermost"),
        ("wool felt", "wool felts", r"layer\.felt\.material.*mean.*wool felt"),
        ("thickness", "thicknes", r"thicknes: unknown key"),
        ('name = "felt"', 'name = "felt"\nfrom = "3 mm"', r"from: unknown key"),
    ],
)
def test_refused_sleeves(old, new, message):
    assert old in SLEEVE
    with pytest.raises(InputError, match=message) as caught:
        worn(SLEEVE.replace(old, new, 1))
    assert "\n" not in str(caught.value)


@pytest.mark.parametrize(
    ("bottom", "top", "message"),
    [("50 mm", "60 mm", "does not go on"), ("90 mm", "95 mm", "does not grip")],
)
def test_a_sleeve_of_the_wrong_size_is_refused(bottom, top, message):
    with pytest.raises(InputError, match=message):
        worn(LOOSE.format(bottom=bottom, top=top))


def test_diameters_need_a_fit():
    with pytest.raises(InputError, match=r"fit: missing"):
        Sleeve.from_text(LOOSE.format(bottom="64 mm", top="78 mm").replace('fit = "350 W/(m^2 K)"\n', ""))


def test_a_sleeve_over_ridges_is_refused():
    ridges = '[[layer]]\nname = "ribs"\nmaterial = "silicone rubber"\n[layer.ridge]\nheight = "1 mm"\n'
    text = CUP.format(sleeve="").replace("[base]", ridges + 'crest_width = "1 mm"\nat = ["40 mm"]\n[base]')
    with pytest.raises(InputError, match=r"not outermost: \"felt\" lies over it"):
        worn(cup=Cup.from_text(text))


def test_a_missing_file_is_told(tmp_path):
    (tmp_path / "cup.toml").write_text(CUP.format(sleeve='sleeve = "felt.toml"'), encoding="utf-8")
    with pytest.raises(InputError, match="no such file"):
        load_cup(tmp_path / "cup.toml")


def test_published_schema_is_up_to_date():
    path = Path(__file__).parents[1] / "docs" / "schemas" / "sleeve.schema.json"
    assert json.loads(path.read_text(encoding="utf-8")) == sleeve_schema(), "run python docs/schemas/write.py"
