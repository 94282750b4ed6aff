"""Where on the wall heat does not run straight through: ends, the level, and how far they reach.

A disturbance dies out along the wall like that of a fin, exp(-x/l), l = sqrt(k t / (G_in + G_out)), with k t
the conduction along the solid layers between two gaps and G the conductances to what is on both sides (fin of
infinite length: Incropera, DeWitt, Bergman, Lavine, Fundamentals of Heat and Mass Transfer, 6th ed. 2007,
sec. 3.6, Table 3.4).
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from cupfem.breakdown.rungs import Ladder
from cupfem.cup import Cup
from cupfem.quantities import Units, format_quantity
from cupfem.run import Run

Floats = NDArray[np.float64]

FIN_LENGTHS = 3.0
"""An end is felt over so many fin lengths: exp(-3) is 5 %."""
LEAST_REACH = 2e-3
"""An end is felt at least so far [m]: layers outside it move in over some millimetres."""
LATERAL_SHARE = 0.05
"""Share of the heat flux from which on what flows along the wall counts."""
PROPERTIES = "closed-form properties"
"""Name of the flag of a wall of flutes or struts that the closed forms of its cells do not tell well."""
LEVEL = "level line"
"""Name of the flag of the drink's level."""
SAME = 1e-6  # m


@dataclass(frozen=True)
class End:
    """An end on the wall: its name and height on the inside face [m]."""

    name: str
    height: float


@dataclass(frozen=True)
class Flag:
    """Why a station is not one-dimensional, with its number and the limit that it passed.

    `end`: it is an end or the level, whose distance is the number and whose reach the limit [m].
    """

    name: str
    number: float
    limit: float
    text: str
    end: bool = False


def ends_of(run: Run) -> tuple[End, ...]:
    """Ends on the wall of a run, from the table up."""
    cup = run.cup
    found = [End("heel", 0.0), End("brim", cup.height)]
    if cup.base_disc is not None:
        found += [End("base joint", cup.base_disc.recess), End("base joint", cup.floor)]
    for layer in cup.layer:
        name = f"ridge ({layer.name})" if layer.ridge is not None else f"{layer.name} end"
        for low, high in cup.spans(layer):
            found += [End(name, end) for end in (low, high) if 0.0 < end < cup.height]
    if run.serving.carrier is not None:
        found.append(End("carrier", run.serving.carrier.height))
    return tuple(sorted(found, key=lambda end: end.height))


def fin_length(cup: Cup, rungs: Ladder) -> float:
    """Longest fin length [m] of the solids of a station, between its films and gaps."""
    return max(math.sqrt(along / losses) for along, losses in _plies(cup, rungs))


def _plies(cup: Cup, rungs: Ladder) -> Iterator[tuple[float, float]]:
    """k t along the solids between two resistances [W/K] and the conductances on both sides [W/(m2 K)]."""
    with np.errstate(divide="ignore"):
        conductance = 1.0 / rungs.network.resistance
    materials = {layer.name: cup.layer_material(layer) for layer in cup.layer}
    along, inside = 0.0, float(conductance[0])
    for layer, across in zip(rungs.station.layers, conductance[1:-1], strict=True):
        if layer.gap is None and layer.thickness > 0.0:
            along += materials[layer.name].conductivity_along.value * layer.thickness
        elif along > 0.0:
            yield along, inside + float(across)
            along, inside = 0.0, float(across)
    yield along, inside + float(conductance[-1])


def flags_at(
    run: Run, rungs: Ladder, ends: tuple[End, ...], lateral: float, off: float, bound: float, units: Units
) -> tuple[Flag, ...]:
    """Flags of a station; empty where the wall is one-dimensional and its properties are right.

    `lateral`: share of what flows along the wall; `off`: largest |2-D minus 1-D| [K], flagged above `bound`.
    """
    height, reach = rungs.station.height, reach_of(run.cup, rungs)
    found = [*_near_ends(height, ends, reach, units), *_near_level(run, height, reach, units)]
    if lateral > LATERAL_SHARE:
        text = f"flows along the wall: {100 * lateral:.3g} % of what flows through"
        found.append(Flag("lateral flux", lateral, LATERAL_SHARE, text))
    if off > bound:
        found.append(_off(off, bound, bool(found)))
    return tuple(found)


def _off(off: float, bound: float, along: bool) -> Flag:
    """The difference as a flag; where nothing flows along the wall, its closed forms are to blame."""
    told = f"2-D minus 1-D reaches {off:.2g} K"
    if along:
        return Flag("2-D minus 1-D", off, bound, told)
    return Flag(PROPERTIES, off, bound, f"{told}, nothing flows along the wall: {PROPERTIES}")


def reach_of(cup: Cup, rungs: Ladder) -> float:
    """How far an end is felt along the wall [m]."""
    return max(FIN_LENGTHS * fin_length(cup, rungs), rungs.station.thickness, LEAST_REACH)


def _near_ends(height: float, ends: tuple[End, ...], reach: float, units: Units) -> list[Flag]:
    nearest: dict[str, float] = {}
    for end in ends:
        nearest[end.name] = min(abs(end.height - height), nearest.get(end.name, math.inf))
    return [
        Flag(name, away, reach, f"{_length(away, units)} away, felt over {_length(reach, units)}", end=True)
        for name, away in nearest.items()
        if away < reach
    ]


def _near_level(run: Run, height: float, reach: float, units: Units) -> list[Flag]:
    levels = run.series.drink_level[np.isfinite(run.series.drink_level)]
    away = level_distance(levels, height)
    if away >= reach:
        return []
    crossed = np.flatnonzero(levels < height - SAME)
    if levels[0] > height + reach and len(crossed):
        when = f"passed by the level after {run.time[crossed[0]]:.3g} s"
    else:
        when = f"{_length(away, units)} away"
    return [Flag(LEVEL, away, reach, f"{when}, felt over {_length(reach, units)}", end=True)]


def level_distance(levels: Floats, height: float) -> float:
    """Least distance [m] of a height from the levels `[t]` [m], which move continuously."""
    if not len(levels):
        return math.inf
    return max(float(levels.min()) - height, height - float(levels.max()), 0.0)


def _length(value: float, units: Units) -> str:
    return format_quantity(value, "length", units, digits=2)


def nearest_end(ends: tuple[End, ...], height: float) -> tuple[str, float]:
    """The nearest end and how far away it is [m]."""
    end = min(ends, key=lambda each: abs(each.height - height))
    return end.name, abs(end.height - height)


def marks(run: Run) -> Mapping[str, Floats]:
    """Heights of the ends [m] by name, for a map."""
    out: dict[str, list[float]] = {}
    for end in ends_of(run):
        out.setdefault(end.name, []).append(end.height)
    return {name: np.array(heights) for name, heights in out.items()}
