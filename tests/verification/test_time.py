"""The time scheme: its coefficients, and the order it shows."""

import numpy as np
import pytest

from cupfem.conduction import FixedTemperature
from cupfem.march import March
from cupfem.march.scheme import EMBEDDED, GAMMA, NODES, STAGES, WEIGHTS
from verification.bodies import section, solid, system, uniform
from verification.compare import within
from verification.drinks import temperature_of, two_nodes, two_nodes_at_start

# J.C. Butcher, Numerical Methods for Ordinary Differential Equations, 2nd ed. 2008, sec. 31 (from memory,
# not re-checked): one condition for each rooted tree, weights . tree = 1 / density.
A, C = STAGES, NODES
TREES = {
    1: [(np.ones(6), 1)],
    2: [(C, 2)],
    3: [(C**2, 3), (A @ C, 6)],
    4: [(C**3, 4), (C * (A @ C), 8), (A @ C**2, 12), (A @ (A @ C), 24)],
}


@pytest.mark.parametrize(("weights", "order"), [(WEIGHTS, 4), (EMBEDDED, 3)], ids=["main", "embedded"])
def test_order_conditions(weights, order):
    conditions = [pair for level in range(1, order + 1) for pair in TREES[level]]
    found = [weights @ tree for tree, _ in conditions]
    within(f"order conditions to {order}", found, [1 / density for _, density in conditions], 1e-14)


def test_embedded_pair_differs_at_order_four():
    """Otherwise the error estimate would be blind."""
    assert max(abs(EMBEDDED @ tree - 1 / density) for tree, density in TREES[4]) > 1e-4


def test_rows():
    """Rows sum to the nodes; the diagonal is constant; the last stage is the new value (stiffly accurate)."""
    within("row sums", STAGES.sum(axis=1), NODES, 1e-14)
    within("diagonal", np.diag(STAGES)[1:], np.full(5, GAMMA), 0.0)
    within("stiff accuracy", STAGES[-1], WEIGHTS, 0.0)
    within("stage order two", STAGES @ NODES, NODES**2 / 2, 1e-14)


def stability(weights: np.ndarray, z: complex) -> complex:
    """R(z) = 1 + z b (I - z A)^-1 1."""
    return complex(1.0 + z * weights @ np.linalg.solve(np.eye(6) - z * STAGES, np.ones(6)))


def test_stability():
    """|R| <= 1 on the imaginary axis and 0 at infinity: L-stable."""
    axis = [abs(stability(WEIGHTS, 1j * y)) for y in np.geomspace(1e-3, 1e6, 400)]
    assert max(axis) <= 1.0 + 1e-12
    within("R(infinity)", abs(stability(WEIGHTS, -1e9)), 0.0, 1e-7)


def states_of(body, start, end, count):
    """States at the ends of `count` equal steps."""
    march = March(body, 1e-6, largest_step=np.inf, fixed_step=end / count)
    return np.array([step.after for step in march.run(start, 0.0, end)])


def order_of(steps, errors):
    """Slope of log error over log step, by least squares."""
    return -float(np.polyfit(np.log(steps), np.log(errors), 1)[0])


def test_order_of_smooth_cooling():
    """Fourth order, within .1, on drink and wall with constant films: nothing starts with a jump that the
    steps do not resolve.
    """
    body = two_nodes(wall_conductivity=100.0)
    start = two_nodes_at_start(body, 60.0, 0.0)

    def end_of(count):
        state = states_of(body, start, 120.0, count)[-1]
        return np.array([temperature_of(body, state), body.wall(state).mean()])

    steps = [6, 12, 24]
    exact = end_of(192)
    errors = [float(np.max(np.abs(end_of(count) - exact))) for count in steps]
    within(f"order in time, errors {errors} K", order_of(steps, errors), 4.0, 0.1)


JUMP_STEPS, FINEST = (16, 32, 64), 1024


@pytest.fixture(scope="module")
def jump_errors():
    """Wall whose face is held at 0 from a start at 1: largest error over the wall after the first and the
    last step.
    """
    mesh = section(np.linspace(0.0, 1.0, 21), [0.0, 0.1])
    body = system(mesh, solid(1.0), FixedTemperature("outside", 0.0), plane=True)
    start = uniform(body, 1.0)
    exact = states_of(body, start, 0.2, FINEST)
    runs = [
        states_of(body, start, 0.2, count) - exact[FINEST // count - 1 :: FINEST // count]
        for count in JUMP_STEPS
    ]
    return np.array([np.abs(run).max(axis=1)[[0, -1]] for run in runs])


def test_order_just_after_a_jump(jump_errors):
    """The first constant step cannot follow a jump, whatever its order: that is why a march starts with
    tiny ones.
    """
    order = order_of(JUMP_STEPS, jump_errors[:, 0])
    print(f"\norder of the first step after a jump: {order:.2f}, errors {jump_errors[:, 0]}", end="")
    assert 0.0 < order < 1.0


def test_order_long_after_a_jump(jump_errors):
    """L-stability damps the error of the jump, so that the full order returns."""
    within("order long after a jump", order_of(JUMP_STEPS, jump_errors[:, 1]), 4.0, 0.1)
