"""The commands: what they print, what they leave behind, and the status they end with."""

import csv
import json
import os
import signal
import subprocess
import sys
import time
from io import StringIO
from pathlib import Path

import pytest
from rich.console import Console
from typer.testing import CliRunner

from cupfem.cli import app, jobs, main
from cupfem.cli.show import _table
from cupfem.errors import ConvergenceError
from cupfem.materials import library
from cupfem.run import CAUTION, load_run

ROOT = Path(__file__).parents[1]
CUP = str(ROOT / "geometries" / "double_wall.toml")
TEA = str(ROOT / "geometries" / "serving_galley_tea.toml")
START = [sys.executable, "-c", "from cupfem.cli import main; main()"]
SHORT = ["--duration", "20 s", "--fineness", "0.25"]
TARGET = """
duration = "20 s"
[drink]
temperature = "85 degC"
[target]
drink_above = "90 degC"
"""


@pytest.fixture(autouse=True)
def _in_an_empty_folder(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    monkeypatch.setenv("COLUMNS", "110")


def command(*arguments: str, capsys) -> tuple[int, str, str]:
    """Status, standard output and standard error of a command in this process."""
    with pytest.raises(SystemExit) as ended:
        main(list(arguments))
    printed = capsys.readouterr()
    return ended.value.code, printed.out, printed.err


def test_pour_prints_and_writes(capsys):
    status, out, err = command("pour", CUP, *SHORT, capsys=capsys)
    assert (status, err) == (0, "")
    folder = Path(out.splitlines()[-1])
    assert folder == Path("pour-001")
    assert {"summary.json", "series.csv", "fields.pvd", "section.png", "field.png", "heat.png"} <= {
        path.name for path in folder.iterdir()
    }
    assert load_run(folder).serving.duration == 20.0
    assert json.loads((folder / "timings.json").read_text())["run_s"] > 0


def test_pour_says_what_its_figures_are(capsys):
    _, out, _ = command("pour", CUP, *SHORT, capsys=capsys)
    words = " ".join(out.split())
    assert "free-wall figures, not a hold time" not in words  # a verdict of touch stands beside them
    assert "can be held, " in words
    assert " (thin skin, " in words
    assert CAUTION in words
    assert "numerical: time" in words
    assert "model: board moisture not modelled" in words
    assert 'drink.temperature = "85 degC"' in words
    assert out.index("Uncertainty") < out.index("numerical:") < out.index("model:")


def test_verdict(capsys):
    Path("hot.toml").write_text(TARGET)
    status, out, _ = command("pour", CUP, "hot.toml", "--fineness", "0.5", capsys=capsys)
    assert status == 0
    assert "FAIL  drink above, until 20 s: 90 degC asked, " in out
    Path("mild.toml").write_text(TARGET.replace("90", "50"))
    _, out, _ = command("pour", CUP, "mild.toml", "--fineness", "0.5", capsys=capsys)
    assert "PASS  drink above, until 20 s: 50 degC asked, " in out


def test_folders_are_numbered_or_named_and_replaced_by_force_only(capsys):
    for expected in ("pour-001", "pour-002"):
        _, out, _ = command("pour", CUP, *SHORT, "--quiet", capsys=capsys)
        assert out == f"{expected}\n"
    assert command("pour", CUP, *SHORT, "--out", "mine", "--quiet", capsys=capsys)[0] == 0
    status, out, err = command("pour", CUP, *SHORT, "--out", "mine", "--quiet", capsys=capsys)
    assert (status, out) == (2, "")
    assert "exists already; name another folder, or add --force" in err
    assert command("pour", CUP, *SHORT, "--out", "mine", "--force", "--quiet", capsys=capsys)[0] == 0


def test_us_units(capsys):
    _, out, _ = command("pour", CUP, *SHORT, "--units", "us", capsys=capsys)
    assert " degF +- " in out
    assert " in\n" in out.replace(" in ", " in\n")
    _, out, _ = command("draw", CUP, "--units", "us", capsys=capsys)
    assert "13 mil" in out
    assert " mm" not in out


def test_duration_is_that_of_the_run_and_keeps_the_rest(capsys):
    command("pour", CUP, TEA, "--duration", "19 min", "--fineness", "0.5", "--out", "tea", capsys=capsys)
    run = load_run("tea")
    assert run.serving.duration == 19 * 60.0
    assert run.serving.title == "Tea from the galley, on the mess table"
    assert run.serving.drunk() == pytest.approx(180e-6)
    assert run.fineness == 0.5


def test_draw(capsys):
    status, out, _ = command("draw", CUP, "--out", "sketch", capsys=capsys)
    assert status == 0
    for words in ("brimful capacity", "313 ml", "cells across", "smallest angle", "cupstock board"):
        assert words in out
    assert {path.name for path in Path("sketch").iterdir()} == {
        "cup.toml", "fill.csv", "section.png", "summary.json",
    }  # fmt: skip
    told = json.loads(Path("sketch/summary.json").read_text())
    rows = list(csv.DictReader(Path("sketch/fill.csv").read_text().splitlines()))
    assert float(rows[-1]["volume_ml"]) == pytest.approx(told["brimful_capacity_ml"], rel=1e-5)


@pytest.mark.parametrize("width", [80, 120])
def test_materials_fit_the_terminal(capsys, monkeypatch, width):
    monkeypatch.setenv("COLUMNS", str(width))
    status, out, _ = command("materials", capsys=capsys)
    assert status == 0
    assert max(len(line.rstrip()) for line in out.splitlines()) <= width
    words = " ".join(out.split())
    for name in library():
        assert name in words
    assert "0.07 to 0.14 W/(m K)" in out


def test_one_material(capsys):
    _, out, _ = command("materials", "cupstock board", capsys=capsys)
    assert "from memory, not re-checked" in out
    assert "surface, for the contact of a finger: board" in out
    assert "stoneware" not in out
    _, out, _ = command("materials", "cupstock board", "--units", "us", capsys=capsys)
    assert "Btu/(h ft degF)" in out


def test_help_explains_the_words():
    runner = CliRunner()
    shown = runner.invoke(app, ["--help"])
    assert shown.exit_code == 0
    for word in (
        "cup file",
        "serving file",
        "film coefficient",
        "free wall",
        "hold time",
        "sleeve",
        "Example",
    ):
        assert word in shown.output
    for name in ("draw", "pour", "hold", "materials"):
        one = runner.invoke(app, [name, "--help"])
        assert one.exit_code == 0
        assert "--units" in one.output
        assert "Example: cupfem" in one.output


def test_without_arguments_it_helps(capsys):
    status, out, _ = command(capsys=capsys)
    assert status == 0
    assert "Usage: cupfem" in out


def test_version(capsys):
    from cupfem import __version__

    assert command("--version", capsys=capsys)[:2] == (0, f"cupfem {__version__}\n")


def test_help_loads_nothing_heavy():
    code = (
        "import sys\nsys.argv = ['cupfem', '--help']\nfrom cupfem.cli import main\n"
        "try:\n    main()\nexcept SystemExit:\n    pass\n"
        "heavy = {'numpy', 'scipy', 'skfem', 'matplotlib', 'pydantic', 'pint'}\n"
        "print(heavy & set(sys.modules), file=sys.stderr)"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stderr.strip() == "set()"


def test_a_march_that_cannot_go_on_leaves_the_inputs(capsys, monkeypatch):
    def stuck(*_, **__):
        raise ConvergenceError("the march cannot go on at 3 s: step 1e-9 s, worst at 41 mm")

    monkeypatch.setattr(jobs, "pour", stuck)
    status, out, err = command("pour", CUP, *SHORT, "--out", "gone", capsys=capsys)
    assert (status, out) == (3, "")
    assert err.count("\n") == 1
    assert "cannot go on at 3 s" in err
    assert "gone-incomplete" in err
    assert "cannot go on at 3 s" in Path("gone-incomplete/incomplete.txt").read_text()
    assert not Path("gone").exists()


def test_stopped_by_hand(capsys, monkeypatch):
    def stop(*_, **__):
        raise KeyboardInterrupt

    monkeypatch.setattr(jobs, "pour", stop)
    status, out, err = command("pour", CUP, *SHORT, capsys=capsys)
    assert (status, out, err) == (130, "", "cupfem: stopped\n")
    assert list(Path().iterdir()) == []


def test_interrupt_of_a_real_process():
    """As a terminal does it: SIGINT while the march runs."""
    line = [*START, "pour", CUP, "--duration", "24 h", "--fineness", "4"]
    process = subprocess.Popen(line, stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True)
    time.sleep(2.5)
    process.send_signal(signal.SIGINT)
    out, err = process.communicate(timeout=20)
    assert process.returncode == 130
    assert (out, err) == ("", "cupfem: stopped\n")
    assert list(Path().iterdir()) == []


@pytest.mark.parametrize("arguments", [["materials"], ["--help"]])
def test_a_reader_that_stops_reading(arguments):
    """`cupfem materials | head -1` says nothing of broken pipes."""
    read, write = os.pipe()
    os.close(read)
    done = subprocess.run([*START, *arguments], stdout=write, stderr=subprocess.PIPE, text=True, check=False)
    os.close(write)
    assert done.stderr == ""


def test_progress_is_shown_on_a_terminal_only(monkeypatch, capsys):
    told = []
    monkeypatch.setattr(jobs, "Progress", lambda *_, **__: told.append("bar"))
    command("pour", CUP, *SHORT, "--quiet", capsys=capsys)
    assert told == []
    with jobs._progress(1.0, quiet=True) as tell:
        assert tell is None


HELD = ["hold", CUP, "--duration", "40 s", "--longest", "30 s", "--fineness", "0.25"]


def test_hold_prints_and_writes(capsys):
    status, out, err = command(*HELD, "--asked", "10 s", "--out", "held", capsys=capsys)
    assert (status, err) == (0, "")
    words = " ".join(out.split())
    assert "Hold time in s, thin to thick skin, by height and pick-up" in words
    assert "cannot be held 10 s, picked up from 5 s on" in words
    assert "grip band can be held 10 s from" in words
    assert CAUTION in words
    told = json.loads(Path("held/hold.json").read_text())
    assert told["asked_s"] == 10.0
    rows = list(csv.DictReader(Path("held/hold.csv").read_text().splitlines()))
    heights = {row["height_mm"] for row in rows}
    assert len(rows) == len(heights) * len({row["pick_up_s"] for row in rows})
    shortest = min(float(row["hold_time_s"]) for row in rows if row["hold_time_s"])
    assert told["worst"]["hold_time_s"] == pytest.approx(shortest, rel=1e-5)
    band = told["band_that_cannot_be_held"][0]
    short = [
        float(row["height_mm"])
        for row in rows
        if float(row["pick_up_s"]) == band["pick_up_s"]
        and float(row["hold_time_s"] or row["at_least_s"]) < 10
    ]
    assert [band["from_mm"], band["to_mm"]] == pytest.approx([min(short), max(short)], abs=0.01)
    assert (Path("held") / "hold.png").is_file()


def test_cups_side_by_side(capsys):
    single = str(ROOT / "geometries" / "single_board.toml")
    given = [*SHORT, "--against", single, "--out", "both"]
    status, out, _ = command("pour", CUP, *given, capsys=capsys)
    assert status == 0
    assert "Side by side" in out
    rows = list(csv.reader(Path("both/against.csv").read_text().splitlines()))
    assert rows[0] == ["", "Double-wall board cup", "Single-wall board cup"]
    told = {row[0]: row[1:] for row in rows}
    held = [float(cell.removeprefix("more than ").split()[0]) for cell in told["can be held, thin skin"]]
    assert held[0] > 3 * held[1]
    other = json.loads(Path("both/against_1.json").read_text())
    assert other["title"]["cup"] == "Single-wall board cup"
    assert other["hold_time_s"] == pytest.approx(held[1], rel=5e-3)
    assert (Path("both") / "against.png").is_file()


@pytest.mark.parametrize(
    ("given", "told"),
    [
        (["--asked", "soon"], "--asked"),
        (["--asked", "0 s"], "no time to hold a cup for"),
        (["--longest", "20"], "longest"),
        (["--against", CUP] * 6, "at most 5 cups fit side by side"),
    ],
)
def test_hold_refuses_in_one_line(capsys, given, told):
    status, out, err = command(*HELD[:2], *given, "--duration", "5 s", "--fineness", "0.25", capsys=capsys)
    assert (status, out) == (2, "")
    assert err.count("\n") == 1
    assert told in err
    assert list(Path().iterdir()) == []


def test_a_narrow_terminal_cuts_no_figure():
    """A range breaks after its dots: no figure loses a digit or goes on in the next line."""
    console = Console(file=StringIO(), width=20)
    console.print(_table([("0.913..2.58", "0.771..2.63")], ("5 s", "10 s")))
    shown = console.file.getvalue()
    assert "…" not in shown
    assert shown.split() == ["5", "s", "10", "s", "0.913..", "0.771..", "2.58", "2.63"]
