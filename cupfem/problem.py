"""Cup and serving -> wall section, films, drink and start: the system that the march solves.

Which film stands on which edge is decided in `edges`; here it meets the mesh.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from cupfem import edges
from cupfem.conduction import Conditions, Conduction, Exchange, GasLayer, Solid
from cupfem.cup import Cup
from cupfem.drink import Ambient, Drink, Lumped, Surface
from cupfem.edges import TO_DRINK
from cupfem.errors import InputError, nearest
from cupfem.films import Film
from cupfem.fluids import air_density, air_specific_heat, vapour_pressure
from cupfem.gaps import Gap
from cupfem.march import Section, System
from cupfem.materials import Material
from cupfem.meridian import Meridian
from cupfem.meridian import build as build_meridian
from cupfem.mesh import SectionMesh
from cupfem.mesh import build as build_mesh
from cupfem.serving import PRESSURE, Serving, check, fill_volume

Floats = NDArray[np.float64]
Overrides = Mapping[str, Film]

EDGES = ("wetted", "dry", "outside", "underside", "heel", "brim")
GAS_TEMPERATURE = 50.0
"""Temperature [degC] at which the heat capacity of the gas in a gap is taken: a thousandth of the board's."""


@dataclass(eq=False)
class Problem:
    """A system ready to march, and what it was made of."""

    cup: Cup
    serving: Serving
    meridian: Meridian
    mesh: SectionMesh
    system: System
    start: Floats

    def enter(self, time: float) -> None:
        """Set what is constant from a break on: room and steady drinking."""
        self.system.ambient = ambient_at(self.serving, time)
        drink = self.system.drink
        assert drink is not None
        flows = [
            flow for flow, start, end in self.serving.steady_drinking() if start - 1e-9 <= time < end - 1e-9
        ]
        self.system.drink = drink.with_drinking(sum(flows))


def build(cup: Cup, serving: Serving, fineness: float = 1.0, films: Overrides | None = None) -> Problem:
    """Mesh the cup and put the serving's films on its edges.

    `films` replaces the films of edges by name (`EDGES`).
    """
    check(cup, serving)
    films = _checked(films or {})
    meridian = build_meridian(cup)
    mesh = build_mesh(meridian, fineness)
    conditions = Conditions(tuple(exchanges(cup, serving, mesh, films)))
    conduction = Conduction(mesh, properties(cup, mesh), conditions)
    drink = Drink(serving.drink.liquid, meridian, drink_surface(serving))
    system = System([Section(conduction)], drink, ambient_at(serving, 0.0))
    level = meridian.level(fill_volume(cup, serving))
    wall = np.full(mesh.size, serving.start_temperature)
    start = system.state([wall], drink.start(serving.drink.temperature, level))
    return Problem(cup, serving, meridian, mesh, system, start)


def ambient_at(serving: Serving, time: float) -> Ambient:
    """The room from a time [s] on."""
    temperature = float(serving.room.temperature_at(time))
    return Ambient(temperature, float(vapour_pressure(temperature, serving.room.humidity)), PRESSURE)


def drink_surface(serving: Serving) -> Surface:
    """What the drink's surface exchanges."""
    return Surface(
        edges.surface_films(serving),
        edges.surroundings_of(serving, "surface"),
        edges.surface_closure(serving),
    )


# -- regions -------------------------------------------------------------------------------------------------


def properties(cup: Cup, mesh: SectionMesh) -> dict[str, Solid | GasLayer]:
    """Properties of each region of a cup's mesh."""
    given: dict[str, Solid | GasLayer] = {}
    for index, layer in enumerate(cup.layer):
        material = cup.material(layer.material)
        if material.kind == "gas":
            pressure = PRESSURE if layer.pressure is None else layer.pressure
            given[layer.name] = GasLayer(
                edges.gap_of(cup, index), _air(pressure), edges.gap_height(cup, index)
            )
        else:
            given[layer.name] = solid(material)
            given[f"{layer.name} pocket"] = GasLayer(_pocket(cup, index), _air(PRESSURE))
    if cup.base_disc is not None:
        given["base"] = solid(cup.material(cup.base_disc.material))
    return {name: given[name] for name in mesh.regions}


def solid(material: Material) -> Solid:
    """Conductivities and heat capacity of a solid."""
    return Solid(
        material.conductivity_through.value,
        material.conductivity_along.value,
        material.density.value * material.specific_heat.value,
    )


def _air(pressure: float) -> float:
    return float(air_density(GAS_TEMPERATURE, pressure)) * float(air_specific_heat(GAS_TEMPERATURE))


def _pocket(cup: Cup, index: int) -> Gap:
    """The air left where a solid layer ends under others: between its neighbours' faces."""
    emissivities = [edges.emissivity_of(cup, layer) for layer in cup.layer]
    return Gap(emissivities[max(index - 1, 0)], emissivities[min(index + 1, len(emissivities) - 1)])


# -- edges ---------------------------------------------------------------------------------------------------


def exchanges(cup: Cup, serving: Serving, mesh: SectionMesh, films: Overrides) -> list[Exchange]:
    """Heat exchange on all edges of a cup's mesh."""
    return [
        *_inside(cup, serving, mesh, films),
        *_outside(cup, serving, mesh, films),
        *_below(cup, serving, mesh, films),
        *_ends(serving, films),
    ]


def _inside(cup: Cup, serving: Serving, mesh: SectionMesh, films: Overrides) -> list[Exchange]:
    """Below the level to the drink, above it to the room."""
    around = _surroundings(serving, "dry", films)
    out = []
    wetted = _films(films, "wetted", TO_DRINK, lambda drink: edges.wetted_films(cup, serving, drink.level))
    for part, layer in _layers(cup, mesh, "inside"):
        emissivity = edges.emissivity_of(cup, layer)
        dry = _films(
            films,
            "dry",
            "dry wall",
            lambda drink, e=emissivity: edges.dry_films(cup, serving, drink.level, e),
        )
        out += [
            Exchange(part, wetted, _drink_temperature, _below_level, to_drink=True),
            Exchange(part, dry, around, _above_level),
        ]
    if cup.base_disc is not None:
        floor = _films(films, "wetted", TO_DRINK, edges.floor_films(cup, serving))
        dry = _films(films, "dry", "dry wall", edges.dry_films(cup, serving, cup.floor))
        out += [
            Exchange("floor", floor, _drink_temperature, _below_level, to_drink=True),
            Exchange("floor", dry, around, _above_level),
        ]
    return out


def _outside(cup: Cup, serving: Serving, mesh: SectionMesh, films: Overrides) -> list[Exchange]:
    around = _surroundings(serving, "outside", films)
    out = []
    for part, layer in _layers(cup, mesh, "outside"):
        standard = edges.outside_films(cup, serving, edges.emissivity_of(cup, layer))
        out.append(Exchange(part, _films(films, "outside", "outside", standard), around))
    return out


def _below(cup: Cup, serving: Serving, mesh: SectionMesh, films: Overrides) -> list[Exchange]:
    """Underside of the base; a film that is given acts on the inside of the skirt too, which is insulated
    otherwise."""
    standard = edges.underside_films(cup, serving)
    if not standard:
        return []
    around = _surroundings(serving, "underside", films)
    chosen = _films(films, "underside", "underside", standard)
    given = "underside" in films or edges.surroundings_of(serving, "underside") is not None
    parts = ["underside", "skirt"] if given and mesh.edges["skirt"].shape[1] else ["underside"]
    return [Exchange(part, chosen, around) for part in parts]


def _ends(serving: Serving, films: Overrides) -> list[Exchange]:
    out = []
    for edge in ("heel", "brim"):
        chosen = _films(films, edge, edge, edges.end_films(serving, edge))
        if chosen:
            out.append(Exchange(edge, chosen, _surroundings(serving, edge, films)))
    return out


def _films(films: Overrides, edge: str, name: str, standard: Any) -> Any:
    return {name: films[edge]} if edge in films else standard


def _surroundings(serving: Serving, edge: edges.EdgeName, films: Overrides) -> float | Callable[..., float]:
    fixed = None if edge in films else edges.surroundings_of(serving, edge)
    return _room_temperature if fixed is None else fixed


def _layers(cup: Cup, mesh: SectionMesh, edge: str) -> list[tuple[str, Any]]:
    """Parts of an edge by the layer whose face it is."""
    return [(f"{edge}.{layer.name}", layer) for layer in cup.layer if f"{edge}.{layer.name}" in mesh.edges]


def _room_temperature(height: Floats, time: float, drink: Lumped) -> float:
    return drink.ambient.temperature


def _drink_temperature(height: Floats, time: float, drink: Lumped) -> float:
    return drink.temperature


def _below_level(drink: Lumped, time: float) -> tuple[float, float]:
    return -np.inf, drink.level


def _above_level(drink: Lumped, time: float) -> tuple[float, float]:
    return drink.level, np.inf


def _checked(films: Overrides) -> Overrides:
    for name in films:
        if name not in EDGES:
            raise InputError(
                "films", name, f"no such edge{nearest(name, EDGES)}", f"one of: {', '.join(EDGES)}"
            )
    return films
