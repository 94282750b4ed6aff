"""Write the verification book: one page for each case, from what the tests themselves compared.

    python docs/verification/build.py

It runs tests/verification and the tube job by pytest and keeps every comparison of a found with an exact or
printed value. Pages and figures are committed; run it again after a change of a case.
"""

from __future__ import annotations

import importlib
import inspect
import re
import sys
from dataclasses import dataclass, field
from pathlib import Path
from types import ModuleType
from typing import Any

import matplotlib as mpl
import numpy as np
import pytest
from numpy.typing import NDArray

HERE = Path(__file__).parent
ROOT = HERE.parents[1]
TESTS = ROOT / "tests"
sys.path[:0] = [str(ROOT), str(TESTS)]

from verification import compare  # noqa: E402

Floats = NDArray[np.float64]
FEWEST_POINTS = 3
"""Fewer values make no figure: the table tells them."""


INTRODUCTION = """\
# Verification book

{count} cases with an exact or a published answer, each through cupfem's own mesh, operators and march. The
pages are written by `python docs/verification/build.py` from what the tests under `tests/verification`
and `tests/test_tube.py` compare; what is allowed is what the test allows. Of each
case the comparison is told that
comes nearest to it. A right answer here says that the equations are solved right, not that they are the right
equations for a cup.

| case | comparisons | largest error | allowed | within |
|---|---|---|---|---|
{rows}

```{{toctree}}
:hidden:

{names}
```
"""


@dataclass
class Comparison:
    """One call of `within` or `within_share`."""

    what: str
    found: Floats
    target: Floats
    tolerance: float
    kind: str
    scale: Floats

    @property
    def error(self) -> float:
        """Largest deviation, in the unit of the tolerance."""
        return float(np.max(np.abs(self.found - self.target) / self.scale))


@dataclass
class Case:
    """A test function with all its comparisons."""

    name: str
    module: ModuleType
    owner: type | None
    function: Any
    comparisons: list[Comparison] = field(default_factory=list)
    passed: bool = True

    @property
    def title(self) -> str:
        words = self.function.__name__.removeprefix("test_").replace("_", " ")
        group = (
            ""
            if self.owner is None
            else re.sub(r"(?<!^)(?=[A-Z])", " ", self.owner.__name__[4:]).lower() + ": "
        )
        return (group + words).capitalize()

    @property
    def worst(self) -> Comparison:
        """The comparison that comes nearest to what is allowed."""
        return max(self.comparisons, key=lambda each: each.error / max(each.tolerance, 1e-17))


class Recorder:
    """A plugin of pytest that keeps what each test compared."""

    def __init__(self) -> None:
        self.cases: dict[str, Case] = {}
        self.now: Case | None = None
        self.compared = compare._compare

    def pytest_runtest_call(self, item: pytest.Function) -> None:
        name = item.nodeid.split("[")[0]
        self.now = self.cases.setdefault(name, Case(name, item.module, item.cls, item.function))

    def pytest_runtest_logreport(self, report: pytest.TestReport) -> None:
        if report.when == "call" and self.now is not None:
            self.now.passed &= report.passed

    def keep(self, what: str, found: Any, target: Any, tolerance: float, scale: Floats, kind: str) -> None:
        """Stand in for `compare._compare`."""
        if self.now is not None:
            values = [np.atleast_1d(np.asarray(each, dtype=float)) for each in (found, target, scale)]
            self.now.comparisons.append(Comparison(what, *values[:2], tolerance, kind, values[2]))
        self.compared(what, found, target, tolerance, scale, kind)


def main() -> int:
    """Run the cases and write all pages; the status of pytest."""
    recorder = Recorder()
    compare._compare = recorder.keep
    status = pytest.main(
        [*map(str, (TESTS / "verification", TESTS / "test_tube.py")), "-q", "-n0", "-p", "no:cacheprovider"],
        plugins=[recorder],
    )
    cases = [case for case in recorder.cases.values() if case.comparisons and "faults" not in case.name]
    for old in (*HERE.glob("*.md"), *HERE.glob("*.svg")):
        old.unlink()
    for case in cases:
        (HERE / f"{slug(case)}.md").write_text(page(case), encoding="utf-8")
    (HERE / "index.md").write_text(index(cases), encoding="utf-8")
    print(f"{len(cases)} pages in {HERE.relative_to(ROOT)}")
    return int(status)


def slug(case: Case) -> str:
    """Name of a case's page."""
    parts = [case.module.__name__.rsplit(".", 1)[-1], "" if case.owner is None else case.owner.__name__]
    words = [
        re.sub(r"(?<!^)(?=[A-Z])", "_", part).lower() for part in [*parts, case.function.__name__] if part
    ]
    return "_".join(word.removeprefix("test_") for word in words)


def index(cases: list[Case]) -> str:
    """The summary table."""
    rows = []
    for case in cases:
        worst, within = case.worst, "yes" if case.passed else "**no**"
        error = f"{worst.kind}{worst.error:.1e} | {worst.tolerance:.0e} | {within}"
        rows.append(f"| [{case.title}]({slug(case)}.md) | {len(case.comparisons)} | {error} |")
    names = "\n".join(slug(case) for case in cases)
    return INTRODUCTION.format(count=len(cases), rows="\n".join(rows), names=names)


def page(case: Case) -> str:
    """The page of one case: problem, equations and their sources, found against exact, figure."""
    lines = [f"# {case.title}", "", "## Problem and source", ""]
    for described in (case.function, case.owner, case.module):
        if described is not None and described.__doc__:
            lines += [plain(inspect.getdoc(described) or ""), ""]
    equations = oracles_of(case)
    if equations:
        lines += ["## Exact solution", ""]
    for name, text in equations.items():
        lines += [f"`{name}`", "", plain(text), ""]
    lines += ["## Found against exact", "", *table(case), ""]
    figure = draw(case)
    if figure:
        lines += [f"![Found and exact values, and their error]({figure})", ""]
    test = f"{case.module.__name__.replace('.', '/')}.py"
    lines += [f"Run by `pytest tests/{test}`, `{case.function.__name__}`.", ""]
    return "\n".join(lines)


def plain(text: str) -> str:
    """A docstring as Markdown text: what looks like mark-up is not."""
    return re.sub(r"([*_<>\[\]|$`])", r"\\\1", text)


def oracles_of(case: Case) -> dict[str, str]:
    """The functions of tests/oracles that a case calls, itself or by a helper of its module, by docstring."""
    source = inspect.getsource(case.function)
    helpers = [name for name in re.findall(r"\b([a-z]\w+)\(", source) if hasattr(case.module, name)]
    for name in dict.fromkeys(helpers):
        helper = getattr(case.module, name)
        if inspect.isfunction(helper) and helper.__module__ == case.module.__name__:
            source += inspect.getsource(helper)
    found = {}
    for part, name in dict.fromkeys(re.findall(r"\b([a-z_]+)\.(\w+)\(", source)):
        if (TESTS / "oracles" / f"{part}.py").exists():
            called = getattr(importlib.import_module(f"oracles.{part}"), name, None)
            if called is not None and called.__doc__:
                found[f"{part}.{name}"] = inspect.getdoc(called) or ""
    return found


def table(case: Case) -> list[str]:
    """Each comparison by its worst value."""
    rows = [
        "| compared | values | found | exact or printed | largest error | allowed |",
        "|---|---|---|---|---|---|",
    ]
    for each in case.comparisons:
        worst = int(np.argmax(np.abs(each.found - each.target) / each.scale))
        pair = f"{each.found.flat[worst]:.9g} | {each.target.flat[worst]:.9g}"
        error = f"{each.kind}{each.error:.1e} | {each.tolerance:.0e}"
        rows.append(f"| {plain(each.what)} | {each.found.size} | {pair} | {error} |")
    return rows


def draw(case: Case) -> str:
    """Exact against computed and the error where the most values are compared; the figure's name, or ""."""
    most = max(case.comparisons, key=lambda each: each.found.size)
    if most.found.size < FEWEST_POINTS:
        return ""
    from matplotlib.figure import Figure

    mpl.rcParams["svg.hashsalt"] = "cupfem"
    mpl.rcParams["svg.fonttype"] = "none"  # text stays text: a fifth of the size
    numbers = np.arange(1, most.found.size + 1)
    figure = Figure(figsize=(7.0, 3.0), layout="constrained")
    left, right = figure.subplots(1, 2)
    left.plot(numbers, most.target.ravel(), "-", color="0.5", label="exact or printed")
    left.plot(numbers, most.found.ravel(), "x", color="tab:blue", label="found")
    left.set(xlabel="value, in the order of the test", title=most.what)
    left.legend()
    right.semilogy(numbers, np.maximum(np.abs(most.found - most.target) / most.scale, 1e-17).ravel(), "x-")
    right.axhline(max(most.tolerance, 1e-17), color="tab:red", label="allowed")
    right.set(xlabel="value, in the order of the test", title=f"{most.kind}error")
    right.legend()
    name = f"{slug(case)}.svg"
    figure.savefig(HERE / name, metadata={"Date": None})
    return name


if __name__ == "__main__":
    sys.exit(main())
