"""Limits that need no correlation: what must not happen, and what two descriptions must agree on."""

from pathlib import Path

import numpy as np
import pytest

import cupfem
from cupfem.cup import Cup
from cupfem.serving import Serving

ROOT = Path(__file__).parents[1]
WET_ROOM = """
duration = "5 min"
[drink]
temperature = "30 degC"
[room]
temperature = "30 degC"
humidity = 1.0
"""
TUBE = """
base = "none"
[cup]
height = "90 mm"
inner_top_diameter = "70 mm"
inner_foot_diameter = "70 mm"
[[layer]]
name = "inner"
material = "dull"
thickness = "0.3 mm"
[[layer]]
name = "gap"
material = "air"
thickness = "1 mm"
pressure = "0 Pa"
[[layer]]
name = "outer"
material = "dull"
thickness = "0.3 mm"
[material.dull]
like = "cupstock board"
emissivity = 0.0
"""


@pytest.fixture(scope="module")
def cup():
    return cupfem.load_cup(ROOT / "geometries" / "double_wall.toml")


def poured(cup, text, **options):
    return cupfem.pour(cup, Serving.from_text(text), fineness=0.5, tolerance=0.02, companion=False, **options)


def test_a_sealed_lid_without_conductance_keeps_all_vapour(cup):
    run = poured(cup, 'duration = "10 min"\n[lid]\nconductance = "0 W/(m^2 K)"')
    mass = run.series.drink_mass
    assert run.ledger.out["vapour"] == 0.0
    assert run.ledger.out["lid"] == 0.0
    assert mass[-1] == pytest.approx(mass[0], rel=1e-8)


def test_vacuum_between_mirrors_insulates():
    """Neither gas nor radiation nor contact: the outer ply stays at the room, to what the iterations
    leave."""
    run = poured(Cup.from_text(TUBE), 'duration = "5 min"\n[drink]\nlevel = "80 mm"')
    assert run.series.outer_temperature == pytest.approx(22.0, abs=1e-4)  # of the time tolerance 0.02 K, 5e-3
    assert run.inner_temperature_at(0.04)[-1] > 70.0


def test_a_dying_air_stream_leaves_natural_convection(cup):
    base = 'duration = "2 min"\n[room]\nair_speed = '
    still, faint = poured(cup, base + '"0 m/s"'), poured(cup, base + '"0.01 mm/s"')
    assert faint.snapshots[-1] == pytest.approx(still.snapshots[-1], abs=1e-4)


@pytest.mark.parametrize("lid", ["", "[lid]", '[lid]\nsip_hole = "1 cm^2"'], ids=["open", "sealed", "hole"])
def test_nothing_happens_in_a_room_as_warm_and_moist_as_the_drink(cup, lid):
    """Also the test that the headspace can be solved where nothing drives it."""
    run = poured(cup, WET_ROOM + lid)
    assert run.snapshots == pytest.approx(30.0, abs=1e-9)
    assert run.series.drink_temperature == pytest.approx(30.0, abs=1e-9)
    assert run.series.drink_mass == pytest.approx(run.series.drink_mass[0], rel=1e-12)


def test_a_room_hotter_than_the_drink_warms_it(cup):
    run = poured(
        cup,
        'duration = "5 min"\n[drink]\ntemperature = "20 degC"\n'
        '[room]\ntemperature = "38 degC"\nhumidity = 0.2',
    )
    assert np.all(np.diff(run.series.drink_temperature[run.time > 5.0]) > 0.0)
    assert run.series.drink_temperature[-1] < 38.0
    assert abs(run.ledger.relative_residual) < 1e-6


@pytest.mark.parametrize("lid", ["", "[lid]"])
def test_a_drink_near_boiling_in_dry_air(cup, lid):
    run = poured(
        cup, f'duration = "2 min"\n[drink]\ntemperature = "99.9 degC"\n[room]\nhumidity = 0.0\n{lid}'
    )
    assert np.all(np.isfinite(run.snapshots))
    assert run.snapshots.max() < 99.91
    assert run.snapshots.min() > 21.9
    assert abs(run.ledger.relative_residual) < 1e-6


def test_a_level_that_passes_every_node(cup):
    run = poured(cup, 'duration = "5 min"\n[[event]]\ndrinking = "265 ml"\nfrom = "10 s"\nto = "4 min"')
    assert np.nanmin(run.series.drink_level) < 0.015
    assert abs(run.ledger.relative_residual) < 1e-6
