"""The cup file: what it means, and that every file of `geometries` is one."""

import json
import math
import tomllib
from pathlib import Path

import pytest
from shipped import CUPS, SLEEVES

from cupfem.cup import Cup, Layer, Outline, cup_schema, load_cup
from cupfem.errors import InputError
from cupfem.inputs import defaults_used, resolved_toml

ROOT = Path(__file__).parents[1]

TUBE = """
base = "none"
[cup]
height = "100 mm"
{top}
{foot}
[[layer]]
name = "inner"
material = "cupstock board"
thickness = "2 mm"
[[layer]]
name = "shoulder"
material = "cupstock board"
thickness = "3 mm"
to = "40 mm"
"""


def double_wall() -> Cup:
    return load_cup(ROOT / "geometries" / "double_wall.toml")


def tube(top: str, foot: str) -> Cup:
    return Cup.from_text(TUBE.format(top=top, foot=foot))


@pytest.mark.parametrize("path", CUPS, ids=lambda path: path.stem)
def test_every_cup_of_the_project_is_one(path):
    cup = load_cup(path)
    # nominal sizes of 4 to 22 ounces: 110 to 700 ml, brimful up to a sixth more (trade tables)
    assert 110e-6 < cup.brimful_capacity < 820e-6
    assert "Invented for the demo" in path.read_text(encoding="utf-8")


def test_there_is_a_cup_for_each_family():
    """Straight and bent insides, every kind of layer, sleeves, a second cup, one by grammage."""
    cups = [load_cup(path) for path in CUPS]
    layers = [layer for cup in cups for layer in cup.layer]
    assert len(cups) >= 16
    assert len(SLEEVES) >= 4
    for key in ("ridge", "flute", "strut", "grammage", "thickness_along", "fit", "fit_gap", "pressure"):
        assert any(getattr(layer, key) for layer in layers), key
    for key in ("inner_emissivity", "outer_emissivity"):
        assert any(getattr(layer, key) is not None for layer in layers), key
    assert {cup.outline.inner_curve for cup in cups if cup.outline.inner_profile} == {None, "spline"}


@pytest.mark.parametrize("path", SLEEVES, ids=lambda path: path.stem)
def test_every_sleeve_of_the_project_goes_on_a_cup(path):
    worn = load_cup(ROOT / "geometries" / "single_board.toml").wearing(path)
    assert len(worn.layer) > 2
    assert "Invented for the demo" in path.read_text(encoding="utf-8")


def test_lengths_are_metres():
    cup = double_wall()
    assert cup.height == 0.095
    assert cup.inner_radius(cup.height) == pytest.approx(0.039, abs=1e-15)
    assert cup.inner_radius(0.0) == pytest.approx(0.0275, abs=1e-15)
    gap = cup.layer[1]
    assert (gap.name, gap.from_, gap.to, gap.blend) == ("gap", 0.014, 0.088, 0.003)
    assert gap.contact_fraction == 0.02
    assert gap.contact is None
    assert cup.layer_range(cup.layer[0]) == (0.0, 0.095)
    assert cup.base_disc is not None
    assert cup.floor == pytest.approx(8.35e-3)


def test_total_wall_thickness_counts_the_layers_that_are_there():
    cup = double_wall()
    assert cup.wall_thickness(0.050) == pytest.approx(1.63e-3)
    assert cup.wall_thickness(0.005) == pytest.approx(0.63e-3)


def test_taper_is_that_of_the_drawing():
    # tan a = (78 - 55) / 2 / 95, by hand: 6.902 degrees
    assert math.degrees(double_wall().half_taper_angle) == pytest.approx(6.902, abs=5e-4)


def test_capacity_is_the_frustum_between_base_and_brim():
    # disc by disc, the definition of the volume, with the midpoint rule
    cup = double_wall()
    n = 2000
    step = (cup.height - cup.floor) / n
    discs = sum(math.pi * cup.inner_radius(cup.floor + (i + 0.5) * step) ** 2 * step for i in range(n))
    assert cup.brimful_capacity == pytest.approx(discs, rel=1e-7)


def test_an_open_tube_has_no_base():
    cup = tube('inner_top_diameter = "80 mm"', 'inner_foot_diameter = "80 mm"')
    assert cup.base_disc is None
    assert cup.floor == 0.0
    assert cup.volume(0.05) == pytest.approx(math.pi * 0.04**2 * 0.05)
    assert 'base = "none"' in resolved_toml(cup)


def outer_point_distance(cup: Cup, radius: float, height: float) -> float:
    """Distance of a point of the section from the straight inside face."""
    along = (cup.inner_radius(cup.height) - cup.inner_radius(0.0), cup.height)
    away = (radius - cup.inner_radius(0.0), height)
    return abs(along[0] * away[1] - along[1] * away[0]) / math.hypot(*along)


@pytest.mark.parametrize(
    ("top", "foot", "radius", "height", "thickness"),
    [
        ('top_outside_diameter = "90 mm"', 'inner_foot_diameter = "50 mm"', 0.045, 0.100, 0.002),
        ('inner_top_diameter = "90 mm"', 'foot_outside_diameter = "60 mm"', 0.030, 0.0, 0.005),
        ('top_outside_diameter = "90 mm"', 'foot_outside_diameter = "60 mm"', 0.045, 0.100, 0.002),
        ('top_outside_diameter = "90 mm"', 'foot_outside_diameter = "60 mm"', 0.030, 0.0, 0.005),
        ('top_outside_diameter = "60 mm"', 'foot_outside_diameter = "80 mm"', 0.040, 0.0, 0.005),
    ],
)
def test_an_outside_diameter_lies_one_wall_away_from_the_inside_face(top, foot, radius, height, thickness):
    """Thickness is normal to the wall, so the point given in the drawing is that far from the inside face."""
    cup = tube(top, foot)
    assert outer_point_distance(cup, radius, height) == pytest.approx(thickness, rel=1e-12)
    assert cup.inner_radius(height) < radius


def test_own_material_wins_and_the_library_is_read():
    text = (ROOT / "geometries" / "double_wall.toml").read_text(encoding="utf-8")
    own = '[material."trial board"]\nlike = "cupstock board"\nconductivity_through = "0.08 W/(m K)"\n'
    cup = Cup.from_text(text.replace('material = "cupstock board"', 'material = "trial board"', 1) + own)
    assert cup.material("trial board").conductivity_through.value == 0.08
    assert cup.material("air").kind == "gas"
    assert Cup.from_text(resolved_toml(cup)) == cup


def test_a_gap_may_be_evacuated():
    text = (ROOT / "geometries" / "double_wall.toml").read_text(encoding="utf-8")
    for written, pressure in (("0 Pa", 0.0), ("1 mbar", 100.0)):
        cup = Cup.from_text(text.replace("contact_fraction", f'pressure = "{written}"\ncontact_fraction'))
        assert cup.layer[1].pressure == pytest.approx(pressure)


def test_blends_are_where_something_outside_moves_in():
    cup = double_wall()
    inner, gap, outer = cup.layer
    assert cup.blends(gap) == (3e-3, 3e-3)
    assert cup.blends(inner) == cup.blends(outer) == (0.0, 0.0)


@pytest.mark.parametrize("path", CUPS, ids=lambda path: path.stem)
def test_resolved_file_gives_the_same_cup(path):
    cup = load_cup(path)
    again = Cup.from_text(resolved_toml(cup))
    assert again == cup
    assert resolved_toml(again) == resolved_toml(cup)


def test_resolved_file_is_exact_for_inches():
    text = (ROOT / "geometries" / "double_wall.toml").read_text(encoding="utf-8")
    cup = Cup.from_text(text.replace('"0.33 mm"', '"13.1 mil"').replace('"95 mm"', '"3.74 in"'))
    assert cup.layer[0].thickness == pytest.approx(13.1 * 25.4e-6, rel=1e-12)
    again = Cup.from_text(resolved_toml(cup))
    assert again.height == pytest.approx(cup.height, rel=1e-14)
    assert again.layer[0].thickness == pytest.approx(cup.layer[0].thickness, rel=1e-14)


def test_resolved_file_holds_the_defaults():
    gap = tomllib.loads(resolved_toml(double_wall()))["layer"][1]
    assert gap["blend"] == "3 mm"
    assert gap["contact_conductance"] == "100 W/(m^2 K)"


def test_defaults_are_told():
    told = defaults_used(double_wall())
    assert 'layer.gap.blend = "3 mm"' in told
    assert "layer.inner.to = the brim" in told
    assert not any("layer.inner.contact" in line or "thickness" in line for line in told)
    assert defaults_used(Cup.from_text(resolved_toml(double_wall()))) != told


def test_python_works_like_the_file():
    text = (ROOT / "geometries" / "double_wall.toml").read_text(encoding="utf-8")
    data = tomllib.loads(text)
    layers = [
        {("from_" if key == "from" else key): value for key, value in row.items()} for row in data["layer"]
    ]
    cup = Cup(
        title=data["title"],
        outline=Outline(**data["cup"]),
        layer=tuple(Layer(**row) for row in layers),
        base=data["base"],
    )
    assert cup == Cup.from_text(text)


def test_a_cup_is_frozen():
    with pytest.raises(ValueError, match="frozen"):
        double_wall().layer[0].thickness = 1.0


def test_published_schema_is_up_to_date():
    published = (ROOT / "docs" / "schemas" / "cup.schema.json").read_text(encoding="utf-8")
    assert json.loads(published) == cup_schema(), "run python docs/schemas/write.py"


def test_schema_names_the_keys_of_the_file():
    schema = cup_schema()
    assert set(schema["required"]) == {"cup", "layer", "base"}
    layer = schema["$defs"]["Layer"]
    assert {"from", "to", "contact_fraction"} <= set(layer["properties"])
    assert layer["additionalProperties"] is False
    assert layer["properties"]["blend"]["default"] == "3 mm"


def test_a_message_from_python_has_the_names_of_python():
    with pytest.raises(InputError, match=r'^layer\.from_: "14": no unit; write the unit too'):
        Layer(name="a", material="air", thickness="1 mm", from_="14")
