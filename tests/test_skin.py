"""Skin: the damage integral against published and recomputed times, properties, thresholds, messages."""

import numpy as np
import pytest

from cupfem.errors import InputError
from cupfem.skin import (
    SKINS,
    THRESHOLDS,
    damage,
    damage_rate,
    get_skin,
    surface_threshold,
    time_to_damage,
)

# Time [s] to Omega = 1 at constant temperature [C] for P = 3.1e98 1/s and E/R = 75000 K, recomputed from the
# formula of Henriques 1947.
RECOMPUTED = {44: 16259, 45: 7732, 47: 1773, 48: 855, 49: 414, 51: 98.46, 55: 5.867, 60: 0.190}
# The table of Moritz and Henriques 1947 as others print it, second degree in water [s]; original not seen.
PUBLISHED = {45: 7200, 47: 1200, 48: 900, 49: 480, 51: 120}


@pytest.mark.parametrize(("temperature", "seconds"), RECOMPUTED.items())
def test_damage_times(temperature, seconds):
    assert time_to_damage(temperature) == pytest.approx(seconds, rel=0.01)


@pytest.mark.parametrize(("temperature", "seconds"), PUBLISHED.items())
def test_damage_times_against_the_published_table(temperature, seconds):
    """The table is rounded and of the surface: within 50 % (47 degC the farthest)."""
    assert time_to_damage(temperature) == pytest.approx(seconds, rel=0.5)


def test_the_si_activation_energy_would_miss_the_published_table(monkeypatch):
    """Planted fault: 6.28e5 J/mol over 8.314 J/(mol K) is five times too slow."""
    monkeypatch.setattr("cupfem.skin.ACTIVATION", 6.28e5 / 8.314)
    slower = time_to_damage(47) / RECOMPUTED[47]
    assert 4.8 < slower < 5.8


def test_damage_of_a_history():
    """A rate that grows exponentially is integrated exactly: closed form of its own."""
    time = np.linspace(0.0, 30.0, 13)
    rate = 1e-3 * np.exp(0.1 * time)
    temperature = 75000.0 / np.log(3.1e98 / rate) - 273.15
    exact = 1e-2 * (np.exp(0.1 * time) - 1.0)
    np.testing.assert_allclose(damage(time, temperature), exact, rtol=1e-9, atol=1e-12)


def test_damage_of_many_histories():
    time = np.array([0.0, 10.0, 20.0])
    histories = np.array([[40.0, 50.0], [43.9, 50.0], [43.0, 50.0]])
    omega = damage(time, histories)
    assert omega.shape == (3, 2)
    assert np.all(omega[:, 0] == 0.0)
    assert omega[-1, 1] == pytest.approx(20.0 / time_to_damage(50.0))


def test_no_damage_below_44():
    assert damage_rate(43.99) == 0.0
    assert damage_rate(44.01) > 0.0


def test_skins_name_their_sources():
    for skin in SKINS.values():
        assert skin.source
        assert all(layer.source for layer in skin.layers)
        assert skin.thickness == pytest.approx(sum(layer.thickness for layer in skin.layers))


def test_whole_skin_lies_in_the_published_range():
    """Thermal inertia k rho c of skin, in vitro 9.6e5 to 13.1e5 W2 s/(m4 K2): Ye and De, Burns 43 (2017)."""
    for layer in SKINS["thin"].layers[:2]:
        assert 8.6e5 < layer.conductivity * layer.heat_capacity < 13.2e5


def test_unknown_skin():
    with pytest.raises(InputError, match=r'skin: "fingerpad": no such skin\. Did you mean "finger pad"'):
        get_skin("fingerpad")


def test_thresholds_fall_with_time_and_follow_conduction():
    """ISO 13732-1:2006 (from memory): 60 s metal 51, glass 56, plastic and wood 60; 8 h all 43."""
    for values in THRESHOLDS.values():
        assert np.all(np.diff(values) < 0)
    assert [float(surface_threshold(name, 60.0)) for name in THRESHOLDS] == [51.0, 56.0, 60.0, 60.0]
    assert all(float(surface_threshold(name, 28800.0)) == 43.0 for name in THRESHOLDS)
    assert surface_threshold("metal", [0.2, np.sqrt(10.0)]) == pytest.approx([65.0, 60.0])
