"""The shipped files, by kind: a file's first word tells what it is; a cup has none."""

from pathlib import Path

GEOMETRIES = Path(__file__).parents[1] / "geometries"
KINDS = ("serving", "sleeve", "plan", "section", "profile")

CUPS = sorted(path for path in GEOMETRIES.glob("*.toml") if path.stem.split("_")[0] not in KINDS)
SERVINGS = sorted(GEOMETRIES.glob("serving_*.toml"))
SLEEVES = sorted(GEOMETRIES.glob("sleeve_*.toml"))
PLANS = sorted(GEOMETRIES.glob("plan_*.toml"))
