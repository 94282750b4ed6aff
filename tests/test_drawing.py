"""Facts of a drawing against the theorem of Pappus and Guldin and against counting by hand."""

from math import hypot, pi, radians
from pathlib import Path

import numpy as np
import pytest
from shipped import CUPS

from cupfem.cup import Cup, load_cup
from cupfem.drawing import survey

GEOMETRIES = Path(__file__).parents[1] / "geometries"
PLAIN = """
base = "none"
[cup]
height = "90 mm"
inner_top_diameter = "80 mm"
inner_foot_diameter = "56 mm"
[[layer]]
name = "wall"
material = "trial"
thickness = "2 mm"
[material."trial"]
conductivity_through = "0.1 W/(m K)"
density = "700 kg/m^3"
specific_heat = "1400 J/(kg K)"
emissivity = 0.9
surface_class = "board"
"""
COST = "cost_per_kg = 1.5\n"


def pappus(height: float, foot: float, top: float, thickness: float) -> float:
    """Volume of a conical wall: area of its parallelogram times the way of its centroid (Bronshtein and
    Semendyayev, Handbook of Mathematics, Pappus-Guldin theorems); radii at the inside."""
    slant = hypot(height, top - foot)
    centroid = (foot + top) / 2 + thickness / 2 * (height / slant)
    return 2 * pi * centroid * slant * thickness


def test_mass_of_a_conical_wall():
    drawing = survey(Cup.from_text(PLAIN))
    (wall,) = drawing.parts
    volume = pappus(0.090, 0.028, 0.040, 0.002)
    assert wall.volume == pytest.approx(volume, rel=1e-12)
    assert drawing.mass == pytest.approx(700 * volume, rel=1e-12)
    assert drawing.figures()["wall_volume_cm3"] == pytest.approx(1e6 * volume)


def test_mass_of_a_disc():
    """The base of a real cup reaches the inside face of the wall, whose radius changes over 0.35 mm."""
    cup = load_cup(GEOMETRIES / "double_wall.toml")
    (base,) = (part for part in survey(cup).parts if part.name == "base")
    radius = cup.inner_radius(cup.floor - base.thickness / 2)
    assert base.volume == pytest.approx(pi * radius**2 * base.thickness, rel=1e-5)
    assert base.mass == pytest.approx(base.volume * cup.material("cupstock board").density.value)


def test_gas_has_no_share_in_the_mass():
    drawing = survey(load_cup(GEOMETRIES / "double_wall.toml"))
    by_name = {part.name: part for part in drawing.parts}
    assert not by_name["gap"].is_solid
    assert drawing.mass == pytest.approx(sum(by_name[name].mass for name in ("inner", "outer", "base")))


def test_cost_only_when_all_of_it_is_known():
    drawing = survey(Cup.from_text(PLAIN + COST))
    assert drawing.cost == pytest.approx(1.5 * drawing.mass)
    assert survey(Cup.from_text(PLAIN)).cost is None
    assert "cost" not in survey(Cup.from_text(PLAIN)).figures()


def test_volume_against_height():
    """Euclid's frustum, and the ends of the table."""
    drawing = survey(Cup.from_text(PLAIN))
    assert drawing.levels[0] == 0.0
    assert drawing.levels[-1] == pytest.approx(0.090)
    radius = 0.028 + 0.012 * drawing.levels / 0.090
    frustum = pi / 3 * drawing.levels * (0.028**2 + 0.028 * radius + radius**2)
    assert drawing.volumes == pytest.approx(frustum, rel=1e-12)
    assert drawing.fill_level == pytest.approx(0.080)
    assert np.all(np.diff(drawing.levels) > 0)


def test_quality_of_a_mesh_that_is_known():
    """Every cell of the plain cone has the wall's lean as its corner's deviation from the right angle: none,
    since columns stand on the wall; 72 stations of 1.25 mm, six cells across 2 mm."""
    drawing = survey(Cup.from_text(PLAIN))
    slant = hypot(90, 12)
    along = slant / 72
    assert drawing.quality.smallest_angle == pytest.approx(radians(90), rel=1e-9)
    assert drawing.quality.worst_aspect_ratio == pytest.approx(along / (2 / 6), rel=1e-9)
    assert drawing.quality.cells == 72 * 6
    assert drawing.quality.unknowns == 145 * 13
    assert drawing.parts[0].cells_across == 6


def test_fineness_changes_the_mesh_and_not_the_mass():
    cup = Cup.from_text(PLAIN)
    coarse, fine = survey(cup), survey(cup, 2.0)
    assert fine.quality.cells == 4 * coarse.quality.cells
    assert fine.mass == pytest.approx(coarse.mass, rel=1e-12)


@pytest.mark.parametrize("path", CUPS, ids=lambda path: path.stem)
def test_every_shipped_cup_has_a_sound_drawing(path):
    drawing = survey(load_cup(path))
    assert drawing.quality.smallest_angle > radians(20)
    assert drawing.quality.half_bandwidth <= 3 * drawing.mesh.nodes_across


def test_table_in_both_units():
    drawing = survey(load_cup(GEOMETRIES / "double_wall.toml"))
    si, us = drawing.table(), drawing.table("us")
    assert "brimful capacity" in si
    assert " ml" in si
    assert " g" in si
    assert "cupstock board" in si
    assert " fl_oz" in us
    assert " oz" in us
    assert " mm" not in us
