"""Each key that says what a cup looks like changes its mesh, its contacts or its gaps."""

import numpy as np
import pytest

from cupfem.cup import Cup
from cupfem.meridian import build as build_meridian
from cupfem.mesh import build
from cupfem.problem import properties

CUP = """
[cup]
height = "95 mm"
inner_profile = [["0 mm", "55 mm"], ["50 mm", "70 mm"], ["95 mm", "78 mm"]]
inner_curve = "straight"
[[layer]]
name = "wall"
material = "cupstock board"
grammage = "200 g/m^2"
[[layer]]
name = "gap"
material = "air"
thickness_along = [["14 mm", "1 mm"], ["88 mm", "2 mm"]]
from = "14 mm"
to = "88 mm"
blend = "4 mm"
contact = "300 W/(m^2 K)"
[[layer]]
name = "skin"
material = "cupstock board"
thickness = "0.3 mm"
[[layer]]
name = "ribs"
material = "silicone rubber"
fit = "300 W/(m^2 K)"
[layer.ridge]
height = "2 mm"
crest_width = "1 mm"
flank_angle = "10 deg"
crest = "flat"
first = "60 mm"
pitch = "6 mm"
count = 2
[[layer]]
name = "core"
material = "kraft liner"
from = "20 mm"
to = "45 mm"
[layer.strut]
height = "2 mm"
pitch = "8 mm"
thickness = "0.3 mm"
[[layer]]
name = "cover"
material = "kraft liner"
thickness = "0.2 mm"
from = "20 mm"
to = "45 mm"
fit = "200 W/(m^2 K)"
[base]
material = "cupstock board"
thickness = "0.35 mm"
recess = "8 mm"
"""
SLEEVED = """
[cup]
height = "95 mm"
top_outside_diameter = "80 mm"
foot_outside_diameter = "56 mm"
[[layer]]
name = "wall"
material = "cupstock board"
thickness = "0.35 mm"
[base]
material = "cupstock board"
thickness = "0.35 mm"
recess = "8 mm"
[sleeve]
height = "50 mm"
bottom = "25 mm"
fit = "200 W/(m^2 K)"
bottom_inside_diameter = "63 mm"
top_inside_diameter = "77 mm"
[[sleeve.layer]]
name = "felt"
material = "wool felt"
thickness = "2 mm"
"""


def signature(text):
    """All that a solver sees of a cup: points, cells by region, contacts, and properties at 50 degC."""
    cup = Cup.from_text(text)
    mesh = build(build_meridian(cup), 0.5)
    told = [mesh.points.ravel()]
    for _, elements in sorted(mesh.regions.items()):
        told.append(mesh.element_dofs[:, elements].ravel())
    for contact in mesh.contacts:
        told += [contact.inner.ravel(), np.broadcast_to(contact.conductance, contact.inner.shape[1])]
    at = np.full(2, 50.0)
    for _, given in sorted(properties(cup, mesh).items()):
        values = [getattr(given, name, 0.0) for name in ("through", "along", "heat_capacity")]
        told += [np.ravel(value(at) if callable(value) else value) for value in values]
    return np.concatenate(told)


CHANGES = [
    (CUP, '["50 mm", "70 mm"]', '["50 mm", "71 mm"]'),
    (CUP, '"straight"', '"spline"'),
    (CUP, '"200 g/m^2"', '"220 g/m^2"'),
    (CUP, '["88 mm", "2 mm"]', '["88 mm", "1.5 mm"]'),
    (CUP, 'from = "14 mm"', 'from = "16 mm"'),
    (CUP, 'to = "88 mm"', 'to = "86 mm"'),
    (CUP, 'blend = "4 mm"', 'blend = "3 mm"'),
    (CUP, 'contact = "300', 'contact = "200'),
    (CUP, 'fit = "300', 'fit = "250'),
    (CUP, '[layer.ridge]\nheight = "2 mm"', '[layer.ridge]\nheight = "1.8 mm"'),
    (CUP, 'crest_width = "1 mm"', 'crest_width = "1.2 mm"'),
    (CUP, '"10 deg"', '"15 deg"'),
    (CUP, '"flat"', '"rounded"'),
    (CUP, 'first = "60 mm"', 'first = "61 mm"'),
    (CUP, 'pitch = "6 mm"', 'pitch = "7 mm"'),
    (CUP, "count = 2", "count = 3"),
    (CUP, 'first = "60 mm"\npitch = "6 mm"\ncount = 2', 'at = ["62 mm"]'),
    (CUP, '[layer.strut]\nheight = "2 mm"', '[layer.strut]\nheight = "1.6 mm"'),
    (CUP, 'pitch = "8 mm"', 'pitch = "9 mm"'),
    (
        CUP,
        'thickness = "0.3 mm"\n[[layer]]\nname = "cover"',
        'thickness = "0.4 mm"\n[[layer]]\nname = "cover"',
    ),
    (CUP, 'recess = "8 mm"', 'recess = "9 mm"'),
    (SLEEVED, '"80 mm"', '"81 mm"'),
    (SLEEVED, '"56 mm"', '"56.5 mm"'),
    (SLEEVED, 'height = "50 mm"', 'height = "48 mm"'),
    (SLEEVED, 'bottom = "25 mm"\n', ""),
    (SLEEVED, 'fit = "200', 'fit = "180'),
    (SLEEVED, '"63 mm"', '"63.2 mm"'),
    (SLEEVED, '"77 mm"', '"77.5 mm"'),
    (SLEEVED, "wool felt", "cork"),
]


@pytest.mark.parametrize(("text", "old", "new"), CHANGES, ids=[f"{old}-{new}" for _, old, new in CHANGES])
def test_a_key_changes_what_the_solver_sees(text, old, new):
    assert text.count(old) >= 1
    before, after = signature(text), signature(text.replace(old, new, 1))
    assert before.shape != after.shape or not np.allclose(before, after, rtol=1e-9, atol=0)


def test_the_signature_is_that_of_the_cup():
    assert np.array_equal(signature(CUP), signature(CUP))
