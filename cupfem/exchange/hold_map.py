"""`hold.csv` and `hold.json`: the map of hold times, and what follows from it."""

from __future__ import annotations

import csv
import io
from typing import Any

import numpy as np

from cupfem.exchange.summary import json_text, rounded
from cupfem.run import CAUTION
from cupfem.touch.holding import Hold

HEADS = (
    "pick_up_s",
    "height_mm",
    "hold_time_s",
    "hold_time_thick_skin_s",
    "injury_time_s",
    "at_least_s",
    "decided_by",
    "decided_by_thick_skin",
    "section_solve",
)


def hold_csv(hold: Hold) -> str:
    """One row for each pick-up and height; a time is empty where it was not reached within `at_least_s`."""
    text = io.StringIO(newline="")
    table = csv.writer(text, lineterminator="\n")
    table.writerow(HEADS)
    times = hold.times
    for p, pick_up in enumerate(hold.pick_ups):
        for h, height in enumerate(hold.heights):
            found = (times.thin[p, h], times.thick[p, h], times.injury[p, h], times.at_least[p, h])
            cells = [_cell(float(value)) for value in (pick_up, 1e3 * height, *found)]
            words = (times.thin_decided[p, h], times.thick_decided[p, h], int(hold.solved[h]))
            table.writerow([*cells, *words])
    return text.getvalue()


def hold_json(hold: Hold, asked: float) -> str:
    """What the map says for a hold of `asked` seconds, and its worst place."""
    return json_text(hold_told(hold, asked))


def hold_told(hold: Hold, asked: float) -> dict[str, Any]:
    """What `hold.json` holds; None where no height, or no pick-up, is meant."""
    bands = hold.band_not_held(asked)
    return {
        "asked_s": asked,
        "band_that_cannot_be_held": [
            {"pick_up_s": float(pick_up), "from_mm": _mm(band, 1), "to_mm": _mm(band, 2)}
            for pick_up, band in zip(hold.pick_ups, bands, strict=True)
        ],
        "first_comfortable_moment": [
            {"height_mm": 1e3 * float(height), "pick_up_s": moment}
            for height, moment in zip(hold.heights, hold.first_comfortable(asked), strict=True)
        ],
        "worst": hold.figures().figures(),
        "caution": CAUTION,
    }


def _mm(band: tuple[float, float, float] | None, place: int) -> float | None:
    return None if band is None else 1e3 * band[place]


def _cell(value: float) -> str:
    return f"{rounded(value):g}" if np.isfinite(value) else ""
