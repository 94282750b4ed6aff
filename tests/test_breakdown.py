"""The field set beside the one-dimensional estimates: a wall with no height dependence, flags, errors, files.

Rungs against published values: tests/test_estimates.py, test_estimates_slab.py, test_estimates_radial.py.
That estimates and field share nothing but films, gaps and properties: tests/test_levels.py.
"""

import csv
import io
import math
import time

import numpy as np
import pytest
from shipped import GEOMETRIES

import cupfem
from cupfem.breakdown import RUNGS, End, slab
from cupfem.breakdown.errors import difference, longest_within, passing
from cupfem.breakdown.height import over_height
from cupfem.breakdown.job import difference_map
from cupfem.breakdown.lateral import lateral_shares
from cupfem.breakdown.places import fin_length, level_distance, nearest_end
from cupfem.breakdown.rungs import ELEMENTS, TOLERANCE, Servings, along_times, ladder
from cupfem.cup import Cup
from cupfem.errors import InputError
from cupfem.estimates import follow
from cupfem.films import FluxFunction
from cupfem.pour import pour
from cupfem.serving import Serving

TUBE = """
base = "none"
[cup]
height = "92 mm"
inner_top_diameter = "70 mm"
inner_foot_diameter = "70 mm"
[[layer]]
name = "inner"
material = "cupstock board"
thickness = "0.33 mm"
[[layer]]
name = "gap"
material = "air"
thickness = "1 mm"
contact_fraction = 0.02
[[layer]]
name = "outer"
material = "cupstock board"
thickness = "0.30 mm"
"""
FULL = """
duration = "120 s"
[drink]
density = "970 kg/m^3"
specific_heat = "4190 J/(kg K)"
temperature = "85 degC"
level = "91.99 mm"
[room]
temperature = "22 degC"
[films]
wetted = { coefficient = "400 W/(m^2 K)" }
surface = { coefficient = "60 W/(m^2 K)", surroundings = "22 degC" }
"""
SAME_WALL = 0.01
"""Allowed between field and radial estimate where nothing depends on the height [K]."""
SHORT = {"title": "Two minutes", "duration": "2 min"}


def poured(name, **serving):
    given = Serving(**{**SHORT, **serving})
    return pour(
        cupfem.load_cup(GEOMETRIES / f"{name}.toml"), given, companion=False, hold=False, fineness=0.5
    )


@pytest.fixture(scope="module")
def plain():
    """The single-wall board cup with a station at mid-wall and beside its ends."""
    run = poured("single_board")
    level = f"{1e3 * float(run.series.drink_level[0]):.6g} mm"
    return slab(run, ["8.35 mm", "20 mm", "47.5 mm", "60 mm", level, "90 mm"]), level


@pytest.fixture(scope="module")
def sleeved():
    """The sleeved double wall: the sleeve from 28 to 82 mm, the gap from 14 to 88 mm."""
    return slab(poured("double_wall_sleeve"), ["8.35 mm", "21 mm", "27 mm", "29 mm", "50 mm"])


# -- a wall with no height dependence ------------------------------------------------------------------------


@pytest.fixture(scope="module")
def tube():
    """A straight tube wetted to its brim, its ends insulated, films that depend on temperature outside."""
    return pour(Cup.from_text(TUBE), Serving.from_text(FULL), companion=False, hold=False, tolerance=1e-3)


def test_field_and_radial_estimate_agree_where_nothing_depends_on_the_height(tube):
    """They share films, gaps and properties and no other code; each has a drink of its own."""
    late = tube.time >= 1.0
    estimate = follow(tube.cup, tube.serving, 0.046).interfaces(tube.time)
    outer = np.abs(estimate[late, -1] - tube.outer_temperature_at(0.046)[late]).max()
    inner = np.abs(estimate[late, 0] - tube.inner_temperature_at(0.046)[late]).max()
    print(f"radial estimate beside the field from 1 s on: outer face {outer:.4f} K, inner face {inner:.4f} K")
    assert outer < SAME_WALL
    assert inner < SAME_WALL


def test_the_agreement_is_not_blind(tube):
    """A tenth more drink film moves the estimate by more than is allowed."""
    faulty = tube.serving.model_dump(mode="json", by_alias=True, exclude_unset=True)
    faulty["films"]["wetted"] = {"coefficient": "440 W/(m^2 K)"}
    wall = follow(tube.cup, Serving(**faulty), 0.046).outside(tube.time)
    assert np.abs(wall - tube.outer_temperature_at(0.046))[tube.time >= 1.0].max() > 5.0 * SAME_WALL


def test_map_of_such_a_wall_is_all_within_a_kelvin_but_for_the_brim(tube):
    found = difference_map(tube)
    assert found.within(1.0) > 0.99
    assert found.worst_at(0.046) < 0.03  # of the coarser settings in use here


# -- flags ---------------------------------------------------------------------------------------------------


def names(found, height):
    return {flag.name for flag in found.flags(height)}


def test_mid_wall_of_a_plain_cup_is_not_flagged(plain):
    found, _ = plain
    assert found.flags("47.5 mm") == ()
    assert found.flags("20 mm") == ()


def test_level_line_and_base_joint_are_flagged(plain):
    found, level = plain
    assert {"level line", "lateral flux"} <= names(found, level)
    assert {"base joint", "lateral flux", "2-D minus 1-D"} <= names(found, "8.35 mm")


@pytest.mark.parametrize("height", ["27 mm", "29 mm"])
def test_a_millimetre_from_the_end_of_a_sleeve_is_flagged(sleeved, height):
    assert {"sleeve end", "lateral flux", "2-D minus 1-D"} <= names(sleeved, height)


def test_between_the_ends_a_sleeved_cup_is_not_flagged(sleeved):
    assert sleeved.flags("50 mm") == ()


def test_a_level_that_passes_is_flagged_with_its_time():
    event = [{"drinking": "150 ml", "from": "0 s", "to": "2 min"}]
    found = slab(poured("single_board", event=event), ["30 mm", "50 mm", "60 mm"])
    flag = next(flag for flag in found.flags("60 mm") if flag.name == "level line")
    passed = float(np.interp(-0.060, -found.run.series.drink_level, found.run.time))
    assert "passed by the level after" in flag.text
    told = float(flag.text.split("after ")[1].split(" s")[0])
    assert told == pytest.approx(passed, abs=2.0)
    assert "level line" not in names(found, "30 mm")
    assert "where the level passes, up to" in found.sentence()


def test_where_nothing_is_one_dimensional_the_sentence_says_so():
    """Across a vacuum hardly any heat goes, along half a millimetre of steel it does."""
    found = slab(poured("vacuum_mug"), ["20 mm", "50 mm"])
    assert found.sentence().endswith(
        "no station beside the drink is one-dimensional throughout; only the field tells."
    )
    assert found.map.within(1.0) < 0.5


def test_flags_tell_lengths_in_thousandths_of_an_inch_too(plain):
    found, _ = plain
    assert "mil away" in found.flags("8.35 mm", "us")[0].text


def test_a_station_that_is_none_is_refused(plain):
    with pytest.raises(InputError, match=r"station: .*33 mm.*not among those of this slab"):
        plain[0].flags("33 mm")


# -- numbers behind the flags --------------------------------------------------------------------------------


def test_heat_along_a_dry_wall_dies_out_as_along_a_fin():
    """exp(-x/l), l = sqrt(k t / h) with films on both faces of a sheet: Incropera, 6th ed. 2007, sec. 3.6,
    Table 3.4, case D (infinite length). The films depend on the temperature, hence a tenth."""
    one = TUBE[: TUBE.index('[[layer]]\nname = "gap"')].replace("0.33 mm", "0.6 mm")
    half_full = FULL.replace("91.99 mm", "40 mm").replace("120 s", "600 s")
    run = pour(Cup.from_text(one), Serving.from_text(half_full), companion=False, hold=False)
    rungs = ladder(Servings(run.cup, run.serving, run.time), 0.052)
    film = 1.0 / rungs.network.resistance
    along = run.cup.material("cupstock board").conductivity_along.value
    assert fin_length(run.cup, rungs) == pytest.approx(
        math.sqrt(along * 0.6e-3 / (film[0] + film[-1])), rel=1e-12
    )
    first, second = (float(run.outer_temperature_at(z)[-1]) - 22.0 for z in (0.048, 0.056))
    assert 8e-3 / math.log(first / second) == pytest.approx(fin_length(run.cup, rungs), rel=0.1)


def test_lateral_share_vanishes_in_a_wall_with_no_height_dependence(tube):
    assert lateral_shares(tube, np.array([0.03, 0.046])).max() < 1e-4


def test_nearest_end_and_distance_from_a_moving_level():
    assert nearest_end((End("heel", 0.0), End("brim", 0.095)), 0.09) == ("brim", pytest.approx(0.005))
    levels = np.array([0.085, 0.060])
    assert level_distance(levels, 0.07) == 0.0
    assert level_distance(levels, 0.09) == pytest.approx(0.005)
    assert level_distance(levels, 0.05) == pytest.approx(0.010)
    assert math.isinf(level_distance(levels[:0], 0.05))


def test_the_estimate_over_the_height_is_that_of_each_height():
    """Interpolated between solved heights, also past a falling level."""
    event = [{"drinking": "150 ml", "from": "0 s", "to": "2 min"}]
    cup = cupfem.load_cup(GEOMETRIES / "double_wall.toml")
    serving = Serving(**{**SHORT, "event": event})
    times = np.linspace(0.0, 120.0, 121)
    drink = along_times(times, 85.0 - 0.03 * times)
    found = over_height(cup, serving, times, drink)
    for height, allowed in ((0.033, 0.05), (0.0667, 0.7), (0.092, 0.05)):
        exact = follow(cup, serving, height, drink, elements=ELEMENTS, tolerance=TOLERANCE).outside(times)
        assert np.abs(found.outer(np.array([height]))[:, 0] - exact).max() < allowed
    assert found.solves < 40


def test_settings_of_the_radial_rung_are_fine_enough():
    cup, serving = cupfem.load_cup(GEOMETRIES / "stoneware_mug.toml"), Serving(**SHORT)
    times = np.linspace(1.0, 120.0, 60)
    coarse = follow(cup, serving, 0.046, 85.0, elements=ELEMENTS, tolerance=TOLERANCE).outside(times)
    assert np.abs(coarse - follow(cup, serving, 0.046, 85.0).outside(times)).max() < 0.02


# -- errors --------------------------------------------------------------------------------------------------


def test_times_and_spans_of_a_hand_made_series():
    times = np.array([0.0, 1.0, 2.0, 4.0, 8.0])
    assert passing(times, np.array([22.0, 30.0, 50.0, 60.0, 55.0])) == pytest.approx(1.5)
    assert passing(times, np.array([41.0, 50.0, 50.0, 50.0, 50.0])) == 0.0
    assert math.isinf(passing(times, np.full(5, 30.0)))
    assert longest_within(times, np.array([0.0, 1.0, 3.0, 1.0, 1.5]), 2.0) == (4.0, 8.0)
    assert longest_within(times, np.full(5, 3.0), 2.0) is None
    assert difference(math.inf, math.inf) == 0.0
    assert math.isnan(difference(3.0, math.inf))


def test_errors_are_estimate_minus_field(plain):
    found, _ = plain
    place = found.station("47.5 mm")
    error, field = found.error("b", place), found.field(place)
    assert error.end == pytest.approx(found.rungs[place].network.temperature[-1] - field[-1])
    assert error.drink_error == pytest.approx(85.0 - found.run.series.drink_temperature[-1])
    assert found.error("d", place).worst < 0.2 < error.worst


def test_hold_times_of_the_radial_rung_are_those_of_the_field_and_a_hotter_wall_is_held_shorter(plain):
    found, _ = plain
    place = found.station("47.5 mm")
    field, held = found.holds["field"].thin[place], {rung: found.holds[rung].thin[place] for rung in RUNGS}
    assert held["d"] == pytest.approx(field, rel=0.01)
    assert held["c"] < field  # its drink does not cool


def test_contact_temperature_lies_between_skin_and_wall(plain):
    found, _ = plain
    place = found.station("47.5 mm")
    wall = float(np.interp(found.pick_up, found.run.time, found.rungs[place].outer["d"]))
    assert 30.0 < found.first.contact[place] < wall


def test_assumptions_come_with_their_numbers(plain):
    found, _ = plain
    told = {each.text.split(":")[0]: each for each in found.assumptions(found.station("47.5 mm"))}
    assert told["no film inside"].failed  # 400 to 800 W/(m2 K) beside 0.33 mm of board
    assert told["one wall temperature"].number == pytest.approx(found.rungs[2].outer_biot)
    assert not told["one wall temperature"].failed
    assert not told["nothing along the wall"].failed


# -- table, files, command -----------------------------------------------------------------------------------


def test_the_sentence_names_rung_and_time(plain):
    text = plain[0].sentence()
    assert text.endswith(".") and "\n" not in text
    assert "Single-wall board cup, Two minutes: rung (d)" in text
    assert "up to the end (120 s)" in text


def test_the_table_can_be_pasted(plain):
    text = plain[0].table()
    assert "An estimate for comparing designs, not a safety certificate" in text
    assert all(f"\n{rung} " in text for rung in RUNGS)
    assert "degF" in plain[0].table("us") and "degF" not in text


def test_the_csv_holds_a_row_for_each_station_and_rung(plain):
    rows = list(csv.DictReader(io.StringIO(plain[0].csv())))
    assert len(rows) == len(plain[0].heights) * len(RUNGS)
    row = next(row for row in rows if row["height_mm"] == "47.5" and row["rung"] == "d")
    assert float(row["outer_end_degC"]) == pytest.approx(plain[0].rungs[2].outer["d"][-1], rel=1e-5)
    assert row["flags"] == ""


@pytest.mark.parametrize(
    ("options", "message"),
    [
        ({"heights": ["120 mm"]}, 'height: "120 mm": not on the wall'),
        ({"heights": [47.5]}, "heights: 47.5: no unit"),
        ({"heights": []}, "heights: .*not a list of lengths"),
        ({"pick_up": "3 min"}, 'pick_up: "180 s": not within the serving'),
    ],
)
def test_bad_stations_are_refused(plain, options, message):
    with pytest.raises(InputError, match=message):
        slab(plain[0].run, **options)


def test_films_that_python_gave_are_refused():
    films = {"outside": FluxFunction(lambda surface, around, height, time: 10.0 * (surface - around))}
    cup = cupfem.load_cup(GEOMETRIES / "single_board.toml")
    run = pour(cup, Serving(duration="5 s"), companion=False, hold=False, films=films, fineness=0.5)
    with pytest.raises(InputError, match="its films were given by Python"):
        slab(run)


def test_pictures_draw_the_ends_and_every_rung(sleeved):
    from cupfem.figures.breakdown import difference_figure, ladder_figure

    drawn = difference_figure(sleeved).axes[0]
    marked = {line.get_gid() for line in drawn.lines}
    assert {"brim", "heel", "gap end", "fit end, sleeve end", "base joint"} <= marked
    texts = {text.get_text() for text in ladder_figure(sleeved, units="us").axes[0].texts}
    assert {"field", *(f"rung {rung}" for rung in RUNGS)} <= texts


def test_the_command_writes_a_whole_folder(tmp_path, capsys, monkeypatch):
    from cupfem.cli import main

    serving = tmp_path / "short.toml"
    serving.write_text('title = "Short"\nduration = "20 s"\n', encoding="utf-8")
    monkeypatch.chdir(tmp_path)
    with pytest.raises(SystemExit) as end:
        main(["slab", str(GEOMETRIES / "polypropylene.toml"), str(serving), "--fineness", "0.5"])
    assert end.value.code == 0
    written = {path.name for path in (tmp_path / "slab-001").iterdir()}
    assert {"table.txt", "slab.csv", "summary.json", "map.png", "ladder.png"} <= written
    assert "not a safety certificate" in capsys.readouterr().out
    assert "not a safety certificate" in (tmp_path / "slab-001" / "summary.json").read_text(encoding="utf-8")


# -- cost ----------------------------------------------------------------------------------------------------


def test_slab_costs_at_most_three_times_the_march():
    """Both in one process, by its own processor time; a second try where something else was in the way."""
    cup, serving = cupfem.load_cup(GEOMETRIES / "double_wall.toml"), Serving()
    for _ in range(2):
        start = time.process_time()
        run = pour(cup, serving, companion=False, hold=False)
        middle = time.process_time()
        slab(run)
        ratio = (time.process_time() - middle) / (middle - start)
        print(f"march {middle - start:.2f} s, slab {ratio:.2f} times that")
        if ratio < 3.0:
            break
    assert ratio < 3.0
