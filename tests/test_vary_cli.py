"""The command `vary`: its folder, going on, and refusals before anything is written."""

import csv

import pytest

from cupfem.cli import main
from cupfem.cli.vary import progress_text
from cupfem.vary import Progress

CUP = """
[cup]
height = "95 mm"
inner_top_diameter = "78 mm"
inner_foot_diameter = "55 mm"
[[layer]]
name = "wall"
material = "cupstock board"
thickness = "0.33 mm"
[base]
material = "cupstock board"
thickness = "0.35 mm"
recess = "8 mm"
"""
PLAN = """
title = "Thin or thick"
cup = "cup.toml"
serving = "serving.toml"
fineness = 0.25
record = ["board_mass_g", "outer_max_degC"]
[limits]
board_mass_g = { at_most = "5 g" }
[[vary]]
key = "layer.wall.thickness"
list = ["0.3 mm", "0.5 mm", "60 mm"]
"""


@pytest.fixture
def plan(tmp_path, monkeypatch):
    """A folder with a plan of three small cases, one of them no cup."""
    monkeypatch.chdir(tmp_path)
    (tmp_path / "cup.toml").write_text(CUP, encoding="utf-8")
    (tmp_path / "serving.toml").write_text('duration = "2 s"\n', encoding="utf-8")
    (tmp_path / "plan.toml").write_text(PLAN, encoding="utf-8")
    return tmp_path


def command(*arguments):
    """Run the command line; returns its status."""
    with pytest.raises(SystemExit) as ended:
        main(["vary", *arguments])
    return ended.value.code


def test_the_folder_holds_table_text_and_pictures_and_is_gone_on_with(plan, capsys):
    assert command("plan.toml", "--workers", "1") == 0
    shown = capsys.readouterr().out
    folder = plan / "plan-cases"
    assert "3 cases, 1 failed" in shown
    assert "limit: board_mass_g at most 5" in shown
    assert "not a safety certificate" in shown
    assert shown.startswith((folder / "outcome.txt").read_text(encoding="utf-8"))
    rows = list(csv.DictReader((folder / "cases.csv").read_text(encoding="utf-8").splitlines()))
    assert [row["layer.wall.thickness [mm]"] for row in rows] == ["0.3", "0.5", "60"]
    assert [row["limits"] for row in rows] == ["passed", "failed", "not run"]
    assert (folder / "effects_outer_max_degC.png").read_bytes().startswith(b"\x89PNG")
    before = {path.name: path.read_bytes() for path in folder.iterdir() if path.suffix != ".sqlite"}
    assert command("plan.toml", "--quiet") == 0
    assert capsys.readouterr().out == "plan-cases\n"
    after = {path.name: path.read_bytes() for path in folder.iterdir() if path.suffix != ".sqlite"}
    assert before == after


@pytest.mark.parametrize(
    ("arguments", "text"),
    [
        (("plan.tml",), 'plan.tml: no such file. Did you mean "plan.toml"?'),
        (("plan.toml", "--workers", "0"), "workers: 0: no process would do the work"),
        (("plan.toml", "--out", "."), "it exists and holds no cases.sqlite"),
        (("plan.toml", "--out", "none/there"), "does not exist"),
    ],
)
def test_what_cannot_be_used_is_one_line(plan, capsys, arguments, text):
    assert command(*arguments) == 2
    told = capsys.readouterr().err
    assert text in told
    assert told.count("\n") == 1


def test_progress_in_words():
    assert progress_text(Progress(3, 40, 0, 0, 0.5, 74.0)) == "0.5 a second, 74 s left"
    told = progress_text(Progress(30, 4000, 20, 2, 0.5, 7940.0))
    assert told == "0.5 a second, 132 min left, 20 taken up, 2 failed"
    assert progress_text(Progress(0, 4, 0, 0, 0.0, None)) == "starting"
