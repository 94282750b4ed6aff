"""The examples of the manual run, and answer as their page says."""

import runpy
from pathlib import Path

import pytest

EXAMPLES = Path(__file__).parents[1] / "docs" / "examples"
COARSE = 0.25


def answer(name: str, fineness: float = COARSE):
    return runpy.run_path(str(EXAMPLES / f"{name}.py"))["main"](fineness)


def test_there_is_a_test_for_each():
    names = {path.stem for path in EXAMPLES.glob("*.py")}
    assert names == {"equal_board", "sleeve_and_lid", "hand_estimate", "mug_from_profile"}


def test_two_plies_are_held_longer_than_one_of_the_same_mass():
    one, two = answer("equal_board").values()
    assert one["mass_g"] == pytest.approx(two["mass_g"], abs=0.01)
    assert two["outer_max_degC"] < one["outer_max_degC"] < two["outer_max_degC"] + 5.0
    assert two["hold_time_s"] > 4.0 * one["hold_time_s"]


def test_the_sleeve_covers_the_hot_band_without_a_lid_only():
    told = answer("sleeve_and_lid")
    above, below = 84.0, 22.0
    covered = [height for height in told[True, False] if below < height < above]
    assert all(told[True, False][height] > 3 * told[False, False][height] for height in covered)
    assert told[True, False][above] > 60.0
    assert told[True, True][above] < 20.0
    assert told[True, True][below] < 5.0


def test_the_hand_estimate_is_enough_away_from_ends():
    told = answer("hand_estimate")
    for found in told.values():
        verdict = found.verdict()
        assert verdict is not None
        assert verdict[0] == "d"
        assert found.map.within(2.0) < 0.95  # and not near base, brim and level
    single, double = told.values()
    assert single.map.within(2.0) > double.map.within(2.0)  # ends of the gap


def test_the_mug_takes_heat_from_the_drink(capsys):
    run = answer("mug_from_profile")
    stored = sum(run.ledger.stored.values())
    assert stored > 0.2 * -run.ledger.drink
    assert " ml to the brim" in capsys.readouterr().out
