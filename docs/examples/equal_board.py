"""Which wall, at equal board mass? One thick ply, or two thinner ones with a gap between.

The galley pays for board by its mass. Both walls of this cup have the same: the single ply is made as
thick as the mass of the two. All data are invented.
"""

import argparse

import cupfem
from cupfem.drawing import survey

CUP = """
title = "{title}"
[cup]
height = "95 mm"
inner_top_diameter = "78 mm"
inner_foot_diameter = "55 mm"
{layers}
[base]
material = "cupstock board"
thickness = "0.35 mm"
recess = "8 mm"
"""
PLY = '[[layer]]\nname = "{name}"\nmaterial = "cupstock board"\nthickness = "{thickness:.4f} mm"\n'
GAP = (
    '[[layer]]\nname = "gap"\nmaterial = "air"\nthickness = "0.8 mm"\n'
    'from = "14 mm"\nto = "88 mm"\ncontact_fraction = 0.02\n'
)
DOUBLE = CUP.format(
    title="Two plies and a gap",
    layers=PLY.format(name="inner", thickness=0.28) + GAP + PLY.format(name="outer", thickness=0.26),
)
SERVING = cupfem.Serving(
    title="Tea on the mess table",
    duration="6 min",
    drink=cupfem.Drink(temperature="85 degC"),
    target=cupfem.Target(hold_time="20 s", between=["40 mm", "70 mm"]),
)


def single(thickness: float) -> cupfem.Cup:
    """The cup of one ply [mm]."""
    return cupfem.Cup.from_text(
        CUP.format(title="One ply", layers=PLY.format(name="ply", thickness=thickness))
    )


def equal_single(mass: float) -> cupfem.Cup:
    """The cup of one ply with a given mass [kg]: the mass is linear in the thickness but for the bend."""
    low, high = 0.3, 0.9
    for _ in range(30):
        middle = 0.5 * (low + high)
        low, high = (middle, high) if survey(single(middle), 0.5).mass < mass else (low, middle)
    return single(high)


def main(fineness: float = 1.0) -> dict[str, dict[str, float | None]]:
    """Pour both and print them side by side."""
    double = cupfem.Cup.from_text(DOUBLE)
    mass = survey(double, 0.5).mass
    told = {}
    for cup in (equal_single(mass), double):
        run = cupfem.pour(cup, SERVING, fineness=fineness, companion=False)
        told[cup.title] = run.figures() | {"mass_g": 1e3 * survey(cup, 0.5).mass}
    for title, figures in told.items():
        held = figures["hold_time_s"] or figures["hold_time_at_least_s"]
        print(
            f"{title:<20} {figures['mass_g']:.2f} g, hottest free wall {figures['outer_max_degC']:.1f} degC, "
            f"held {held:.3g} s, drink at the end {figures['drink_end_degC']:.1f} degC"
        )
    return told


if __name__ == "__main__":
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("--fineness", type=float, default=1.0)
    main(parser.parse_args().fineness)
