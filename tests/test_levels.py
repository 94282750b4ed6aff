"""Imports follow the table of levels in DEVELOPERS.md, and the estimates use no finite elements."""

import ast
import re
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]
PACKAGE = ROOT / "cupfem"
ROW = re.compile(r"^\| (\d+) \| ((?:`\w+`(?:, )?)+) \|", re.MULTILINE)

Imports = dict[str, set[str]]


def levels_of(table: str) -> dict[str, int]:
    """Module name to level, from the rows of the table."""
    return {name: int(level) for level, names in ROW.findall(table) for name in re.findall(r"\w+", names)}


def imported_names(tree: ast.AST, package: list[str]) -> set[str]:
    """Absolute dotted names of everything imported anywhere in a file that lies in `package`."""
    names: set[str] = set()
    for node in ast.walk(tree):
        if isinstance(node, ast.Import):
            names |= {alias.name for alias in node.names}
        elif isinstance(node, ast.ImportFrom):
            above = package[: len(package) - node.level + 1] if node.level else []
            base = ".".join([*above, *([node.module] if node.module else [])])
            names |= {f"{base}.{alias.name}" for alias in node.names}
    return names


def imports_of(package: Path) -> Imports:
    """Module (or folder) of the package to all it imports: "films" for our own, "skfem" for others.

    An import of a name of the package itself (``from cupfem import pour``) gives "cupfem" unless the name
    is a module: nothing inside the package may go through its front door.
    """
    own = {path.stem for path in package.iterdir() if path.suffix == ".py" or path.is_dir()}
    imports: Imports = {}
    for path in sorted(package.rglob("*.py")):
        inside = path.relative_to(package)
        if inside == Path("__init__.py"):
            continue
        found = imports.setdefault(inside.with_suffix("").parts[0], set())
        tree = ast.parse(path.read_text(encoding="utf-8"))
        for name in imported_names(tree, [package.name, *inside.parts[:-1]]):
            first, _, rest = name.partition(".")
            second = rest.partition(".")[0]
            found.add(second if first == package.name and second in own else first)
    return imports


def breaches(imports: Imports, levels: dict[str, int]) -> list[str]:
    """One line for each import that is neither from a lower level nor of `errors`, which all may raise."""
    lines = [f"{module} is not in the table" for module in imports if module not in levels]
    for module, names in imports.items():
        for name in sorted(names & {*imports, "cupfem"} - {module, "errors"}):
            if levels.get(name, 99) >= levels.get(module, 99):
                lines.append(f"{module} imports {name}")
    return lines


def reached(imports: Imports, start: str) -> set[str]:
    """Everything that `start` imports, directly or through other modules of the package."""
    seen: set[str] = set()
    waiting = [start]
    while waiting:
        for name in imports.get(waiting.pop(), set()) - seen:
            seen.add(name)
            waiting.append(name)
    return seen


@pytest.fixture(scope="module")
def levels():
    return levels_of((ROOT / "DEVELOPERS.md").read_text(encoding="utf-8"))


@pytest.fixture
def planted(tmp_path):
    """A small package whose module `films` holds the given line."""

    def plant(line: str, module: str = "films") -> Imports:
        package = tmp_path / "cupfem"
        package.mkdir()
        for name in ("__init__", "errors", "fluids", "films", "estimates", "march"):
            (package / f"{name}.py").write_text("import skfem\n" if name == "march" else "", encoding="utf-8")
        (package / f"{module}.py").write_text(line + "\n", encoding="utf-8")
        return imports_of(package)

    return plant


def test_the_table_is_read(levels):
    assert levels["errors"] == 0
    assert levels["estimates"] == 5
    assert levels["cli"] == max(levels.values())
    assert set(levels.values()) == set(range(17))


def test_modules_import_only_from_lower_levels(levels):
    assert breaches(imports_of(PACKAGE), levels) == []


def test_estimates_use_no_finite_elements(levels):
    """An estimate that shared code with the field could not disagree with it."""
    found = reached(imports_of(PACKAGE), "estimates") - {"estimates"}  # a folder imports from itself
    assert not found & {"skfem", "meshio"}
    assert all(levels[name] < levels["estimates"] for name in found & set(levels))


@pytest.mark.parametrize(("library", "home"), [("meshio", {"exchange"}), ("matplotlib", {"figures"})])
def test_a_library_has_one_home(library, home):
    assert {module for module, names in imports_of(PACKAGE).items() if library in names} <= home


@pytest.mark.parametrize(
    "line",
    [
        "import cupfem.march",
        "from cupfem.march import Step",
        "from cupfem import march",
        "from . import march",
        "from .march import Step",
        "def late():\n    from cupfem.march import Step",
    ],
)
def test_an_import_upwards_is_caught(planted, levels, line):
    assert breaches(planted(line), levels) == ["films imports march"]


def test_an_import_from_the_same_level_is_caught(planted, levels):
    assert breaches(planted("import cupfem.films", module="gaps"), levels) == ["gaps imports films"]


def test_an_import_through_the_front_door_is_caught(planted, levels):
    assert breaches(planted("from cupfem import pour"), levels) == ["films imports cupfem"]


def test_a_module_outside_the_table_is_caught(planted, levels):
    assert breaches(planted("", module="helpers"), levels) == ["helpers is not in the table"]


def test_an_import_downwards_is_allowed(planted, levels):
    assert breaches(planted("from cupfem.fluids import water\nfrom . import errors"), levels) == []
    assert imports_of(PACKAGE)["quantities"] >= {"errors", "pydantic"}


def test_a_hidden_road_from_the_estimates_is_caught(planted):
    """Through a module in between, which alone would be allowed to import the mesh."""
    imports = planted("from cupfem.films import plate", module="estimates")
    imports["films"] = {"march"}
    assert {"march", "skfem"} <= reached(imports, "estimates")
