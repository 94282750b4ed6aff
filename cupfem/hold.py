"""Where and how long a cup can be held, as one call."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from cupfem.cup import Cup
from cupfem.errors import InputError
from cupfem.pour import pour
from cupfem.quantities import parse_quantity
from cupfem.run import Run
from cupfem.serving import Pad, Serving
from cupfem.touch.holding import DEFAULT_PAD, SECTIONS, Hold, default_heights, default_pick_ups, hold_map

Floats = NDArray[np.float64]

__all__ = ["Hold", "hold"]


def hold(
    run_or_cup: Run | Cup,
    serving: Serving | None = None,
    *,
    heights: Sequence[str] | None = None,
    pick_ups: Sequence[str] | None = None,
    longest: str = "5 min",
    pad: Pad | None = None,
    sections: int = SECTIONS,
) -> Hold:
    """How long a cup can be held, over heights and pick-ups.

    Parameters
    ----------
    run_or_cup:
        A run, or a cup that is poured first, with `serving`.
    heights, pick_ups:
        Text with units, such as ["45 mm", "60 mm"] and ["30 s", "2 min"]; left out: 40 heights over the whole
        wall, and pick-ups from 5 s on.
    longest:
        Longest hold that is tried.
    pad:
        The finger: width, skin, contact conductance, crush of gaps; its height and times do not count.
    sections:
        Most section solves; the rest of the map is scaled from them.

    Raises
    ------
    InputError
        For a height beside the wall, a pick-up outside the serving, or a quantity without its unit.
    """
    if isinstance(run_or_cup, Run):
        if serving is not None:
            raise InputError(
                "serving", None, "given together with a run, which has its own", "pass the cup instead"
            )
        run = run_or_cup
    else:
        run = pour(run_or_cup, serving, companion=False)
    pad = pad or DEFAULT_PAD
    return hold_map(
        run,
        default_heights(run, pad.width) if heights is None else _numbers("heights", heights, "length"),
        default_pick_ups(run.serving.duration)
        if pick_ups is None
        else _numbers("pick_ups", pick_ups, "time"),
        pad=pad,
        longest=_number("longest", longest, "time"),
        sections=sections,
    )


def _numbers(what: str, texts: Sequence[str], dimension: str) -> Floats:
    if isinstance(texts, str) or not len(texts):
        raise InputError(what, texts, "not a list of quantities", 'write for example ["45 mm", "60 mm"]')
    return np.array([_number(what, text, dimension) for text in texts])


def _number(what: str, text: object, dimension: str) -> float:
    if not isinstance(text, str):
        raise InputError(what, text, "no unit", 'write text with a unit, as "45 mm" or "60 s"')
    try:
        return parse_quantity(text, dimension)
    except InputError as error:
        raise InputError(what, error.value, error.why, error.instead) from None
