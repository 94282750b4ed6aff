"""Write estimates_library.md: every shipped cup by every rung, errors in time to 40 degC and in hold time.

Run it with ``python docs/tables/estimates_library.py``; it takes a minute or two.
"""

from __future__ import annotations

import math
from pathlib import Path

import cupfem
from cupfem.breakdown import RUNGS, Slab

HERE = Path(__file__).parent
GEOMETRIES = HERE.parents[1] / "geometries"
OTHER_KINDS = ("serving", "sleeve", "plan", "section", "profile")
"""First words of the file names that are no cups."""
HEAD = """# Every cup by every rung

Written by `docs/tables/estimates_library.py`, version {version}: each shipped cup with the default serving
(water at 85 degC to 10 mm below the brim, a room of 22 degC, 10 minutes), at the station nearest to mid-wall
that is one-dimensional (where none is: nearest to mid-wall, marked \\*). Errors are estimate minus field;
"none" where one of the two never gets there, "=" where neither does. The rungs are those of
{{doc}}`../theory/estimates`.

An estimate for comparing designs, not a safety certificate: test real cups; local codes and qualified people
decide; spilled drink scalds whatever the wall does.
"""


def cups() -> list[Path]:
    """The shipped cup files."""
    files = sorted(GEOMETRIES.glob("*.toml"))
    return [path for path in files if path.stem.split("_")[0] not in OTHER_KINDS]


def compared() -> dict[str, Slab]:
    """The comparison of every cup, by its file name."""
    found = {}
    for path in cups():
        run = cupfem.pour(cupfem.load_cup(path), companion=False, hold=False)
        found[path.stem] = cupfem.slab(run)
    return found


def table(slabs: dict[str, Slab], title: str, field: str, error: str) -> list[str]:
    """One table: the field's time [s] and the error of each rung."""
    heads = f"| cup | station | field | {' | '.join(RUNGS)} |"
    lines = [f"## {title} [s]", "", heads, "|---" * (3 + len(RUNGS)) + "|"]
    for name, slab in slabs.items():
        place = slab.reference
        mark = "" if place in slab.plain else r" \*"
        known = slab.field_comfort(place) if field == "comfort" else float(slab.holds["field"].thin[place])
        cells = [_error(known, getattr(each, field), getattr(each, error)) for each in slab.errors[place]]
        station = f"{1e3 * float(slab.heights[place]):.3g} mm{mark}"
        lines.append(f"| {name} | {station} | {_time(known)} | {' | '.join(cells)} |")
    return [*lines, ""]


def worst(slabs: dict[str, Slab]) -> list[str]:
    """What is one-dimensional, and where it breaks down most."""
    lines = [
        "## 2-D minus 1-D",
        "",
        "Shares of wall and time within 1, 2 and 5 K, of rung d behind the field's own drink; largest error",
        "of rung d, with its own drink, at the station; the rung that is good (within 2 K) for longest.",
        "",
        "| cup | 1 K | 2 K | 5 K | rung d [K] | L2/alpha [s] | Bi outside | good | since [s] | to [s] |",
        "|---" * 10 + "|",
    ]
    for name, slab in slabs.items():
        place, found = slab.reference, slab.verdict()
        shares = " | ".join(f"{100 * slab.map.within(bound):.0f} %" for bound in (1.0, 2.0, 5.0))
        rung = "none" if found is None else found[0]
        since, until = ("", "") if found is None else (f"{time:.3g}" for time in found[1:])
        rungs = slab.rungs[place]
        numbers = f"{slab.error('d', place).worst:.2g} | {rungs.wall.time_scale:.3g} | {rungs.outer_biot:.2g}"
        lines.append(f"| {name} | {shares} | {numbers} | {rung} | {since} | {until} |")
    return [*lines, ""]


def _time(value: float) -> str:
    return f"{value:.3g}" if math.isfinite(value) else "none"


def _error(known: float, value: float, error: float) -> str:
    if math.isinf(known) and math.isinf(value):
        return "="
    return f"{error:+.2g}" if math.isfinite(error) else "none"


def write(slabs: dict[str, Slab]) -> None:
    """The page."""
    lines = [HEAD.format(version=cupfem.__version__)]
    lines += table(slabs, "Time to 40 degC outside", "comfort", "comfort_error")
    lines += table(slabs, "Hold time, thin skin, picked up at 60 s", "hold", "hold_error")
    lines += worst(slabs)
    lines += [(HERE / "estimates_worst.txt").read_text(encoding="utf-8")]
    (HERE / "estimates_library.md").write_text("\n".join(lines), encoding="utf-8")


if __name__ == "__main__":
    write(compared())
