"""The invented tube of `tests/benchmarks/plain_tube.py` on cupfem's own mesh, operators and march."""

from __future__ import annotations

import numpy as np
from benchmarks import plain_tube as given
from numpy.typing import NDArray

from cupfem.conduction import Exchange
from cupfem.drink import Ambient, Drink, Lumped, Surface
from cupfem.films import FixedFilm, FluxFunction
from cupfem.march import March, Step, System
from cupfem.meridian import LayerBand, Meridian, Profile
from cupfem.mesh import build
from verification.bodies import SOLID, solid, system, uniform
from verification.drinks import stirred_fluid, wetted

NAMES = ("inner", "gap", "outer")
LEDGER_NAMES = ("dry wall", "outside", "surface", "sips")


def shape() -> Meridian:
    """The tube's half section."""
    profile = Profile(np.array([0.0, given.HEIGHT]), np.full(2, given.RADIUS))
    layers = (
        LayerBand(name, SOLID, thickness, 0.0, given.HEIGHT)
        for name, (thickness, _, _) in zip(NAMES, given.LAYERS, strict=True)
    )
    return Meridian(profile, tuple(layers))


def outside_flux(surface, room, height, time):
    """Still air, 1.42 (dT/H)^(1/4) (common practice), and radiation [W/m2]."""
    difference = surface - room
    warm, cold = surface + given.ZERO_CELSIUS, room + given.ZERO_CELSIUS
    convection = 1.42 * (np.hypot(difference, 1e-4) / given.HEIGHT) ** 0.25 * difference
    return convection + given.EMISSIVITY * given.STEFAN_BOLTZMANN * (warm**4 - cold**4)


def tube() -> tuple[System, NDArray[np.float64]]:
    """System and start of the tube job."""
    body = shape()
    solids = {name: solid(k, capacity) for name, (_, k, capacity) in zip(NAMES, given.LAYERS, strict=True)}
    edges = (
        wetted("inside", given.WET_FILM, below_level=True),
        Exchange("inside", {"dry wall": FixedFilm(given.DRY_FILM)}, given.HEADSPACE, above_level),
        Exchange("outside", {"outside": FluxFunction(outside_flux)}, given.ROOM),
    )
    drunk = np.pi * given.RADIUS**2 * (given.LEVEL_START - given.LEVEL_END) / given.DURATION
    liquid = stirred_fluid(given.DENSITY * given.SPECIFIC_HEAT, given.DENSITY)
    surface = Surface({"surface": FixedFilm(given.SURFACE_FILM)}, given.ROOM)
    drink = Drink(liquid, body, surface, drunk)
    job = system(build(body), solids, *edges, drink=drink, ambient=Ambient(given.ROOM))
    return job, uniform(job, given.ROOM, drink.start(given.POURED, given.LEVEL_START))


def above_level(drink: Lumped, time: float) -> tuple[float, float]:
    return drink.level, np.inf


def steps(job: System, start: NDArray[np.float64], tolerance: float = 5e-3) -> list[Step]:
    """The accepted steps of the whole job."""
    return list(March(job, tolerance).run(start, 0.0, given.DURATION))
