"""A run names each correlation with its range, and whether it stayed inside."""

from pathlib import Path

import pytest

import cupfem
from cupfem.cup import Cup
from cupfem.pour.ranges import LEFT
from cupfem.serving import Serving

ROOT = Path(__file__).parents[1]
WIDE = """
base = "none"
[cup]
height = "90 mm"
inner_top_diameter = "70 mm"
inner_foot_diameter = "70 mm"
[[layer]]
name = "inner"
material = "cupstock board"
thickness = "0.3 mm"
[[layer]]
name = "gap"
material = "air"
thickness = "25 mm"
[[layer]]
name = "outer"
material = "cupstock board"
thickness = "0.3 mm"
"""


def lines(cup, text):
    run = cupfem.pour(cup, Serving.from_text(text), fineness=0.5, tolerance=0.02, companion=False)
    return run.ranges


@pytest.fixture(scope="module")
def open_cup():
    cup = cupfem.load_cup(ROOT / "geometries" / "double_wall.toml")
    return lines(cup, 'duration = "2 min"')


def test_a_small_surface_is_outside_the_pools_of_the_closure(open_cup):
    """Shah's smallest pool has 0.07 m2 (HVAC&R Research 8 (2002) 125); the mouth of a cup 0.0045."""
    left = [line for line in open_cup if line.startswith(LEFT)]
    assert len(left) == 1
    assert left[0].endswith("tested from 0.07 to 425")
    assert "free surface [m2] reached 0.0044" in left[0]
    assert open_cup[0] == left[0]


def test_every_correlation_is_named(open_cup):
    for name in ("mixed convection, wall", "natural convection, drink", "recess air and table", "Shah"):
        assert any(line.removeprefix(LEFT).startswith(name) for line in open_cup), name


def test_the_range_that_is_told_was_reached(open_cup):
    """Wall of 95 mm between 22 and some 75 degC: by hand (Incropera Eq. 9.25) Ra = 9.81/320 53 0.095^3 /
    (1.75e-5 2.48e-5) = 3.2e6."""
    (line,) = [x for x in open_cup if x.startswith("mixed convection, wall: Rayleigh")]
    highest = float(line.split(" to ")[1].split(",")[0])
    assert 2.5e6 < highest < 3.5e6


def test_a_lid_takes_the_closure_out_of_its_air():
    cup = cupfem.load_cup(ROOT / "geometries" / "double_wall.toml")
    found = lines(cup, 'duration = "1 min"\n[lid]')
    assert any("air temperature [degC] reached" in line for line in found if line.startswith(LEFT))
    assert any(line.startswith("natural convection, headspace") for line in found)


def test_a_gap_too_wide_for_its_height_is_told():
    """ElSherbiny, Raithby and Hollands tested heights over widths from 5; 90 mm over 25 mm is less."""
    found = lines(Cup.from_text(WIDE), 'duration = "2 min"\n[drink]\nlevel = "80 mm"')
    assert any(line.startswith(f"{LEFT}gap: height over width") for line in found)
