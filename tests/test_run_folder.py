"""The run folder: what is in it, the same bytes again, and that it appears whole or not at all."""

import csv
import dataclasses
import errno
import json
import math
import os
import re
import subprocess
import sys
import tempfile
import threading
from pathlib import Path

import numpy as np
import pytest

import cupfem
from cupfem.exchange import check_place, write_incomplete, write_run
from cupfem.exchange.place import _exchanged
from cupfem.exchange.summary import rounded, summary_json
from cupfem.touch.felt import pad_verdict

ROOT = Path(__file__).parents[1]
sys.path.insert(0, str(ROOT / "tests" / "hard_use"))

from kill_runs import FILES, flaws  # noqa: E402

CUP = ROOT / "geometries" / "double_wall.toml"
UNIT = re.compile(r"_(degC|K|s|mm|ml|J|kJ|W|g|relative|W_m2_K)$")
TARGET = {"drink_above": "84 degC", "until": "20 s"}


@pytest.fixture(scope="module")
def run():
    serving = cupfem.Serving(duration="30 s", target=cupfem.Target(**TARGET))
    return cupfem.pour(cupfem.load_cup(CUP), serving, fineness=0.5)


@pytest.fixture(scope="module")
def folder(run, tmp_path_factory):
    return write_run(run, tmp_path_factory.mktemp("runs") / "pour", timings={"march": 1.25})


@pytest.fixture
def here(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    return tmp_path


def names(path):
    return {file.name for file in path.iterdir()}


def told(folder):
    return json.loads((folder / "summary.json").read_text(encoding="utf-8"))


# -- what is in it -------------------------------------------------------------------------------------------


def test_files(folder):
    assert names(folder) == FILES
    assert flaws(folder) == []


def test_the_run_comes_back(run, folder):
    again = cupfem.load_run(folder)
    np.testing.assert_array_equal(again.snapshots, run.snapshots)
    assert again.figures() == run.figures()


def test_the_inputs_come_back(run, folder):
    """Resolved: with the defaults written out, and the figures of a second run from them are the same."""
    cup, serving = cupfem.load_cup(folder / "cup.toml"), cupfem.load_serving(folder / "serving.toml")
    again = cupfem.pour(cup, serving, fineness=0.5)
    for name, value in run.figures().items():
        assert again.figures()[name] == (value if value is None else pytest.approx(value, rel=1e-9, abs=1e-9))
    assert "humidity = 0.45" in (folder / "serving.toml").read_text(encoding="utf-8")


def test_figures_in_the_summary(run, folder):
    summary = told(folder)
    for name, value in run.figures().items():
        if value is None:
            assert summary[name] is None
        else:
            assert summary[name] == pytest.approx(value, rel=1e-8, abs=1e-9)


def test_a_time_not_reached_is_null_with_a_bound(folder):
    summary = told(folder)
    assert summary["drink_below_60_degC_s"] is None
    assert summary["drink_below_60_degC_at_least_s"] == 30.0


def numbers(value, key=""):
    """Key of each number."""
    if isinstance(value, dict):
        return [key for name, item in value.items() for key in numbers(item, name)]
    if isinstance(value, list):
        return [found for item in value for found in numbers(item, key)]
    return [key] if isinstance(value, (int, float)) and not isinstance(value, bool) else []


def test_each_number_has_its_unit_in_the_key(folder):
    keys = numbers(told(folder))
    assert len(keys) > 25
    assert [key for key in keys if not UNIT.search(key)] == []


def test_verdict_and_cautions(folder):
    summary = told(folder)
    (verdict,) = summary["verdicts"]
    assert verdict["limit_degC"] == 84.0
    assert verdict["margin_K"] == pytest.approx(verdict["reached_degC"] - 84.0, abs=1e-6)
    assert verdict["passed"] == (verdict["margin_K"] >= 0.0)
    assert "not a safety certificate" in summary["caution"]
    assert any("board moisture not modelled" in line for line in summary["uncertainty"]["model"])
    assert summary["uncertainty"]["numerical"]["time_K"] > 0.0


def test_the_ledger_in_the_summary_closes(folder):
    """Heat out, heat stored and the drink's own, from the written and rounded terms [J]."""
    ledger = told(folder)["ledger"]
    rest = sum(ledger["out"].values()) + sum(ledger["stored"].values()) + ledger["drink_J"]
    assert abs(rest) < 1e-5 * abs(ledger["drink_J"])


def test_the_summary_says_which_defaults_were_used(run, folder):
    assert told(folder)["defaults"] == list(run.defaults)
    assert "room.humidity = 0.45" in run.defaults


def test_keys_are_sorted(folder):
    text = (folder / "summary.json").read_text(encoding="utf-8")
    assert text == json.dumps(json.loads(text), indent=2, sort_keys=True, ensure_ascii=False) + "\n"


def test_pads_in_the_summary(tmp_path):
    """Hold times stand by pad; the second pad lets go before it hurts."""
    pads = [
        {"height": "50 mm", "width": "6 mm", "pick_up": "10 s"},
        {"height": "70 mm", "width": "6 mm", "pick_up": "20 s", "release": "20.5 s"},
    ]
    serving = cupfem.Serving(duration="60 s", pad=pads)
    held = cupfem.pour(cupfem.load_cup(CUP), serving, fineness=0.25, companion=False)
    summary = told(write_run(held, tmp_path / "held"))
    first, second = summary["pads"]
    expected = pad_verdict(held, held.pads[0])
    assert first["hold_time_s"] == pytest.approx(expected.thin, rel=1e-8)
    assert first["decided_by"] == expected.thin_decided
    assert (first["height_mm"], first["pick_up_s"]) == (50.0, 10.0)
    assert second["hold_time_s"] is None
    assert second["hold_time_at_least_s"] == 0.5
    assert [key for key in numbers(summary) if not UNIT.search(key)] == []


def test_hold_time_in_the_summary(tmp_path):
    """Judged: the target in seconds, the figures of touch and what decided them. Not judged: the note."""
    cup = cupfem.load_cup(CUP)
    serving = cupfem.Serving(duration="60 s", target=cupfem.Target(hold_time="2 min"))
    judged = cupfem.pour(cup, serving, fineness=0.25, companion=False, hold=True)
    summary = told(write_run(judged, tmp_path / "judged"))
    (verdict,) = summary["verdicts"]
    assert (verdict["limit_s"], verdict["passed"]) == (120.0, False)
    assert verdict["margin_s"] == pytest.approx(verdict["reached_s"] - 120.0, abs=1e-6)
    for name, value in judged.touch.figures().items():
        assert summary[name] == (value if value is None else pytest.approx(value, rel=1e-8))
    assert summary["hold"]["decided_by"] == judged.touch.thin_decided
    assert "note" not in summary
    assert [key for key in numbers(summary) if not UNIT.search(key)] == []
    free = cupfem.pour(cup, cupfem.Serving(duration="10 s"), fineness=0.25, companion=False, hold=False)
    assert told(write_run(free, tmp_path / "free"))["note"] == "free-wall figures, not a hold time"


def test_what_is_no_number_is_null(run):
    """A drink that is gone has no temperature; JSON has no NaN."""
    series = dataclasses.replace(run.series, drink_level=np.full_like(run.series.drink_level, np.nan))
    text = summary_json(dataclasses.replace(run, series=series))
    assert json.loads(text)["drink_level_end_mm"] is None


@pytest.mark.parametrize(
    ("value", "expected"),
    [(1234.56789012, 1234.56789), (8.25e-11, 0.0), (-1e-12, 0.0), (0.000761162123456, 0.000761162)],
)
def test_rounding(value, expected):
    assert rounded(value) == expected
    assert math.copysign(1.0, rounded(value)) == 1.0


def test_series(run, folder):
    with (folder / "series.csv").open(encoding="utf-8", newline="") as file:
        rows = list(csv.DictReader(file))
    assert len(rows) == len(run.time)
    last = {name: float(text) for name, text in rows[-1].items()}
    assert all(re.search(r"_(s|degC|mm|g|W)$", name) for name in last)
    assert {name for name in last if name.startswith("outer_")} == {
        f"outer_z{height:03d}mm_degC" for height in range(0, 91, 10)
    }
    assert last["time_s"] == 30.0
    assert last["outer_z040mm_degC"] == pytest.approx(run.outer_temperature_at(40e-3)[-1], rel=1e-8)
    assert last["drink_mass_g"] == pytest.approx(1e3 * run.series.drink_mass[-1], rel=1e-8)
    assert last["outside_radiation_W"] == pytest.approx(run.series.powers["outside radiation"][-1], rel=1e-8)


def test_a_drink_that_is_gone_leaves_its_cells_empty(run, tmp_path):
    gone = np.where(run.time < 10.0, run.series.drink_temperature, np.nan)
    empty = dataclasses.replace(run, series=dataclasses.replace(run.series, drink_temperature=gone))
    with (write_run(empty, tmp_path / "gone") / "series.csv").open(encoding="utf-8", newline="") as file:
        rows = list(csv.DictReader(file))
    assert rows[0]["drink_temperature_degC"] == "85"
    assert rows[-1]["drink_temperature_degC"] == ""


def test_timings_stand_apart(folder):
    timings = json.loads((folder / "timings.json").read_text(encoding="utf-8"))
    assert timings["march_s"] == 1.25
    assert timings["write_s"] > 0.0
    assert timings["steps"] > 0
    assert "write_s" not in (folder / "summary.json").read_text(encoding="utf-8")


def test_versions(folder):
    versions = json.loads((folder / "versions.json").read_text(encoding="utf-8"))
    assert versions["cupfem"] == cupfem.__version__
    assert versions["numpy"] == np.__version__


def test_figures_are_added(run, tmp_path):
    def draw(run, place):
        (place / "wall.png").write_bytes(b"picture")

    assert (write_run(run, tmp_path / "with", figures=draw) / "wall.png").read_bytes() == b"picture"


SCRIPT = """
import sys, cupfem
from cupfem.exchange import write_run
run = cupfem.pour(cupfem.load_cup(sys.argv[1]), cupfem.Serving(duration="2 min"))
write_run(run, sys.argv[2])
"""


def test_the_same_summary_from_another_process(tmp_path):
    """Byte for byte, with one thread of the linear algebra and with two."""
    found = []
    for threads in ("1", "2"):
        place = tmp_path / threads
        environment = os.environ | {"OPENBLAS_NUM_THREADS": threads, "PYTHONHASHSEED": threads}
        line = [sys.executable, "-c", SCRIPT, str(CUP), str(place)]
        subprocess.run(line, check=True, cwd=ROOT, env=environment)
        found.append([(place / name).read_bytes() for name in ("summary.json", "series.csv", "cup.toml")])
    assert found[0] == found[1]


# -- its name ------------------------------------------------------------------------------------------------


def test_numbered_names(run, here):
    assert [write_run(run, name="pour-cup").name for _ in range(2)] == ["pour-cup-001", "pour-cup-002"]
    assert names(here) == {"pour-cup-001", "pour-cup-002"}


def test_runs_that_end_together_get_different_numbers(run, here):
    threads = [threading.Thread(target=write_run, args=(run,)) for _ in range(6)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert names(here) == {f"pour-00{number}" for number in range(1, 7)}
    assert [line for place in here.iterdir() for line in flaws(place)] == []


def test_an_existing_folder_is_kept(run, folder, tmp_path):
    before = (folder / "timings.json").read_bytes()
    with pytest.raises(cupfem.InputError, match="it exists already; name another folder, or add --force"):
        write_run(run, folder)
    assert (folder / "timings.json").read_bytes() == before
    assert names(folder.parent) == {"pour"}


@pytest.fixture(params=[True, False], ids=["in one step", "in two steps"])
def exchanging(request, monkeypatch):
    """Whether the system can let two folders exchange their names."""
    if not request.param:
        monkeypatch.setattr("cupfem.exchange.place._exchanged", lambda first, second: False)
    return request.param


def test_force_replaces(run, tmp_path, exchanging):
    place = write_run(run, tmp_path / "pour")
    (place / "old.txt").write_text("old", encoding="utf-8")
    write_run(run, place, force=True)
    assert names(place) == FILES
    assert names(tmp_path) == {"pour"}


def test_folders_exchange_their_names(tmp_path):
    for name in ("first", "second"):
        (tmp_path / name).mkdir()
        (tmp_path / name / f"{name}.txt").touch()
    done = _exchanged(tmp_path / "first", tmp_path / "second")
    assert names(tmp_path / "first") == {"second.txt" if done else "first.txt"}
    assert not _exchanged(tmp_path / "first", tmp_path / "third")


def test_force_through_a_link(run, tmp_path):
    place = write_run(run, tmp_path / "pour")
    (tmp_path / "latest").symlink_to(place)
    write_run(run, tmp_path / "latest", force=True)
    assert (tmp_path / "latest").is_symlink()
    assert names(place) == FILES


def test_force_replaces_nothing_but_runs(run, tmp_path):
    (tmp_path / "home").mkdir()
    (tmp_path / "home" / "letters.txt").write_text("dear", encoding="utf-8")
    with pytest.raises(cupfem.InputError, match="holds no run, and only a run is replaced"):
        write_run(run, tmp_path / "home", force=True)
    assert names(tmp_path / "home") == {"letters.txt"}


@pytest.mark.parametrize("force", [False, True])
def test_a_file_in_its_place(run, tmp_path, force):
    (tmp_path / "pour").write_text("a file", encoding="utf-8")
    with pytest.raises(cupfem.InputError, match="a file of that name exists; choose another name"):
        write_run(run, tmp_path / "pour", force=force)
    assert (tmp_path / "pour").read_text(encoding="utf-8") == "a file"


@pytest.mark.parametrize(
    ("place", "why"),
    [
        ("nowhere/pour", "the folder that it should lie in does not exist; make that folder first"),
        ("file/pour", "a part of the path is a file; name a folder"),
        ("n" * 250, "the name is too long; choose a shorter one"),
    ],
)
def test_places_that_cannot_be(run, here, place, why):
    (here / "file").touch()
    with pytest.raises(cupfem.InputError, match=why) as caught:
        write_run(run, place)
    assert "\n" not in str(caught.value)
    assert names(here) == {"file"}


@pytest.fixture
def closed():
    """A folder that may be read but not written to, for root too."""
    with tempfile.TemporaryDirectory() as name:
        Path(name).chmod(0o555)
        if os.geteuid() == 0:
            os.seteuid(65534)
            yield Path(name)
            os.seteuid(0)
        else:
            yield Path(name)
        Path(name).chmod(0o755)


def test_a_read_only_folder(run, closed):
    with pytest.raises(cupfem.InputError, match="may not be written to; name a place that you may write to"):
        write_run(run, closed / "pour")
    with pytest.raises(cupfem.InputError, match="may not be written to"):
        cupfem.write_fields(run, closed / "fields.pvd")


def test_a_read_only_folder_is_told_before_the_run(closed):
    with pytest.raises(cupfem.InputError, match="may not be written to"):
        check_place(closed / "pour")


def test_a_long_path_keeps_its_end(run, tmp_path):
    with pytest.raises(cupfem.InputError, match=r'"\.\.\..*/nowhere/the_run"'):
        write_run(run, tmp_path / ("a" * 60) / "nowhere" / "the_run")


# -- whole or not at all -------------------------------------------------------------------------------------


def failing(error):
    def draw(run, place):
        raise error

    return draw


def test_a_full_disk_leaves_nothing(run, tmp_path):
    full = OSError(errno.ENOSPC, os.strerror(errno.ENOSPC))
    with pytest.raises(cupfem.InputError, match="the disk is full; free some space"):
        write_run(run, tmp_path / "pour", figures=failing(full))
    assert names(tmp_path) == set()


@pytest.mark.parametrize("foreign", [False, True])
def test_fields_that_cannot_be_written_leave_nothing(run, here, monkeypatch, foreign):
    """The disk fills up with the third file; what others keep in the folder stays."""
    write, calls = Path.write_text, []

    def full(path, text, **settings):
        calls.append(path)
        if len(calls) == 3:
            raise OSError(errno.ENOSPC, os.strerror(errno.ENOSPC))
        return write(path, text, **settings)

    if foreign:
        (here / "fields").mkdir()
        (here / "fields" / "notes.txt").touch()
    monkeypatch.setattr(Path, "write_text", full)
    with pytest.raises(cupfem.InputError, match=r'output: "fields\.pvd": the disk is full'):
        cupfem.write_fields(run, "fields.pvd")
    assert {file.name for file in here.rglob("*")} == ({"fields", "notes.txt"} if foreign else set())


LIMITED = """
import resource, sys, cupfem
from cupfem.exchange import write_run
run = cupfem.load_run(sys.argv[1])
resource.setrlimit(resource.RLIMIT_FSIZE, (int(sys.argv[3]), int(sys.argv[3])))
try:
    write_run(run, sys.argv[2])
except cupfem.InputError as error:
    print(error)
"""


@pytest.mark.parametrize("largest", [1000, 30000, 100000])
def test_a_write_that_the_system_refuses_halfway_leaves_nothing(folder, tmp_path, largest):
    """In the summary, in the series, and in the arrays; the message names the folder that was asked for."""
    line = [sys.executable, "-c", LIMITED, str(folder), str(tmp_path / "pour"), str(largest)]
    done = subprocess.run(line, check=True, cwd=ROOT, capture_output=True, text=True)
    assert re.fullmatch(r'run folder: "\S+/pour": a file grew beyond what is allowed here; .*\n', done.stdout)
    assert names(tmp_path) == set()


@pytest.mark.parametrize("error", [KeyboardInterrupt, cupfem.ConvergenceError("no")])
@pytest.mark.parametrize("numbered", [False, True])
def test_an_interrupt_leaves_nothing(run, here, error, numbered):
    with pytest.raises(type(error) if isinstance(error, Exception) else error):
        write_run(run, None if numbered else "pour", figures=failing(error))
    assert names(here) == set()


def test_an_interrupt_while_replacing_puts_the_old_folder_back(run, tmp_path, monkeypatch):
    place = write_run(run, tmp_path / "pour", timings={"march": 1.0})
    before = (place / "timings.json").read_bytes()
    rename, calls = os.rename, []

    def interrupted(source, target):
        calls.append(source)
        if len(calls) == 2:
            raise KeyboardInterrupt
        rename(source, target)

    monkeypatch.setattr("cupfem.exchange.place._exchanged", lambda first, second: False)
    monkeypatch.setattr(os, "rename", interrupted)
    with pytest.raises(KeyboardInterrupt):
        write_run(run, place, force=True)
    assert len(calls) == 3
    assert (place / "timings.json").read_bytes() == before
    assert names(tmp_path) == {"pour"}


def test_killed_processes_leave_whole_folders_or_none():
    line = [sys.executable, str(ROOT / "tests" / "hard_use" / "kill_runs.py"), "--count", "10"]
    environment = os.environ | {"PYTHONPATH": str(ROOT)}
    done = subprocess.run(line, capture_output=True, text=True, check=False, env=environment)
    assert done.returncode == 0, done.stderr
    assert done.stdout.startswith("10 kills: ")


@pytest.mark.parametrize("name", ["fields/fields_0001.vtu", "run.npz", "summary.json", "series.csv"])
@pytest.mark.parametrize("cut", [False, True])
def test_a_torn_folder_would_be_seen(run, tmp_path, name, cut):
    """Planted fault: a file is missing or ends halfway."""
    place = write_run(run, tmp_path / "pour")
    file = place / name
    if cut:
        file.write_bytes(file.read_bytes()[: file.stat().st_size // 2])
    else:
        file.unlink()
    assert len(flaws(place)) == 1


# -- a run that could not go on ------------------------------------------------------------------------------


def test_incomplete(run, here):
    error = cupfem.ConvergenceError("the march cannot go on at t = 12.5 s: step 1e-10 s after 40 steps")
    place = write_incomplete(run.cup, run.serving, error, name="pour-cup")
    assert place.name == "pour-cup-001-incomplete"
    assert names(place) == {"cup.toml", "serving.toml", "versions.json", "incomplete.txt"}
    assert (place / "incomplete.txt").read_text(encoding="utf-8") == f"{error}\n"
    assert cupfem.load_cup(place / "cup.toml").title == run.cup.title


def test_the_next_run_takes_the_next_number(run, here):
    write_incomplete(run.cup, run.serving, cupfem.ConvergenceError("stopped"))
    assert write_run(run).name == "pour-002"


def test_incomplete_beside_a_named_folder(run, tmp_path):
    for text in ("first", "second"):
        error = cupfem.ConvergenceError(text)
        place = write_incomplete(run.cup, run.serving, error, tmp_path / "pour")
    assert names(tmp_path) == {"pour-incomplete"}
    assert (place / "incomplete.txt").read_text(encoding="utf-8") == "second\n"
