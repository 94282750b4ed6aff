"""What a run says of itself."""

from pathlib import Path

import cupfem

GEOMETRIES = Path(__file__).parents[1] / "geometries"


def told(name: str) -> str:
    cup = cupfem.load_cup(GEOMETRIES / f"{name}.toml")
    serving = cupfem.Serving(duration="5 s")
    return cupfem.pour(cup, serving, fineness=0.5, companion=False).summary()


def test_only_board_is_said_to_hold_moisture():
    """The gas of a gap is no board: a steel mug with a gap has none."""
    assert "board moisture not modelled" in told("double_wall")
    assert "board moisture" not in told("vacuum_mug")
