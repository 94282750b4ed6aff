"""Bad input at the command line: status 2, one line on standard error, no traceback, nothing written."""

import subprocess
import sys
from pathlib import Path

import pytest

from cupfem.cli import main

ROOT = Path(__file__).parents[1]
GEOMETRIES = ROOT / "geometries"
DOUBLE_WALL = (GEOMETRIES / "double_wall.toml").read_text(encoding="utf-8")
OUTER = 'name = "outer"\nmaterial = "cupstock board"\n'

# text of the cup file that is replaced, by what, and what the message has to say
CUPS = {
    "decimal comma": ("0.33 mm", "0,33 mm", '"0,33 mm": decimal comma; write "0.33 mm"'),
    "wrong unit": ("0.33 mm", "0.33 kg", '"kg" is a unit of mass, not of length'),
    "no unit": ('"0.33 mm"', "0.33", 'write it as in "0.33 mm"'),
    "zero thickness": ("0.33 mm", "0 mm", "must be more than zero"),
    "negative thickness": ("0.33 mm", "-0.3 mm", "must be more than zero"),
    "unknown key": ('thickness = "0.33', 'thicknes = "0.33', 'did you mean "thickness"?'),
    "unknown material": (OUTER, OUTER.replace("cupstock", "cupstok"), 'Did you mean "cupstock board"?'),
    "layer that leaves the cup": ('"88 mm"', '"99 mm"', "above the brim at 95 mm: the layer leaves the cup"),
    "overlap of blends": ('"88 mm"', '"94 mm"', '"outer" ends within this length'),
    "gas outermost": (OUTER, 'name = "outer"\nmaterial = "air"\n', "nothing holds the gas"),
    "handle": ("[base]", "handle = true\n[base]", "handle"),
    "wall too thick": ("0.33 mm", "40 mm", "thicker than the inside radius"),
    "wall too flat": ("78 mm", "300 mm", "45 is the limit"),
    "material without data": (
        "[base]", '[material."trial"]\ndensity = "600 kg/m^3"\n[base]', "no conductivity_through",
    ),
    "not TOML": ("[cup]", "[cup", "not a TOML file"),
}  # fmt: skip

SERVINGS = {
    "fill above the brim": ('[drink]\nlevel = "96 mm"', "not below the brim at 95 mm"),
    "more than brimful": ('[drink]\nvolume = "2 l"', "the cup is brimful with 313 ml"),
    "boiling drink": ('[drink]\ntemperature = "120 degC"', "boiling is not modelled"),
    "drink below the dew point": ('[drink]\ntemperature = "4 degC"', "outside condensation is not modelled"),
    "coulombs": ('[drink]\ntemperature = "85 C"', 'write "85 degC"'),
    "drunk more than poured": ('[[event]]\nsip = "400 ml"\nfirst = "1 min"', "more than the 266 ml poured"),
    "target beyond the end": (
        '[target]\ndrink_above = "60 degC"\nuntil = "2 h"', "after the end of the serving",
    ),
    "target above the brim": (
        '[target]\nwall_below = "60 degC"\nbetween = ["10 mm", "120 mm"]', "above the brim at 95 mm",
    ),
}  # fmt: skip

OPTIONS = {
    "missing cup file": (["pour", "no_such.toml"], "no_such.toml: no such file."),
    "missing serving file": (["pour", "cup.toml", "no_such.toml"], "no_such.toml: no such file."),
    "folder instead of a file": (["pour", "."], "is a folder, not a file"),
    "serving as cup": (["pour", str(GEOMETRIES / "serving_galley_tea.toml")], "serving_galley_tea.toml"),
    "duration without a unit": (["pour", "cup.toml", "--duration", "5"], 'as in "5 min"'),
    "duration of nothing": (["pour", "cup.toml", "--duration", "0 s"], "must be more than zero"),
    "duration before the last event": (
        ["pour", "cup.toml", str(GEOMETRIES / "serving_galley_tea.toml"), "--duration", "5 min"],
        "after the end of the serving",
    ),
    "fineness out of range": (["pour", "cup.toml", "--fineness", "100"], "fineness: 100"),
    "fineness not a number": (["draw", "cup.toml", "--fineness", "nan"], "fineness"),
    "units of nowhere": (["pour", "cup.toml", "--units", "metric"], "'si', 'us'"),
    "unknown option": (["pour", "cup.toml", "--colour"], "--colour"),
    "unknown command": (["brew", "cup.toml"], "brew"),
    "no cup": (["pour"], "CUP"),
    "out in no folder": (["pour", "cup.toml", "--out", "no/such/place"], "run folder"),
    "out is a file": (["draw", "cup.toml", "--out", "cup.toml"], "a file of that name exists"),
    "unknown material of the library": (["materials", "cupstock bord"], 'Did you mean "cupstock board"?'),
}


@pytest.fixture(autouse=True)
def _with_a_cup_file(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    Path("cup.toml").write_text(DOUBLE_WALL, encoding="utf-8")


def refusal(capsys, *arguments: str) -> str:
    """The one line with which a command is refused, after the checks that hold for all."""
    before = {path: path.read_bytes() for path in Path().rglob("*") if path.is_file()}
    with pytest.raises(SystemExit) as ended:
        main(list(arguments))
    printed = capsys.readouterr()
    assert ended.value.code == 2
    assert printed.out == ""
    assert printed.err.startswith("cupfem: ")
    assert printed.err.count("\n") == 1
    assert "Traceback" not in printed.err
    assert {path: path.read_bytes() for path in Path().rglob("*") if path.is_file()} == before
    return printed.err


@pytest.mark.parametrize("kind", CUPS)
@pytest.mark.parametrize("command", ["pour", "draw"])
def test_cup_file(capsys, command, kind):
    old, new, message = CUPS[kind]
    assert old in DOUBLE_WALL
    Path("cup.toml").write_text(DOUBLE_WALL.replace(old, new, 1), encoding="utf-8")
    assert message in refusal(capsys, command, "cup.toml")


@pytest.mark.parametrize("kind", SERVINGS)
def test_serving_file(capsys, kind):
    text, message = SERVINGS[kind]
    Path("serving.toml").write_text(text + "\n", encoding="utf-8")
    assert message in refusal(capsys, "pour", "cup.toml", "serving.toml")


@pytest.mark.parametrize("kind", OPTIONS)
def test_command_line(capsys, kind):
    arguments, message = OPTIONS[kind]
    assert message in refusal(capsys, *arguments)


def test_a_real_process_says_the_same():
    Path("cup.toml").write_text(DOUBLE_WALL.replace("0.33 mm", "0,33 mm"), encoding="utf-8")
    line = [sys.executable, "-c", "from cupfem.cli import main; main()", "pour", "cup.toml"]
    done = subprocess.run(line, capture_output=True, text=True, check=False)
    assert done.returncode == 2
    assert done.stdout == ""
    assert done.stderr == (
        'cupfem: cup.toml, line 13: layer.inner.thickness: "0,33 mm": decimal comma; write "0.33 mm"\n'
    )
    assert [path.name for path in Path().iterdir()] == ["cup.toml"]
