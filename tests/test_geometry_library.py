"""Every shipped cup, plain and in each sleeve, is drawn and poured coarsely."""

import numpy as np
import pytest
from shipped import CUPS, GEOMETRIES, SLEEVES

import cupfem
from cupfem.drawing import survey

SERVING = cupfem.Serving(duration="15 s")


def is_plausible(run):
    """The drink cools, and in the end the outer wall lies between room and drink."""
    drink, wall = run.series.drink_temperature, np.asarray(run.series.outer_temperature)[-1]
    assert drink[-1] < drink[0]
    assert np.all(wall < drink.max())
    assert np.all(wall > 21.5)  # the coarse mesh undershoots the starting jump
    return float(wall.max())


@pytest.mark.parametrize("path", CUPS, ids=lambda path: path.stem)
def test_a_shipped_cup_is_drawn_and_poured(path):
    cup = cupfem.load_cup(path)
    drawing = survey(cup)
    assert drawing.quality.smallest_angle > np.radians(5.0)
    assert drawing.mass > 0
    assert is_plausible(cupfem.pour(cup, SERVING, fineness=0.25)) > 22.0


@pytest.mark.parametrize("path", SLEEVES, ids=lambda path: path.stem)
def test_a_sleeve_makes_the_outside_cooler(path):
    cup = cupfem.load_cup(GEOMETRIES / "single_board.toml")
    bare = is_plausible(cupfem.pour(cup, SERVING, fineness=0.25))
    sleeved = cupfem.pour(cup.wearing(path), SERVING, fineness=0.25)
    is_plausible(sleeved)
    low, high = 40e-3, 60e-3
    inside = (sleeved.faces.outer_height > low) & (sleeved.faces.outer_height < high)
    assert np.asarray(sleeved.series.outer_temperature)[-1][inside].max() < bare - 3.0
