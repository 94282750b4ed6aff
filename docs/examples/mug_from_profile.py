"""A mug from a profile: its inside as measured, two columns of height and diameter.

The bent wall comes from a table, such as one taken from a drawing or a calliper. All data are invented.
"""

import argparse
import csv
import tempfile
from pathlib import Path

import cupfem
from cupfem.drawing import survey

MEASURED = [(0, 58), (10, 66), (25, 73), (45, 77), (70, 79), (88, 82)]  # mm: height, inside diameter
CUP = """
title = "Galley mug from its profile"
[cup]
height = "88 mm"
inner_profile = "mug.csv"
inner_curve = "spline"
[[layer]]
name = "body"
material = "stoneware"
thickness = "4 mm"
[base]
material = "stoneware"
thickness = "5 mm"
recess = "2.5 mm"
"""


def mug(folder: Path) -> cupfem.Cup:
    """Write profile and cup file into a folder, and load them."""
    with (folder / "mug.csv").open("w", encoding="utf-8", newline="") as file:
        csv.writer(file).writerows([("height_mm", "diameter_mm"), *MEASURED])
    (folder / "mug.toml").write_text(CUP, encoding="utf-8")
    return cupfem.load_cup(folder / "mug.toml")


def main(fineness: float = 1.0) -> cupfem.Run:
    """Capacity, mass, and how the mug takes its first heat from the drink."""
    with tempfile.TemporaryDirectory() as folder:
        cup = mug(Path(folder))
    drawing = survey(cup, fineness)
    print(f"{1e6 * drawing.brimful_capacity:.0f} ml to the brim, {1e3 * drawing.mass:.0f} g")
    serving = cupfem.Serving(duration="8 min", drink=cupfem.Drink(temperature="90 degC"))
    run = cupfem.pour(cup, serving, fineness=fineness, companion=False, hold=True)
    print(run.summary())
    return run


if __name__ == "__main__":
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("--fineness", type=float, default=1.0)
    main(parser.parse_args().fineness)
