"""Would the hand estimate have been enough? The ladder of one-dimensional estimates beside the field.

For a plain wall a hand estimate goes far; for a wall with a gap that ends, it does not see the ends.
"""

import argparse

import cupfem
from cupfem.breakdown import Slab, slab

CUPS = ("geometries/single_board.toml", "geometries/double_wall.toml")


def main(fineness: float = 1.0) -> dict[str, Slab]:
    """The sentence for each cup, and the share of wall and time where an estimate is within 2 K."""
    told = {}
    for path in CUPS:
        serving = cupfem.Serving(duration="6 min", drink=cupfem.Drink(temperature="85 degC"))
        run = cupfem.pour(cupfem.load_cup(path), serving, fineness=fineness, companion=False, hold=False)
        found = slab(run)
        print(found.sentence())
        print(f"  within 2 K over {100 * found.map.within(2.0):.0f} % of wall and time")
        told[run.cup.title] = found
    return told


if __name__ == "__main__":
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("--fineness", type=float, default=1.0)
    main(parser.parse_args().fineness)
