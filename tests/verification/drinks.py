"""Bodies that hold a lumped drink: a slab beside a stirred fluid, two nodes, a cylinder that is drunk
empty.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from cupfem.conduction import Exchange, FixedTemperature
from cupfem.drink import Drink, Lumped, Surface
from cupfem.edges import TO_DRINK
from cupfem.films import FixedFilm
from cupfem.fluids import Liquid, water
from cupfem.march import System
from cupfem.materials import get_material
from cupfem.meridian import BaseDisc, LayerBand, Meridian, Profile
from cupfem.mesh import build
from verification.bodies import SOLID, film, meridian, section, solid, system

NO_SURFACE = Surface({})
LOWEST_MASS = 1e-9  # kg; the node stays to the end


def stirred_fluid(heat_capacity: float, density: float = 1000.0) -> Liquid:
    """A liquid of constant heat capacity [J/(m3 K)]."""
    return water().with_constants(density=density, specific_heat=heat_capacity / density)


def wetted(edge: str, coefficient: float, *, below_level: bool = False) -> Exchange:
    """A constant film between an edge and the drink, over all of it or below the drink's level."""
    window = (lambda drink, time: (-np.inf, drink.level)) if below_level else None
    return Exchange(edge, {TO_DRINK: FixedFilm(coefficient)}, drink_temperature, window, to_drink=True)


def drink_temperature(height: NDArray[np.float64], time: float, drink: Lumped) -> float:
    return drink.temperature


def temperature_of(body: System, state: NDArray[np.float64]) -> float:
    """Temperature of the drink [degC]."""
    return body.lumped(state).temperature


def slab_beside_fluid(
    thickness: float,
    conductivity: float,
    heat_capacity: float,
    area: float,
    fluid_capacity: float,
    coefficient: float,
) -> tuple[System, Drink]:
    """A plane slab, insulated outside, whose inner face of `area` [m2] meets a stirred fluid of some
    capacity [J/K].

    The strip is `area` high and one metre deep; the fluid's level plays no part.
    """
    cells = np.concatenate([[0.0], np.geomspace(0.01, 1.0, 16)]) * thickness
    mesh = section(cells, [0.0, area])
    drink = Drink(
        stirred_fluid(1e6), meridian({"wall": [1.0, 1.1]}, 1.0), NO_SURFACE, minimum_mass=LOWEST_MASS
    )
    body = system(
        mesh, solid(conductivity, heat_capacity), wetted("inside", coefficient), plane=True, drink=drink
    )
    return body, drink


def two_nodes(wall_conductivity: float = 1e5) -> System:
    """A tube whose wall (80 J/K) and drink (1254 J/K) exchange 3 W/K, and that loses .35 W/K to 0 degC."""
    inner, outer, height = 0.035, 0.036, 0.08
    volume, inside, outside = (
        np.pi * height * (outer**2 - inner**2),
        2 * np.pi * inner * height,
        2 * np.pi * outer * height,
    )
    mesh = section([inner, outer], [0.0, height])
    shape = meridian({"wall": [inner, outer]}, height)
    drink = Drink(stirred_fluid(1254.0 / shape.volume(0.5 * height)), shape, NO_SURFACE)
    films = wetted("inside", 3.0 / inside), film("outside", 0.35 / outside, 0.0)
    return system(mesh, solid(wall_conductivity, 80.0 / volume), *films, drink=drink)


def two_nodes_at_start(body: System, drink: float, wall: float) -> NDArray[np.float64]:
    """State of `two_nodes` with the drink filling half the tube."""
    assert body.drink is not None
    start = body.drink.start(drink, 0.5 * body.drink.meridian.height)
    return body.state([np.full(body.sections[0].conduction.mesh.size, wall)], start)


def cylinder_drunk_empty(film_coefficient: float, radius: float, level: float, duration: float) -> System:
    """A cup whose inside and floor are held at 0 degC, drunk at a steady rate from `level` [m] to nothing."""
    top = 1.05 * level
    base = BaseDisc(get_material("cupstock board"), 0.5e-3, 1e-3)
    profile = Profile(np.array([0.0, base.top + top]), np.array([radius, radius]))
    shape = Meridian(profile, (LayerBand("wall", SOLID, 1e-3, 0.0, base.top + top),), base)
    mesh = build(shape)
    drinking = np.pi * radius**2 * level / duration
    drink = Drink(stirred_fluid(4.1e6), shape, NO_SURFACE, drinking, LOWEST_MASS)
    cold = FixedTemperature("inside", 0.0), FixedTemperature("floor", 0.0)
    films = (
        wetted("inside", film_coefficient, below_level=True),
        wetted("floor", film_coefficient, below_level=True),
    )
    return system(mesh, {"wall": solid(0.12, 1e6), "base": solid(0.12, 1e6)}, *cold, *films, drink=drink)
