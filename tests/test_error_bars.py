"""Headline figures as value +- error: held to much finer runs, and an accuracy that is asked for."""

import json

import pytest
from shipped import GEOMETRIES

import cupfem
from cupfem.cli import main
from cupfem.run.error_bars import LEAST, space_errors

CASES = {
    "double_wall": 'duration = "60 s"',
    "single_board": 'duration = "60 s"\n[drink]\ntemperature = "70 degC"\nlevel = "60 mm"',
    "stoneware_mug": 'duration = "120 s"\n[room]\ntemperature = "5 degC"',
}
"""Invented servings; the full count, on more than forty cases, is tests/hard_use/error_bars.py."""


def poured(name, text, **options):
    cup, serving = cupfem.load_cup(GEOMETRIES / f"{name}.toml"), cupfem.Serving.from_text(text)
    return cupfem.pour(cup, serving, hold=False, **options)


@pytest.mark.parametrize("name", CASES)
def test_a_finer_run_lies_within_the_bars(name):
    """A run of twice the fineness and a tenth of the tolerance; of four or more, one may be outside."""
    run = poured(name, CASES[name])
    finer = poured(name, CASES[name], fineness=2.0, tolerance=5e-4, companion=False).figures()
    bars = run.error_bars()
    outside = [key for key, bar in bars.items() if not abs(run.figures()[key] - finer[key]) <= bar]
    assert len(bars) >= 4
    assert len(outside) <= 1, outside
    assert max(bars[key] for key in bars if key.endswith("degC")) < 0.3


def test_a_time_that_only_the_run_reached_has_what_is_left_as_its_error():
    fine, coarse = {"outer_past_40_degC_s": 20.0}, {"outer_past_40_degC_s": None}
    assert space_errors(fine, coarse, 60.0) == {"outer_past_40_degC_s": 40.0}
    assert space_errors(coarse, fine, 60.0) == {}


def test_an_accuracy_is_met_by_a_finer_mesh():
    loose = poured("single_board", CASES["single_board"], fineness=0.5)
    asked = 0.7 * max(bar for key, bar in loose.error_bars().items() if key.endswith("degC"))
    run = poured("single_board", CASES["single_board"], fineness=0.5, accuracy=asked)
    assert run.fineness > 0.5
    assert max(bar for key, bar in run.error_bars().items() if key.endswith("degC")) <= asked
    assert "accuracy" in run.summary() and " met:" in run.summary()


def test_an_accuracy_that_cannot_be_met_is_said():
    run = poured("single_board", CASES["single_board"], fineness=0.25, accuracy=0.1 * LEAST)
    assert "NOT met" in run.summary()


@pytest.mark.parametrize("accuracy", [0.0, -1.0, float("nan")])
def test_no_accuracy(accuracy):
    with pytest.raises(cupfem.InputError, match=r"accuracy: \".* K\": must be more than zero"):
        poured("single_board", CASES["single_board"], accuracy=accuracy)


def test_the_command_line_takes_an_accuracy(tmp_path, monkeypatch, capsys):
    monkeypatch.chdir(tmp_path)
    cup = str(GEOMETRIES / "single_board.toml")
    with pytest.raises(SystemExit) as ended:
        main(["pour", cup, "--duration", "20 s", "--fineness", "0.5", "--accuracy", "3 K", "--out", "run"])
    assert ended.value.code == 0, capsys.readouterr().err
    told = json.loads((tmp_path / "run" / "summary.json").read_text())["uncertainty"]["numerical"]
    assert told["asked_K"] == 3.0 and told["met"]
    assert set(told["plus_minus"]) >= {"drink_end_K", "outer_max_K", "outer_past_40_degC_s"}


def test_the_command_line_refuses_an_accuracy_without_a_unit(capsys):
    cup = str(GEOMETRIES / "single_board.toml")
    with pytest.raises(SystemExit) as ended:
        main(["pour", cup, "--accuracy", "0.1"])
    assert ended.value.code == 2
    assert "0.1 K" in capsys.readouterr().err
