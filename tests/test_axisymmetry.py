"""Patch tests: fields that the elements hold exactly, on the meshes of real cups."""

from pathlib import Path

import numpy as np
import pytest
from verification.bodies import section, solid, steady

import cupfem
from cupfem import meridian
from cupfem.axisymmetry import Measure
from cupfem.conduction import Conditions, Conduction, FixedTemperature
from cupfem.march import Section, System
from cupfem.mesh import build

GEOMETRIES = Path(__file__).parents[1] / "geometries"
EDGES = ("inside", "outside", "heel", "brim", "skirt", "floor", "underside")


@pytest.mark.parametrize("order", [1, 2])
@pytest.mark.parametrize(
    ("name", "allowed"), [("single_board", 1e-9), ("stoneware_mug", 1e-9), ("double_wall_sleeve", 2e-3)]
)
def test_linear_field(name, allowed, order):
    """T = 20 + 300 z (28 K in all) solves div grad T = 0 in any section; k the same everywhere. Exact to
    rounding.

    Where layers end within the wall, the insulated slits at their tips disturb it by about a millikelvin.
    """
    mesh = build(meridian.build(cupfem.load_cup(GEOMETRIES / f"{name}.toml")), order=order)
    field = lambda r, z, t: 20.0 + 300.0 * z  # noqa: E731
    held = tuple(FixedTemperature(edge, field) for edge in EDGES)
    conduction = Conduction(
        mesh, {region: solid(0.3) for region in mesh.regions}, Conditions(temperatures=held)
    )
    found = steady(System([Section(conduction)]))
    np.testing.assert_allclose(found, field(*mesh.points, 0.0), atol=allowed)


@pytest.mark.parametrize(("plane", "factor"), [(False, -2.0), (True, -1.0)])
def test_quadratic_field(plane, factor):
    """r^2 - 2 z^2 is harmonic about an axis, r^2 - z^2 in the plane: quadratic elements hold both exactly."""
    mesh = section(np.linspace(0.03, 0.05, 4), [0.0, 0.01, 0.025, 0.05], lean=0.2)
    field = lambda r, z, t: 1e4 * (r**2 + factor * z**2)  # noqa: E731
    held = tuple(FixedTemperature(edge, field) for edge in ("inside", "outside", "heel", "brim"))
    conduction = Conduction(mesh, {"wall": solid(0.3)}, Conditions(temperatures=held), Measure(plane))
    found = steady(System([Section(conduction)]))
    np.testing.assert_allclose(found, field(*mesh.points, 0.0), atol=1e-9)


def test_lost_circumference_fails():
    """Planted fault: with the plane measure the axisymmetric harmonic is none."""
    with pytest.raises(AssertionError):
        test_quadratic_field(True, -2.0)
