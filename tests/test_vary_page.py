"""The page of an outcome holds what the table holds, and needs nothing beside itself."""

import re
from html import unescape
from pathlib import Path

import pytest

from cupfem.report.outcome import render_outcome, write_outcome
from cupfem.vary import Outcome, Row
from cupfem.vary.outcome import Goal, Varied

CUP = (Path(__file__).parents[1] / "geometries/single_board.toml").read_text(encoding="utf-8")


@pytest.fixture
def outcome():
    """Four cases over one key: one lasts long, one fails to run, one breaks the limit."""
    told = [
        {"board_mass_g": 6.0, "hold_time_s": 12.0},
        {"board_mass_g": 8.0, "hold_time_s": 25.0},
        {"board_mass_g": 9.0, "hold_time_s": None, "hold_time_at_least_s": 60.0},
        {},
    ]
    texts = [CUP.replace('"0.33 mm"', f'"{thickness} mm"') for thickness in (0.3, 0.4, 0.5)]
    rows = tuple(
        Row(
            n,
            {"layer.board.thickness": f"0.{n + 2} mm"},
            figures,
            "" if figures else "leaves <the> cup",
            text,
        )
        for n, (figures, text) in enumerate(zip(told, [*texts, ""], strict=True), 1)
    )
    varied = (Varied("layer.board.thickness", "length", "mm"),)
    goals = (Goal("hold_time_s", at_least=20.0),)
    return Outcome("Thin & thick", "random", 4, varied, ("board_mass_g", "hold_time_s"), goals, rows)


def test_the_page_says_what_the_rows_say(outcome):
    page = render_outcome(outcome)
    text = unescape(re.sub(r"<[^>]+>", " ", page))
    assert "2 of 4 cases keep the limits; case 2 has the least board mass of them." in text
    assert "1 of 3 fail: 33.33%" in text
    assert "1 not run" in text
    assert "1 of 4 cases failed; 1 of 4 not reached, taken as 60" in text
    assert "Case 4: leaves <the> cup" in text
    assert "leaves &lt;the&gt; cup" in page
    assert "not a safety certificate" in text
    cells = re.findall(r"<td>(.*?)</td>", page)
    assert [unescape(cell) for cell in cells if cell.startswith("&gt;=")] == [">= 60"]


def test_sections_are_those_of_the_front_that_keeps_the_limits(outcome):
    captions = re.findall(r"<figcaption>(Case .*?)</figcaption>", render_outcome(outcome))
    assert captions == ["Case 2: layer.board.thickness 0.4 mm", "Case 3: layer.board.thickness 0.5 mm"]


def test_the_page_needs_nothing_else_and_is_the_same_again(outcome, tmp_path):
    first = write_outcome(outcome, tmp_path / "outcome.html").read_bytes()
    assert write_outcome(outcome, tmp_path / "again.html").read_bytes() == first
    links = re.findall(rb'(?:src|href)="(?!data:image/png;base64,)', first)
    assert links == []


def test_without_a_case_that_keeps_the_limits_it_says_so(outcome):
    hard = Outcome(
        outcome.title, "random", 4, outcome.varied, outcome.recorded,
        (Goal("hold_time_s", at_least=500.0, at_most=900.0),), outcome.rows,
    )  # fmt: skip
    page = render_outcome(hard)
    assert "0 of 4 cases keep the limits." in page
    assert "No case keeps the limits." in page
