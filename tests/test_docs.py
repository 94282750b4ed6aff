"""The manual: every command and code block runs, links lead somewhere, pages of the files are the models'."""

import json
import re
import runpy
import shlex
import shutil
import tomllib
from collections.abc import Iterator
from pathlib import Path

import numpy as np
import pytest

import cupfem
from cupfem.cli import main
from cupfem.cup import Cup, Sleeve
from cupfem.errors import InputError
from cupfem.serving import Serving
from cupfem.vary import Plan

ROOT = Path(__file__).resolve().parents[1]
DOCS = ROOT / "docs"
PAGES = sorted(path.resolve() for path in DOCS.rglob("*.md") if "_build" not in path.parts)
BLOCK = re.compile(r"^```(\{?[\w-]*\}?)[^\n]*\n(.*?)^```$", re.MULTILINE | re.DOTALL)
NAMED = re.compile(r"^# (\w+\.toml)$", re.MULTILINE)
SHOWN = {"text", "", "{toctree}", "{literalinclude}", "{eval-rst}", "{math}", "{code-block}"}
"""Blocks that are no input: output, and directives, which the build of the manual checks."""
SETTING_UP = (
    "python3 -m venv",
    ".venv/bin/",
    "pip install ",
    "dask ",
    "source ",
    "python docs/examples/",
    "git ",
    ".ci/",
)
"""Lines that set up an environment (the line of README is run by CI), and the examples, tested by name."""
NOWHERE = "192.0.2."
"""Addresses that stand in manuals only (RFC 5737): nothing answers there."""
QUICK = ["--fineness", "0.25", "--quiet"]
SHORT = ["--duration", "60 s"]
TUTORIAL = DOCS / "tutorial.md"
NEAR = 0.03
"""Relative closeness of the tutorial's figures, which are those of the default fineness."""
LOG = "time_s,drink_temperature_degC,outer_z045mm_degC\n0,85,22\n20,84,70\n40,83,71\n"
"""A log of a reader's own, invented."""
KINDS = (Cup, Serving, Sleeve, Plan)


def blocks_of(page: Path) -> list[tuple[str, str]]:
    return BLOCK.findall(page.read_text(encoding="utf-8"))


def run_line(line: str, extra: list[str]) -> None:
    """A command of the command line, in this process."""
    with pytest.raises(SystemExit) as ended:
        main([*shlex.split(line, comments=True)[1:], *extra])
    assert ended.value.code == 0, line


def extra_of(line: str, quick: bool) -> list[str]:
    job = line.split()[1]
    if "--help" in line or job not in ("pour", "hold", "slab", "draw"):
        return []
    if not quick:
        return ["--fineness", "0.5"]
    return QUICK + (SHORT if job in ("pour", "hold") and "serving_" not in line else [])


@pytest.fixture
def place(tmp_path, monkeypatch):
    """A folder as a reader has it: that of the repository, with the shipped files."""
    shutil.copytree(ROOT / "geometries", tmp_path / "geometries")
    for mesh in (ROOT / "tests" / "meshes").glob("tube_*.msh"):
        shutil.copy(mesh, tmp_path)
    (tmp_path / "cup_3.csv").write_text(LOG, encoding="utf-8")
    monkeypatch.chdir(tmp_path)
    monkeypatch.setenv("COLUMNS", "110")
    return tmp_path


@pytest.fixture
def quick(monkeypatch):
    """Coarse runs, where the point is that a block works."""
    whole, held = cupfem.pour, cupfem.hold

    def pour(*given, **options):
        return whole(*given, **{"fineness": 0.25, "hold": False, **options, "companion": False})

    monkeypatch.setattr(cupfem, "pour", pour)
    monkeypatch.setattr(cupfem, "hold", lambda *given, **options: held(*given, **{"sections": 1, **options}))


def run_page(page: Path, folder: Path, quick: bool) -> None:
    """All blocks of a page in their order; Python blocks share their names."""
    names: dict[str, object] = {}
    for language, text in blocks_of(page):
        if language == "toml":
            for name in NAMED.findall(text)[:1]:
                (folder / name).write_text(text, encoding="utf-8")
        elif language == "python":
            exec(compile(text, str(page), "exec"), names)
        elif language == "sh":
            for line in filter(None, text.splitlines()):
                if not line.startswith(SETTING_UP) and NOWHERE not in line:
                    assert line.startswith("cupfem "), line
                    run_line(line, extra_of(line, quick))


@pytest.mark.parametrize("page", PAGES, ids=lambda page: str(page.relative_to(DOCS)))
def test_every_block_is_of_a_kind_that_is_checked(page):
    kinds = {language for language, _ in blocks_of(page)}
    assert kinds <= {"python", "sh", "toml"} | SHOWN
    assert page.read_text(encoding="utf-8").count("\n```") % 2 == 0


RUN = [
    page for page in PAGES if {"python", "sh"} & {kind for kind, _ in blocks_of(page)} and page != TUTORIAL
]


@pytest.mark.parametrize("page", RUN, ids=lambda page: str(page.relative_to(DOCS)))
@pytest.mark.filterwarnings("ignore::DeprecationWarning")
def test_every_block_runs(page, place, quick):
    run_page(page, place, quick=True)


@pytest.mark.slow
def test_the_tutorial_gives_its_figures(place, capsys):
    """On a coarser mesh, to save time; every figure that the page shows is among those that are printed."""
    run_page(TUTORIAL, place, quick=False)
    printed = numbers(capsys.readouterr().out)
    shown = [text for language, text in blocks_of(TUTORIAL) if language == "text"]
    assert len(shown) == 3
    for text in shown:
        for number in numbers(text):
            assert np.isclose(printed, number, rtol=NEAR, atol=0.1).any(), number
    report = (place / "second" / "report.html").read_text(encoding="utf-8")
    assert "The cup meets all 2 targets." in report
    assert (place / "drawn" / "section.png").is_file()
    assert (place / "held" / "hold.csv").is_file()


def numbers(text: str) -> np.ndarray:
    return np.array([float(found) for found in re.findall(r"(?<![\w.])\d+(?:\.\d+)?", text)])


def test_a_figure_that_is_not_printed_is_noticed():
    """Planted fault."""
    assert not np.isclose(numbers("can be held 33.6 s"), 38.0, rtol=NEAR, atol=0.1).any()


@pytest.mark.parametrize("page", PAGES, ids=lambda page: str(page.relative_to(DOCS)))
def test_every_file_of_a_page_can_be_read(page, place):
    """A block of TOML is a whole file of one of the four kinds; the how-to of plans shows parts of one."""
    for text in [text for language, text in blocks_of(page) if language == "toml"]:
        for name in NAMED.findall(text)[:1]:
            (place / name).write_text(text, encoding="utf-8")
        if page.name == "vary.md":
            continue  # its parts are put together and read by the tests of plans
        assert any(reads(kind, text, place) for kind in KINDS), text


def reads(kind: type, text: str, folder: Path) -> bool:
    path = folder / "block.toml"
    path.write_text(text, encoding="utf-8")
    try:
        kind.load(path)
    except InputError:
        return False
    return True


@pytest.mark.parametrize("page", PAGES, ids=lambda page: str(page.relative_to(DOCS)))
def test_parts_of_files_have_known_keys(page):
    text = page.read_text(encoding="utf-8")
    for part in re.findall(r"^```\{code-block\} toml\n(.*?)^```$", text, re.MULTILINE | re.DOTALL):
        assert set(keys_in(tomllib.loads(part))) <= KEYS


def keys_in(table: dict[str, object]) -> Iterator[str]:
    """All keys of a table and of those within, but for the names of materials."""
    for key, value in table.items():
        yield key
        inner = value if isinstance(value, list) else [value]
        for each in inner:
            if isinstance(each, dict):
                yield from keys_in(each) if key != "material" else ()


SCHEMAS = [json.loads(path.read_text(encoding="utf-8")) for path in (DOCS / "schemas").glob("*.json")]
TABLES = [told for schema in SCHEMAS for told in (schema, *schema["$defs"].values())]
KEYS = {key for told in TABLES for key in told.get("properties", {})}


def test_a_file_that_cannot_be_read_is_noticed(tmp_path):
    """Planted fault."""
    assert not any(reads(kind, 'title = "x"\n[cop]\nheight = "9 mm"\n', tmp_path) for kind in KINDS)


@pytest.mark.parametrize("page", PAGES, ids=lambda page: str(page.relative_to(DOCS)))
def test_links_lead_somewhere(page):
    text = page.read_text(encoding="utf-8")
    for link in re.findall(r"\]\((?!https?:)([^)#\s]+)", text):
        assert (page.parent / link).exists(), link
    for target in re.findall(r"\{doc\}`(?:[^`<]*<)?([^`>]+)>?`", text):
        assert (page.parent / f"{target}.md").is_file() or (DOCS / f"{target.lstrip('/')}.md").is_file(), (
            target
        )
    for name in re.findall(r"`((?:geometries|docs|tests|cupfem)/[\w./-]+\.\w+)`", text):
        assert (ROOT / name).exists(), name


def test_every_page_is_in_a_list():
    listed = {(DOCS / "index.md").resolve()}
    for page in PAGES:
        for language, text in blocks_of(page):
            if language == "{toctree}":
                entries = [line.strip() for line in text.splitlines() if line.strip() and line[0] != ":"]
                for entry in entries:
                    listed |= {found.resolve() for found in page.parent.glob(f"{entry}.md")}
    assert set(PAGES) <= listed


def test_pages_of_the_files_are_those_of_the_models():
    pages = runpy.run_path(str(DOCS / "reference" / "write.py"))["PAGES"]
    assert set(pages) >= {"cup_file", "serving_file", "sleeve_file", "plan_file"}
    for name, write in pages.items():
        assert (DOCS / "reference" / f"{name}.md").read_text(encoding="utf-8") == write(), name


def test_the_api_page_has_every_public_name():
    page = (DOCS / "reference" / "api.md").read_text(encoding="utf-8")
    assert [name for name in cupfem.__all__ if name not in page] == []
