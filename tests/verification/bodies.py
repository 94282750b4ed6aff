"""Plain bodies as sections of cupfem: cylinders, plane strips, leaning walls; steady states and marches.

A body is a wall without a base. Its edges are those of a cup: `inside` and `outside` (faces across), `heel`
(bottom) and `brim` (top). Probes are unknowns of the mesh, so that nothing is interpolated in space.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence

import numpy as np
from numpy.typing import ArrayLike, NDArray

from cupfem.axisymmetry import Measure
from cupfem.conduction import (
    Conditions,
    Conduction,
    Exchange,
    FixedFlux,
    FixedTemperature,
    GasLayer,
    Solid,
    Surroundings,
)
from cupfem.drink import Ambient, Drink
from cupfem.films import FixedFilm
from cupfem.march import March, Section, System
from cupfem.march.linearised import Linearised
from cupfem.materials import get_material
from cupfem.meridian import LayerBand, Meridian, Profile
from cupfem.mesh import SectionMesh, build

Floats = NDArray[np.float64]
Condition = Exchange | FixedTemperature | FixedFlux

ROOM = Ambient()
SOLID = get_material("cupstock board")
"""Only tells the mesh that a layer is solid; the properties of a case go to `Conduction`."""


def meridian(lines: Mapping[str, ArrayLike], height: float, lean: float = 0.0) -> Meridian:
    """Half section of a wall with the given lines across (radii at the foot [m], layer by layer from inside).

    `lean` [rad] is the angle between the wall and the axis.
    """
    positions = {name: np.asarray(values, dtype=float) for name, values in lines.items()}
    inner = next(iter(positions.values()))[0]
    layers = [LayerBand(name, SOLID, float(p[-1] - p[0]), 0.0, height) for name, p in positions.items()]
    profile = Profile(np.array([0.0, height]), np.array([inner, inner + height * np.tan(lean)]))
    return Meridian(profile, tuple(layers))


def section(
    lines: Mapping[str, ArrayLike] | ArrayLike, stations: ArrayLike, *, lean: float = 0.0, order: int = 2
) -> SectionMesh:
    """Mesh with cells between given lines across and given heights [m]; one layer is called `wall`."""
    if not isinstance(lines, Mapping):
        lines = {"wall": lines}
    heights = np.asarray(stations, dtype=float)
    positions = {name: np.asarray(values, dtype=float) for name, values in lines.items()}
    fractions = {name: (p - p[0]) / (p[-1] - p[0]) for name, p in positions.items()}
    body = meridian(positions, float(heights[-1]), lean)
    return build(body, order=order, stations=heights, fractions=fractions)


def solid(conductivity: float, heat_capacity: float = 1.0) -> Solid:
    """An isotropic solid: conductivity [W/(m K)], heat capacity [J/(m3 K)]."""
    return Solid(conductivity, conductivity, heat_capacity)


def film(edge: str, coefficient: float, surroundings: Surroundings) -> Exchange:
    """A constant film coefficient [W/(m2 K)] on an edge."""
    return Exchange(edge, {edge: FixedFilm(coefficient)}, surroundings)


def system(
    mesh: SectionMesh,
    solids: Mapping[str, Solid | GasLayer] | Solid,
    *conditions: Condition,
    sources: Mapping[str, object] | None = None,
    plane: bool = False,
    drink: Drink | None = None,
    ambient: Ambient = ROOM,
) -> System:
    """The body as a system of one section."""
    given = solids if isinstance(solids, Mapping) else {"wall": solids}
    kinds = (Exchange, FixedTemperature, FixedFlux)
    exchanges, temperatures, fluxes = (tuple(c for c in conditions if isinstance(c, kind)) for kind in kinds)
    acting = Conditions(exchanges, temperatures, fluxes, sources or {})
    return System([Section(Conduction(mesh, given, acting, Measure(plane)))], drink, ambient)


def steady(system: System, start: float = 0.0, time: float = 0.0, iterations: int = 60) -> Floats:
    """Temperatures [degC] at rest: Newton's method with the march's own linearisation of K T = f(T)."""
    weight = 1e9  # s; a step so long that the heat capacity does not count
    state = system.with_fixed(system.state([np.full(system.sections[0].conduction.mesh.size, start)]), time)
    for _ in range(iterations):
        residual = weight * (system.conducted(state) - system.loads(state, time)[0])
        matrix = Linearised(system, (state, state, state), (time, time, time), weight)
        change = matrix.solve(system.free(residual))
        state = state - change
        if np.max(np.abs(change)) < 1e-9 * max(1.0, float(np.max(np.abs(state)))):
            return state
    raise AssertionError(f"no steady state after {iterations} iterations")


def marched(
    system: System, state: Floats, times: Sequence[float], tolerance: float = 1e-4, first_step: float = 1e-3
) -> Floats:
    """States `[time, unknown]` at given times [s]: adaptive marches from 0 to the first, on to the second,
    and so on.
    """
    found, start, march = [], 0.0, March(system, tolerance, largest_step=np.inf)
    for time in times:
        for step in march.run(state, start, time, first_step):
            state, start, first_step = step.after, step.end, step.end - step.start
        found.append(state)
    return np.array(found)


def uniform(system: System, temperature: float, drink: Floats | None = None) -> Floats:
    """State of a body at one temperature [degC]."""
    return system.state([np.full(system.sections[0].conduction.mesh.size, temperature)], drink)


def node(mesh: SectionMesh, r: float, z: float) -> int:
    """The unknown at a place; there must be one."""
    distance = np.hypot(mesh.points[0] - r, mesh.points[1] - z)
    nearest = int(np.argmin(distance))
    assert distance[nearest] < 1e-9 * max(1.0, float(mesh.points.max())), f"no unknown at ({r}, {z})"
    return nearest


def nodes(mesh: SectionMesh, places: Sequence[tuple[float, float]]) -> list[int]:
    """The unknowns at places."""
    return [node(mesh, r, z) for r, z in places]


def graded(start: float, end: float, count: int, growth: float) -> Floats:
    """`count` cells from start to end, each `growth` times as long as the one before."""
    lengths = growth ** np.arange(count)
    return np.asarray(start + (end - start) * np.concatenate([[0.0], np.cumsum(lengths) / lengths.sum()]))


def pieces(*parts: ArrayLike) -> Floats:
    """Parts of a grid one after the other; ends that meet are taken once."""
    joined = np.concatenate([np.asarray(part, dtype=float) for part in parts])
    return np.asarray(joined[np.concatenate([[True], np.diff(joined) > 1e-12])])
