"""The engine: the same rows whatever the workers, nothing finished is lost, and what fails is a row."""

import csv
import io
import itertools
import os
import random
import signal
import sys
from pathlib import Path

import pytest
import vary_functions
from hard_use.kill_plans import CASES, Attempt

from cupfem.errors import InputError
from cupfem.vary import FunctionModel, Plan, csv_text, vary, write_parquet

HERE = Path(__file__).parent
ROOT = HERE.parent


def plan_of(values, **keys):
    """A plan over one number."""
    return Plan.from_data({"vary": [{"key": "x", "list": list(values)}], **keys})


def model_of(function, *names):
    """The model of one of the functions."""
    return FunctionModel(function, names or ("x",))


def rows_of(text):
    """The rows of a table as CSV."""
    return list(csv.DictReader(io.StringIO(text)))


def test_a_failing_case_is_a_row_and_the_others_stand(tmp_path):
    outcome = vary(plan_of([1, 0, 2, 7]), model=model_of(vary_functions.picky), workers=1)
    assert [row.figures.get("inverse") for row in outcome.rows] == [1.0, None, 0.5, None]
    assert outcome.rows[1].error == "ZeroDivisionError: float division by zero"
    assert outcome.rows[3].error == "ValueError: too large"
    assert rows_of(csv_text(outcome))[1] == {
        "case": "2",
        "x": "0",
        "inverse": "",
        "error": outcome.rows[1].error,
    }


def test_a_case_that_kills_its_worker_is_a_row_and_the_others_stand():
    outcome = vary(plan_of([1, 2, -1, 0.5, 4]), model=model_of(vary_functions.picky), workers=2)
    assert [row.figures.get("inverse") for row in outcome.rows] == [1.0, 0.5, None, 2.0, None]
    assert "worker process died" in outcome.rows[2].error
    assert outcome.rows[4].error == "ValueError: too large"


def test_a_fault_of_the_program_stops_the_plan_and_keeps_what_finished(tmp_path):
    plan = Plan.from_data({"vary": [{"key": "y", "list": [1, 2]}]})
    with pytest.raises(KeyError, match="x"):
        vary(plan, model=model_of(vary_functions.picky, "y"), workers=1)


def test_rows_do_not_hang_on_workers_or_order(tmp_path):
    """Two workers take turns by chance; the plan the other way round runs the cases in the other order."""
    values = [0.1 * number for number in range(300)]
    model = model_of(vary_functions.linear, "x1", "x2")
    two = [{"key": "x1", "list": values}, {"key": "x2", "list": [1.0, 2.0]}]
    one = vary(Plan.from_data({"vary": two}), model=model, workers=1)
    store = tmp_path / "cases.sqlite"
    backwards = [{"key": "x1", "list": values[::-1]}, {"key": "x2", "list": [2.0, 1.0]}]
    vary(Plan.from_data({"vary": backwards}), model=model, workers=2, store=store)
    resumed = vary(Plan.from_data({"vary": two}), model=model, workers=2, store=store)
    assert csv_text(one) == csv_text(resumed)
    assert rows_of(csv_text(one))[3] == {"case": "4", "x1": "0.1", "x2": "2", "y": "4.1", "error": ""}


def test_a_store_is_taken_up_and_a_case_asked_twice_runs_once(tmp_path):
    model, store, log, told = (
        FunctionModel(vary_functions.noted, ("x",), ("log",)),
        tmp_path / "cases.sqlite",
        [],
        [],
    )
    for values in ([1, 2], [1, 2, 3, 3, 2]):
        both = [{"key": "x", "list": values}, {"key": "log", "list": [str(tmp_path / "log")]}]
        outcome = vary(
            Plan.from_data({"vary": both}), model=model, workers=1, store=store, progress=told.append
        )
        log.append((tmp_path / "log").read_text().split())
    assert [row.figures["square"] for row in outcome.rows] == [1, 4, 9, 9, 4]
    assert log == [["1", "2"], ["1", "2", "3"]]
    assert (told[-1].done, told[-1].total, told[-1].resumed) == (5, 5, 3)


def test_killed_at_a_random_moment_nothing_is_lost_doubled_or_redone(tmp_path):
    """`python tests/hard_use/kill_plans.py --count 20` does the same more often."""
    attempt = Attempt(tmp_path)
    attempt.kill_after(random.Random(1).uniform(0.0, 0.4))
    attempt.finish()
    assert attempt.faults() == []
    assert len(attempt.rows()) == CASES


def test_ctrl_c_keeps_what_is_under_way_and_leaves_no_process(tmp_path):
    attempt = Attempt(tmp_path)
    process = attempt.start()
    attempt.wait_for_calls(20)
    os.killpg(process.pid, signal.SIGINT)
    assert process.wait(timeout=20) != 0
    called = len(attempt.calls())
    attempt.finish()
    assert attempt.faults() == []
    assert len(attempt.calls()) == CASES  # not one case ran twice
    assert called < CASES
    attempt.wait_for_no_process()  # raises if one stays


def test_progress_tells_rate_and_time_left(tmp_path, monkeypatch):
    told = []
    vary(plan_of(range(1, 40)), model=model_of(vary_functions.picky), workers=1, progress=told.append)
    assert told[-1].done == told[-1].total == 39
    assert told[-1].failed == 36
    assert told[-1].left == 0.0
    assert all(0 < earlier.done <= later.done for earlier, later in itertools.pairwise(told))
    assert told[0].rate > 0.0


def test_a_file_that_is_no_store_is_one_line(tmp_path):
    path = tmp_path / "store.sqlite"
    path.write_text("not a store " * 100, encoding="utf-8")
    with pytest.raises(InputError, match="cannot be used as the store of a plan"):
        vary(plan_of([1]), model=model_of(vary_functions.picky), store=path)


def test_no_workers_is_one_line():
    with pytest.raises(InputError, match="workers: 0: no process would do the work; write 1 or more"):
        vary(plan_of([1]), model=model_of(vary_functions.picky), workers=0)


def test_a_real_cup_with_units_in_the_headings_and_all_inputs(tmp_path):
    """A coarse double wall, one case of it impossible; the row says what a lone pour of it says."""
    import cupfem

    folder = ROOT / "geometries"
    (tmp_path / "serving.toml").write_text('duration = "20 s"\n[target]\ndrink_above = "84 degC"\n')
    (tmp_path / "cup.toml").write_text((folder / "double_wall.toml").read_text(encoding="utf-8"))
    (tmp_path / "plan.toml").write_text(
        'cup = "cup.toml"\nserving = "serving.toml"\nfineness = 0.5\n'
        'record = ["outer_past_40_degC_s", "board_mass_g"]\n'
        '[[vary]]\nkey = "layer.gap.thickness"\nlist = ["500 um", "60 mm", "3 mm"]\n'
    )
    outcome = vary(tmp_path / "plan.toml", workers=2)
    first, second, third = rows_of(csv_text(outcome))
    assert first["layer.gap.thickness [mm]"] == "0.5"
    assert "must be from 1 um to 50 mm" in second["error"]
    assert first["cup.height [mm]"] == "95"
    assert first["serving.duration [s]"] == "20"
    text = (tmp_path / "cup.toml").read_text().replace('"1.0 mm"', '"0.5 mm"')
    serving = cupfem.load_serving(tmp_path / "serving.toml")
    run = cupfem.pour(cupfem.Cup.from_text(text), serving, fineness=0.5, companion=False)
    told = run.figures()
    assert float(first["outer_past_40_degC_s"]) == pytest.approx(told["outer_past_40_degC_s"], rel=1e-8)
    assert float(first["target_drink_above_margin_K"]) == pytest.approx(
        told["drink_end_degC"] - 84.0, abs=1e-7
    )
    assert third["outer_past_40_degC_s"] == "" or float(third["outer_past_40_degC_s"]) < 20.0
    assert {row["limits"] for row in (first, third)} <= {"passed", "failed"}


def test_an_unknown_figure_is_refused_before_anything_runs():
    path = ROOT / "geometries/plan_gap_and_board.toml"
    plan = Plan.load(path).model_copy(update={"record": ("drink_end_degF",), "fineness": 0.5})
    with pytest.raises(InputError, match=r'record: "drink_end_degF": .*did you mean "drink_end_degC"'):
        vary(plan, folder=path.parent)


def test_masses_are_those_of_the_drawing(tmp_path):
    """Against volumes of frusta (Euclid, Elements XII.10) times density: a wall and a base without a gap."""
    import math

    from cupfem.vary.cases import cup_model
    from cupfem.vary.recorded import pour_case

    (tmp_path / "cup.toml").write_text(
        '[cup]\nheight = "100 mm"\ninner_top_diameter = "80 mm"\ninner_foot_diameter = "80 mm"\n'
        '[[layer]]\nname = "wall"\nmaterial = "cupstock board"\nthickness = "2 mm"\n'
        '[base]\nmaterial = "polypropylene"\nthickness = "3 mm"\nrecess = "10 mm"\n'
        '[material."cupstock board"]\ncost_per_kg = 2.0\n[material.polypropylene]\ncost_per_kg = 1.5\n'
    )
    plan = Plan.from_data(
        {
            "cup": "cup.toml",
            "fineness": 0.5,
            "record": ["board_mass_g", "mass_g", "cost"],
            "vary": [{"key": "serving.duration", "list": ["5 s"]}],
        }
    )
    model = cup_model(plan, tmp_path, pour_case)
    told = pour_case(model.case({model.slot("serving.duration"): "5 s"}).payload)
    board = 620.0 * math.pi * (0.042**2 - 0.040**2) * 0.1  # density of the library
    assert told["board_mass_g"] == pytest.approx(1e3 * board, rel=1e-6)
    plastic = told["mass_g"] - told["board_mass_g"]
    assert told["cost"] == pytest.approx(1e-3 * (2.0 * told["board_mass_g"] + 1.5 * plastic), rel=1e-7)
    assert plastic == pytest.approx(1e3 * 905.0 * math.pi * 0.040**2 * 0.003, rel=0.02)


def test_parquet_holds_the_table_or_says_what_is_missing(tmp_path, monkeypatch):
    outcome = vary(plan_of([1, 0]), model=model_of(vary_functions.picky), workers=1)
    monkeypatch.setitem(sys.modules, "pyarrow", None)
    with pytest.raises(InputError, match='needs the extra "parquet"'):
        write_parquet(outcome, tmp_path / "cases.parquet")


def test_a_worker_has_one_thread_of_linear_algebra():
    values = {"vary": [{"key": "x", "list": [1]}]}
    outcome = vary(Plan.from_data(values), model=model_of(vary_functions.threads), workers=1)
    assert outcome.rows[0].figures == {"threads": 1.0}


def test_a_hold_time_and_its_margin(tmp_path):
    """A cup of foam is held to the end of a short serving: whether it is for longer is not known."""
    import cupfem

    folder = ROOT / "geometries"
    (tmp_path / "serving.toml").write_text(
        'duration = "30 s"\n[target]\nhold_time = "45 s"\nbetween = ["40 mm", "60 mm"]\n'
    )
    plan = Plan.from_data(
        {
            "cup": "cup.toml",
            "serving": "serving.toml",
            "fineness": 0.5,
            "record": ["hold_time_s"],
            "vary": [{"key": "cup", "list": ["cup.toml", "single.toml"]}],
        }
    )
    (tmp_path / "cup.toml").write_text((folder / "foam.toml").read_text(encoding="utf-8"))
    (tmp_path / "single.toml").write_text((folder / "single_board.toml").read_text(encoding="utf-8"))
    outcome = vary(plan, folder=tmp_path, workers=1)
    foam, board = outcome.rows
    serving = cupfem.load_serving(tmp_path / "serving.toml")
    for row, name in ((foam, "cup.toml"), (board, "single.toml")):
        told = cupfem.pour(cupfem.load_cup(tmp_path / name), serving, fineness=0.5, companion=False).figures()
        for key in row.figures.keys() & told.keys():
            assert row.figures[key] == (told[key] and pytest.approx(told[key], rel=1e-8))
    assert board.figures["target_hold_time_margin_s"] == pytest.approx(board.figures["hold_time_s"] - 45.0)
    assert foam.figures["hold_time_s"] is None
    assert outcome.verdicts() == ["undecided", "failed"]
    assert list(outcome.censored("hold_time_s")) == [True, False]


def test_errors_of_the_estimates_are_those_of_the_comparison(tmp_path):
    """At half the height of the wall, each rung; the same figures as from `slab` of the same run."""
    import cupfem
    from cupfem.breakdown import slab
    from cupfem.vary.cases import cup_model
    from cupfem.vary.recorded import pour_case

    (tmp_path / "serving.toml").write_text('duration = "30 s"\n')
    plan = Plan.from_data(
        {
            "cup": str(ROOT / "geometries/single_board.toml"),
            "serving": "serving.toml",
            "fineness": 0.5,
            "record": ["slab_d_error_K", "slab_b_error_end_K"],
            "vary": [{"key": "serving.duration", "list": ["30 s"]}],
        }
    )
    told = pour_case(cup_model(plan, tmp_path, pour_case).case({}).payload)
    cup, serving = cupfem.load_cup(plan.cup), cupfem.load_serving(tmp_path / "serving.toml")
    compared = slab(cupfem.pour(cup, serving, fineness=0.5, companion=False), heights=["47.5 mm"])
    assert told == {
        "slab_d_error_K": pytest.approx(compared.error("d", 0).worst, rel=1e-8),
        "slab_b_error_end_K": pytest.approx(compared.error("b", 0).end, rel=1e-8),
    }
    assert told["slab_d_error_K"] < told["slab_b_error_end_K"]
