"""Runs and hold times in a notebook: as tables, for pandas and for xarray."""

import functools
import importlib.util
import sys
from html.parser import HTMLParser

import numpy as np
import pandas
import pytest

import cupfem
from cupfem.errors import InputError
from cupfem.exchange import notebook
from cupfem.run import CAUTION


@functools.cache
def run():
    serving = cupfem.Serving.from_text('duration = "60 s"\n[target]\ndrink_above = "60 degC"')
    cup = cupfem.load_cup("geometries/single_board.toml")
    return cupfem.pour(cup, serving, companion=False, hold=False, fineness=0.35)


@functools.cache
def held():
    return cupfem.hold(
        run(), heights=["40 mm", "60 mm"], pick_ups=["5 s", "20 s"], longest="30 s", sections=1
    )


class Text(HTMLParser):
    """The words of a piece of HTML."""

    def __init__(self, html: str):
        super().__init__()
        self.words = ""
        self.feed(html)

    def handle_data(self, data):
        self.words += data + " "


def test_a_run_shows_itself_with_verdict_and_caution():
    words = Text(run()._repr_html_()).words
    assert "Single-wall board cup" in words
    assert "PASS  drink above, until 60 s" in words
    assert "not a hold time" in words
    assert CAUTION in words


def test_hold_times_show_themselves():
    words = Text(held()._repr_html_()).words
    assert held().table() in words


def test_a_run_becomes_a_table():
    table = notebook.to_pandas(run())
    assert list(table["time_s"]) == pytest.approx(run().time)
    assert list(table["drink_temperature_degC"]) == pytest.approx(run().series.drink_temperature, rel=1e-8)


def test_hold_times_become_a_table():
    table = notebook.to_pandas(held())
    assert isinstance(table, pandas.DataFrame)
    assert len(table) == 4
    row = table[(table["pick_up_s"] == 20.0) & (table["height_mm"] == 60.0)].iloc[0]
    assert row["hold_time_s"] == pytest.approx(held().times.thin[1, 1], rel=1e-5)
    assert set(table["decided_by"]) <= {"pain", "injury", "surface threshold", "not reached"}


class Dataset:
    """What stands for xarray: it holds every variable to its dimensions, as the real one does."""

    def __init__(self, data, coordinates):
        for dimensions, values in data.values():
            names = (dimensions,) if isinstance(dimensions, str) else dimensions
            assert np.shape(values) == tuple(len(coordinates[name]) for name in names)
        self.data, self.coordinates = data, coordinates


@pytest.mark.parametrize("result", [run, held])
def test_datasets_have_the_shapes_of_their_coordinates(monkeypatch, result):
    monkeypatch.setitem(sys.modules, "xarray", type("xarray", (), {"Dataset": Dataset}))
    found = notebook.to_xarray(result())
    assert "height_mm" in found.coordinates
    assert all(values is not None for values in found.data.values())


def test_a_package_that_is_missing_is_named(monkeypatch):
    monkeypatch.setitem(sys.modules, "xarray", None)
    with pytest.raises(InputError, match=r"xarray: this package is not installed.*pip install xarray"):
        notebook.to_xarray(run())
    assert importlib.util.find_spec("pandas") is not None
