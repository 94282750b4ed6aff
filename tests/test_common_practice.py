"""Facts of the trade: common practice, no source. Orders of magnitude only; each names its wall, films and
cup, and prints cupfem's own figure beside (run pytest with -s).

The cup is the shipped double-wall board cup (board 0.33 / air 1.0 / board 0.30 mm, 95 mm tall, 313 ml
brimful) with the default serving: water at 85 degC to 10 mm below the brim, an open cup in a room of 22 degC,
45 % relative humidity, 0.1 m/s, 10 minutes, correlations on all edges.
"""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

import cupfem
from cupfem.films import NaturalConvectionPlate
from cupfem.films.outside import air_film
from cupfem.run import COMFORT, Run
from cupfem.run.headline import crossing

GEOMETRIES = Path(__file__).parents[1] / "geometries"
MID_WALL = 0.046


@pytest.fixture(scope="module")
def run() -> Run:
    return cupfem.pour(cupfem.load_cup(GEOMETRIES / "double_wall.toml"), companion=False)


def test_drinks_are_served_at_80_to_85_degrees() -> None:
    served = cupfem.Serving().drink.temperature
    print(f"default serving {served:g} degC; common practice 80 to 85 degC")
    assert 80.0 <= served <= 85.0


def test_a_hand_finds_about_40_degrees_comfortable_and_designers_ask_for_ten_minutes() -> None:
    print(f"marked line {COMFORT:g} degC, default duration {cupfem.Serving().duration:g} s")
    assert pytest.approx(40.0, abs=3.0) == COMFORT
    assert cupfem.Serving().duration == pytest.approx(600.0)


def test_a_laminar_plate_estimate_near_rayleigh_1e6_gives_about_six_and_a_half() -> None:
    """A wall 80 mm tall at 48 degC in still air of 22 degC: Rayleigh number near 1e6."""
    wall, room, length = 48.0, 22.0, 0.08
    air = air_film(wall, room, 101325.0)
    kelvin = 0.5 * (wall + room) + 273.15
    rayleigh = 9.80665 * (wall - room) / kelvin * length**3 / (air.kinematic_viscosity * air.diffusivity)
    simple = 0.59 * rayleigh**0.25 * air.conductivity / length
    ours = NaturalConvectionPlate(length).coefficient(wall, room)
    print(f"Ra {rayleigh:.3g}: 0.59 Ra^1/4 gives {simple:.2f}, Churchill-Chu {ours:.2f} W/(m2 K)")
    assert 0.7e6 < rayleigh < 1.6e6
    assert simple == pytest.approx(6.5, rel=0.15)
    assert float(ours) == pytest.approx(6.5, rel=0.25)


def test_time_scale_of_a_layered_board_wall_is_of_the_order_of_ten_seconds(run: Run) -> None:
    """L2/alpha of the whole wall with the series conductivity and the mean heat capacity."""
    layers = [(layer.thickness, layer.material) for layer in run.meridian.layers]
    resistance = sum(t / (m.conductivity_through.value if m.kind == "solid" else 0.045) for t, m in layers)
    solids = [(t, m) for t, m in layers if m.kind == "solid"]
    capacity = sum(t * m.density.value * m.specific_heat.value for t, m in solids)
    scale = resistance * capacity
    print(f"L2/alpha = R C = {scale:.1f} s")
    assert 3.0 < scale < 60.0


def test_time_scale_of_the_drink_is_of_the_order_of_an_hour(run: Run) -> None:
    """The drink's excess over the room, divided by its rate of cooling at the end of the run."""
    time, drink = run.time, run.series.drink_temperature
    late = time > 300.0
    rate = -np.polyfit(time[late], drink[late], 1)[0]
    scale = (float(drink[late].mean()) - 22.0) / rate
    print(f"drink's own time scale {scale:.0f} s")
    assert 1000.0 < scale < 3.6e4


def test_outer_face_passes_40_degrees_within_tens_of_seconds(run: Run) -> None:
    """Mid-wall of the double wall; where the plies are glued the face is hot within a second or two."""
    middle = crossing(run.time, run.outer_temperature_at(MID_WALL), COMFORT)
    anywhere = run.figures()["outer_past_40_degC_s"]
    print(f"passes 40 degC at mid-wall after {middle:.3g} s, at the hottest place after {anywhere:.3g} s")
    assert middle is not None and 1.0 < middle < 100.0
    assert anywhere is not None and anywhere < middle
