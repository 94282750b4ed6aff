"""Does the sleeve cover the band that is too hot to hold, with the lid on?

With a lid the wall above the drink is warm too: the vapour under the lid condenses on it. A sleeve that
covers the wall beside the drink may end below that. All data are invented.
"""

import argparse

import cupfem

CUP = """
title = "{title}"
[cup]
height = "95 mm"
inner_top_diameter = "78 mm"
inner_foot_diameter = "55 mm"
[[layer]]
name = "board"
material = "cupstock board"
thickness = "0.33 mm"
{sleeve}
[base]
material = "cupstock board"
thickness = "0.35 mm"
recess = "8 mm"
"""
SLEEVE = """
[[layer]]
name = "sleeve"
material = "corrugated board"
thickness = "1.5 mm"
from = "28 mm"
to = "76 mm"
"""
SERVING = 'title = "{title}"\nduration = "5 min"\n[drink]\ntemperature = "85 degC"\nlevel = "72 mm"\n{lid}'
HEIGHTS = ["22 mm", "40 mm", "52 mm", "64 mm", "84 mm"]
ASKED = 20.0
"""How long a guest carries the cup [s]."""


def held(sleeve: bool, lid: bool, fineness: float) -> dict[float, float]:
    """Height [mm] -> hold time in thin skin [s], picked up a minute after the pour."""
    cup = CUP.format(title="sleeved" if sleeve else "bare", sleeve=SLEEVE if sleeve else "")
    serving = SERVING.format(
        title="lid on" if lid else "open", lid='[lid]\nsip_hole = "1.2 cm^2"\n' if lid else ""
    )
    run = cupfem.pour(
        cupfem.Cup.from_text(cup),
        cupfem.Serving.from_text(serving),
        fineness=fineness,
        companion=False,
        hold=False,
    )
    found = cupfem.hold(run, heights=HEIGHTS, pick_ups=["60 s"], longest="90 s", sections=2)
    times = [min(time, most) for time, most in zip(found.times.thin[0], found.times.at_least[0], strict=True)]
    return {1e3 * float(height): float(time) for height, time in zip(found.heights, times, strict=True)}


def main(fineness: float = 1.0) -> dict[tuple[bool, bool], dict[float, float]]:
    """All four cases, and where the cup cannot be held long enough."""
    told = {(sleeve, lid): held(sleeve, lid, fineness) for sleeve in (False, True) for lid in (False, True)}
    for (sleeve, lid), times in told.items():
        bad = ", ".join(f"{height:g}" for height, time in times.items() if time < ASKED) or "nowhere"
        row = ", ".join(f"{height:g} mm {time:.3g} s" for height, time in times.items())
        print(f"{'sleeve' if sleeve else 'bare':<7}{'lid' if lid else 'open':<5} {row}")
        print(f"{'':12} not for {ASKED:g} s at: {bad}")
    return told


if __name__ == "__main__":
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("--fineness", type=float, default=1.0)
    main(parser.parse_args().fineness)
