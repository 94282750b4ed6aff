"""A slice of the random cup and serving files; the whole search is tests/hard_use/fuzz_files.py."""

import dataclasses

from hard_use import fuzz_files
from shipped import GEOMETRIES

import cupfem

SEED, COUNT = 7, 8


def test_random_files_are_refused_in_one_line_or_make_sense():
    """No traceback, no hang, nothing that cannot be; some are refused and some run."""
    texts = [fuzz_files.files(SEED, number) for number in range(COUNT)]
    found = [fuzz_files.outcome(*each) for each in texts]
    faults = [f"{kind}: {more}" for kind, more in found if kind not in ("ran", "refused")]
    assert not faults, "\n".join(faults)
    assert {kind for kind, _ in found} == {"ran", "refused"}


def test_a_case_is_the_same_each_time():
    assert fuzz_files.files(SEED, 3) == fuzz_files.files(SEED, 3)
    assert fuzz_files.files(SEED, 3) != fuzz_files.files(SEED, 4)


def test_nonsense_is_noticed():
    """A field below the wet bulb, and a ledger that is open."""
    run = cupfem.pour(
        cupfem.load_cup(GEOMETRIES / "single_board.toml"),
        cupfem.Serving(duration="5 s"),
        fineness=0.25,
        tolerance=0.05,
        companion=False,
    )
    assert not fuzz_files.nonsense(run)
    cold = dataclasses.replace(run, snapshots=run.snapshots - 40.0)
    assert "field" in fuzz_files.nonsense(cold)[0]
    lost = dataclasses.replace(run.ledger, drink=run.ledger.drink + 50.0)
    assert "ledger" in fuzz_files.nonsense(dataclasses.replace(run, ledger=lost))[0]
