"""`import cupfem` is light, and its public names are found where they live."""

import ast
import subprocess
import sys
import tomllib
from pathlib import Path

import pytest

import cupfem

ROOT = Path(__file__).parents[1]
HEAVY = {"matplotlib", "meshio", "pandas", "pint", "scipy", "skfem"}


def modules_after(statement: str) -> set[str]:
    """Top-level modules loaded in a fresh interpreter once `statement` has run."""
    code = f"{statement}\nimport sys\nprint(*sorted({{m.partition('.')[0] for m in sys.modules}}))"
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True, cwd=ROOT)
    return set(done.stdout.split())


def test_import_loads_nothing_heavy():
    assert not HEAVY & modules_after("import cupfem")


def test_a_heavy_import_would_be_seen():
    """Planted fault: the probe itself must notice a heavy module."""
    assert "pint" in modules_after("import cupfem, pint")


@pytest.mark.parametrize("name", cupfem.__all__)
def test_every_public_name_loads(name):
    value = getattr(cupfem, name)
    assert value.__name__ == name
    assert callable(value)


def test_a_function_stays_a_function_beside_its_module():
    """`pour` is a module and the function in it; importing the module must not hide the function."""
    check = "import cupfem.pour, cupfem, types; assert not isinstance(cupfem.pour, types.ModuleType)"
    assert "cupfem" in modules_after(check)


def test_type_checkers_and_the_loader_agree():
    """The imports for type checkers, `__all__` and the table of the loader hold the same names."""
    tree = ast.parse(Path(cupfem.__file__).read_text(encoding="utf-8"))
    imported = {
        (alias.name, node.module.removeprefix("cupfem."))
        for node in ast.walk(tree)
        if isinstance(node, ast.ImportFrom) and node.module and node.module.startswith("cupfem.")
        for alias in node.names
    }
    assert imported == set(cupfem._HOME.items())
    assert set(cupfem.__all__) == set(cupfem._HOME)


def test_unknown_name():
    with pytest.raises(AttributeError, match="no attribute 'poor'"):
        cupfem.poor  # noqa: B018


def test_version_is_the_one_of_the_package():
    project = tomllib.loads((ROOT / "pyproject.toml").read_text(encoding="utf-8"))["project"]
    assert cupfem.__version__ == project["version"]
