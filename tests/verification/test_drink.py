"""The lumped drink against exact answers: a slab beside a stirred fluid, two nodes, a level that falls."""

import numpy as np
import pytest
from oracles import lumped, stirred

from verification.bodies import marched, uniform
from verification.compare import within
from verification.drinks import (
    cylinder_drunk_empty,
    slab_beside_fluid,
    temperature_of,
    two_nodes,
    two_nodes_at_start,
)

CONTACT = 1e8
"""Film [W/(m2 K)] that stands for perfect contact: its resistance is a 3e5th of the porcelain slab's."""


@pytest.mark.parametrize("ratio", [1.0, 4.0])
def test_slab_beside_stirred_fluid(ratio):
    """J. Crank, The Mathematics of Diffusion, 2nd ed. 1975, sec. 4.3.5 (numbering from memory): uptake of a
    slab.

    Capacity of fluid over slab a = 1: .20708604 .41924647 .55284072 .91646666 at Fo .01 .05 .1 .5; a = 4:
    .13798020 .30040001 .41654458 .82369141. Allowed 1e-4.
    """
    body, _ = slab_beside_fluid(1.0, 1.0, 1.0, 1.0, ratio, CONTACT)
    fluid = np.array([ratio / 1000.0, ratio])  # kg, J: 1 K above the slab
    times = [0.01, 0.05, 0.1, 0.5]
    states = marched(body, uniform(body, 0.0, fluid), times, 1e-6, 1e-6)
    taken = [body.stored(state)["wall"] for state in states]
    uptake = np.array(taken) / (ratio / (1.0 + ratio))
    within(f"stirred fluid, capacity ratio {ratio:g}", uptake, stirred.stirred_uptake(ratio, times), 1e-4)


def test_porcelain_cup_just_poured():
    """The same for a cup (invented sizes): 5 mm of porcelain (k 1.5, rho c 2.592e6, .023640 m2) at 25 C,
    250 mL at 85 C.

    82.016062 C after 1 s, 78.640720 after 5 s, 73.689279 after 20 s, 71.099465 in the end. Allowed .02 K.
    """
    capacity = 0.25e-3 * 970.0 * 4190.0
    case = (0.005, 1.5, 2.592e6, 0.023640, capacity)
    body, drink = slab_beside_fluid(*case, CONTACT)
    mass = capacity / float(drink.liquid.specific_heat(60.0))
    start = uniform(body, 25.0, np.array([mass, capacity * 85.0]))
    times = [1.0, 2.0, 5.0, 10.0, 20.0, 1000.0]
    found = [temperature_of(body, state) for state in marched(body, start, times, 1e-3, 1e-5)]
    within("porcelain cup", found, stirred.poured_cup_fluid(times, *case, (85.0, 25.0)), 0.02)


def test_two_nodes():
    """Drink 1254 J/K, wall 80 J/K, 3 W/K between them, .35 W/K to the room: time constants 22.712 and
    4206.7 s.

    (57.43042801, 37.30119899) at 30 s, (24.24273759, 21.83386024) at 3600 s, by the matrix exponential.
    Allowed 1e-4 K of 60 K: the wall conducts 1e5 W/(m K), which leaves less than that across it.
    """
    body, times = two_nodes(), [30.0, 300.0, 3600.0]
    states = marched(body, two_nodes_at_start(body, 60.0, 0.0), times, 1e-5, 1e-4)
    found = [(temperature_of(body, state), float(body.wall(state).mean())) for state in states]
    within("two nodes", found, lumped.two_node(times, (1254.0, 80.0), 3.0, 0.35, (60.0, 0.0)), 1e-4)


def check_level_that_falls() -> None:
    """A cylinder of .04 m drunk from .08 m to nothing in 1800 s, 10 W/(m2 K) to 0 C over the wetted side
    and the floor.

    theta = exp(-2 U t/(c R)) (1 - s t/L0)^(U/(c s)) (own derivation, no published value): .9544778737 at
    300 s, .8626082227 at 900 s, .7548357578 at 1500 s. Allowed 1e-5: the wetted edge is integrated exactly
    wherever the level stands.
    """
    body = cylinder_drunk_empty(10.0, 0.04, 0.08, 1800.0)
    assert body.drink is not None
    start = uniform(body, 0.0, body.drink.start(1.0, body.drink.meridian.floor + 0.08))
    times = [300.0, 900.0, 1500.0]
    found = [temperature_of(body, state) for state in marched(body, start, times, 1e-6)]
    within("level that falls", found, lumped.draining_cylinder(times, 0.04, 0.08, 1800.0, 10.0, 4.1e6), 1e-5)


def test_level_that_falls():
    check_level_that_falls()
