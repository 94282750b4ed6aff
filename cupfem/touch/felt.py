"""What a pad of a run felt, in the form that the criteria judge; and where it was worst."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from cupfem.run import PadField, Run
from cupfem.skin import THICK_DEPTH, THIN_DEPTH, damage, get_skin
from cupfem.touch.contact import Contact
from cupfem.touch.criteria import HoldTimes, judge
from cupfem.touch.finger import contact_conductance, skin_nodes
from cupfem.touch.wall import free_outer

Floats = NDArray[np.float64]

NEAR_RIM = 1.5e-3
"""Within this distance of a pad's rim [m] its heat flow is not one-dimensional."""


def felt(run: Run, field: PadField) -> Contact:
    """The places along a pad as columns of a `Contact`: one pick-up, heights `[q]`."""
    skin = get_skin(field.pad.skin)
    pick_up = np.array([field.pad.pick_up])
    layers = [run.meridian.outer_layer_at(float(height)) for height in field.heights]
    by_class = np.array([contact_conductance(layer.material) for layer in layers])
    thin = field.skin[:, :, _index(field, THIN_DEPTH)]
    free = free_outer(run, field.heights, field.pad.pick_up + field.time)
    return Contact(
        heights=field.heights,
        pick_ups=pick_up,
        time=field.time,
        thin=thin[:, None, :],
        thick=field.skin[:, None, :, _index(field, THICK_DEPTH)],
        surface=field.skin[:, None, :, 0],
        wall=field.wall[:, None, :],
        free=free[:, None, :],
        damage=damage(field.time, thin)[:, None, :],
        possible=np.array([field.time[-1]]),
        classes=tuple(layer.material.surface_class for layer in layers),
        conductance=by_class if field.pad.contact is None else np.full(len(layers), field.pad.contact),
        skin=skin,
        skins=_at_depths(field, skin_nodes(skin)),
        room=np.full(len(layers), float(run.serving.room.temperature_at(field.pad.pick_up))),
    )


def _index(field: PadField, depth: float) -> int:
    return int(np.argmin(np.abs(field.depths - depth)))


def _at_depths(field: PadField, depths: Floats) -> Floats:
    """`[t, q, n]` at other depths [m], linear in between."""
    place = np.clip(np.searchsorted(field.depths, depths) - 1, 0, len(field.depths) - 2)
    share = (depths - field.depths[place]) / (field.depths[place + 1] - field.depths[place])
    return np.asarray((1.0 - share) * field.skin[:, :, place] + share * field.skin[:, :, place + 1])


@dataclass(frozen=True)
class PadVerdict:
    """Hold times of a pad [s], infinite where not reached within `at_least`; where and by what.

    `middle` and `middle_thick` are those at the pad's middle, the others at its hottest point.
    """

    thin: float
    thick: float
    injury: float
    at_least: float
    thin_decided: str
    thick_decided: str
    height: float
    place: str
    middle: float
    middle_thick: float


def pad_verdict(run: Run, field: PadField) -> PadVerdict:
    """The verdict on a pad of a run: the earliest over all its places."""
    times = judge(felt(run, field))
    thin, thick = (int(np.argmin(each[0])) for each in (times.thin, times.thick))
    middle = int(np.argmin(np.abs(field.heights - field.pad.height)))
    height = float(field.heights[thin if np.isfinite(times.thin[0, thin]) else hottest(field)])
    return PadVerdict(
        thin=float(times.thin[0, thin]),
        thick=float(times.thick[0, thick]),
        injury=float(times.injury.min()),
        at_least=float(times.at_least[0, 0]),
        thin_decided=str(times.thin_decided[0, thin]),
        thick_decided=str(times.thick_decided[0, thick]),
        height=height,
        place=place_name(field, height),
        middle=float(times.thin[0, middle]),
        middle_thick=float(times.thick[0, middle]),
    )


def hottest(field: PadField) -> int:
    """Place whose skin at 0.1 mm gets hottest."""
    return int(np.argmax(field.skin[:, :, _index(field, THIN_DEPTH)].max(axis=0)))


def place_name(field: PadField, height: float) -> str:
    """Where a height lies on a pad: its rim or within."""
    from_rim = min(height - field.heights[0], field.heights[-1] - height)
    return "pad rim" if from_rim < NEAR_RIM else "within the pad"


def times_of(run: Run, field: PadField) -> HoldTimes:
    """Hold times of all places of a pad, `[1, q]`."""
    return judge(felt(run, field))
