"""The films on the edges of a cup in a serving: which correlation stands where, with which length.

The serving names a fixed film or a correlation for each edge; here it meets the cup's sizes and materials.
Each function answers films by the name under which the ledger keeps their heat. `surroundings_of` tells what
a fixed film leads to; without it the room, and for the wetted edges the drink.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from itertools import pairwise
from typing import ClassVar, Literal

import numpy as np

from cupfem.cup import Cup, Layer
from cupfem.films import (
    STEFAN_BOLTZMANN,
    CavityAir,
    DrinkConvection,
    Film,
    FixedFilm,
    ForcedConvection,
    MixedConvection,
    NaturalConvectionPlate,
    Radiation,
    Recessed,
    SurfaceClosure,
    Values,
    closure,
    disk_length,
)
from cupfem.films.base import fourth_power_difference
from cupfem.gaps import Gap
from cupfem.serving import PRESSURE, NamedFilm, Serving
from cupfem.serving import FixedFilm as FixedEntry

TO_DRINK = "wall to drink"
WATER_EMISSIVITY = 0.96  # Incropera et al., 6th ed. 2007, Table A.11, water at 300 K; from memory
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
    natural = NaturalConvectionPlate(length, lean=lean, diameter=diameter, pressure=PRESSURE)
    speed = serving.room.air_speed
    return MixedConvection(natural, ForcedConvection(speed, diameter, PRESSURE)) if speed else natural


def wetted_films(cup: Cup, serving: Serving, level: float) -> Films:
    """Film between wall and drink, for a level above the table [m]."""
    return _drink_films(serving, "wall", _along(cup, cup.floor, level), cup.half_taper_angle)


def floor_films(cup: Cup, serving: Serving) -> Films:
    """Film between the upper face of the base and the drink."""
    return _drink_films(serving, "base", disk_length(2.0 * cup.inner_radius(cup.floor)), 0.0)


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
    plate = NaturalConvectionPlate(length, lean=cup.half_taper_angle, pressure=PRESSURE)
    return {"dry wall convection": plate, "dry wall radiation": Radiation(share)}


def underside_films(cup: Cup, serving: Serving) -> Films:
    """Film below the base; none on an open tube."""
    base, entry = cup.base_disc, serving.films.underside
    if base is None:
        return {}
    if not isinstance(entry, NamedFilm):
        return {"underside": FixedFilm(entry.coefficient)}
    emissivity = cup.material(base.material).emissivity.value
    return {"underside": CavityAir(base.recess, base_emissivity=emissivity, pressure=PRESSURE)}


def end_films(serving: Serving, edge: Literal["heel", "brim"]) -> Films:
    """Film on the wall's lower or upper end; none where it is insulated."""
    entry = getattr(serving.films, edge)
    return {} if isinstance(entry, NamedFilm) else {edge: FixedFilm(entry.coefficient)}


def surface_films(serving: Serving) -> Films:
    """Films on the drink's surface beside the closure: radiation, or one film that replaces all three."""
    entry = serving.films.surface
    if not isinstance(entry, NamedFilm):
        return {"surface": FixedFilm(entry.coefficient)}
    return {"surface radiation": Radiation(WATER_EMISSIVITY)}


def surface_closure(serving: Serving) -> SurfaceClosure | None:
    """Closure of evaporation and convection for a surface below a rim; None for a fixed film."""
    entry = serving.films.surface
    return Recessed(closure(entry.correlation)) if isinstance(entry, NamedFilm) else None


def gap_of(cup: Cup, index: int, height: float | None = None) -> Gap:
    """The gap that layer `index` of the cup, a gas, makes between its neighbours.

    Their emissivities are those at a height [m] on the inside face; left out: at the gap's middle.
    """
    layer = cup.layer[index]
    low, high = cup.layer_range(layer)
    stack = cup.stack(0.5 * (low + high) if height is None else height)
    place = stack.index(layer)
    return Gap(
        cup.emissivity(stack[place - 1], "outer"),
        cup.emissivity(stack[place + 1], "inner"),
        contact_fraction=layer.contact_fraction,
        contact_conductance=layer.contact_conductance,
        pressure=PRESSURE if layer.pressure is None else layer.pressure,
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


def _drink_films(serving: Serving, place: Literal["wall", "base"], length: float, lean: float) -> Films:
    entry = serving.films.wetted
    if not isinstance(entry, NamedFilm):
        return {TO_DRINK: FixedFilm(entry.coefficient)}
    return {TO_DRINK: DrinkConvection(serving.drink.liquid, length, place, lean)}


def _along(cup: Cup, low: float, high: float) -> float:
    """Length along the inside face between two heights [m], at least `SHORTEST`."""
    first, last = cup.profile.arc_length_at([low, high]).tolist()
    return max(last - first, SHORTEST)
