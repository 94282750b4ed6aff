"""Everything that can happen to a cup in one serving: exact breaks, and a ledger that closes over all of
them."""

from pathlib import Path

import numpy as np
import pytest

import cupfem
from cupfem.errors import InputError
from cupfem.serving import Serving, check

ROOT = Path(__file__).parents[1]
CLOSED = 1e-6

EVERY_KIND = """
duration = "12 min"
[drink]
temperature = "80 degC"
level = "70 mm"
pour = "2 s"
stirred = "10 s"
[room]
temperature = [["0 s", "22 degC"], ["3 min", "4 degC"], ["9 min", "30 degC"]]
[start]
temperature = "50 degC"
[lid]
sip_hole = "1.2 cm^2"
vent = "10 mm^2"
[table]
material = "wood"
[carrier]
height = "30 mm"
[films]
heel = { correlation = "contact with the table" }
[[event]]
lid = "on"
at = "1 min"
[[event]]
lid = "off"
at = "7 min"
[[event]]
sip = "10 ml"
first = "2 min"
every = "3 min"
[[event]]
drinking = "20 ml"
from = "3 min"
to = "5 min"
[[event]]
refill = "40 ml"
at = "8 min"
temperature = "90 degC"
[[event]]
stir = "10 s"
at = "6 min"
[[event]]
stand = "air"
at = "4 min"
[[event]]
stand = "table"
at = "10 min"
"""


@pytest.fixture(scope="module")
def cup():
    return cupfem.load_cup(ROOT / "geometries" / "double_wall.toml")


def poured(cup, text, **options):
    return cupfem.pour(cup, Serving.from_text(text), fineness=0.5, tolerance=0.02, companion=False, **options)


@pytest.fixture(scope="module")
def run(cup):
    return poured(cup, EVERY_KIND)


def test_every_event_is_a_break():
    serving = Serving.from_text(EVERY_KIND)
    expected = [2, 12, 60, 120, 180, 240, 300, 360, 370, 420, 480, 490, 540, 600, 660]
    assert serving.breaks() == tuple(float(time) for time in expected)


def test_the_ledger_closes_with_every_kind_of_event(run):
    """Each term from its own integral, none by difference."""
    terms = run.ledger.out
    for name in ("sips", "refills", "vapour", "lid convection", "air through the lid", "carrier", "heel"):
        assert abs(terms[name]) > 1.0, name
    assert abs(run.ledger.relative_residual) < CLOSED


def test_what_is_poured_and_refilled_is_counted_with_its_enthalpy(run):
    """250 g at 80 degC and 39 g at 90: IAPWS enthalpies 335.0 and 377.0 kJ/kg (h(80) - h(0), h(90) -
    h(0))."""
    meridian = run.meridian
    first = 10e-6  # there at time zero
    poured = 971.8 * (meridian.volume(0.070) - first) * 335.0e3
    refilled = 965.3 * 40e-6 * 377.0e3
    assert -run.ledger.out["refills"] == pytest.approx(poured + refilled, rel=2e-3)


def test_a_refill_mixes(cup):
    """100 ml of 60 degC into about 180 ml: the mean by mass and enthalpy, an instant later."""
    serving = 'duration = "70 s"\n[drink]\nlevel = "60 mm"\ntemperature = "80 degC"\n'
    run = poured(cup, serving + '[[event]]\nrefill = "100 ml"\nat = "60 s"\ntemperature = "60 degC"\n')
    before = int(np.flatnonzero(run.time < 60.0 - 1e-6)[-1])
    after = int(np.flatnonzero(np.isclose(run.time, 60.0))[-1])
    there, warm = run.series.drink_mass[before], run.series.drink_temperature[before]
    added = 983.2 * 100e-6  # kg/m3 at 60 degC, handbook
    assert run.series.drink_mass[after] - there == pytest.approx(added, rel=2e-3)
    mixed = (there * warm + added * 60.0) / (there + added)
    assert run.series.drink_temperature[after] == pytest.approx(mixed, abs=0.1)


def test_a_slow_pour_ends_with_the_volume_asked_for(cup):
    run = poured(cup, 'duration = "20 s"\n[drink]\nvolume = "200 ml"\npour = "8 s"')
    filled = run.meridian.volume(float(np.interp(8.0, run.time, run.series.drink_level)))
    assert filled == pytest.approx(200e-6, rel=0.01)
    rising = run.series.drink_level[run.time <= 8.0]
    assert np.all(np.diff(rising) > 0.0)


def test_a_sip_that_empties_the_cup(cup):
    run = poured(
        cup,
        'duration = "3 min"\n[drink]\nvolume = "50 ml"\n[[event]]\nsip = "49.9 ml"\nfirst = "1 min"\n'
        '[[event]]\nsip = "0.1 ml"\nfirst = "2 min"',
    )
    assert np.isnan(run.series.drink_temperature[-1])
    assert abs(run.ledger.relative_residual) < CLOSED


def test_an_emptied_cup_under_a_lid_goes_on(cup):
    run = poured(
        cup,
        'duration = "3 min"\n[drink]\nvolume = "50 ml"\n[lid]\n[[event]]\nsip = "49.9 ml"\nfirst = "1 min"',
    )
    assert np.isnan(run.series.drink_temperature[-1])
    assert abs(run.ledger.relative_residual) < CLOSED
    assert np.all(run.snapshots[-1] > 21.0)


def test_a_refill_above_the_brim_is_refused(cup):
    serving = Serving.from_text('[[event]]\nrefill = "60 ml"\nat = "1 min"')
    message = r'^event\.refill: "60 ml": above the brim: there is room for 46.3 ml at 60 s; write less'
    with pytest.raises(InputError, match=message):
        check(cup, serving)
    with pytest.raises(InputError, match=r"^event\.refill: "):
        cupfem.pour(cup, serving)


def test_a_refill_after_drinking_fits(cup):
    serving = Serving.from_text(
        '[[event]]\nsip = "60 ml"\nfirst = "30 s"\n[[event]]\nrefill = "90 ml"\nat = "1 min"'
    )
    check(cup, serving)


def test_a_lid_put_on_later_changes_nothing_before(cup):
    base = 'duration = "2 min"\n'
    without, late = poured(cup, base), poured(cup, base + '[lid]\n[[event]]\nlid = "on"\nat = "1 min"')
    before = late.time < 60.0 - 1e-9
    shared = np.interp(late.time[before], without.time, without.series.drink_temperature)
    assert late.series.drink_temperature[before] == pytest.approx(shared, abs=0.02)
    assert late.series.drink_temperature[-1] > without.series.drink_temperature[-1] + 0.5


def test_events_and_fingers_together(cup):
    """A hand from before the lid comes off until after a refill: two wall sections share one headspace."""
    run = poured(
        cup,
        'duration = "100 s"\n[lid]\nsip_hole = "1.2 cm^2"\n'
        '[[event]]\nlid = "off"\nat = "50 s"\n[[event]]\nsip = "40 ml"\nfirst = "60 s"\n'
        '[[event]]\nrefill = "20 ml"\nat = "70 s"\n'
        '[[pad]]\nheight = "60 mm"\nwidth = "15 mm"\nshare = 0.2\npick_up = "30 s"\nrelease = "80 s"\n',
    )
    assert run.ledger.out["hand"] > 1.0
    assert abs(run.ledger.relative_residual) < CLOSED
