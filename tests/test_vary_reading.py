"""What is read from an outcome, against published indices, exact quantiles, and small cases by hand."""

import math

import numpy as np
import pytest
import vary_functions
from scipy import stats

from cupfem.errors import InputError
from cupfem.vary import FunctionModel, Outcome, Plan, Row, csv_text, vary
from cupfem.vary.outcome import Goal, Varied
from cupfem.vary.reading import (
    best_rows,
    failure_share,
    interactions,
    main_effects,
    pareto_front,
    sobol_indices,
    tornado,
)

INTERVAL = 0.02
"""How far an index may be from the published one."""


def run(function, vary_tables, **keys):
    """The outcome of a plan about one of the functions."""
    names = tuple(table["key"] for table in vary_tables)
    plan = Plan.from_data({"vary": vary_tables, **keys})
    return vary(plan, model=FunctionModel(function, names), workers=1)


def outcome_of(figures, inputs=None, goals=(), combine="grid"):
    """An outcome with these figures in its rows."""
    inputs = inputs or [{"x": float(number)} for number in range(len(figures))]
    rows = tuple(Row(n, given, told) for n, (given, told) in enumerate(zip(inputs, figures, strict=True), 1))
    varied = tuple(Varied(key, "number") for key in inputs[0])
    recorded = tuple(dict.fromkeys(key for row in figures for key in row if "_at_least_" not in key))
    return Outcome("test", combine, 0, varied, recorded, tuple(goals), rows)


@pytest.fixture(scope="module")
def ishigami():
    """Three inputs, even on -pi to pi; 4096 points of Saltelli's design, 20480 cases."""
    span = {"from": -math.pi, "to": math.pi}
    tables = [{"key": name, **span} for name in ("x1", "x2", "x3")]
    return run(vary_functions.ishigami, tables, combine="sobol indices", samples=4096, seed=1)


def test_ishigami_indices_are_the_published_ones(ishigami):
    """Variances in closed form, V1 = (1 + b pi^4 / 5)^2 / 2, V2 = a^2 / 8, V13 = 8 b^2 pi^8 / 225 (Ishigami
    and Homma 1990, from memory); scipy 1.17, documentation of sobol_indices, prints 0.31, 0.44, 0.56."""
    a, b = 7.0, 0.1
    v1, v2, v13 = 0.5 * (1 + b * math.pi**4 / 5) ** 2, a**2 / 8, 8 * b**2 * math.pi**8 / 225
    total = v1 + v2 + v13
    found = {index.key: index for index in sobol_indices(ishigami, "y")}
    exact = {"x1": (v1, v1 + v13), "x2": (v2, v2), "x3": (0.0, v13)}
    for key, (first, both) in exact.items():
        assert found[key].first == pytest.approx(first / total, abs=INTERVAL)
        assert found[key].total == pytest.approx(both / total, abs=INTERVAL)
    assert (v1 / total, v2 / total, (v1 + v13) / total) == pytest.approx((0.31, 0.44, 0.56), abs=5e-3)


def test_intervals_of_indices_hold_the_exact_ones(ishigami):
    """Of six 95 % intervals five or six hold theirs, with a probability of 0.97."""
    exact = {"x1": (0.3139, 0.5576), "x2": (0.4424, 0.4424), "x3": (0.0, 0.2437)}
    held = 0
    for index in sobol_indices(ishigami, "y"):
        first, total = exact[index.key]
        held += index.first_interval[0] <= first <= index.first_interval[1]
        held += index.total_interval[0] <= total <= index.total_interval[1]
        assert index.first_interval[0] <= index.first <= index.first_interval[1]
    assert held >= 5


def test_indices_are_the_same_on_every_reading(ishigami):
    assert sobol_indices(ishigami, "y", resamples=20) == sobol_indices(ishigami, "y", resamples=20)


def test_indices_need_their_plan_and_all_cases(ishigami):
    with pytest.raises(InputError, match='combines by "grid"; write combine = "sobol indices"'):
        sobol_indices(outcome_of([{"y": 1.0}]), "y")
    rows = (*ishigami.rows[:-1], Row(20480, {}, {}, "no convergence"))
    broken = Outcome("t", "sobol indices", 4096, ishigami.varied, ("y",), (), rows)
    with pytest.raises(InputError, match="1 cases have none; the first is case 20480: no convergence"):
        sobol_indices(broken, "y")


def test_failure_share_against_the_exact_normal_quantile():
    """x1 + 2 x2 with normal inputs is normal, N(5, sqrt(0.5^2 + 4 0.3^2)); the limit: its 97th percentile."""
    exact = stats.norm(5.0, math.hypot(0.5, 0.6))
    tables = [
        {"key": "x1", "distribution": "normal", "mean": 1.0, "deviation": 0.5},
        {"key": "x2", "distribution": "normal", "mean": 2.0, "deviation": 0.3},
    ]
    limit = float(exact.ppf(0.97))
    outcome = run(
        vary_functions.linear, tables, combine="random", samples=2000, limits={"y": {"at_most": limit}}
    )
    told = failure_share(outcome)
    assert told.interval[0] <= 0.03 <= told.interval[1]
    assert told.interval[1] - told.interval[0] < 0.02
    spread = run(
        vary_functions.linear, tables, combine="sobol", samples=4096, limits={"y": {"at_most": limit}}
    )
    assert failure_share(spread).share == pytest.approx(0.03, abs=0.002)
    assert np.quantile(spread.figure("y"), 0.97) == pytest.approx(limit, abs=0.02)


def test_wilson_interval_is_the_published_one():
    """R. G. Newcombe, Statistics in Medicine 17 (1998) 857, table I: 15 of 148, and 0 of 20, method 3."""
    for failed, count, low, high in ((15, 148, 0.0624, 0.1605), (0, 20, 0.0, 0.1611)):
        figures = [{"y": float(number < failed)} for number in range(count)]
        told = failure_share(outcome_of(figures, goals=[Goal("y", at_most=0.5)]))
        assert told.interval == pytest.approx((low, high), abs=5e-5)


def test_a_time_not_reached_is_known_to_be_long_and_no_more():
    outcome = run(vary_functions.clock, [{"key": "x", "list": [20.0, 40.0, 80.0, 90.0]}])
    assert list(outcome.figure("hold_time_s")) == [20.0, 40.0, 60.0, 60.0]
    assert list(outcome.censored("hold_time_s")) == [False, False, True, True]
    assert outcome.note("hold_time_s") == "2 of 4 not reached, taken as 60"
    heads = csv_text(outcome).splitlines()
    assert heads[0] == "case,x,hold_time_s,hold_time_at_least_s,error"
    assert heads[2:4] == ["2,40,40,,", "3,80,,60,"]


@pytest.mark.parametrize(
    ("limit", "verdicts"),
    [
        ({"at_least": 50.0}, ["failed", "failed", "passed", "passed"]),
        ({"at_least": 70.0}, ["failed", "failed", "undecided", "undecided"]),
        ({"at_most": 50.0}, ["passed", "passed", "failed", "failed"]),
        ({"at_most": 70.0}, ["passed", "passed", "undecided", "undecided"]),
        ({"at_least": 30.0, "at_most": 70.0}, ["failed", "passed", "undecided", "undecided"]),
    ],
)
def test_limits_on_times_not_reached(limit, verdicts):
    outcome = run(vary_functions.clock, [{"key": "x", "list": [20.0, 40.0, 80.0, 90.0]}])
    judged = Outcome(
        "t", "grid", 0, outcome.varied, outcome.recorded, (Goal("hold_time_s", **limit),), outcome.rows
    )
    assert judged.verdicts() == verdicts
    told = failure_share(judged)
    assert (told.failed, told.undecided) == (verdicts.count("failed"), verdicts.count("undecided"))


def test_main_effects_and_interactions_are_those_of_the_analysis_of_variance():
    """D. C. Montgomery, Design and Analysis of Experiments, 5th ed. (2001), example 5-1 (battery life): sums
    of squares 10683.72 material, 39118.72 temperature, 9613.78 interaction, 77646.97 total."""
    cells = {
        (1, 15): (130, 155, 74, 180), (1, 70): (34, 40, 80, 75), (1, 125): (20, 70, 82, 58),
        (2, 15): (150, 188, 159, 126), (2, 70): (136, 122, 106, 115), (2, 125): (25, 70, 58, 45),
        (3, 15): (138, 110, 168, 160), (3, 70): (174, 120, 150, 139), (3, 125): (96, 104, 82, 60),
    }  # fmt: skip
    inputs = [
        {"material": float(m), "temperature": float(t)} for (m, t), lives in cells.items() for _ in lives
    ]
    figures = [{"y": float(life)} for lives in cells.values() for life in lives]
    outcome = outcome_of(figures, inputs)
    effects = {effect.varied.key: effect for effect in main_effects(outcome, "y")}
    total = 77646.97
    assert effects["material"].share * total == pytest.approx(10683.72, abs=0.01)
    assert effects["temperature"].share * total == pytest.approx(39118.72, abs=0.01)
    assert interactions(outcome, "y")[0].share * total == pytest.approx(9613.78, abs=0.01)
    assert list(effects["temperature"].places) == [15.0, 70.0, 125.0]
    assert effects["temperature"].means == pytest.approx([144.83, 107.58, 64.17], abs=0.005)


def test_tornado_of_one_at_a_time_orders_the_widths():
    tables = [
        {"key": "x1", "list": [0.0, 1.0]},
        {"key": "x2", "list": [0.0, 3.0]},
    ]
    outcome = run(vary_functions.linear, tables, combine="grid")
    assert [(bar.key, bar.low, bar.high) for bar in tornado(outcome, "y")] == [
        ("x2", 0.5, 6.5),
        ("x1", 3.0, 4.0),
    ]
    rows = [{"y": 10.0}, {"y": 9.0}, {"y": 10.5}, {"y": 4.0}, {"y": 12.0}]
    inputs = [{}, {"a": 1.0}, {"a": 2.0}, {"b": 5.0}, {"b": 6.0}]
    alone = outcome_of(
        rows, [{"a": math.nan, "b": math.nan} | given for given in inputs], combine="one at a time"
    )
    bars = tornado(alone, "y")
    assert [(bar.key, bar.base, bar.low, bar.high, bar.width) for bar in bars] == [
        ("b", 10.0, 4.0, 12.0, 8.0), ("a", 10.0, 9.0, 10.5, 1.5),
    ]  # fmt: skip
    assert (bars[0].low_label, bars[0].high_label) == ("5", "6")


def test_pareto_front_is_what_nothing_beats():
    points = [(1.0, 5.0), (2.0, 6.0), (3.0, 6.0), (2.0, 4.0), (4.0, 9.0), (4.0, 8.0)]
    outcome = outcome_of([{"mass_g": m, "hold_time_s": t} for m, t in points])
    front = pareto_front(outcome, {"mass_g": "least", "hold_time_s": "most"})
    assert [row.number for row in front] == [1, 2, 5]


def test_best_rows_keep_the_limits():
    figures = [{"mass_g": float(m), "t": float(t)} for m, t in ((5, 1), (3, 0), (4, 1), (9, 2))]
    outcome = outcome_of(figures, goals=[Goal("t", at_least=1.0)])
    assert [row.number for row in best_rows(outcome, "mass_g", "least")] == [3, 1, 4]
    assert [row.number for row in best_rows(outcome, "mass_g", "most", count=1)] == [4]


def test_an_unknown_figure_or_key_is_one_line():
    outcome = outcome_of([{"mass_g": 1.0}])
    with pytest.raises(InputError, match='figure: "mass": not recorded by this plan; did you mean "mass_g"'):
        main_effects(outcome, "mass")
    with pytest.raises(InputError, match='key: "y": not varied'):
        outcome.inputs("y")


BOUNDS = {"from": 0.0, "to": 5.0}


def test_best_finds_a_published_optimum_under_three_constraints():
    """Hock and Schittkowski, problem 24: f = -1 at (3, sqrt(3))."""
    keep = {name: {"at_least": 0.0} for name in ("g1", "g2", "g3")}
    tables = [{"key": "x1", **BOUNDS}, {"key": "x2", **BOUNDS}]
    outcome = run(
        vary_functions.hock_schittkowski_24, tables, combine="best", limits=keep,
        best={"least": "f", "generations": 60, "polish": 60},
    )  # fmt: skip
    best = best_rows(outcome, "f", "least")[0]
    assert best.figures["f"] == pytest.approx(-1.0, abs=1e-3)
    assert best.inputs["x1"] == pytest.approx(3.0, abs=0.02)
    assert best.inputs["x2"] == pytest.approx(math.sqrt(3.0), abs=0.02)
    assert all(best.figures[name] >= 0.0 for name in keep)
    assert len({tuple(row.inputs.values()) for row in outcome.rows}) == len(outcome)  # each tried once


def test_best_takes_choices_beside_numbers():
    """Hock and Schittkowski, problem 21: f = -99.96 at (2, 0); x1 is chosen from a list here."""
    tables = [{"key": "x1", "list": [30, 11, 2, 5, 8, 50]}, {"key": "x2", "from": -50.0, "to": 50.0}]
    outcome = run(
        vary_functions.hock_schittkowski_21, tables, combine="best", limits={"g": {"at_least": 0.0}},
        best={"most": "f", "generations": 1, "polish": 0},
    )  # fmt: skip
    assert max(row.figures["f"] for row in outcome.rows) > 0.0  # "most" looks the other way
    outcome = run(
        vary_functions.hock_schittkowski_21, tables, combine="best", limits={"g": {"at_least": 0.0}},
        best={"least": "f", "generations": 60, "polish": 40},
    )  # fmt: skip
    best = best_rows(outcome, "f", "least")[0]
    assert best.inputs["x1"] == 2
    assert best.figures["f"] == pytest.approx(-99.96, abs=1e-3)
