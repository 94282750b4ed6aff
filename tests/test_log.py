"""A measured log beside a run."""

from pathlib import Path

import numpy as np
import pytest

import cupfem
from cupfem.cli import main
from cupfem.errors import InputError
from cupfem.run.log import misfits, read_log

ROOT = Path(__file__).parents[1]


@pytest.fixture(scope="module")
def run():
    cup = cupfem.load_cup(ROOT / "geometries" / "single_board.toml")
    serving = cupfem.Serving(duration="3 min")
    return cupfem.pour(cup, serving, fineness=0.5, tolerance=0.02, companion=False)


def written(folder, text):
    path = folder / "log.csv"
    path.write_text(text, encoding="utf-8")
    return path


def test_a_log_that_is_the_run_plus_a_known_error(run, tmp_path):
    """Readings half a kelvin too high and half too low in turn: RMSE 0.5, mean 0; the wall one kelvin low."""
    times = np.arange(10.0, 170.0, 10.0)
    drink = np.interp(times, run.time, run.series.drink_temperature) + 0.5 * (-1.0) ** np.arange(len(times))
    wall = np.interp(times, run.time, run.outer_temperature_at(0.045)) - 1.0
    rows = [f"{t},{d:.9f},{w:.9f}" for t, d, w in zip(times, drink, wall, strict=True)]
    log = read_log(
        written(tmp_path, "\n".join(["time_s,drink_temperature_degC,outer_z045mm_degC", *rows, "9999,20,20"]))
    )
    on_drink, on_wall = misfits(run, log)
    assert (on_drink.points, on_wall.points) == (16, 16)
    assert on_drink.root_mean_square == pytest.approx(0.5, abs=1e-6)
    assert on_drink.mean == pytest.approx(0.0, abs=1e-6)
    assert (on_wall.root_mean_square, on_wall.mean) == pytest.approx((1.0, 1.0), abs=1e-6)
    assert on_wall.line() == "outer_z045mm_degC: RMSE 1.00 K over 16 points, mean +1.00 K, largest 1.00 K"


def test_empty_cells_are_no_readings(run, tmp_path):
    log = read_log(written(tmp_path, "time_s,drink_temperature_degC\n30,80\n60,\n90,79\n"))
    assert misfits(run, log)[0].points == 2


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("", r"^log: .*holds no rows below its headings"),
        ("minutes,drink_temperature_degC\n1,80\n", r'^log: "minutes": no column time_s beside a temperature'),
        (
            "time_s,drink_temperature_C\n1,80\n",
            r'^log: "drink_temperature_C": no such column.*drink_temperature_degC',
        ),
        ("time_s,drink_temperature_degC\n1,80,3\n", r"^log, line 2: 3 values below 2 headings"),
        (
            "time_s,drink_temperature_degC\n1,hot\n",
            r'^log, line 2, drink_temperature_degC: "hot": not a number',
        ),
        ("time_s,drink_temperature_degC\n2,80\n1,81\n", r'^log: "time_s": the times do not rise'),
    ],
)
def test_what_cannot_be_used(tmp_path, text, message):
    with pytest.raises(InputError, match=message):
        read_log(written(tmp_path, text))


def test_a_missing_file(tmp_path):
    with pytest.raises(InputError, match=r"^log: .*cannot be read as text"):
        read_log(tmp_path / "none.csv")


def test_a_log_after_the_end_of_the_run(run, tmp_path):
    log = read_log(written(tmp_path, "time_s,drink_temperature_degC\n900,60\n"))
    with pytest.raises(InputError, match=r'^log: "drink_temperature_degC": has no reading within the run'):
        misfits(run, log)


def test_the_command_draws_the_log_over_the_run(tmp_path, capsys):
    """`--log`: a line on the screen, a picture and the numbers in the folder."""
    log = written(tmp_path, "time_s,drink_temperature_degC\n10,84\n30,83\n50,82\n")
    cup = str(ROOT / "geometries" / "single_board.toml")
    out = tmp_path / "out"
    options = ["--duration", "1 min", "--fineness", "0.5", "--out", str(out), "--log", str(log)]
    with pytest.raises(SystemExit) as ended:
        main(["pour", cup, *options])
    assert ended.value.code == 0
    assert "drink_temperature_degC: RMSE" in capsys.readouterr().out
    assert (out / "log.png").read_bytes().startswith(b"\x89PNG")
    table = (out / "log.csv").read_text(encoding="utf-8").splitlines()
    assert table[0] == "column,points,rmse_K,mean_K,largest_K"
