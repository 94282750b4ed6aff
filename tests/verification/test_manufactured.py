"""Rates of convergence in space with a full conductivity tensor, which comes from turning the wall's own
axes.

K. Salari, P. Knupp, Code Verification by the Method of Manufactured Solutions, SAND2000-1444, 2000.
"""

import numpy as np
import pytest
from oracles.manufactured import ManufacturedCylinder

from cupfem.conduction import FixedTemperature, Solid
from verification.bodies import section, steady, system
from verification.compare import within

TENSOR = np.array([[0.12, 0.03], [0.03, 0.30]])  # rr, rz, zz [W/(m K)]
STEADY = ManufacturedCylinder(heat_capacity=0.0)  # the source then balances conduction alone


def principal_axes() -> tuple[float, float, float]:
    """Conductivities through and along a wall, and the angle [rad] by which it leans, that give `TENSOR` in
    r and z.
    """
    (through, along), vectors = np.linalg.eigh(TENSOR)
    return through, along, float(np.arctan(vectors[0, 1] / vectors[1, 1]))


def test_principal_axes():
    through, along, lean = principal_axes()
    within("principal axes", [through, along, np.degrees(lean)], [0.1151317, 0.3048683, 9.2174744], 1e-7)


def error_in_mean_square(order: int, cells: int) -> float:
    """Mean-square error [K] on a leaning block, .03 < r, with exact values on its edges."""
    through, along, lean = principal_axes()
    mesh = section(
        np.linspace(0.03, 0.05, cells + 1), np.linspace(0.0, 0.04, 2 * cells + 1), lean=lean, order=order
    )
    exact = lambda r, z, t: STEADY.temperature(r, z, 0.0)  # noqa: E731
    held = [FixedTemperature(edge, exact) for edge in ("inside", "outside", "heel", "brim")]
    source = {"wall": lambda r, z: STEADY.source(r, z, 0.0)}
    state = steady(system(mesh, Solid(through, along, 1.0), *held, sources=source))
    basis = mesh.basis()
    r, z = np.asarray(basis.global_coordinates())
    shapes = np.array([np.asarray(basis.basis[n][0]) for n in range(len(mesh.element_dofs))])
    found = np.einsum(
        "neq,ne->eq", np.broadcast_to(shapes, (len(shapes), *r.shape)), state[mesh.element_dofs]
    )
    weight = basis.dx * r
    return float(np.sqrt((weight * (found - STEADY.temperature(r, z, 0.0)) ** 2).sum() / weight.sum()))


@pytest.mark.parametrize(("order", "rate"), [(1, 2.0), (2, 3.0)])
def test_rate(order, rate):
    """Three meshes; the error falls with the cell to the power order + 1, within .1 (finite-element
    theory).
    """
    cells = np.array([4, 8, 16])
    errors = [error_in_mean_square(order, count) for count in cells]
    slope = -np.polyfit(np.log(cells), np.log(errors), 1)[0]
    within(f"rate of order {order} elements, errors {errors}", slope, rate, 0.1)
