"""What README and the how-to pages say can be typed works as it stands there."""

import re
import shutil
import subprocess
import sys
from pathlib import Path

import pytest

import cupfem

ROOT = Path(__file__).parents[1]
README = (ROOT / "README.md").read_text(encoding="utf-8")
MARKED = re.compile(r"^<!-- ci: (\w+) -->\n```sh\n(.*?)^```$", re.MULTILINE | re.DOTALL)
COMMAND = re.compile(r"\bcupfem ([a-z]+)(?= CUP| geometries|`)")


def blocks(text: str, language: str) -> list[str]:
    """The code blocks of one language in a page."""
    return re.findall(rf"^```{language}\n(.*?)^```$", text, re.MULTILINE | re.DOTALL)


def marked_lines() -> dict[str, str]:
    """The two lines that `.ci/run` takes from README, by their marks."""
    return dict(MARKED.findall(README))


def help_of(command: str) -> subprocess.CompletedProcess[str]:
    code = "from cupfem.cli import main; main()"
    line = [sys.executable, "-c", code, command, "--help"]
    return subprocess.run(line, capture_output=True, text=True, check=False)


def test_there_is_a_line_for_the_job_and_one_for_the_tests():
    assert set(marked_lines()) == {"job", "test"}


@pytest.mark.parametrize("name", ["job", "test"])
def test_a_line_stands_alone(name):
    """One line that sets itself up, from the pinned releases, and parses."""
    line = marked_lines()[name]
    assert line.count("\n") == 1
    assert line.startswith("python3 -m venv .venv && .venv/bin/pip install -q -c .ci/constraints.txt ")
    subprocess.run(["bash", "-n", "-c", line], check=True)


def test_the_files_of_the_lines_exist():
    files = [
        word for line in marked_lines().values() for word in line.split() if word.endswith((".toml", ".txt"))
    ]
    assert len(files) == 3
    assert all((ROOT / file).is_file() for file in files)


def test_the_script_of_all_checks_reads_the_same_lines():
    """`.ci/run` finds the lines by a pattern of its own."""
    script = (ROOT / ".ci" / "run").read_text(encoding="utf-8")
    reader = script[script.index("readme_line() {") : script.index("run_readme_line() {")]
    for name, line in marked_lines().items():
        done = subprocess.run(
            ["bash", "-c", f"{reader}\nreadme_line {name}"],
            cwd=ROOT,
            capture_output=True,
            text=True,
            check=True,
        )
        assert done.stdout == line


def test_every_command_exists():
    commands = set(COMMAND.findall(README))
    assert {"draw", "pour", "materials"} <= commands
    for command in commands:
        assert help_of(command).returncode == 0, command


def test_a_command_that_does_not_exist_is_noticed():
    """Planted fault."""
    refused = help_of("brew")
    assert refused.returncode == 2
    assert "Traceback" not in refused.stderr


def test_the_links_lead_somewhere():
    links = re.findall(r"\]\(([^)#]+)\)", README)
    assert len(links) >= 5
    assert [link for link in links if not (ROOT / link).exists()] == []


def test_the_python_example_runs(tmp_path, monkeypatch, capsys):
    shutil.copytree(ROOT / "geometries", tmp_path / "geometries")
    monkeypatch.chdir(tmp_path)
    (example,) = blocks(README, "python")
    exec(compile(example, "README.md", "exec"), {})
    assert "degC" in capsys.readouterr().out
    assert (tmp_path / "fields.pvd").is_file()


@pytest.mark.parametrize(
    ("page", "load", "count"),
    [("cup_file", "load_cup", 2), ("serving_file", "load_serving", 4)],
)
def test_the_files_of_the_how_to_pages_load(tmp_path, page, load, count):
    texts = blocks((ROOT / "docs" / "howto" / f"{page}.md").read_text(encoding="utf-8"), "toml")
    assert len(texts) == count
    for text in texts:
        file = tmp_path / f"{page}.toml"
        file.write_text(text, encoding="utf-8")
        title = re.search(r'title = "(.*)"', text)
        assert title is not None
        assert getattr(cupfem, load)(file).title == title[1]
