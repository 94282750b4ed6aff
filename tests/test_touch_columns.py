"""Columns of wall and skin against exact solutions: touched half-spaces, bioheat, damage, rest."""

from itertools import pairwise

import numpy as np
import pytest
from oracles import bioheat
from oracles.semi_infinite import contact_temperature, effusivity, touched_surface

from cupfem.skin import BLOOD_RATE, PAIN, SKINS, THIN_DEPTH, Skin, Tissue, damage
from cupfem.touch.columns import Columns, cells, join, step_times
from cupfem.touch.finger import FLAT, SkinColumn, resting_profile

CLOSE = 0.02  # K; a tenth of what a thermocouple on skin tells
PERFECT = 1e7  # W/(m2 K); stands for perfect contact
# Conductivity, density, specific heat of touched bodies; contact temperature [C] of skin at 33 C and body at
# 60 C, recomputed from Carslaw and Jaeger, 2nd ed. 1959, sec. 2.14 (also W.R. Van Sant, UCRL-52863, 6.1.9).
BODIES = {
    "porcelain": ((1.5, 2400, 1080), 49.7009),
    "glass": ((1.05, 2500, 840), 47.8443),
    "polypropylene": ((0.22, 905, 1900), 42.0695),
    "polystyrene": ((0.14, 1050, 1300), 40.1398),
    "board": ((0.12, 700, 1340), 38.8386),
    "expanded polystyrene": ((0.035, 30, 1300), 33.7962),
    "stainless steel": ((14.9, 7900, 477), 56.2303),
}
SKIN = (0.37, 1060, 3770)
# Surface of the skin on porcelain through a contact conductance; same source, recomputed.
TOUCHED = {
    500: {0.1: 36.32575, 1: 40.68135, 5: 44.29290, 10: 45.61076, 60: 47.90372},
    1000: {0.1: 38.69711, 1: 43.82441, 5: 46.68662, 10: 47.51841, 60: 48.79019},
}


def even_skin(thickness=60e-3, perfusion=0.0, properties=SKIN):
    """One tissue, thick enough to count as a half-space within a minute."""
    tissue = Tissue("tissue", thickness, *properties, perfusion, "test")
    return Skin("even", (tissue,), core=33.0, below=1e-9)


def touching(body, conductance):
    """Body at 60 C and skin at 33 C: times, surface of skin."""
    k, density, heat = body
    diffusivity = k / (density * heat)
    depth = 12 * np.sqrt(diffusivity * 60)
    nodes = depth * (1 - np.concatenate([[0], np.geomspace(2e-6 / depth, 1, 120)])[::-1])
    radius = np.full(1, FLAT)
    shape = (1, len(nodes) - 1)
    wall = cells(nodes[None], np.full(shape, k), np.full(shape, density * heat), radius)
    skin = SkinColumn.of(even_skin(), radius)
    capacity, link = join([wall, (skin.capacity, skin.link)], [np.full(1, conductance * FLAT)])
    columns = Columns(capacity, link, np.zeros_like(capacity), 0.0)
    field = np.where(np.arange(capacity.shape[1]) < len(nodes), 60.0, 33.0)[None]
    return march(columns, field, 60.0, len(nodes))


def march(columns, field, end, kept, first=0.0, surroundings=0.0):
    times = step_times(end)
    film = (np.full(1, first), np.full(1, surroundings), np.full(1, surroundings))
    none = (np.zeros(1), np.zeros(1), np.zeros(1))
    out = [field[0, kept]]
    for before, after in pairwise(times):
        field = columns.advance(field, after - before, film, none)
        out.append(field[0, kept])
    return times, np.array(out)


@pytest.mark.parametrize(("body", "expected"), BODIES.values(), ids=BODIES)
def test_perfect_contact_of_half_spaces(body, expected):
    times, surface = touching(body, PERFECT)
    assert contact_temperature((effusivity(*SKIN), 33), (effusivity(*body), 60)) == pytest.approx(
        expected, abs=1e-3
    )
    early = (times > 0.05) & (times < 60)
    assert np.max(np.abs(surface[early] - expected)) < CLOSE


@pytest.mark.parametrize("conductance", TOUCHED)
def test_contact_conductance_between_half_spaces(conductance):
    body = BODIES["porcelain"][0]
    times, surface = touching(body, conductance)
    exact = touched_surface(times, (effusivity(*SKIN), 33), (effusivity(*body), 60), conductance)
    assert np.max(np.abs(surface - exact)[times > 0.01]) < CLOSE
    for time, expected in TOUCHED[conductance].items():
        assert np.interp(time, times, surface) == pytest.approx(expected, abs=CLOSE)


def test_a_lost_contact_resistance_would_be_seen():
    """Planted fault: perfect contact instead of 1000 W/(m2 K) misses by kelvins."""
    _, surface = touching(BODIES["porcelain"][0], PERFECT)
    assert surface[-1] - TOUCHED[1000][60] > 0.5


# -- bioheat -------------------------------------------------------------------------------------------------


def one(value):
    return np.full(1, value)


def test_perfused_slab():
    """L = 0.02 m, k = 0.5, surface 45, core 37: m = 63.2155 1/m, 43.87405994, 42.38630731, 40.31522866 C at
    2, 5 and 10 mm, 296.700040 W/m2; recomputed from Incropera et al., 6th ed. 2007, sec. 3.7.1."""
    tissue = Tissue("tissue", 0.02, 0.5, 1000, 4000, BLOOD_RATE, "test")
    column = SkinColumn.of(Skin("slab", (tissue,), core=37.0, below=1e9), one(FLAT))
    hold = 1e9 * FLAT
    field = column.alone().steady((one(hold), one(45.0)), (one(hold), one(37.0)))[0]
    exact, flux = bioheat.slab([2e-3, 5e-3, 10e-3], 0.02, 0.5, BLOOD_RATE, 45, 37)
    np.testing.assert_allclose(exact, [43.87405994, 42.38630731, 40.31522866], atol=1e-8)
    assert flux == pytest.approx(296.700040, abs=1e-6)
    assert np.interp([2e-3, 5e-3, 10e-3], column.nodes, field) == pytest.approx(exact, abs=CLOSE)


@pytest.mark.parametrize(
    ("coefficient", "inner", "loss"), [(7.9, 34.774149, 141.991106), (205.9, 28.245343, 514.354097)]
)
def test_body_in_air_and_water(coefficient, inner, loss):
    """Incropera et al., 6th ed. 2007, Ex. 3.12, p. 163: printed 34.8 C and 142 W in air, 28.2 C and 514 W in
    water, for 1.8 m2; recomputed figures above (radiation of 5.9 W/(m2 K) in both). Metabolic heat enters as
    a core warmer by 700/1800 K."""
    exact = bioheat.skin_on_tissue((0.03, 0.5), (0.003, 0.3), 1800, 700, 37, (coefficient, 24))
    assert exact[0] == pytest.approx(inner, abs=1e-5)
    assert 1.8 * exact[1] == pytest.approx(loss, abs=1e-4)
    layers = (
        Tissue("skin and fat", 0.003, 0.3, 1000, 3600, 0.0, "test"),
        Tissue("muscle", 0.03, 0.5, 1000, 3600, 1800.0, "test"),
    )
    body = Skin("body", layers, core=37 + 700 / 1800, below=1e9)
    column = SkinColumn.of(body, one(FLAT))
    below = (one(1e9 * FLAT), one(37.0))
    field = column.alone().steady((one(coefficient * FLAT), one(24.0)), below)[0]
    assert field[column.index(0.003)] == pytest.approx(exact[0], abs=CLOSE)
    assert 1.8 * coefficient * (field[0] - 24) == pytest.approx(1.8 * exact[1], rel=2e-3)


@pytest.mark.parametrize(
    ("depth", "time", "theta"),
    [(1e-3, 10, 0.52627534), (2e-3, 60, 0.59982110), (5e-3, 60, 0.19335771), (5e-3, 600, 0.63127809)],
)
def test_perfused_half_space(depth, time, theta):
    """Surface held: Carslaw and Jaeger, 2nd ed. 1959, sec. 4.2 (recomputed); 10 K of rise to `CLOSE`."""
    properties = (0.5, 1060, 3770)
    rate = 5e-4
    diffusivity = properties[0] / (properties[1] * properties[2])
    assert float(bioheat.half_space_theta(depth, time, diffusivity, rate)) == pytest.approx(theta, abs=1e-7)
    skin = even_skin(perfusion=rate * properties[1] * properties[2], properties=properties)
    column = SkinColumn.of(skin, one(FLAT))
    field = np.full((1, len(column.nodes)), 33.0)
    _, kept = march(column.alone(), field, time, slice(None), 1e9 * FLAT, 43.0)
    reached = np.interp(depth, column.nodes, kept[-1])
    assert reached == pytest.approx(33 + 10 * theta, abs=CLOSE)


def test_layers_in_series():
    """0.1/1.5/10 mm of 0.21/0.37/0.16 W/(m K) between 50 and 37 C: 0.06703024 m2 K/W, 193.942303 W/m2,
    49.907647 and 49.121394 C between the layers (series resistances, exact)."""
    layers = tuple(
        Tissue(f"layer {k}", thickness, k, 1000, 3000, 0.0, "test")
        for thickness, k in ((0.1e-3, 0.21), (1.5e-3, 0.37), (10e-3, 0.16))
    )
    column = SkinColumn.of(Skin("three", layers, core=37.0, below=1e9), one(FLAT))
    field = column.alone().steady((one(1e12 * FLAT), one(50.0)), (one(1e12 * FLAT), one(37.0)))[0]
    assert field[column.index(0.1e-3)] == pytest.approx(49.907647, abs=1e-5)
    assert field[column.index(1.6e-3)] == pytest.approx(49.121394, abs=1e-5)


# -- a hand --------------------------------------------------------------------------------------------------


def test_a_resting_hand():
    """A finger in a room of 22 C has 30 to 34 C at its surface, in the cold less: scenario 20 to 28 C at
    -10 to 5 C in wind (from memory, not re-checked)."""
    warm, cold = resting_profile(SKINS["finger pad"], np.array([22.0, 0.0]))[:, 0]
    assert 30 < warm < 34
    assert 20 < cold < 29


@pytest.mark.parametrize(("surface", "low", "high"), [(55.0, 5.0, 30.0), (60.0, 1.0, 5.0)])
@pytest.mark.parametrize("depth", [80e-6, 100e-6])
def test_time_to_damage_under_a_held_surface(surface, low, high, depth):
    """Second degree at a skin surface of 55 C in 17 s and of 60 C in 3 s (table after Moritz and Henriques,
    Am. J. Pathol. 23 (1947) 695, as printed by others; original not seen)."""
    column = SkinColumn.of(SKINS["thin"], one(FLAT))
    field = resting_profile(SKINS["thin"], one(22.0))
    times, kept = march(column.alone(), field, 40.0, slice(None), 1e9 * FLAT, surface)
    basal = np.array([np.interp(depth, column.nodes, row) for row in kept])
    omega = damage(times, basal)
    assert low < np.interp(1.0, omega, times) < high


def test_half_the_steps_change_nothing():
    """Time of 43 C at 0.1 mm with steps of half the length: within 0.2 %."""
    reached = []
    column = SkinColumn.of(SKINS["finger pad"], one(FLAT))
    for share in (0.06, 0.03):
        field = resting_profile(SKINS["finger pad"], one(22.0))
        times, film = step_times(60.0, first=1e-3 * share / 0.06, share=share), 600.0 * FLAT
        basal = []
        for before, after in pairwise(times):
            film_at = (one(film), one(70.0), one(70.0))
            field = column.alone().advance(
                field, after - before, film_at, (column.below, one(36.0), one(36.0))
            )
            basal.append(field[0, column.index(THIN_DEPTH)])
        reached.append(np.interp(PAIN, basal, times[1:]))
    assert reached[0] == pytest.approx(reached[1], rel=2e-3)
