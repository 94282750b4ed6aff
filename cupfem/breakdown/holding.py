"""Hold times by rung: the finger's columns on a run in which the wall and the drink are those of a rung."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from cupfem.breakdown.rungs import Ladder
from cupfem.estimates import SKIN_EFFUSIVITY, HalfSpace, contact_temperature, effusivity_of, touched_surface
from cupfem.problem import Problem
from cupfem.run import Run
from cupfem.serving import Pad
from cupfem.skin import PAIN, get_skin
from cupfem.touch.contact import touch
from cupfem.touch.criteria import first_time, judge
from cupfem.touch.finger import contact_conductance, resting_profile

Floats = NDArray[np.float64]

LONGEST = 300.0
"""Longest hold that is tried [s]."""
FINGER = Pad(height="50 mm")
"""The finger: its skin; height and times do not count."""
APART = 1e-7  # m; a column of its own at each station, twice


@dataclass(frozen=True, eq=False)
class Holds:
    """Hold times at stations `[h]` [s] for thin and thick skin, infinite where not reached.

    NaN below the floor.
    """

    thin: Floats
    thick: Floats


def hold_times(run: Run, heights: Floats, pick_up: float, problem: Problem) -> Holds:
    """Hold times of a run at heights [m], picked up at a time [s], by columns."""
    thin, thick = np.full((2, len(heights)), np.nan)
    beside = (heights >= run.meridian.floor) & (heights <= run.meridian.height)
    if beside.any():
        longest = min(LONGEST, run.serving.duration - pick_up)
        skin = get_skin(FINGER.skin)
        felt = touch(run, heights[beside], np.array([pick_up]), longest, skin=skin, problem=problem)
        times = judge(felt)
        thin[beside], thick[beside] = times.thin[0], times.thick[0]
    return Holds(thin, thick)


def as_estimated(run: Run, heights: Floats, outer: Floats, inner: Floats, drink: Floats) -> Run:
    """The run with faces `[t, h]` and drink `[t]` [degC] of an estimate at heights `[h]`."""
    states = run.drink_states.copy()
    enthalpy = run.serving.drink.liquid.enthalpy
    states[:, 1] = states[:, 0] * np.asarray(enthalpy(drink))
    beside = np.concatenate([heights, heights[-1:] + APART])
    faces = replace(run.faces, outer_height=beside, inner_height=beside)
    series = replace(
        run.series,
        outer_temperature=np.hstack([outer, outer[:, -1:]]),
        inner_temperature=np.hstack([inner, inner[:, -1:]]),
        drink_temperature=drink,
    )
    return replace(run, faces=faces, series=series, drink_states=states)


@dataclass(frozen=True, eq=False)
class FirstTouch:
    """Rung (f) at stations `[h]`: contact temperature [degC]; when the skin's surface reaches pain [s]."""

    contact: Floats
    hold: Floats


def first_touch(run: Run, rungs: Sequence[Ladder], pick_up: float) -> FirstTouch:
    """Two half-spaces that meet, the wall at the outer face of the radial estimate at the pick-up [s]."""
    room = np.array([float(run.serving.room.temperature_at(pick_up))])
    skin = HalfSpace(SKIN_EFFUSIVITY, float(resting_profile(get_skin(FINGER.skin), room)[0, 0]))
    times = np.geomspace(1e-3, min(LONGEST, run.serving.duration - pick_up), 200)
    contact, hold = [], []
    for each in rungs:
        material = run.meridian.outer_layer_at(each.station.height).material
        wall = HalfSpace(effusivity_of(material), float(np.interp(pick_up, run.time, each.outer["d"])))
        contact.append(contact_temperature(skin, wall))
        surface = touched_surface(times, skin, wall, contact_conductance(material))
        hold.append(float(first_time(times, surface[:, None], PAIN)[0]))
    return FirstTouch(np.array(contact), np.array(hold))
