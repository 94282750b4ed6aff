"""The main job: what a march keeps, its companion, films from Python, and what `Run` answers."""

import functools

import numpy as np
import pytest

import cupfem
from cupfem.errors import InputError
from cupfem.films import FixedFilm, FluxFunction
from cupfem.pour.record import series_times, snapshot_times
from cupfem.run.headline import Verdict, crossing, verdict_line
from cupfem.run.store import save_run
from cupfem.serving import Serving

SHORT = 'duration = "90 s"\n'


@functools.cache
def poured(text=SHORT, **options):
    cup = cupfem.load_cup("geometries/single_board.toml")
    return cupfem.pour(cup, Serving.from_text(text), hold=False, **options)


def test_series_and_snapshots_end_with_the_serving():
    times, kept = series_times(90.0, (33.3,)), snapshot_times(90.0)
    assert times[0] == kept[0] == 0.0
    assert times[-1] == kept[-1] == 90.0
    assert 33.3 in times
    assert np.all(np.diff(times) > 0)
    assert list(kept) == [0, 1, 2, 5, 10, 20, 30, 60, 90]


def test_snapshots_and_series_tell_the_same():
    run = poured()
    for time in run.snapshot_times:
        place = int(np.argmin(np.abs(run.time - time)))
        outer = run.snapshot(float(time))[run.faces.outer]
        np.testing.assert_allclose(outer, run.series.outer_temperature[place], atol=1e-9)


def test_the_companion_tells_the_space_error():
    """A run of twice the fineness differs by less than what was told, plus the time's error."""
    run, finer = poured(), poured(fineness=2.0, companion=False)
    told = run.space_errors["outer_end_max_degC"]
    difference = abs(run.figures()["outer_end_max_degC"] - finer.figures()["outer_end_max_degC"])
    assert 0.0 < told < 0.2
    assert difference < told + run.time_error
    assert not poured(companion=False).space_errors


def test_a_smaller_tolerance_brings_the_time_error_down():
    loose, tight = (poured(tolerance=each, companion=False, fineness=0.5) for each in (2e-2, 1e-3))
    assert tight.time_error < loose.time_error
    assert tight.counters["steps"] > loose.counters["steps"]


def test_a_film_from_python_replaces_that_of_the_serving():
    """A fixed film in Python is that of the file; a function of the surface is seen by the wall."""
    file = 'outside = { coefficient = "20 W/(m^2 K)", surroundings = "22 degC" }\n'
    options = {"companion": False, "fineness": 0.5}
    cup = cupfem.load_cup("geometries/single_board.toml")
    from_file = poured(SHORT + "[films]\n" + file, **options)
    python = cupfem.pour(
        cup, Serving.from_text(SHORT), films={"outside": FixedFilm(20.0)}, hold=False, **options
    )
    np.testing.assert_allclose(
        python.series.outer_temperature, from_file.series.outer_temperature, rtol=0, atol=1e-9
    )
    hot = FluxFunction(lambda surface, around, height, time: 20.0 * (surface - around))
    function = cupfem.pour(cup, Serving.from_text(SHORT), films={"outside": hot}, hold=False, **options)
    np.testing.assert_allclose(
        function.series.outer_temperature, python.series.outer_temperature, rtol=0, atol=1e-6
    )


def test_a_film_from_python_is_lost_in_a_folder_and_says_so(tmp_path):
    cup = cupfem.load_cup("geometries/single_board.toml")
    options = {"companion": False, "fineness": 0.5, "hold": False}
    run = cupfem.pour(cup, Serving.from_text(SHORT), films={"wetted": FixedFilm(400.0)}, **options)
    save_run(run, tmp_path)
    with pytest.raises(InputError, match=r"^films\.wetted: given in Python.*pour again"):
        cupfem.hold(cupfem.load_run(tmp_path), heights=["50 mm"], pick_ups=["20 s"])


def test_an_unknown_edge_is_refused():
    cup = cupfem.load_cup("geometries/single_board.toml")
    with pytest.raises(InputError, match=r'^films: "outsid": no such edge.*outside'):
        cupfem.pour(cup, Serving.from_text(SHORT), films={"outsid": FixedFilm(20.0)})


def test_progress_is_told_to_the_end():
    told = []
    cup = cupfem.load_cup("geometries/single_board.toml")
    cupfem.pour(cup, Serving.from_text(SHORT), companion=False, fineness=0.5, progress=told.append)
    assert told == sorted(told)
    assert told[-1] == 90.0


def test_drink_states_give_the_series_back():
    """Mass [kg] is kept as it is; enthalpy over mass and the drink's own relation give its temperature."""
    run = poured()
    np.testing.assert_array_equal(run.drink_states[:, 0], run.series.drink_mass)
    liquid = run.serving.drink.liquid
    temperature = [float(liquid.temperature(h / m)) for m, h in run.drink_states[:, :2]]
    np.testing.assert_allclose(temperature, run.series.drink_temperature, atol=1e-9)


def test_temperatures_at_heights():
    run = poured()
    high = run.outer_temperature_at(0.05)
    assert high.shape == run.time.shape
    place = int(np.argmin(np.abs(run.faces.outer_height - 0.05)))
    assert high[-1] == pytest.approx(run.series.outer_temperature[-1, place], abs=0.2)
    with pytest.raises(
        InputError, match=r'^height: "120 mm": not on the wall; write a height from .* to 95 mm'
    ):
        run.outer_temperature_at(0.12)


@pytest.mark.parametrize(
    ("values", "limit", "expected"),
    [
        ([20, 30, 50], 40, 1.5),
        ([45, 50, 60], 40, 0.0),
        ([20, 30, 35], 40, None),
        ([np.nan, np.nan, 50], 40, 2.0),
    ],
)
def test_crossing(values, limit, expected):
    found = crossing(np.array([0.0, 1.0, 2.0]), np.array(values, dtype=float), limit)
    assert found == (expected if expected is None else pytest.approx(expected, abs=1e-6))


def test_verdict_lines():
    kept = Verdict("drink above, until 600 s", 60.0, 68.5, 8.5)
    missed = Verdict("hold time from 45 to 70 mm", 60.0, 30.6, -29.4, "time")
    assert (
        verdict_line(kept)
        == "PASS  drink above, until 600 s: 60 degC asked, 68.5 degC reached, margin +8.5 K"
    )
    assert verdict_line(kept, "us").endswith("margin +15.3 degF")
    assert verdict_line(missed).startswith("FAIL  hold time from 45 to 70 mm: 60 s asked, 30.6 s reached")
