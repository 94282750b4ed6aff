"""Sphinx settings of the cupfem documentation."""

import tomllib
from pathlib import Path

_pyproject = Path(__file__).parents[1] / "pyproject.toml"
_project = tomllib.loads(_pyproject.read_text(encoding="utf-8"))["project"]

project = "cupfem"
author = "the cupfem developers"
copyright = f"2026, {author}"
version = release = _project["version"]

extensions = ["myst_parser", "sphinx.ext.mathjax", "sphinx.ext.autodoc", "sphinx.ext.napoleon"]
autodoc_typehints = "none"
napoleon_use_rtype = False
napoleon_use_param = False
napoleon_use_ivar = True
myst_enable_extensions = ["dollarmath", "deflist"]
myst_heading_anchors = 3
exclude_patterns = ["_build"]
nitpicky = True
nitpick_ignore_regex = [("py:.*", ".*")]  # names of other packages in signatures lead nowhere here

html_theme = "furo"
html_title = f"cupfem {version}"
