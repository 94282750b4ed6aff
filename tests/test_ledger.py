"""The ledger closes on sound code, and does not with a lost sip or an edge that the operator forgets.

Closing is bookkeeping, not accuracy: faults that conserve energy are planted in
`verification/test_faults.py`.
"""

from pathlib import Path

import pytest
from verification.faults import changed_sip, drinking_without_loss, edge_without_load
from verification.tube import steps, tube

import cupfem
from cupfem.edges import TO_DRINK
from cupfem.march import add_terms

GEOMETRIES = Path(__file__).parents[1] / "geometries"
CLOSED, BROKEN = 1e-6, 1e-3

SIPS = """
duration = "60 s"

[drink]
kind = "water"
temperature = "85 degC"

[room]
temperature = "21 degC"

[[event]]
sip = "20 ml"
first = "20 s"
every = "20 s"
count = 2
"""


def tube_residual() -> float:
    """Heat of the tube job that no term accounts for, over the heat that the drink lost."""
    job, start = tube()
    energies: dict[str, float] = {}
    taken = steps(job, start)
    for step in taken:
        add_terms(energies, step.energies)
    before, after = job.stored(start), job.stored(taken[-1].after)
    out = sum(energy for name, energy in energies.items() if name != TO_DRINK)
    change = sum(after.values()) - sum(before.values())
    return abs(change + out) / (before["drink"] - after["drink"])


def cup_residual() -> float:
    """The same for a poured cup with two single sips."""
    cup = cupfem.load_cup(GEOMETRIES / "double_wall.toml")
    run = cupfem.pour(cup, cupfem.Serving.from_text(SIPS), fineness=0.5, companion=False)
    return abs(run.ledger.relative_residual)


def test_tube_closes():
    residual = tube_residual()
    print(f"\ntube: residual {residual:.1e} of the heat lost", end="")
    assert residual < CLOSED


def test_cup_closes():
    residual = cup_residual()
    print(f"\ncup with sips: residual {residual:.1e} of the heat lost", end="")
    assert residual < CLOSED


def test_drinking_that_does_not_empty_the_cup():
    with drinking_without_loss():
        assert tube_residual() > BROKEN


@pytest.mark.parametrize("film", ["dry wall", "outside", "surface"])
def test_edge_without_load(film):
    """Only edges of the wall are loads of the operator: the surface is none, and closes."""
    with edge_without_load(film):
        residual = tube_residual()
    assert residual > BROKEN if film != "surface" else residual < CLOSED


def test_sip_that_leaves_the_cup_full():
    with changed_sip(lambda before, after, heat: (before, heat)):
        assert cup_residual() > BROKEN


def test_sip_that_is_not_counted():
    with changed_sip(lambda before, after, heat: (after, 0.0)):
        assert cup_residual() > BROKEN
