"""Plan files: what they may say, which paths there are, and which cases come of them."""

import json
import re
import runpy
from pathlib import Path

import numpy as np
import pytest
from scipy import stats

from cupfem.errors import InputError
from cupfem.vary import Plan, load_plan, plan_schema
from cupfem.vary.design import design_of
from cupfem.vary.factors import factors_of
from cupfem.vary.job import case_of, prepared

ROOT = Path(__file__).parents[1]
GEOMETRIES = ROOT / "geometries"
GAP = {"key": "layer.gap.thickness", "list": ["0.5 mm", "1 mm"]}
CALIPER = {"key": "layer.inner.thickness", "distribution": "normal", "deviation": "3 %"}


def cases(**keys):
    """The cases of a plan about the double wall."""
    plan, model = prepared(Plan.from_data({"cup": "double_wall.toml", **keys}), GEOMETRIES)
    slots = {key: model.slot(key) for varied in plan.vary for key in varied.keys}
    factors = factors_of(plan, slots)
    return [case_of(model, factors, point) for point in design_of(plan, factors).points]


def values(found, key, unit=""):
    """A varied value of each case as a number."""
    given = [case.inputs[key] for case in found]
    return np.array([float(value.removesuffix(f" {unit}")) if unit else float(value) for value in given])


@pytest.mark.parametrize("path", sorted(GEOMETRIES.glob("plan_*.toml")), ids=lambda path: path.stem)
def test_shipped_plans_give_cases_without_error(path):
    plan, model = prepared(path)
    factors = factors_of(plan, {key: model.slot(key) for varied in plan.vary for key in varied.keys})
    found = [case_of(model, factors, point) for point in design_of(plan, factors).points]
    assert found
    assert [case.error for case in found if case.error] == []


def test_grid_is_each_with_each_in_order():
    steps = {"key": "serving.drink.temperature", "from": "80 degC", "to": "90 degC", "count": 3}
    found = cases(vary=[GAP, steps])
    told = [tuple(case.inputs.values()) for case in found]
    assert told == [(gap, f"{t} degC") for gap in ("0.5 mm", "1 mm") for t in (80, 85, 90)]
    assert len({case.key for case in found}) == 6


def test_zip_goes_side_by_side():
    words = {"key": "layer.outer.material", "list": ["cupstock board", "corrugated board"]}
    told = [tuple(case.inputs.values()) for case in cases(combine="zip", vary=[GAP, words])]
    assert told == [("0.5 mm", "cupstock board"), ("1 mm", "corrugated board")]


def test_one_at_a_time_begins_with_the_file():
    found = cases(combine="one at a time", vary=[GAP, CALIPER])
    assert [len(case.inputs) for case in found] == [0, 1, 1, 1, 1]
    z = stats.norm.ppf(0.1)
    low, high = values(found[3:], "layer.inner.thickness", "mm")
    assert (low, high) == pytest.approx((0.33 * (1 + 0.03 * z), 0.33 * (1 - 0.03 * z)))


def test_whole_files_can_vary():
    files = {"key": "cup", "list": ["double_wall.toml", "foam.toml"]}
    room = {"key": "serving.room.temperature", "list": ["4 degC"]}
    found = cases(vary=[room, files])
    assert ["expanded polystyrene" in case.text for case in found] == [False, True]
    assert all('temperature = "4 degC"' in case.text for case in found)


def test_several_paths_get_the_same_change():
    both = {**CALIPER, "key": ["layer.inner.thickness", "layer.outer.thickness"]}
    found = cases(combine="random", samples=20, vary=[both])
    inner, outer = (values(found, f"layer.{name}.thickness", "mm") for name in ("inner", "outer"))
    assert inner / 0.33 == pytest.approx(outer / 0.30, rel=1e-8)


DRAWN = [
    ("layer.gap.thickness", {"distribution": "normal", "deviation": "20 %"}, "mm", stats.norm(1.0, 0.2)),
    (
        "serving.drink.temperature",
        {"distribution": "uniform", "plus_minus": "1.5 K"},
        "degC",
        stats.uniform(83.5, 3.0),
    ),
    (
        "serving.room.air_speed",
        {"distribution": "lognormal", "median": "0.1 m/s", "spread": 0.6},
        "m/s",
        stats.lognorm(0.6, scale=0.1),
    ),
    (
        "layer.gap.contact_fraction",
        {"distribution": "beta", "alpha": 2, "beta": 6, "from": 0, "to": 0.08},
        "",
        stats.beta(2, 6, scale=0.08),
    ),
    ("layer.gap.to", {"from": "60 mm", "to": "90 mm"}, "mm", stats.uniform(60.0, 30.0)),
]


@pytest.mark.parametrize("combine", ["latin hypercube", "sobol", "random"])
@pytest.mark.parametrize(("key", "given", "unit", "exact"), DRAWN, ids=[row[0] for row in DRAWN])
def test_drawn_values_follow_their_distribution(key, given, unit, exact, combine):
    """Kolmogorov-Smirnov against scipy's own distribution."""
    found = cases(combine=combine, samples=128, seed=3, vary=[{"key": key, **given}])
    assert stats.kstest(values(found, key, unit), exact.cdf).pvalue > 0.01


def test_the_seed_tells_the_cases():
    first, again, other = (
        [case.key for case in cases(combine="random", samples=4, seed=seed, vary=[CALIPER])]
        for seed in (1, 1, 2)
    )
    assert first == again
    assert not set(first) & set(other)


def test_a_library_material_can_vary():
    key = 'material."cupstock board".conductivity_through'
    found = cases(combine="one at a time", vary=[{"key": key, "distribution": "normal", "deviation": "10 %"}])
    z = stats.norm.ppf(0.1)
    assert values(found[1:], key, "W/(m K)") == pytest.approx([0.09 * (1 + 0.1 * z), 0.09 * (1 - 0.1 * z)])


def test_a_case_that_is_no_cup_has_its_error():
    found = cases(vary=[{"key": "layer.gap.to", "list": ["88 mm", "120 mm"]}])
    assert found[0].error == ""
    assert found[1].error.startswith('layer.gap.to: "120 mm": above the brim at 95 mm')


def test_writing_a_length_otherwise_is_the_same_case():
    first, second = cases(vary=[{"key": "layer.gap.thickness", "list": ["0.5 mm", "500 um"]}])
    assert first.key == second.key


def one(key="layer.gap.thickness", **keys):
    """A plan with one [[vary]] table."""
    return {"vary": [{"key": key, **(keys or {"list": ["1 mm"]})}]}


def drawn(**keys):
    """A plan that draws."""
    return {"combine": "sobol", "samples": 8, **one(**{**CALIPER, **keys})}


def limited(**limit):
    """A plan with a limit."""
    return {**one(), "limits": {"outer_max_degC": limit}}


SHORT = {**GAP, "key": "layer.inner.thickness", "list": ["1 mm"]}
REFUSED = [
    ({}, r"vary: missing; write at least one \[\[vary\]\] table"),
    (one("layer.gap.thicknes"), 'vary.key: "layer.gap.thicknes": .*did you mean "thickness"'),
    (one("layer.gpa.thickness"), 'did you mean "gap"'),
    (one("serving.drink.temprature"), 'did you mean "temperature"'),
    (one("layer"), "a list, not a single value"),
    (one("layer.gap"), "a list, not a single value"),
    (one("layer..gap"), "not a path of keys"),
    (one("serving.drink"), "not a single value"),
    (one("cup.height.top"), "goes on too far"),
    (one(["layer.gap.thickness", "layer.gap.material"]), "different kinds"),
    (one('material."cupstock board".cost'), "cost_per_kg"),
    (one(list=[1]), r'layer.gap.thickness: 1: not a text with a unit; write it as in "1 mm"'),
    (one(list=["0,5 mm"]), 'decimal comma; write "0.5 mm"'),
    (one(**{"from": "2 mm", "to": "1 mm", "count": 3}), "not below to"),
    (one(**{"from": "1 mm", "to": "2 mm"}), "write count = 5"),
    (one("layer.gap.material", **{"from": "1 mm", "to": "2 mm", "count": 3}), "not a number"),
    ({"vary": [CALIPER]}, '"grid" cannot draw from a distribution'),
    ({"vary": [GAP, GAP]}, "varied twice"),
    ({"vary": [GAP, SHORT], "combine": "zip"}, "1 values, but 2"),
    ({**one(), "samples": 8}, "would change nothing"),
    ({**one(), "combine": "sobol", "samples": 100}, "power of two; write 128"),
    ({**one(), "combine": "random"}, "write samples = 256"),
    ({**one(), "combine": "best"}, r"write a \[best\] table"),
    ({**one(), "combine": "grit"}, 'did you mean "grid"'),
    (limited(at_most=65), r'limits.outer_max_degC: 65: .*"65 degC"'),
    (limited(), "write at_least or at_most"),
    (drawn(distribution="gauss"), '"normal"'),
    (drawn(key="serving.drink.temperature"), 'write it as in "1.5 K"'),
    (drawn(deviation="3"), "no unit"),
    ({**one(), "cup": None}, "cup: .*"),
    ({**one(), "cup": "double_wal.toml"}, 'Did you mean "double_wall.toml"'),
]


@pytest.mark.parametrize(("keys", "text"), REFUSED)
def test_what_cannot_be_used_is_one_line(keys, text):
    with pytest.raises(InputError, match=text) as caught:
        cases(**keys)
    assert "\n" not in str(caught.value)


def test_an_error_in_a_plan_file_tells_its_line(tmp_path):
    path = tmp_path / "plan.toml"
    path.write_text('cup = "a.toml"\n[[vary]]\nkey = "layer.gap.thickness"\nlist = []\n', encoding="utf-8")
    with pytest.raises(InputError, match=r"plan.toml, line 4: vary.1.list: no values"):
        load_plan(path)


def test_a_change_needs_something_to_change():
    found = cases(combine="one at a time", vary=[{**CALIPER, "key": "layer.inner.from", "deviation": "1 mm"}])
    assert "not in the file" in found[1].error


def test_the_published_schema_is_that_of_the_code():
    published = json.loads((ROOT / "docs/schemas/plan.schema.json").read_text(encoding="utf-8"))
    assert published == plan_schema()


def test_the_published_reference_is_that_of_the_schema():
    page = runpy.run_path(str(ROOT / "docs/reference/write.py"))["page"]
    assert (ROOT / "docs/reference/plan_file.md").read_text(encoding="utf-8") == page()


def test_the_plan_of_the_how_to_page_can_be_read():
    text = (ROOT / "docs/howto/vary.md").read_text(encoding="utf-8")
    blocks = re.findall(r"```toml\n(.*?)```", text, re.DOTALL)
    Plan.from_text(blocks[0])
    drawn = Plan.from_text('combine = "sobol"\nsamples = 4\n' + blocks[1])
    assert len(drawn.vary) == 4
    one_key = '[[vary]]\nkey = "cup.height"\nlist = ["90 mm"]\n'
    limits = Plan.from_text(blocks[2] + one_key)
    assert limits.recorded[-1] == "hold_time_s"
    Plan.from_text(blocks[3] + one_key)


def test_a_sleeve_varies_by_its_file_and_by_its_values():
    """The cup names a file for its sleeve; the case has the sleeve's layers, and no file any more."""
    given = {"cup": "felt_sleeved.toml", "vary": [{"key": "sleeve.height", "list": ["40 mm", "45 mm"]}]}
    first, second = cases(**given)
    assert (first.error, second.error) == ("", "")
    assert first.key != second.key
    assert "felt" in first.text and "sleeve_felt" not in first.text
    files = {"key": "sleeve", "list": ["sleeve_felt.toml", "sleeve_cork.toml"]}
    felt, cork = cases(**{**given, "vary": [files]})
    assert (felt.error, cork.error) == ("", "")
    assert "cork" in cork.text and "cork" not in felt.text


def test_a_profile_from_a_file_stays_with_the_case():
    found = cases(cup="porcelain_beaker.toml", vary=[{"key": "serving.duration", "list": ["1 min"]}])
    assert found[0].error == ""
    assert "porcelain_beaker.csv" not in found[0].text
