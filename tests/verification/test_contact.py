"""Layers that touch through a contact conductance."""

import numpy as np
import pytest
from oracles import planar

from cupfem.conduction import FixedTemperature
from cupfem.meridian import LayerBand, Meridian, Profile
from cupfem.mesh import build
from verification.bodies import SOLID, nodes, solid, steady, system
from verification.compare import within

LINES = np.array([0.0, 0.25 / 0.495, 1.0])  # across the first slab, and mirrored across the second


def slabs(*layers):
    """Layers side by side in a strip .1 m high."""
    lines = {"first": LINES, "gap": np.array([0.0, 1.0]), "second": 1.0 - LINES[::-1]}
    profile = Profile(np.array([0.0, 0.1]), np.zeros(2))
    return build(Meridian(profile, layers), stations=profile.height, fractions=lines)


def slab(name, inner_conductance=np.inf):
    return LayerBand(name, SOLID, 0.495, 0.0, 0.1, inner_conductance=inner_conductance)


def closed_gap():
    """A layer that is nowhere there: what is outside closes on what is inside, through a contact."""
    gap = LayerBand("gap", SOLID, 1e-3, -1.0, -0.9, closing_conductance=80.0)
    return slabs(slab("first"), gap, slab("second"))


def loose_layer():
    """A layer that lies loosely on the one inside it."""
    return slabs(slab("first"), slab("second", inner_conductance=80.0))


@pytest.mark.parametrize("mesh_of", [closed_gap, loose_layer])
def test_contact_between_two_slabs(mesh_of):
    """Two slabs with a contact conductance of 80 W/(m2 K) between them; analytic (series resistances).

    k 40, .495 m of solid each, 100 and 300 C: 133.557047 C at .25 m, 266.442953 C as far from the other end.
    Allowed 1e-6 K: the profile is linear in each slab, which the elements hold exactly.
    """
    mesh = mesh_of()
    held = FixedTemperature("inside", 100.0), FixedTemperature("outside", 300.0)
    body = system(mesh, {"first": solid(40.0), "second": solid(40.0)}, *held, plane=True)
    found = steady(body)[nodes(mesh, [(0.25, 0.0), (0.74, 0.0)])]
    exact = planar.two_slabs_with_contact([0.25, 0.74], 40.0, 80.0, 0.990, (100.0, 300.0))
    within("contact between two slabs", found, exact, 1e-6)
