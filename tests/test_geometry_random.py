"""Random cups: valid meshes from every valid file, one clear line for every broken one.

The whole count is run by hand: `python tests/hard_use/random_cups.py --count 2000`.
"""

import numpy as np
import pytest
from drawn_cups import broken, valid

from cupfem.cup import Cup
from cupfem.errors import InputError
from cupfem.inputs import toml
from cupfem.meridian import build as build_meridian
from cupfem.mesh import build

SEEDS = range(40)


def corner_products(mesh):
    """At each corner of each cell, the product of its sides and the sine of its angle [m2]."""
    corner = mesh.grid.p[:, mesh.grid.t]
    before, after = np.roll(corner, 1, axis=1) - corner, np.roll(corner, -1, axis=1) - corner
    return after[0] * before[1] - after[1] * before[0]


def cells_at(mesh, points):
    """How many cells hold each of some points."""
    corner = mesh.grid.p[:, mesh.grid.t]
    side = np.roll(corner, -1, axis=1) - corner
    away = points[:, None, None, :] - corner[..., None]
    left = side[0][..., None] * away[1] - side[1][..., None] * away[0]
    return np.all(left > 0, axis=0).sum(axis=0)


def check_mesh(cup, mesh, random):
    """Positive Jacobians, conforming, no overlaps, all names present, band bound kept."""
    assert corner_products(mesh).min() > 0
    assert np.array_equal(np.unique(mesh.element_dofs), np.arange(mesh.size))
    assert mesh.half_bandwidth <= 3 * mesh.nodes_across
    assert {layer.name for layer in cup.layer} <= set(mesh.regions)
    assert all(mesh.edges[name].shape[1] for name in ("inside", "outside", "heel", "brim"))
    assert ("base" in mesh.regions) == (cup.base_disc is not None)
    cells = np.concatenate(list(mesh.regions.values()))
    assert np.array_equal(np.sort(cells), np.arange(mesh.grid.t.shape[1]))
    check_conforming(cup, mesh)
    chosen = random.integers(mesh.grid.t.shape[1], size=60)
    middles = mesh.grid.p[:, mesh.grid.t[:, chosen]].mean(axis=1)
    assert np.all(cells_at(mesh, middles) == 1)


def check_conforming(cup, mesh):
    """Each side of a cell is a side of another, or lies on a named edge, a contact, the axis or a slit."""
    named = [mesh.edges[name] for name in mesh.edges if "." not in name]
    named += [face for contact in mesh.contacts for face in (contact.inner, contact.outer)]
    facets = {tuple(sorted(pair)) for face in named for pair in face[:2].T}
    sides = np.concatenate([mesh.element_dofs[[n, (n + 1) % 4]] for n in range(4)], axis=1)
    pairs, counts = np.unique(np.sort(sides, axis=0), axis=1, return_counts=True)
    assert counts.max() == 2
    once = {tuple(pair) for pair in pairs[:, counts == 1].T}
    assert facets <= once
    off_axis = [pair for pair in once - facets if np.any(mesh.points[0, list(pair)] > 1e-12)]
    rings = sum(len(cup.spans(layer)) for layer in cup.layer)
    assert len(off_axis) <= 24 * rings  # slits at the tips of layers that taper to nothing


@pytest.mark.parametrize("seed", SEEDS)
def test_a_random_cup_is_meshed(seed):
    cup = Cup.from_text(toml.write(valid(seed).data))
    for fineness in (1.0, 2.0):
        check_mesh(cup, build(build_meridian(cup), fineness), np.random.default_rng(seed))


@pytest.mark.parametrize("seed", range(70))
def test_a_broken_cup_is_refused_in_one_line(seed):
    fault, data = broken(seed)
    with pytest.raises(InputError) as caught:
        Cup.from_text(toml.write(data))
    message = str(caught.value)
    assert "\n" not in message
    assert len(message) < 400, fault
