"""The page in a real browser: no complaint, no request, the slider moves the picture, it prints and fits."""

import io
import json
import re

import numpy as np
import pytest
from browser import Browser
from PIL import Image

from cupfem.against import Candidate
from cupfem.cup import load_cup
from cupfem.pour import pour
from cupfem.report import write_report
from cupfem.serving import Serving
from cupfem.touch.holding import hold_map

pytestmark = pytest.mark.chromium

SERVING = 'duration = "60 s"\n[drink]\ntemperature = "85 degC"\n[target]\ndrink_above = "60 degC"\n'
SEEN = (
    "[document.querySelector('#slider output').textContent,"
    " [...document.querySelectorAll('#slider img')].flatMap((image, index) => image.hidden ? [] : [index])]"
)
SLIDER = "document.querySelector('#slider img:not([hidden])')"
SMALLEST = """Math.min(...[...document.querySelectorAll('p, li, td')].map(
    (element) => parseFloat(getComputedStyle(element).fontSize)))"""
PAPERS = {"A4": (8.27, 11.69), "letter": (8.5, 11.0)}
PAGES = (6, 14)
"""Sensible numbers of printed pages: all pictures, tables, and the files."""
MEDIA_BOX = re.compile(rb"/MediaBox\s*\[\s*0 0 ([\d.]+) ([\d.]+)\s*\]")


@pytest.fixture(scope="module")
def page(tmp_path_factory):
    path = tmp_path_factory.mktemp("page") / "report.html"
    candidates = []
    for name in ("double_wall", "single_board"):
        run = pour(load_cup(f"geometries/{name}.toml"), Serving.from_text(SERVING), fineness=0.35)
        held = hold_map(run, np.array([0.03, 0.05, 0.08]), np.array([5.0, 20.0]), longest=40.0, sections=1)
        candidates.append(Candidate(run, held))
    return write_report(candidates[0].run, path, candidates=candidates)


@pytest.fixture(scope="module")
def browser(page, tmp_path_factory):
    with Browser(tmp_path_factory.mktemp("profile")) as browser:
        yield browser


@pytest.fixture
def opened(browser, page):
    browser.size(1280, 900)
    browser.open(page)
    return browser


def test_no_request_leaves_the_file_and_nothing_is_complained_of(opened, page):
    opened.press("ArrowRight", 39)
    assert opened.requests() == [page.resolve().as_uri()]
    assert opened.complaints() == []


def test_a_fault_and_a_request_are_noticed(opened, tmp_path):
    """Planted faults."""
    bad = tmp_path / "bad.html"
    bad.write_text('<img src="other.png"><script>missing()</script>', encoding="utf-8")
    opened.open(bad)
    assert len(opened.requests()) == 2
    assert any("missing is not defined" in told for told in opened.complaints())


def test_the_slider_moves_the_picture_by_keys(opened):
    time, (frame,) = opened.value(SEEN)
    before = picture_of_slider(opened)
    opened.press("ArrowLeft", 37)
    earlier, (left,) = opened.value(SEEN)
    assert (left, earlier != time) == (frame - 1, True)
    assert not np.array_equal(before, picture_of_slider(opened))
    opened.value("document.querySelector('#slider input').focus()")
    opened.press("ArrowRight", 39)
    assert opened.value(SEEN) == [time, [frame]]
    assert np.array_equal(before, picture_of_slider(opened))
    opened.value("document.querySelector('#slider input').focus()")
    opened.press("Home", 36)
    assert opened.value(SEEN)[1] == [0]
    opened.press("ArrowLeft", 37)  # before the first there is nothing
    assert opened.value(SEEN)[1] == [0]


def test_the_slider_is_reached_by_tab(opened):
    for _ in range(40):
        opened.press("Tab", 9)
        if opened.value("document.activeElement.type") == "range":
            return
    pytest.fail("the tab key does not reach the slider")


def picture_of_slider(browser: Browser) -> np.ndarray:
    """What is seen where the slider's picture is."""
    browser.value(f"{SLIDER}.scrollIntoView({{block: 'start'}}); document.activeElement.blur()")
    box = json.loads(browser.value(f"JSON.stringify({SLIDER}.getBoundingClientRect())"))
    left, top, width = (int(box[name]) for name in ("left", "top", "width"))
    picture = np.asarray(Image.open(io.BytesIO(browser.picture())).convert("L"))
    return picture[max(top, 0) : top + 300, left : left + width]


@pytest.mark.parametrize("width", [390, 768, 1280])
def test_it_fits_the_width(opened, width):
    opened.size(width, 844)
    assert opened.value("document.documentElement.scrollWidth") <= width
    assert opened.value(SMALLEST) >= 13.0


@pytest.mark.parametrize("paper", PAPERS)
def test_it_prints(opened, paper):
    size = PAPERS[paper]
    printed = opened.pdf(*size)
    boxes = MEDIA_BOX.findall(printed)
    assert PAGES[0] <= len(boxes) <= PAGES[1]
    for box in boxes:
        assert [float(side) / 72 for side in box] == pytest.approx(size, abs=0.02)
    assert opened.value("[...document.querySelectorAll('details')].every(file => file.open)")


def test_every_picture_of_it_loads(opened):
    assert opened.value("[...document.images].every(image => image.complete && image.naturalWidth > 100)")
