"""The short verdict of a run: the serving's own pads, or the worst of the grip band."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from cupfem.run import HoldFigures, Run
from cupfem.touch.felt import felt, pad_verdict
from cupfem.touch.holding import DEFAULT_PAD, LONGEST, fitting, hold_map

GRIP_BAND = (0.45, 0.72)
"""Where a cup is gripped, as a share of its height: about 0.5 to 0.67 (habit, from memory), and two thirds in
the usual test of stiffness."""
VERDICT_HEIGHTS, VERDICT_PICK_UPS = 5, (10.0, 30.0, 60.0, 120.0, 240.0)
"""Heights of the grip band and pick-ups [s] of the short verdict."""


def grip_band(run: Run) -> tuple[float, float]:
    """Heights between which a cup is gripped [m]: the target's, or the usual band."""
    target = run.serving.target
    if target is not None and target.between is not None:
        return target.between
    low, high = (share * run.meridian.height for share in GRIP_BAND)
    return max(low, run.meridian.floor), high


def verdict(run: Run, coarse: Run | None = None) -> HoldFigures:
    """The short verdict: the serving's own pads; without them, or with a target, the grip band.

    `coarse` is a coarser run of the same, on which the section solve is done.
    """
    target = run.serving.target
    asked = None if target is None else target.hold_time
    if not run.pads:
        return _of_band(run, coarse, asked or 0.0)
    return _of_pads(run) if asked is None else _worst(_of_pads(run), _of_band(run, coarse, asked))


def _worst(one: HoldFigures, other: HoldFigures) -> HoldFigures:
    """The figures of the shorter time, with the shorter of the others."""
    first, second = sorted((one, other), key=lambda each: (each.thin, -each.at_least))
    thick = min((first, second), key=lambda each: (each.thick, -each.thick_at_least))
    injury = min((first, second), key=lambda each: (each.injury, -each.injury_at_least))
    return replace(
        first,
        thick=thick.thick,
        thick_at_least=thick.thick_at_least,
        thick_decided=thick.thick_decided,
        injury=injury.injury,
        injury_at_least=injury.injury_at_least,
        low=min(one.low, other.low),
        high=max(one.high, other.high),
    )


def _of_band(run: Run, coarse: Run | None, asked: float) -> HoldFigures:
    """The worst of the grip band and of a few pick-ups, from which a hold of `asked` [s] ends in time."""
    duration = run.serving.duration
    last = max(min(duration - asked, 0.8 * duration), 0.5 * duration)
    pick_ups = np.array([time for time in VERDICT_PICK_UPS if time <= last])
    pick_ups = pick_ups if len(pick_ups) else np.array([0.5 * duration])
    heights = np.clip(np.linspace(*grip_band(run), VERDICT_HEIGHTS), *fitting(run, DEFAULT_PAD.width))
    longest = max(LONGEST, 1.05 * asked)
    return hold_map(coarse or run, heights, pick_ups, longest=longest, sections=1).figures()


def _of_pads(run: Run) -> HoldFigures:
    """The worst of a run's own pads."""
    told = [(pad_verdict(run, field), field) for field in run.pads]
    thin, field = min(told, key=lambda each: (each[0].thin, -each[0].at_least))
    thick = min((each for each, _ in told), key=lambda each: (each.thick, -each.at_least))
    injury = min((each for each, _ in told), key=lambda each: (each.injury, -each.at_least))
    contact = felt(run, field)
    place = int(np.argmin(np.abs(field.heights - thin.height)))
    return HoldFigures(
        thin=thin.thin,
        thick=thick.thick,
        injury=injury.injury,
        at_least=thin.at_least,
        thick_at_least=thick.at_least,
        injury_at_least=injury.at_least,
        thin_decided=thin.thin_decided,
        thick_decided=thick.thick_decided,
        height=thin.height,
        radius=float(run.meridian.outer_radius_at(thin.height)),
        layer=run.meridian.outer_layer_at(thin.height).name,
        place=thin.place,
        pick_up=field.pad.pick_up,
        low=min(float(field.heights[0]) for field in run.pads),
        high=max(float(field.heights[-1]) for field in run.pads),
        skin=field.pad.skin,
        conductance=float(contact.conductance[place]),
    )
