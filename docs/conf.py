"""Sphinx settings of the cupfem documentation."""

import tomllib
from pathlib import Path

_pyproject = Path(__file__).parents[1] / "pyproject.toml"
_project = tomllib.loads(_pyproject.read_text(encoding="utf-8"))["project"]

project = "cupfem"
author = "the cupfem developers"
copyright = f"2026, {author}"
version = release = _project["version"]

extensions = ["myst_parser", "sphinx.ext.mathjax"]
myst_enable_extensions = ["dollarmath", "deflist"]
myst_heading_anchors = 3
exclude_patterns = ["_build"]
nitpicky = True

html_theme = "furo"
html_title = f"cupfem {version}"
