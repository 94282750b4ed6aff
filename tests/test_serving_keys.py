"""Each key of a serving changes the answer: nothing is accepted and ignored."""

from pathlib import Path

import pytest

import cupfem
from cupfem.serving import Serving

ROOT = Path(__file__).parents[1]
OPEN = 'duration = "60 s"\n'
LIDDED = OPEN + "[lid]\n"
STIR = '[[event]]\nstir = "20 s"\nat = "10 s"\n'
ENOUGH = 1e-4  # K; a hundred times what the iteration leaves

KEYS = [
    (OPEN, '[room]\naltitude = "3 km"'),
    (OPEN, "[room]\nhumidity = 0.9"),
    (OPEN, '[room]\nair_speed = "2 m/s"'),
    (OPEN, '[room]\ntemperature = [["0 s", "22 degC"], ["30 s", "4 degC"]]'),
    (OPEN, '[start]\ntemperature = "60 degC"'),
    (OPEN, '[start]\nstand = "air"'),
    (OPEN, '[drink]\nkind = "milk drink"'),
    (OPEN, '[drink]\nkind = "thick soup"'),
    (OPEN, '[drink]\npour = "5 s"'),
    (OPEN, '[drink]\nstirred = "20 s"'),
    (OPEN, "[drink]\nfoam_factor = 0.2"),
    (OPEN, '[films]\nsurface = { correlation = "Shah", freeboard_factor = 0.65 }'),
    (OPEN, '[films]\nsurface = { correlation = "Bower-Saylor" }'),
    (OPEN, '[films]\noutside = { correlation = "local natural convection and radiation" }'),
    (OPEN, '[films]\nheel = { correlation = "contact with the table" }'),
    (OPEN, '[table]\nresistance = "0.5 m^2 K/W"'),
    (OPEN, '[table]\nmaterial = "wood"'),
    (OPEN, '[carrier]\nheight = "40 mm"'),
    (OPEN, "[lid]"),
    (LIDDED, 'sip_hole = "1.2 cm^2"'),
    (LIDDED, 'vent = "10 mm^2"'),
    (LIDDED, 'conductance = "2 W/(m^2 K)"'),
    (LIDDED, 'material = "cork"'),
    (LIDDED, 'thickness = "4 mm"'),
    (LIDDED, '[[event]]\nlid = "off"\nat = "30 s"'),
    (OPEN, STIR),
    (OPEN, '[[event]]\nsip = "20 ml"\nfirst = "30 s"'),
    (OPEN, '[[event]]\ndrinking = "50 ml"'),
    (
        OPEN + '[drink]\nlevel = "60 mm"\n',
        '[[event]]\nrefill = "50 ml"\nat = "30 s"\ntemperature = "60 degC"',
    ),
    (OPEN, '[[event]]\nstand = "air"\nat = "30 s"'),
]


@pytest.fixture(scope="module")
def cup():
    return cupfem.load_cup(ROOT / "geometries" / "double_wall.toml")


@pytest.fixture(scope="module")
def poured(cup):
    """Drink and wall temperatures of a serving, each computed once."""
    known = {}

    def run(text):
        if text not in known:
            done = cupfem.pour(cup, Serving.from_text(text), fineness=0.5, tolerance=0.02, companion=False)
            known[text] = (done.series.drink_temperature[-1], done.snapshots[-1])
        return known[text]

    return run


@pytest.mark.parametrize(
    ("base", "key"), KEYS, ids=[key.splitlines()[0] + key.splitlines()[-1] for _, key in KEYS]
)
def test_key_changes_the_answer(poured, base, key):
    (drink, wall), (other_drink, other_wall) = poured(base), poured(base + key + "\n")
    assert max(abs(drink - other_drink), abs(wall - other_wall).max()) > ENOUGH


def test_the_coefficient_of_stirring_counts(poured):
    usual, higher = (
        poured(OPEN + STIR),
        poured(OPEN + '[drink]\nstirred_coefficient = "3000 W/(m^2 K)"\n' + STIR),
    )
    assert abs(usual[1] - higher[1]).max() > ENOUGH
