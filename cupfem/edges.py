"""The films on the edges of a cup in a serving: which correlation stands where, with which length.

The serving names a fixed film or a correlation for each edge; here it meets the cup's sizes and materials.
Each function answers films by the name under which the ledger keeps their heat. `surroundings_of` tells what
a fixed film leads to; without it the room, and for the wetted edges the drink.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from itertools import pairwise
from typing import ClassVar, Literal, Protocol

import numpy as np

from cupfem.cup import Cup, Layer
from cupfem.films import (
    DEFAULT_CLOSURE,
    STEFAN_BOLTZMANN,
    TABLE_RESISTANCE,
    CavityAir,
    Condensation,
    DrinkConvection,
    Film,
    FilmSum,
    FixedFilm,
    ForcedConvection,
    HeadspaceConvection,
    Hole,
    HorizontalPlate,
    MixedConvection,
    NaturalConvectionPlate,
    Radiation,
    RadiationTo,
    Recessed,
    Stirred,
    SurfaceClosure,
    TableContact,
    ThickTable,
    Values,
    closure,
    disk_length,
)
from cupfem.films.base import fourth_power_difference
from cupfem.gaps import Gap
from cupfem.serving import PRESSURE, NamedFilm, Serving, SurfaceFilm
from cupfem.serving import FixedFilm as FixedEntry

TO_DRINK = "wall to drink"
DRY_TO_HEADSPACE = "dry wall to headspace"
DRY_TO_DRINK = "dry wall to drink"
DRY_TO_LID = "dry wall to lid"
CONDENSATE = "condensation on dry wall"
INTERNAL = frozenset({TO_DRINK, DRY_TO_HEADSPACE, DRY_TO_DRINK, DRY_TO_LID, CONDENSATE})
"""Names of heat that stays within the cup, between wall, drink, headspace and lid."""
WATER_EMISSIVITY = 0.96  # Incropera et al., 6th ed. 2007, Table A.11, water at 300 K; from memory
LID_EMISSIVITY = 0.90  # of a lid given by its conductance alone: plastic or board; scoping value, no source
SHORTEST = 1e-3  # m; a shorter wetted or dry wall takes the film of this length

EdgeName = Literal["wetted", "dry", "surface", "outside", "underside", "heel", "brim"]
Films = dict[str, Film]


def surroundings_of(serving: Serving, edge: EdgeName) -> float | None:
    """Temperature that an edge's fixed film leads to [degC]; None: the room, or the drink where wetted."""
    entry = getattr(serving.films, edge)
    return entry.surroundings if isinstance(entry, FixedEntry) else None


def outside_films(cup: Cup, serving: Serving, emissivity: float | None = None) -> Films:
    """Films on the outside of the wall: mixed or natural convection, and radiation.

    The natural convection is that of the whole slant height; emissivity left out: that of the outermost layer
    at each height.
    """
    entry = serving.films.outside
    if not isinstance(entry, NamedFilm):
        return {"outside": FixedFilm(entry.coefficient)}
    radiation = wall_radiation(cup) if emissivity is None else Radiation(emissivity)
    return {"outside convection": outside_convection(cup, serving), "outside radiation": radiation}


def outside_convection(cup: Cup, serving: Serving) -> NaturalConvectionPlate | MixedConvection:
    """Natural convection on the outside, with the air stream of the room where there is one."""
    diameter = mean_outside_diameter(cup)
    length, lean = _along(cup, 0.0, cup.height), cup.half_taper_angle
    speed, pressure = serving.room.air_speed, serving.room.pressure
    entry = serving.films.outside
    local = isinstance(entry, NamedFilm) and entry.correlation.startswith("local")
    natural = NaturalConvectionPlate(length, lean=lean, diameter=diameter, local=local, pressure=pressure)
    return MixedConvection(natural, ForcedConvection(speed, diameter, pressure)) if speed else natural


def carrier_films(serving: Serving) -> Films:
    """Film between the outside of the wall and a carrier; none without one."""
    return {"carrier": FixedFilm(serving.carrier.coefficient)} if serving.carrier else {}


def wetted_films(cup: Cup, serving: Serving, level: float, stirred: bool = False) -> Films:
    """Film between wall and drink, for a level above the table [m]."""
    return _drink_films(serving, "wall", _along(cup, cup.floor, level), cup.half_taper_angle, stirred)


def floor_films(cup: Cup, serving: Serving, stirred: bool = False) -> Films:
    """Film between the upper face of the base and the drink."""
    return _drink_films(serving, "base", disk_length(2.0 * cup.inner_radius(cup.floor)), 0.0, stirred)


def dry_films(cup: Cup, serving: Serving, level: float, emissivity: float | None = None) -> Films:
    """Films on the inside of the wall above a level [m]: natural convection, radiation through the mouth.

    The mouth is black at the temperature of the room; what dry wall and drink exchange is left out, and so is
    what the wall reflects. Emissivity left out: that of the innermost layer at the brim.
    """
    entry = serving.films.dry
    if not isinstance(entry, NamedFilm):
        return {"dry wall": FixedFilm(entry.coefficient)}
    dry = max(cup.height - max(level, cup.floor), SHORTEST)
    if emissivity is None:
        emissivity = cup.emissivity(cup.stack(cup.height)[0], "inner")
    below, mouth = cup.inner_radius(cup.height - dry), cup.inner_radius(cup.height)
    share = emissivity * wall_to_mouth(below, mouth, dry)
    length = _along(cup, cup.height - dry, cup.height)
    plate = NaturalConvectionPlate(length, lean=cup.half_taper_angle, pressure=serving.room.pressure)
    return {"dry wall convection": plate, "dry wall radiation": Radiation(share)}


class UnderLid(Protocol):
    """What the dry wall sees under a lid: temperatures [degC], vapour pressure [Pa], level [m]."""

    @property
    def level(self) -> float: ...
    @property
    def present(self) -> bool: ...
    @property
    def temperature(self) -> float: ...
    @property
    def vapour_pressure(self) -> float: ...
    @property
    def lid(self) -> float: ...


def lidded_films(cup: Cup, serving: Serving, inside: UnderLid, emissivity: float) -> Films:
    """Films on the inside of the wall above the level under a lid: to the gas, with vapour that condenses,
    and radiation to drink and lid, each by its mean view factor. A fixed film stays as it is."""
    entry = serving.films.dry
    if not isinstance(entry, NamedFilm):
        return {"dry wall": FixedFilm(entry.coefficient)}
    dry = max(cup.height - max(inside.level, cup.floor), SHORTEST)
    below, mouth = cup.inner_radius(cup.height - dry), cup.inner_radius(cup.height)
    wall = (below + mouth) * math.hypot(dry, mouth - below)
    to_drink = (1.0 - disk_to_disk(below, mouth, dry)) * below * below / wall if inside.present else 0.0
    gas = HeadspaceConvection(
        _along(cup, cup.height - dry, cup.height),
        inside.vapour_pressure,
        serving.room.pressure,
        lean=cup.half_taper_angle,
    )
    drink = inside.temperature if inside.present else 0.0
    return {
        DRY_TO_HEADSPACE: gas,
        CONDENSATE: Condensation(gas),
        DRY_TO_DRINK: RadiationTo(emissivity * WATER_EMISSIVITY * to_drink, drink),
        DRY_TO_LID: RadiationTo(
            emissivity * lid_emissivity(cup, serving) * wall_to_mouth(below, mouth, dry), inside.lid
        ),
    }


def lid_emissivity(cup: Cup, serving: Serving) -> float:
    """Emissivity of a lid's faces [-]."""
    lid = serving.lid
    if lid is None or lid.conductance is not None:
        return LID_EMISSIVITY
    return cup.material(lid.material).emissivity.value


def lid_films(cup: Cup, serving: Serving) -> Films:
    """Films from the outer face of the lid to the room, on the area of the mouth."""
    lid, pressure = serving.lid, serving.room.pressure
    if lid is not None and lid.conductance is not None:
        return {"lid": FixedFilm(lid.conductance)}
    length = disk_length(2.0 * cup.inner_radius(cup.height))
    plate = HorizontalPlate(length, "up", pressure=pressure)
    return {"lid convection": plate, "lid radiation": Radiation(lid_emissivity(cup, serving))}


def lid_resistance(cup: Cup, serving: Serving) -> float:
    """Resistance through the lid [m2 K/W]; zero where its conductance counts it."""
    lid = serving.lid
    if lid is None or lid.conductance is not None:
        return 0.0
    return lid.thickness / cup.material(lid.material).conductivity_through.value


def lid_holes(serving: Serving) -> tuple[Hole, ...]:
    """Holes of the lid."""
    return tuple(Hole(area) for area in serving.lid.openings) if serving.lid else ()


def table_under(cup: Cup, serving: Serving, since: float = 0.0) -> float | ThickTable:
    """Resistance of the table [m2 K/W], or a thick table on which the cup stands since a time [s]."""
    table = serving.table
    if table.material is None:
        return TABLE_RESISTANCE if table.resistance is None else table.resistance
    found = cup.material(table.material)
    conductivity = found.conductivity_through.value
    heat_capacity = found.density.value * found.specific_heat.value
    return ThickTable(conductivity, conductivity / heat_capacity, cup.inner_radius(0.0), since)


def underside_films(cup: Cup, serving: Serving, on_table: bool = True, since: float = 0.0) -> Films:
    """Film below the base, on the table since a time [s] or in the air; none on an open tube."""
    base, entry = cup.base_disc, serving.films.underside
    if base is None:
        return {}
    if not isinstance(entry, NamedFilm):
        return {"underside": FixedFilm(entry.coefficient)}
    emissivity, pressure = cup.material(base.material).emissivity.value, serving.room.pressure
    if not on_table:
        length = disk_length(2.0 * cup.inner_radius(base.recess))
        plate = HorizontalPlate(length, "down", pressure=pressure)
        return {"underside": FilmSum((plate, Radiation(emissivity)))}
    table = table_under(cup, serving, since)
    return {"underside": CavityAir(base.recess, emissivity, table_resistance=table, pressure=pressure)}


def heel_films(cup: Cup, serving: Serving, on_table: bool = True, since: float = 0.0) -> Films:
    """Film on the wall's lower end; none where it is insulated or in the air."""
    entry = serving.films.heel
    if not isinstance(entry, NamedFilm):
        return {"heel": FixedFilm(entry.coefficient)}
    if entry.correlation == "insulated" or not on_table:
        return {}
    return {"heel": TableContact(table_under(cup, serving, since))}


def brim_films(serving: Serving) -> Films:
    """Film on the wall's upper end; none where it is insulated."""
    entry = serving.films.brim
    return {} if isinstance(entry, NamedFilm) else {"brim": FixedFilm(entry.coefficient)}


def surface_films(serving: Serving) -> Films:
    """Films on the drink's surface beside the closure: radiation, or one film that replaces all three."""
    entry = serving.films.surface
    if not isinstance(entry, NamedFilm):
        return {"surface": FixedFilm(entry.coefficient)}
    return {"surface radiation": Radiation(WATER_EMISSIVITY)}


def surface_closure(serving: Serving) -> SurfaceClosure | None:
    """Closure of evaporation and convection for a surface below a rim; None for a fixed film."""
    entry = serving.films.surface
    if not isinstance(entry, SurfaceFilm):
        return None
    return Recessed(closure(entry.correlation), entry.freeboard_factor, serving.drink.foam_factor)


def headspace_closure(serving: Serving) -> SurfaceClosure:
    """Closure from the surface to a headspace: no freeboard factor; for a fixed film, which no lid goes with,
    the default."""
    entry = serving.films.surface
    name = entry.correlation if isinstance(entry, SurfaceFilm) else DEFAULT_CLOSURE
    return Recessed(closure(name), 1.0, serving.drink.foam_factor)


def gap_of(cup: Cup, index: int, height: float | None = None, pressure: float = PRESSURE) -> Gap:
    """The gap that layer `index` of the cup, a gas, makes between its neighbours.

    Their emissivities are those at a height [m] on the inside face; left out: at the gap's middle. Its gas is
    at the pressure of the room [Pa] unless the cup gives one.
    """
    layer = cup.layer[index]
    low, high = cup.spans(layer)[0]
    stack = cup.stack(0.5 * (low + high) if height is None else height)
    place = stack.index(layer)
    return Gap(
        cup.emissivity(stack[place - 1], "outer"),
        cup.emissivity(stack[place + 1], "inner"),
        contact_fraction=layer.contact_fraction,
        contact_conductance=layer.contact_conductance,
        pressure=pressure if layer.pressure is None else layer.pressure,
    )


def gap_height(cup: Cup, index: int) -> float:
    """Height of a gap along the wall [m]; of hollow ridges that of one ring."""
    return _along(cup, *cup.spans(cup.layer[index])[0])


def emissivity_of(cup: Cup, layer: Layer, face: Literal["inner", "outer"] = "outer") -> float:
    """Emissivity of a layer's face [-]."""
    return cup.emissivity(layer, face)


def mean_outside_diameter(cup: Cup) -> float:
    """Mean over the height of the outer diameter [m]."""
    spans = [(layer.thickness, low, high) for layer in cup.layer for low, high in cup.spans(layer)]
    wall = sum(thickness * (high - low) for thickness, low, high in spans) / cup.height
    radius, height = cup.profile.radius, cup.profile.height
    inside = float(0.5 * (radius[1:] + radius[:-1]) @ np.diff(height)) / cup.height
    return 2.0 * (inside + wall * math.cos(cup.half_taper_angle))


@dataclass(frozen=True)
class RadiationByHeight:
    """Radiation from a wall whose outermost layer, and so whose emissivity, changes along the height.

    Parameters: ends: heights of the outer face at which it changes [m], rising; emissivities [-], one more,
    from the table up. Formula, range, reference: those of `Radiation`.
    """

    ends: tuple[float, ...]
    emissivities: tuple[float, ...]
    label: ClassVar[str] = Radiation.label
    source: ClassVar[str] = Radiation.source

    def heat_flux(self, surface: Values, surroundings: Values, height: Values, time: float) -> Values:
        emissivity = np.take(self.emissivities, np.searchsorted(self.ends, height))
        radiated: Values = STEFAN_BOLTZMANN * emissivity * fourth_power_difference(surface, surroundings)
        return radiated


def wall_radiation(cup: Cup) -> Radiation | RadiationByHeight:
    """Radiation of the outside, by the emissivity of the outermost layer at each height."""
    spans = [span for layer in cup.layer for span in cup.spans(layer)]
    ends = sorted({0.0, cup.height, *(end for span in spans for end in span)})
    middles = [0.5 * (low + high) for low, high in pairwise(ends)]
    found = [cup.emissivity(cup.stack(middle)[-1], "outer") for middle in middles]
    if len(set(found)) == 1:
        return Radiation(found[0])
    # a layer's end is cut along the normal, which meets the outer face lower on a wall that widens upwards
    lean = math.sin(cup.half_taper_angle)
    changes = [place for place in range(1, len(found)) if found[place] != found[place - 1]]
    outer = tuple(ends[place] - lean * cup.wall_thickness(ends[place]) for place in changes)
    return RadiationByHeight(outer, (found[0], *(found[place] for place in changes)))


def disk_to_disk(lower: float, upper: float, distance: float) -> float:
    """View factor from a disk to a coaxial parallel one [-].

    Formula: F = {S - [S^2 - 4 (r2/r1)^2]^(1/2)} / 2, S = 1 + (1 + R2^2)/R1^2, R = r / distance.
    Parameters: radii and distance [m]. Example: equal length and diameter: 0.17 (Incropera Ex. 13.1).
    Reference: Incropera et al., Fundamentals of Heat and Mass Transfer, 6th ed. 2007, Table 13.2.
    """
    s = 1.0 + (distance * distance + upper * upper) / (lower * lower)
    return 0.5 * (s - math.sqrt(max(s * s - 4.0 * (upper / lower) ** 2, 0.0)))


def wall_to_mouth(bottom: float, mouth: float, depth: float) -> float:
    """View factor from the inside of a wall to the mouth above it [-], mean over the wall.

    Summation and reciprocity (Incropera, 6th ed. 2007, Eqs. 13.3, 13.4) over mouth, wall and a bottom disk;
    radii of bottom and mouth, and depth [m]. Example: cylinder of equal length and diameter: 0.21 (Ex. 13.1).
    """
    seen = 1.0 - disk_to_disk(mouth, bottom, depth)
    wall = (bottom + mouth) * math.hypot(depth, mouth - bottom)
    return seen * mouth * mouth / wall


def _drink_films(
    serving: Serving, place: Literal["wall", "base"], length: float, lean: float, stirred: bool
) -> Films:
    entry = serving.films.wetted
    if not isinstance(entry, NamedFilm):
        return {TO_DRINK: FixedFilm(entry.coefficient)}
    still = DrinkConvection(serving.drink.liquid, length, place, lean)
    return {TO_DRINK: Stirred(still, serving.drink.stirred_coefficient) if stirred else still}


def _along(cup: Cup, low: float, high: float) -> float:
    """Length along the inside face between two heights [m], at least `SHORTEST`."""
    first, last = (float(length) for length in cup.profile.arc_length_at([low, high]))
    return max(last - first, SHORTEST)
