"""The page that is handed on: complete, self-contained, and it says what the run says."""

import re
import time
from base64 import b64encode
from dataclasses import replace
from html import unescape
from html.parser import HTMLParser
from pathlib import Path

import numpy as np
import pytest

from cupfem.against import Candidate, hold_rows, side_by_side
from cupfem.breakdown import slab
from cupfem.cli import main
from cupfem.cup import Cup, load_cup
from cupfem.figures import write_figures
from cupfem.materials import sources_table
from cupfem.pour import pour
from cupfem.report import render, write_report
from cupfem.run import CAUTION, FREE_WALL, headline
from cupfem.serving import Serving
from cupfem.touch.holding import hold_map

CUP = Path(__file__).parents[1] / "geometries" / "double_wall.toml"
SERVING = """
title = "<script>alert(1)</script> & tea"
duration = "30 s"
[drink]
temperature = "85 degC"
[target]
drink_above = "60 degC"
wall_below = "30 degC"
"""
LARGEST = 3_000_000  # bytes of a page that passes as an attachment
VOID = {"meta", "img", "input", "br", "link", "hr"}


class Page(HTMLParser):
    """Text of the page by the heading above it, tags with their attributes, and whether tags nest."""

    def __init__(self, text: str):
        super().__init__()
        self.tags: list[tuple[str, dict[str, str | None]]] = []
        self.open: list[str] = []
        self.sections: dict[str, str] = {"": ""}
        self.heading = ""
        self.feed(text)

    def handle_starttag(self, tag, attrs):
        self.tags.append((tag, dict(attrs)))
        if tag not in VOID:
            self.open.append(tag)
        if tag == "h2":
            self.heading = "<new>"

    def handle_endtag(self, tag):
        assert self.open.pop() == tag

    def handle_data(self, data):
        if self.heading == "<new>":
            self.heading = data
            self.sections[data] = ""
        elif self.open and self.open[-1] not in ("style", "script"):
            self.sections[self.heading] += data + " "

    def all(self, tag: str) -> list[dict[str, str | None]]:
        return [attributes for name, attributes in self.tags if name == tag]


@pytest.fixture(scope="module")
def run():
    return pour(load_cup(CUP), Serving.from_text(SERVING), fineness=0.5)


@pytest.fixture(scope="module")
def text(run):
    return render(run)


@pytest.fixture(scope="module")
def page(text):
    return Page(text)


def words(text: str) -> str:
    return " ".join(text.split())


def test_it_is_well_formed(page):
    assert page.open == []
    assert page.all("html") == [{"lang": "en"}]


def test_it_needs_nothing_else(text, page):
    assert "http" not in re.sub(r"base64,[A-Za-z0-9+/=]+", "", text)
    assert all(str(image["src"]).startswith("data:image/png;base64,") for image in page.all("img"))
    assert page.all("link") == []
    assert all("src" not in script for script in page.all("script"))
    assert "@import" not in text
    assert "url(" not in text


def test_it_is_small_and_quick(run, tmp_path):
    started = time.process_time()
    path = write_report(run, tmp_path / "report.html")
    assert time.process_time() - started < 6.0  # 3 s on an idle machine
    assert path.stat().st_size < LARGEST


def test_titles_are_escaped(text, page):
    assert "<script>alert" not in text
    assert "<script>alert(1)</script> & tea" in words(page.sections[""])


def test_figures_and_verdict_are_the_run_s(run, page):
    figures = words(page.sections["Figures"])
    for what, value in headline.rows(run, run.figures()):
        assert words(f"{what} {value}") in figures
    top = words(page.sections[""])
    assert "The cup misses 1 of 2 targets." in top
    for verdict in headline.verdicts(run):
        assert words(headline.verdict_line(verdict)) in top
    assert FREE_WALL not in top  # a verdict of touch stands there
    assert f"picked up {run.touch.pick_up:.3g} s after the pour" in top


def test_verdict_sentences(run):
    def sentence(target: str) -> str:
        serving = Serving.from_text(f'duration = "30 s"\n{target}')
        return Page(render(replace(run, serving=serving))).sections[""]

    assert "The cup meets its target." in sentence('[target]\ndrink_above = "60 degC"')
    assert "The cup misses its target." in sentence('[target]\ndrink_above = "90 degC"')
    assert "No target was set" in sentence("")


def test_caution_stands_first_and_last(page):
    assert CAUTION in words(page.sections[""])
    assert words(page.sections["To run it again"]).endswith(CAUTION)


def test_the_two_uncertainties_are_apart(page):
    told = words(page.sections["Uncertainty"])
    numerical, model = told.split("Model and inputs")
    assert "embedded" in numerical
    assert "coarser companion" in numerical
    assert "board moisture not modelled" in model
    assert "board moisture" not in numerical


def test_defaults_and_sources(run, page):
    assumed = words(page.sections["Assumed where the files are silent"])
    assert run.defaults
    assert all(words(line) in assumed for line in run.defaults)
    told = words(page.sections["Materials and their sources"])
    for row in sources_table([run.cup.material("cupstock board"), run.cup.material("air")]):
        assert words(row.source) in told
        assert row.value in told
        assert row.mark in told


def test_inputs_run_again(run, text):
    given = dict(re.findall(r'<pre id="(\w+\.toml)">(.*?)</pre>', text, re.DOTALL))
    assert Cup.from_text(unescape(given["cup.toml"])) == run.cup
    assert Serving.from_text(unescape(given["serving.toml"])) == run.serving
    assert "cupfem pour cup.toml serving.toml --fineness 0.5" in text


def test_slider_has_a_frame_for_each_step(run, page):
    (slider,) = page.all("input")
    frames = [image for image in page.all("img") if "data-time" in image]
    assert int(slider["max"]) == len(frames) - 1
    assert [frame["data-time"] for frame in frames][-1] == "30 s"
    seen = [index for index, frame in enumerate(frames) if "hidden" not in frame]
    assert seen == [int(slider["value"])]


def test_every_picture_has_words(page):
    assert len(page.all("img")) >= 8
    assert all(len(str(image["alt"])) > 20 for image in page.all("img"))


def test_it_prints_and_adapts(text):
    assert "@media print" in text
    assert "prefers-color-scheme: dark" in text
    assert 'name="viewport"' in text


def test_us_units(run):
    told = Page(render(run, "us"))
    assert "degF" in told.sections["Figures"]
    assert "104 °F" in told.sections["Outer wall"]
    assert "Btu" in told.sections["Where the heat goes"]


def test_same_bytes_twice(run, text):
    assert render(run) == text


def test_the_command_writes_it(tmp_path, monkeypatch, capsys):
    monkeypatch.chdir(tmp_path)
    arguments = ["pour", str(CUP), "--duration", "5 s", "--fineness", "0.25", "--report", "--quiet"]
    with pytest.raises(SystemExit) as ended:
        main(arguments)
    assert ended.value.code == 0
    assert (tmp_path / capsys.readouterr().out.strip() / "report.html").is_file()


@pytest.fixture(scope="module")
def candidates(run):
    other = pour(load_cup(CUP.with_name("single_board.toml")), run.serving, fineness=0.35)
    heights, pick_ups = np.array([0.03, 0.05, 0.08]), np.array([5.0, 10.0])
    return [
        Candidate(each, hold_map(each, heights, pick_ups, longest=20.0, sections=1)) for each in (run, other)
    ]


def test_hold_times_are_told(run, candidates):
    page = Page(render(run, candidates=candidates[:1], asked=15.0))
    told = words(page.sections["How long it can be held"])
    for row in hold_rows(candidates[0].hold, "si"):
        assert words(" ".join(row)) in told
    assert "grip band can be held 15 s from" in told
    assert "contact conductance" in told
    assert "Side by side" not in page.sections


def test_cups_stand_side_by_side(run, candidates):
    text = render(run, candidates=candidates)
    told = words(Page(text).sections["Side by side"])
    assert "A Double-wall board cup B Single-wall board cup" in told
    for what, cells in side_by_side(candidates, 30.0):
        assert words(" ".join([what, *cells])) in told
    files = dict(re.findall(r'<pre id="(\w+\.toml)">(.*?)</pre>', text, re.DOTALL))
    assert Cup.from_text(unescape(files["cup_2.toml"])) == candidates[1].run.cup
    assert "--against cup_2.toml" in text


def test_estimates_stand_beside_the_field(run):
    found = slab(run)
    page = Page(render(run, slab=found))
    told = words(page.sections["Would a hand estimate have done?"])
    assert words(found.sentence()) in told
    assert words(found.table()) in told


def test_pictures_that_exist_are_not_drawn_again(run, tmp_path):
    drawn = write_figures(run, tmp_path)
    text = render(run, drawn=drawn)
    for path in drawn.values():
        assert b64encode(path.read_bytes()).decode() in text


def test_the_command_slab_writes_it_too(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    (tmp_path / "short.toml").write_text('duration = "20 s"', encoding="utf-8")
    with pytest.raises(SystemExit) as ended:
        main(["slab", str(CUP), "short.toml", "--fineness", "0.25", "--report", "--quiet", "--out", "hand"])
    assert ended.value.code == 0
    page = Page((tmp_path / "hand" / "report.html").read_text(encoding="utf-8"))
    assert "Would a hand estimate have done?" in page.sections
    assert "cupfem slab cup.toml serving.toml --fineness 0.25 --report" in page.sections["To run it again"]
