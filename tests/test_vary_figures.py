"""Pictures of an outcome say what the table says."""

import math

import numpy as np
import pytest
import vary_functions

from cupfem.errors import InputError
from cupfem.figures.vary import (
    chart_figure,
    front_figure,
    main_effects_figure,
    sobol_figure,
    tornado_figure,
    write_outcome_figures,
)
from cupfem.vary import FunctionModel, Plan, vary

SPAN = {"from": -math.pi, "to": math.pi}


def outcome_of(function, tables, **keys):
    """The outcome of a plan about one of the functions."""
    names = tuple(table["key"] for table in tables)
    return vary(Plan.from_data({"vary": tables, **keys}), model=FunctionModel(function, names), workers=1)


@pytest.fixture(scope="module")
def grid():
    """x1 + 2 x2 over 5 x 4 values, with a limit."""
    tables = [
        {"key": "x1", "from": 0.0, "to": 4.0, "count": 5},
        {"key": "x2", "from": 0.0, "to": 3.0, "count": 4},
    ]
    return outcome_of(vary_functions.linear, tables, limits={"y": {"at_most": 5.0}})


def texts(figure):
    """All text of a figure."""
    return " ".join(text.get_text() for text in figure.findobj(lambda one: hasattr(one, "get_text")))


def test_chart_has_the_values_of_the_table_and_the_line_of_the_limit(grid):
    figure = chart_figure(grid, "y")
    axes = figure.axes[0]
    field = np.asarray(axes.collections[0].get_array()).reshape(4, 5)
    assert field == pytest.approx(np.arange(5)[None, :] + 2.0 * np.arange(4)[:, None])
    line = axes.collections[1].get_paths()[0].vertices
    assert line[:, 0] + 2.0 * line[:, 1] == pytest.approx(np.full(len(line), 5.0))
    swapped = chart_figure(grid, "y", x="x2", bound=7.0)
    assert swapped.axes[0].get_xlabel() == "x2"
    line = swapped.axes[0].collections[1].get_paths()[0].vertices
    assert 2.0 * line[:, 0] + line[:, 1] == pytest.approx(np.full(len(line), 7.0))


def test_a_chart_needs_a_grid(grid):
    single = outcome_of(vary_functions.picky, [{"key": "x", "list": [1, 2]}])
    with pytest.raises(InputError, match="needs a grid over two numbers"):
        chart_figure(single, "inverse")


def test_main_effects_are_drawn_on_one_scale(grid):
    figure = main_effects_figure(grid, "y")
    first, second = figure.axes
    assert first.get_xlabel() == "x2"  # the larger effect
    assert first.lines[0].get_ydata() == pytest.approx([2.0, 4.0, 6.0, 8.0])
    assert first.get_ylim() == second.get_ylim()


def test_tornado_bars_reach_from_low_to_high(grid):
    figure = tornado_figure(grid, "y")
    ends = {round(bar.get_x() + bar.get_width(), 9) for bar in figure.axes[0].patches}
    assert ends == {2.0, 8.0, 3.0, 7.0}
    assert "20 cases" in texts(figure)


def test_indices_come_with_their_intervals():
    tables = [{"key": name, **SPAN} for name in ("x1", "x2", "x3")]
    outcome = outcome_of(vary_functions.ishigami, tables, combine="sobol indices", samples=64)
    figure = sobol_figure(outcome, "y")
    assert len(figure.axes[0].containers) == 2
    assert "interval" in texts(figure)


def test_a_picture_says_how_many_times_were_not_reached(tmp_path):
    tables = [{"key": "x", "list": [20.0, 40.0, 80.0, 90.0]}]
    outcome = outcome_of(vary_functions.clock, tables, limits={"hold_time_s": {"at_least": "70 s"}})
    note = "2 of 4 not reached, taken as 60"
    for figure in (
        main_effects_figure(outcome, "hold_time_s"),
        tornado_figure(outcome, "hold_time_s"),
        front_figure(outcome, "hold_time_s", "hold_time_s"),
    ):
        assert note in texts(figure)
    paths = write_outcome_figures(outcome, tmp_path)
    assert sorted(path.name for path in paths) == ["effects_hold_time_s.png", "tornado_hold_time_s.png"]
    assert all(path.read_bytes().startswith(b"\x89PNG") for path in paths)


def test_front_marks_cases_by_their_verdict(grid):
    figure = front_figure(grid, "y", "y", ("least", "least"))
    told = {one.get_label(): len(one.get_offsets()) for one in figure.axes[0].collections}
    assert told == {"passed": grid.verdicts().count("passed"), "failed": grid.verdicts().count("failed")}
