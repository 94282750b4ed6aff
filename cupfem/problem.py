"""Cup and serving -> wall section, films, drink and start: the system that the march solves.

Which film stands on which edge is decided in `edges`; here it meets the mesh.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from functools import cache, lru_cache
from typing import Any

import numpy as np
from numpy.typing import NDArray

from cupfem import edges
from cupfem.conduction import Conditions, Conduction, Exchange, GasLayer, Solid, Window
from cupfem.cup import Cup, Layer
from cupfem.drink import Ambient, Drink, Headspace, Lid, Lumped, Surface
from cupfem.edges import TO_DRINK
from cupfem.errors import InputError, nearest
from cupfem.films import Film
from cupfem.fluids import STANDARD_PRESSURE, air_density, air_specific_heat, vapour_pressure
from cupfem.gaps import Gap
from cupfem.march import Section, System
from cupfem.materials import Material
from cupfem.meridian import Meridian
from cupfem.meridian import build as build_meridian
from cupfem.mesh import SectionMesh
from cupfem.mesh import build as build_mesh
from cupfem.serving import COINCIDENT, Serving, check, fill_volume
from cupfem.unit_cell import effective_layer

Floats = NDArray[np.float64]
Overrides = Mapping[str, Film]

EDGES = ("wetted", "dry", "outside", "underside", "heel", "brim")
KEPT = 8
"""Films of the last levels that are kept: matrix, loads and ledger ask for the same ones."""
FIRST_VOLUME = 10e-6
"""Of a pour that takes a while, what is there at time zero [m3]: there has to be a drink to begin with."""
TRACE_OF_AIR = 100.0
"""Pressure [Pa] below which a gap keeps the heat capacity of its air."""
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
    gaps: Mapping[str, GasLayer]

    def enter(self, time: float) -> None:
        """Set what is constant from a break on: room, lid, stirring, table, steady drinking and pouring."""
        self.system.ambient = ambient_at(self.serving, time)
        drink, serving = self.system.drink, self.serving
        assert drink is not None
        flows = [flow for flow, start, end in serving.steady_drinking() if _within(time, start, end)]
        self.system.drink = drink.with_flows(sum(flows), _pouring(self.cup, serving, time))

    def jump(self, state: Floats, time: float) -> tuple[Floats, dict[str, float]]:
        """The state after all that happens at a moment [s], sips first, and the heat that left with it [J].

        Enters that moment, and settles the headspace in it. Raises InputError for a refill that does not fit
        below the brim.
        """
        self.enter(time)
        drink, serving = self.system.drink, self.serving
        assert drink is not None
        heats = {"sips": 0.0, "refills": 0.0}
        state = state.copy()
        here = self.system.drink_state(state)
        for at, volume in serving.sips():
            if abs(at - time) < COINCIDENT:
                here[:], heat = drink.sip(here, volume)
                heats["sips"] += heat
        for at, volume, temperature in serving.refills():
            if abs(at - time) < COINCIDENT:
                here[:], heat = drink.refill(here, volume, temperature)
                heats["refills"] -= heat
        if any(abs(at - time) < COINCIDENT for at, _ in serving.lid_moves()):
            here[:] = drink.guessed(here, self.system.ambient)
        return self.system.consistent(state, time), {name: heat for name, heat in heats.items() if heat}


def build(cup: Cup, serving: Serving, fineness: float = 1.0, films: Overrides | None = None) -> Problem:
    """Mesh the cup and put the serving's films on its edges.

    `films` replaces the films of edges by name (`EDGES`).
    """
    check(cup, serving)
    films = _checked(films or {})
    meridian = build_meridian(cup)
    mesh = build_mesh(meridian, fineness)
    headspace = headspace_of(cup, serving)
    conditions = Conditions(tuple(exchanges(cup, serving, mesh, films, headspace)))
    given = properties(cup, mesh, serving.room.pressure)
    conduction = Conduction(mesh, given, conditions)
    drink = Drink(serving.drink.liquid, meridian, drink_surface(serving), headspace=headspace)
    ambient = ambient_at(serving, 0.0)
    system = System([Section(conduction)], drink, ambient)
    wall = np.full(mesh.size, serving.start_temperature)
    start = system.state(
        [wall], drink.start(serving.drink.temperature, _first_level(meridian, serving), ambient)
    )
    gaps = {name: region for name, region in given.items() if isinstance(region, GasLayer)}
    return Problem(cup, serving, meridian, mesh, system, system.consistent(start, 0.0), gaps)


def _first_level(meridian: Meridian, serving: Serving) -> float:
    """Level [m] at time zero: the whole fill, or the first of a pour that takes a while."""
    volume = fill_volume(meridian, serving)
    return meridian.level(min(FIRST_VOLUME, 0.1 * volume) if serving.drink.pour else volume)


def _pouring(cup: Cup, serving: Serving, time: float) -> tuple[float, float]:
    """Volume flow [m3/s] and temperature [degC] of the pour at a time [s]."""
    duration, volume = serving.drink.pour, fill_volume(cup, serving)
    if duration is None or not _within(time, 0.0, duration):
        return 0.0, serving.drink.temperature
    return (volume - min(FIRST_VOLUME, 0.1 * volume)) / duration, serving.drink.temperature


def _within(time: float, start: float, end: float) -> bool:
    return start - COINCIDENT <= time < end - COINCIDENT


def ambient_at(serving: Serving, time: float) -> Ambient:
    """Room and circumstances from a time [s] on."""
    temperature = float(serving.room.temperature_at(time))
    since, place = serving.stand_at(time)
    return Ambient(
        temperature,
        float(vapour_pressure(temperature, serving.room.humidity)),
        serving.room.pressure,
        serving.lid_at(time),
        serving.stirred_at(time),
        place == "table",
        since,
    )


def headspace_of(cup: Cup, serving: Serving) -> Headspace | None:
    """The headspace of a serving that has a lid."""
    if serving.lid is None:
        return None
    lid = Lid(
        edges.lid_films(cup, serving),
        edges.lid_resistance(cup, serving),
        edges.lid_emissivity(cup, serving),
        edges.lid_holes(serving),
        float(np.pi * cup.inner_radius(cup.height) ** 2),
        cup.height,
    )
    return Headspace(serving.drink.liquid, edges.headspace_closure(serving), lid, edges.WATER_EMISSIVITY)


def drink_surface(serving: Serving) -> Surface:
    """What the drink's surface exchanges."""
    return Surface(
        edges.surface_films(serving),
        edges.surroundings_of(serving, "surface"),
        edges.surface_closure(serving),
    )


# -- regions -------------------------------------------------------------------------------------------------


def properties(
    cup: Cup, mesh: SectionMesh, pressure: float = STANDARD_PRESSURE
) -> dict[str, Solid | GasLayer]:
    """Properties of each region of a cup's mesh, in a room of a pressure [Pa]."""
    given: dict[str, Solid | GasLayer] = {}
    for index, layer in enumerate(cup.layer):
        material = cup.material(layer.material)
        if material.kind == "gas":
            gap = edges.gap_of(cup, index, pressure=pressure)
            given[layer.name] = GasLayer(gap, _air(gap.pressure), edges.gap_height(cup, index))
        else:
            cells = layer.flute is not None or layer.strut is not None
            given[layer.name] = repeated(cup, layer) if cells else solid(material)
            given[f"{layer.name} pocket"] = GasLayer(_pocket(cup, index), _air(pressure))
    if cup.base_disc is not None:
        given["base"] = solid(cup.material(cup.base_disc.material))
    return {name: given[name] for name in mesh.regions}


def repeated(cup: Cup, layer: Layer) -> Solid:
    """Conductivities and heat capacity of a layer of flutes or struts, from one of their cells."""
    found = effective_layer(cup, layer)
    return Solid(found.through, found.along, found.heat_capacity)


def solid(material: Material) -> Solid:
    """Conductivities and heat capacity of a solid."""
    return Solid(
        material.conductivity_through.value,
        material.conductivity_along.value,
        material.density.value * material.specific_heat.value,
    )


def _air(pressure: float) -> float:
    """Heat capacity of the gas in a gap [J/(m3 K)]; a trace of it in a vacuum keeps the matrix regular."""
    pressure = max(pressure, TRACE_OF_AIR)
    return float(air_density(GAS_TEMPERATURE, pressure)) * float(air_specific_heat(GAS_TEMPERATURE))


def _pocket(cup: Cup, index: int) -> Gap:
    """The air left where a solid layer ends under others: between its neighbours' faces."""
    inner, outer = cup.layer[max(index - 1, 0)], cup.layer[min(index + 1, len(cup.layer) - 1)]
    return Gap(cup.emissivity(inner, "outer"), cup.emissivity(outer, "inner"))


# -- edges ---------------------------------------------------------------------------------------------------


def exchanges(
    cup: Cup, serving: Serving, mesh: SectionMesh, films: Overrides, headspace: Headspace | None = None
) -> list[Exchange]:
    """Heat exchange on all edges of a cup's mesh."""
    return [
        *_inside(cup, serving, mesh, films, headspace),
        *_outside(cup, serving, mesh, films),
        *_below(cup, serving, mesh, films),
        *_ends(cup, serving, films),
    ]


def _inside(
    cup: Cup, serving: Serving, mesh: SectionMesh, films: Overrides, headspace: Headspace | None
) -> list[Exchange]:
    """Below the level to the drink, above it to the room or to the headspace."""
    made = lru_cache(maxsize=KEPT)(lambda level, stirred: edges.wetted_films(cup, serving, level, stirred))
    wetted = _films(films, "wetted", TO_DRINK, lambda drink: made(drink.level, drink.ambient.stirred))
    out = []
    for part, layer in _layers(cup, mesh, "inside"):
        out.append(Exchange(part, wetted, _drink_temperature, _below_level, to_drink=True))
        out.append(_dry(cup, serving, films, headspace, part, edges.emissivity_of(cup, layer)))
    if cup.base_disc is not None:
        on_floor = cache(lambda stirred: edges.floor_films(cup, serving, stirred))
        floor = _films(films, "wetted", TO_DRINK, lambda drink: on_floor(drink.ambient.stirred))
        emissivity = cup.material(cup.base_disc.material).emissivity.value
        out.append(Exchange("floor", floor, _drink_temperature, _below_level, to_drink=True))
        out.append(_dry(cup, serving, films, headspace, "floor", emissivity))
    return out


def _dry(
    cup: Cup, serving: Serving, films: Overrides, headspace: Headspace | None, part: str, emissivity: float
) -> Exchange:
    """A part of the inside above the level; under a lid it feeds drink, headspace and lid."""

    @lru_cache(maxsize=KEPT)
    def above(level: float) -> Mapping[str, Film]:
        return edges.dry_films(cup, serving, level, emissivity)

    @lru_cache(maxsize=KEPT)
    def chosen(drink: Lumped) -> Mapping[str, Film]:
        return edges.lidded_films(cup, serving, drink, emissivity) if drink.lidded else above(drink.level)

    around = _surroundings(serving, "dry", films)
    if "dry" in films or headspace is None or not callable(around):
        return Exchange(part, _films(films, "dry", "dry wall", chosen), around, _above_level)
    return Exchange(part, chosen, _gas_temperature, _above_level, feeds=headspace.feeds)


def _outside(cup: Cup, serving: Serving, mesh: SectionMesh, films: Overrides) -> list[Exchange]:
    around = _surroundings(serving, "outside", films)
    out = []
    for part, layer in _layers(cup, mesh, "outside"):
        standard = edges.outside_films(cup, serving, edges.emissivity_of(cup, layer))
        chosen = _films(films, "outside", "outside", standard)
        if serving.carrier is None:
            out.append(Exchange(part, chosen, around))
            continue
        end = serving.carrier.height
        held = edges.carrier_films(serving)
        out.append(Exchange(part, held, _room_temperature, _constant(-np.inf, end)))
        out.append(Exchange(part, chosen, around, _constant(end, np.inf)))
    return out


def _below(cup: Cup, serving: Serving, mesh: SectionMesh, films: Overrides) -> list[Exchange]:
    """Underside of the base; a film that is given acts on the inside of the skirt too, which is insulated
    otherwise."""
    if cup.base_disc is None:
        return []
    around = _surroundings(serving, "underside", films)
    chosen = _films(films, "underside", "underside", _standing(edges.underside_films, cup, serving))
    given = "underside" in films or edges.surroundings_of(serving, "underside") is not None
    parts = ["underside", "skirt"] if given and mesh.edges["skirt"].shape[1] else ["underside"]
    return [Exchange(part, chosen, around) for part in parts]


def _ends(cup: Cup, serving: Serving, films: Overrides) -> list[Exchange]:
    """Heel and brim where they are not insulated."""
    out = []
    if "heel" in films or edges.heel_films(cup, serving):
        chosen = _films(films, "heel", "heel", _standing(edges.heel_films, cup, serving))
        out.append(Exchange("heel", chosen, _surroundings(serving, "heel", films)))
    if "brim" in films or edges.brim_films(serving):
        chosen = _films(films, "brim", "brim", edges.brim_films(serving))
        out.append(Exchange("brim", chosen, _surroundings(serving, "brim", films)))
    return out


def _standing(make: Callable[..., edges.Films], cup: Cup, serving: Serving) -> Any:
    """Films of an edge that meets the table, made anew only where table or air changes."""
    made = cache(lambda on_table, since: make(cup, serving, on_table, since))
    return lambda drink: made(drink.ambient.on_table, drink.ambient.since)


def _constant(low: float, high: float) -> Window:
    return lambda drink, time: (low, high)


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


def _gas_temperature(height: Floats, time: float, drink: Lumped) -> float:
    return drink.headspace if drink.lidded else drink.ambient.temperature


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
