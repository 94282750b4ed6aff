"""`hold`: the map, its verdict, its messages, and what `pour` tells of it."""

import dataclasses
import functools
import json
import math
import re
from pathlib import Path

import numpy as np
import pytest

import cupfem
from cupfem.errors import InputError
from cupfem.run import load_run
from cupfem.run.store import save_run
from cupfem.serving import Pad, Serving
from cupfem.skin import FINGER_PAD
from cupfem.touch.contact import touch
from cupfem.touch.criteria import judge

ROOT = Path(__file__).parents[1]
SHORT = 'duration = "150 s"\n'


@functools.cache
def cup(name="single_board"):
    return cupfem.load_cup(f"geometries/{name}.toml")


@functools.cache
def poured(text=SHORT, name="single_board", **options):
    return cupfem.pour(cup(name), Serving.from_text(text), companion=False, fineness=0.5, **options)


@functools.cache
def held(name="single_board"):
    return cupfem.hold(
        poured(hold=False, name=name),
        heights=["25 mm", "50 mm", "80 mm"],
        pick_ups=["10 s", "60 s"],
        longest="80 s",
    )


def test_a_hold_is_a_table_over_heights_and_pick_ups():
    found = held()
    assert found.times.thin.shape == found.times.thick.shape == (2, 3)
    assert np.all(found.times.thin < found.middle.thin)
    assert np.all(found.times.thin <= found.times.thick)
    lines = found.table().splitlines()
    assert "thin skin: 43 degC at 0.1 mm" in lines[0]
    assert lines[1].split() == ["10", "60"]
    assert [line.split()[0].rstrip("*~") for line in lines[2:5]] == ["80", "50", "25"]
    assert "thick skin: 43 degC at 0.5 mm" in found.table(thick_skin=True)


def test_the_cautions_go_with_the_table():
    table = held().table()
    assert "not a safety certificate" in table
    assert "board moisture not modelled" in table
    assert "from memory, not re-checked" in table
    assert "within half to twice" in table


def test_numerical_and_model_uncertainty_are_told_apart():
    """The range that half and twice the contact conductance make: the worse contact is held longer."""
    lines = held().table().splitlines()
    assert sum(line.startswith("numerical: ") for line in lines) == 1
    half, twice = held().contact_range
    usual = held().times.thin.min()
    assert half[0] > usual > twice[0]
    assert any(f"{twice[0]:.3g} s to {half[0]:.3g} s (thin skin)" in line for line in lines)


def test_the_hottest_spot_has_a_place():
    worst = held().figures()
    assert worst.place == "pad rim"
    assert worst.layer == "board"
    assert worst.radius == pytest.approx(float(held().run.meridian.outer_radius_at(worst.height)))
    assert worst.pick_up == 10.0
    assert worst.thin == held().times.thin.min()
    assert worst.thin_decided == "pain"


def test_moments_and_bands():
    found = held("double_wall")
    seconds = float(found.times.thin[1, 1])
    assert found.held_for(0.9 * seconds)[1, 1]
    assert not found.held_for(1.1 * seconds)[1, 1]
    assert found.first_comfortable(1e-3) == [10.0, 10.0, 10.0]
    assert found.first_comfortable(79.0)[1] is None
    assert found.band_not_held(1e-3) == [None, None]
    band = found.band_not_held(79.0)[1]
    assert band == pytest.approx((60.0, 25e-3, 80e-3))


def test_a_cooler_cup_is_held_longer():
    """The drink cools: a later pick-up of a light wall is held longer; and a good wall longer than a poor."""
    assert np.all(held().times.thick[1] > held().times.thick[0])
    assert np.all(held("double_wall").times.thin > held().times.thin)


def test_what_is_not_reached_is_null_with_what_is_known():
    figures = (
        cupfem.hold(poured(hold=False, name="foam"), heights=["50 mm"], pick_ups=["60 s"]).figures().figures()
    )
    assert figures["hold_time_s"] is None
    assert figures["hold_time_at_least_s"] == pytest.approx(90.0)
    assert figures["injury_time_s"] is None
    reached = held().figures().figures()
    assert reached["hold_time_s"] > 0
    assert reached["hold_time_at_least_s"] is None


def test_a_cup_is_poured_first():
    found = cupfem.hold(cup(), Serving.from_text('duration = "60 s"\n'), heights=["50 mm"], pick_ups=["20 s"])
    assert found.run.serving.duration == 60.0
    assert np.isfinite(found.times.thin).all()


def test_the_level_of_the_drink_is_seen():
    """Above the level the wall is cooler; a pad across it counts by its hottest place."""
    found = cupfem.hold(
        poured(SHORT + '[drink]\nlevel = "50 mm"\n', hold=False),
        heights=["30 mm", "48 mm", "54 mm", "75 mm"],
        pick_ups=["60 s"],
        longest="60 s",
        sections=1,
    )
    below, edge, across, above = found.times.thick[0]
    assert above > 2 * below
    assert edge == pytest.approx(below, rel=0.1)
    assert below < across < above
    assert list(found.near_end) == [False, True, True, False]


# -- messages ------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("options", "message"),
    [
        (
            {"heights": ["5 mm"]},
            r'^height: "5 mm": a pad of 15 mm there reaches beyond the wall.*"15.85 mm" to "87.5',
        ),
        ({"heights": [0.05]}, r"^heights: 0.05: no unit; write text with a unit"),
        ({"heights": "50 mm"}, r'^heights: "50 mm": not a list'),
        ({"heights": ["50"]}, r'^heights: "50": '),
        ({"pick_ups": ["3 min"]}, r'^pick_up: "180 s": not within the serving; write a time before "150 s"'),
        ({"longest": "5"}, r'^longest: "5": '),
        ({"serving": Serving()}, r"^serving: given together with a run"),
    ],
)
def test_refusals(options, message):
    with pytest.raises(InputError, match=message):
        cupfem.hold(poured(hold=False), **options)


def test_a_pad_beyond_the_wall_is_refused():
    with pytest.raises(InputError, match=r"^pad\.1: .*reaches beyond the wall.*move the pad"):
        poured(SHORT + '[[pad]]\nheight = "92 mm"\n')


# -- what pour tells -----------------------------------------------------------------------------------------

TARGET = '[target]\nhold_time = "{asked}"\nbetween = ["45 mm", "70 mm"]\n'


@pytest.mark.parametrize(("asked", "word"), [("1 s", "PASS"), ("60 s", "FAIL")])
def test_a_target_of_hold_time_is_judged_with_its_margin(asked, word):
    run = poured(SHORT + TARGET.format(asked=asked))
    line = next(line for line in run.summary().splitlines() if "hold time from" in line)
    assert line.strip().startswith(word)
    reached = run.figures()["hold_time_s"]
    assert f"margin {reached - float(asked[:-2]):+.3g} s" in line
    assert 45.0 - 7.5 - 1e-6 <= run.figures()["hold_time_height_mm"] <= 70.0 + 7.5 + 1e-6


def test_the_summary_has_a_short_verdict_with_its_caution():
    run = poured(hold=True)
    text = run.summary()
    assert "can be held, 42.8 to 68.4 mm high" in text
    assert "thin skin, pain" in text
    assert "injury in thin skin after" in text
    assert "not a safety certificate" in text
    assert "free-wall figures, not a hold time" not in text
    assert "free-wall figures, not a hold time" in poured(hold=False).summary()


def test_the_verdict_is_that_of_the_map():
    figures = poured(hold=True).figures()
    found = cupfem.hold(
        poured(hold=False),
        heights=["42.75 mm", "68.4 mm"],
        pick_ups=["10 s", "60 s"],
        longest="100 s",
        sections=1,
    ).figures()
    assert figures["hold_time_s"] == pytest.approx(found.thin, rel=0.02)
    assert figures["hold_time_thick_skin_s"] == pytest.approx(found.thick, rel=0.02)


def test_pads_of_the_serving_are_the_verdict():
    run = poured(SHORT + '[[pad]]\nheight = "55 mm"\npick_up = "40 s"\n')
    figures = run.figures()
    assert figures["hold_time_pick_up_s"] == 40.0
    assert figures["hold_time_height_mm"] in (pytest.approx(47.5, abs=0.1), pytest.approx(62.5, abs=0.1))
    assert "hand" in run.ledger.out


def test_a_contact_and_a_skin_of_the_pad_change_the_answer():
    base = '[[pad]]\nheight = "55 mm"\npick_up = "40 s"\nrelease = "80 s"\n'
    times = [
        poured(SHORT + base + more).figures()["hold_time_thick_skin_s"]
        for more in ("", 'contact = "300 W/(m^2 K)"\n', 'skin = "thin"\n')
    ]
    assert len({round(each, 2) for each in times}) == 3
    assert times[1] > times[0]


def test_crush_of_a_gap_changes_the_answer():
    base = '[[pad]]\nheight = "55 mm"\npick_up = "40 s"\n'
    usual, crushed = (
        poured('duration = "140 s"\n' + base + more, "double_wall").figures()["hold_time_s"]
        for more in ("", "gap_resistance = 0.5\n")
    )
    assert crushed < 0.9 * usual


def test_a_run_folder_keeps_the_verdict(tmp_path):
    run = poured(SHORT + '[[pad]]\nheight = "55 mm"\npick_up = "40 s"\n')
    save_run(run, tmp_path)
    again = load_run(tmp_path)
    assert again.touch == run.touch
    assert again.figures() == run.figures()
    assert again.serving.pad == run.serving.pad
    np.testing.assert_array_equal(again.pads[0].skin, run.pads[0].skin)


def test_a_loaded_run_can_be_held(tmp_path):
    run = poured(hold=False)
    save_run(run, tmp_path)
    options = {"heights": ["50 mm"], "pick_ups": ["60 s"], "longest": "60 s"}
    first, second = cupfem.hold(run, **options), cupfem.hold(load_run(tmp_path), **options)
    np.testing.assert_allclose(second.times.thin, first.times.thin, rtol=1e-9)


def test_the_how_to_page_holds_what_it_says(capsys, monkeypatch):
    """Its Python runs and its serving file loads."""
    page = (ROOT / "docs" / "howto" / "hold.md").read_text(encoding="utf-8")
    monkeypatch.chdir(ROOT)
    python, toml = (re.search(rf"```{kind}\n(.*?)```", page, re.DOTALL)[1] for kind in ("python", "toml"))
    exec(compile(python, "hold.md", "exec"), {})
    assert "can be held, 30 to 70 mm high" in capsys.readouterr().out
    serving = Serving.from_text(toml)
    assert serving.pad[0].gap_resistance == 0.8
    assert serving.target.hold_time == 30.0


def test_figures_are_plain_numbers():
    told = dataclasses.asdict(held().figures())
    assert json.loads(json.dumps({key: value for key, value in told.items() if value != math.inf}))


def test_the_default_pad_is_told():
    assert Pad(height="50 mm").width == 15e-3
    assert held().pad.skin == "finger pad"


RIDGED = """
title = "ridged"
base = "none"
[cup]
height = "95 mm"
inner_top_diameter = "78 mm"
inner_foot_diameter = "55 mm"
[[layer]]
name = "inner"
material = "cupstock board"
thickness = "0.35 mm"
[[layer]]
name = "ribs"
material = "foamed polyethylene coat"
[layer.ridge]
height = "0.6 mm"
crest_width = "2 mm"
flank_angle = "30 deg"
first = "22 mm"
pitch = "6 mm"
count = 10
"""


def test_solid_ridges_are_held_at_their_crests():
    """Ribs of foam are held longer than the bare board; the crest is named; there is no section."""
    ridged = cupfem.pour(
        cupfem.Cup.from_text(RIDGED), Serving.from_text(SHORT), fineness=0.5, companion=False
    )
    bare_text = RIDGED[: RIDGED.index('[[layer]]\nname = "ribs"')]
    bare = cupfem.pour(
        cupfem.Cup.from_text(bare_text), Serving.from_text(SHORT), fineness=0.5, companion=False
    )
    options = {"heights": ["50 mm"], "pick_ups": ["30 s"], "longest": "80 s"}
    crest, plain = (cupfem.hold(run, **options) for run in (ridged, bare))
    assert crest.times.thin[0, 0] > 1.5 * plain.middle.thin[0, 0]
    assert crest.figures().place.endswith("crest")
    assert not crest.solved.any()
    assert crest.near_end.all()
    with pytest.raises(InputError, match=r"^pad: .*lies on solid ridges.*use hold"):
        cupfem.pour(ridged.cup, Serving.from_text(SHORT + '[[pad]]\nheight = "50 mm"\n'), companion=False)


def test_a_lid_keeps_the_wall_above_the_drink_hot():
    """Under a lid the wall above the level is held for a shorter time than without."""
    times = []
    for lid in ("", '[lid]\nsip_hole = "1.2 cm^2"\n'):
        run = poured(SHORT + lid + '[drink]\nlevel = "45 mm"\n', hold=False)
        found = cupfem.hold(run, heights=["70 mm"], pick_ups=["60 s"], longest="80 s", sections=1)
        times.append(float(found.contact.thick[-1, 0, 0]))
    assert times[1] > times[0] + 3


LINED = (
    RIDGED[: RIDGED.index('[[layer]]\nname = "ribs"')]
    + """
[[layer]]
name = "core"
material = "kraft liner"
{core}
[[layer]]
name = "outer"
material = "kraft liner"
thickness = "0.2 mm"
"""
)


@pytest.mark.parametrize(
    ("core", "hotter"),
    [
        ('[layer.flute]\nletter = "E"\nmedium_thickness = "0.15 mm"\n', False),
        ('[layer.strut]\nheight = "1.2 mm"\npitch = "6 mm"\nthickness = "0.5 mm"\n', True),
    ],
)
def test_flutes_and_struts_count_by_the_hotter_of_crest_and_even_layer(core, hotter):
    """Under a crest of a flute lies the whole height of air, in a strut none: the one is cooler than the even
    layer that stands for all, the other hotter. The map takes the hotter one."""
    text = LINED.replace("{core}", core)
    run = cupfem.pour(cupfem.Cup.from_text(text), Serving.from_text(SHORT), fineness=0.5, companion=False)
    place = np.array([0.05]), np.array([60.0])
    even, crest = (touch(run, *place, 60.0, skin=FINGER_PAD, crest=each) for each in (False, True))
    assert (crest.thick[-1, 0, 0] > even.thick[-1, 0, 0]) == hotter
    found = cupfem.hold(run, heights=["50 mm"], pick_ups=["60 s"], longest="60 s", sections=1)
    expected = crest if hotter else even
    assert found.middle.thick[0, 0] == pytest.approx(judge(expected).thick[0, 0])
