"""A hot drink in a straight three-layer tube, solved the plain way: scikit-fem and SciPy's SuperLU.

This script is the yardstick for speed. It uses public tools only and takes the first road that a
finite-element engineer would take: bilinear quadrilaterals on a structured mesh, constant matrices assembled
once, backward Euler with a fixed step, Picard iteration on the outside film and the drink inside each step,
and a fresh sparse factorisation in each iteration. It is neither slowed down nor tuned.

The case is invented (no drawing behind it): an open tube without a base, board 0.30 mm / air 0.80 mm / board
0.30 mm, inner radius 35 mm, 92 mm tall, ends insulated, all at 22 C when the drink of 85 C is poured in. The
drink is drunk evenly from a level of 78 mm to 30 mm in 600 s. The outside film is common practice for still
air: 1.42 (dT/H)^(1/4) for a vertical face plus grey radiation.

Run it with `python tests/benchmarks/plain_tube.py`; another benchmark imports `run()`.
"""

from __future__ import annotations

import os

os.environ["OPENBLAS_NUM_THREADS"] = "1"  # one thread; has to be set before numpy is loaded
os.environ["OMP_NUM_THREADS"] = "1"
os.environ["MKL_NUM_THREADS"] = "1"

import cProfile
import pstats
import sys
from collections.abc import Iterator
from contextlib import contextmanager
from itertools import pairwise
from time import perf_counter
from typing import Any

import numpy as np
from numpy.typing import NDArray
from scipy.sparse import csc_matrix
from scipy.sparse.linalg import splu
from skfem import Basis, BilinearForm, ElementQuad1, FacetBasis, LinearForm, MeshQuad
from skfem.helpers import dot, grad

Array = NDArray[np.float64]

RADIUS, HEIGHT = 0.035, 0.092  # m
LAYERS = ((0.30e-3, 0.12, 1.12e6), (0.80e-3, 0.045, 1107.0), (0.30e-3, 0.12, 1.12e6))  # m, W/(m K), J/(m3 K)
WET_FILM, DRY_FILM, SURFACE_FILM = 400.0, 8.0, 60.0  # W/(m2 K)
HEADSPACE, ROOM, POURED = 40.0, 22.0, 85.0  # C
DENSITY, SPECIFIC_HEAT = 1000.0, 4180.0  # drink, SI
LEVEL_START, LEVEL_END, DURATION = 0.078, 0.030, 600.0  # m, m, s
EMISSIVITY, STEFAN_BOLTZMANN, ZERO_CELSIUS = 0.9, 5.670374419e-8, 273.15

STEPS = 1200
ELEMENTS_ALONG, ELEMENTS_PER_LAYER = 184, 4
TOLERANCE = 1e-4  # K, largest change in a Picard iteration

PROBE_HEIGHTS = (0.020, 0.046, 0.085)  # m, on the outer face
# Time [s]: outer face at the three heights, drink [C]. From a separate program with fourth-order elements,
# good to about 0.003 K.
REFERENCE = {
    5.0: (43.4071, 43.4071, 22.4301, 84.57271),
    10.0: (57.5295, 57.5295, 23.1950, 84.40859),
    20.0: (66.3030, 66.3030, 24.6676, 84.16576),
    60.0: (67.7545, 67.7545, 28.4232, 83.33463),
    300.0: (64.1234, 64.1232, 29.2707, 78.16017),
    600.0: (58.7072, 29.8979, 29.2505, 70.49388),
}


@BilinearForm
def conduction(u: Any, v: Any, w: Any) -> Any:
    return 2 * np.pi * w.x[0] * w.k * dot(grad(u), grad(v))


@BilinearForm
def storage(u: Any, v: Any, w: Any) -> Any:
    return 2 * np.pi * w.x[0] * w.c * u * v


@BilinearForm
def film_matrix(u: Any, v: Any, w: Any) -> Any:
    return 2 * np.pi * w.x[0] * w.h * u * v


@LinearForm
def film_load(v: Any, w: Any) -> Any:
    return 2 * np.pi * w.x[0] * w.h * w.T * v


def tube_mesh() -> MeshQuad:
    edges = RADIUS + np.concatenate([[0.0], np.cumsum([layer[0] for layer in LAYERS])])
    r = np.concatenate([np.linspace(a, b, ELEMENTS_PER_LAYER + 1)[:-1] for a, b in pairwise(edges)])
    mesh = MeshQuad.init_tensor(np.append(r, edges[-1]), np.linspace(0.0, HEIGHT, ELEMENTS_ALONG + 1))
    return mesh.with_boundaries(
        {"inner": lambda x: np.isclose(x[0], edges[0]), "outer": lambda x: np.isclose(x[0], edges[-1])}
    )


def layer_properties(mesh: MeshQuad) -> tuple[Array, Array]:
    """Conductivity and heat capacity per element, each of shape (elements, 1)."""
    middle = mesh.p[0, mesh.t].mean(axis=0) - RADIUS
    index = np.searchsorted(np.cumsum([layer[0] for layer in LAYERS]), middle)
    table = np.array(LAYERS)
    return table[index, 1][:, None], table[index, 2][:, None]


def outside_film(surface: Array) -> Array:
    """Film coefficient to the room [W/(m2 K)] at surface temperatures [C]: convection and radiation."""
    ts, ta = surface + ZERO_CELSIUS, ROOM + ZERO_CELSIUS
    convection = 1.42 * (np.abs(surface - ROOM) / HEIGHT) ** 0.25
    return convection + EMISSIVITY * STEFAN_BOLTZMANN * (ts**2 + ta**2) * (ts + ta)


def level_at(time: float) -> float:
    return LEVEL_START + (LEVEL_END - LEVEL_START) * time / DURATION


@contextmanager
def lap(seconds: dict[str, float], kind: str) -> Iterator[None]:
    """Add the time spent inside to `seconds[kind]`."""
    start = perf_counter()
    yield
    seconds[kind] += perf_counter() - start


class Tube:
    """Mesh, bases and the constant matrices; the time step is part of the storage matrix."""

    def __init__(self, step: float):
        mesh = tube_mesh()
        self.basis = Basis(mesh, ElementQuad1())
        self.inner = FacetBasis(mesh, ElementQuad1(), facets="inner")
        self.outer = FacetBasis(mesh, ElementQuad1(), facets="outer")
        k, c = layer_properties(mesh)
        self.storage = storage.assemble(self.basis, c=c) / step
        self.constant = conduction.assemble(self.basis, k=k) + self.storage
        self.inner_z = self.inner.default_parameters()["x"][1]

    def inside(self, level: float) -> tuple[Any, Array, Array]:
        """Film matrix of the inner face, load per kelvin of drink, load of the headspace; split by point."""
        wet = self.inner_z < level
        matrix = film_matrix.assemble(self.inner, h=np.where(wet, WET_FILM, DRY_FILM))
        wet_load = film_load.assemble(self.inner, h=np.where(wet, WET_FILM, 0.0), T=np.ones(wet.shape))
        dry_load = film_load.assemble(
            self.inner, h=np.where(wet, 0.0, DRY_FILM), T=np.full(wet.shape, HEADSPACE)
        )
        return matrix, wet_load, dry_load

    def outside(self, temperature: Array) -> tuple[Any, Array]:
        """Film matrix and load of the outer face with the film taken at `temperature`."""
        h = outside_film(self.outer.interpolate(temperature).value)
        load = film_load.assemble(self.outer, h=h, T=np.full(h.shape, ROOM))
        return film_matrix.assemble(self.outer, h=h), load

    def outer_face(self, temperature: Array) -> list[float]:
        """Temperatures [C] of the outer face at PROBE_HEIGHTS."""
        r, z = self.basis.doflocs
        face = np.flatnonzero(np.isclose(r, r.max()))
        face = face[np.argsort(z[face])]
        return [float(value) for value in np.interp(PROBE_HEIGHTS, z[face], temperature[face])]


def cooled_drink(old: float, wall_gain: float, wall_conductance: float, level: float, step: float) -> float:
    """Drink temperature [C] after one backward-Euler step; sips leave at the drink's own temperature."""
    area = np.pi * RADIUS**2
    capacity = DENSITY * area * level * SPECIFIC_HEAT / step
    gain = capacity * old + wall_gain + SURFACE_FILM * area * ROOM
    return float(gain / (capacity + wall_conductance + SURFACE_FILM * area))


def advance(
    tube: Tube, old: Array, old_drink: float, level: float, step: float, seconds: dict[str, float]
) -> tuple[Array, float, int]:
    """One time step: Picard iteration on the outside film and the drink. Also returns the iteration count."""
    with lap(seconds, "assembly"):
        inside, wet_load, dry_load = tube.inside(level)
        fixed = tube.constant + inside
        fixed_load = tube.storage @ old + dry_load
    temperature, drink, change, count = old, old_drink, np.inf, 0
    while change > TOLERANCE:
        with lap(seconds, "assembly"):
            outside, outside_load = tube.outside(temperature)
            matrix = csc_matrix(fixed + outside)
            load = fixed_load + drink * wet_load + outside_load
        with lap(seconds, "factor"):
            factor = splu(matrix)
        with lap(seconds, "solve"):
            new = factor.solve(load)
        new_drink = cooled_drink(old_drink, float(wet_load @ new), float(wet_load.sum()), level, step)
        change = max(np.abs(new - temperature).max(), abs(new_drink - drink))
        temperature, drink, count = new, new_drink, count + 1
    return temperature, drink, count


def march(tube: Tube, step: float, seconds: dict[str, float]) -> tuple[dict[float, list[float]], int]:
    """Temperatures [C] at the times of REFERENCE, and the number of factorisations."""
    temperature, drink, factorisations = np.full(tube.basis.N, ROOM), POURED, 0
    table = {}
    for n in range(1, STEPS + 1):
        temperature, drink, count = advance(tube, temperature, drink, level_at(n * step), step, seconds)
        factorisations += count
        if n * step in REFERENCE:
            table[n * step] = [*tube.outer_face(temperature), drink]
    return table, factorisations


def run() -> dict[str, Any]:
    """Solve; return size, times [s] by kind, temperatures [C] (as REFERENCE), largest error [K]."""
    seconds = {"assembly": 0.0, "factor": 0.0, "solve": 0.0}
    start = perf_counter()
    step = DURATION / STEPS
    tube = Tube(step)
    temperatures, factorisations = march(tube, step, seconds)
    total = perf_counter() - start
    return {
        "unknowns": int(tube.basis.N) + 1,
        "steps": STEPS,
        "factorisations": factorisations,
        "total_s": total,
        **{f"{kind}_s": value for kind, value in seconds.items()},
        "superlu_share": (seconds["factor"] + seconds["solve"]) / total,
        "temperatures": temperatures,
        "largest_error_K": max(
            float(np.abs(np.subtract(temperatures[t], REFERENCE[t])).max()) for t in REFERENCE
        ),
    }


def print_result(result: dict[str, Any]) -> None:
    print(
        f"{result['unknowns']} unknowns, {result['steps']} steps, {result['factorisations']} factorisations"
    )
    for kind in ("assembly", "factor", "solve", "total"):
        seconds = result[f"{kind}_s"]
        print(f"  {kind:9s}{seconds:8.2f} s{100 * seconds / result['total_s']:7.1f} %")
    print(f"  inside SuperLU (factor + solve): {100 * result['superlu_share']:.1f} %")
    print("  time s   outer face at 20, 46, 85 mm; drink [C] (difference from the reference [K])")
    for time, values in result["temperatures"].items():
        pairs = zip(values, REFERENCE[time], strict=True)
        print(f"  {time:6.0f} " + "".join(f"{value:10.4f} ({value - ref:+.4f})" for value, ref in pairs))
    print(f"  largest error {result['largest_error_K']:.3f} K")


def main() -> None:
    """Run plainly, or with `--profile` under cProfile."""
    if "--profile" not in sys.argv[1:]:
        print_result(run())
        return
    with cProfile.Profile() as profile:
        result = run()
    print_result(result)
    pstats.Stats(profile).sort_stats("tottime").print_stats(8)


if __name__ == "__main__":
    main()
