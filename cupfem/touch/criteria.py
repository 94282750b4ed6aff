"""From what fingers felt to how long they can stay: the earliest of pain, injury and published threshold.

Pain is `PAIN` at the base of the epidermis, at 0.1 mm for thin and 0.5 mm for thick skin; injury is told on
its own because pain at 0.1 mm always comes first. Array shapes: t times, p pick-ups, h heights; times not
reached are infinite here.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from cupfem.skin import PAIN, surface_threshold
from cupfem.touch.contact import Contact, injury_times

Floats = NDArray[np.float64]

PAIN_WORD, INJURY_WORD, THRESHOLD_WORD = "pain", "injury", "surface threshold"
NOT_REACHED = "not reached"


@dataclass(frozen=True, eq=False)
class HoldTimes:
    """Hold times `[p, h]` [s], infinite where not reached within `at_least` `[p, h]`, and what decided."""

    thin: Floats
    thick: Floats
    injury: Floats
    at_least: Floats
    thin_decided: NDArray[np.str_]
    thick_decided: NDArray[np.str_]


def judge(contact: Contact) -> HoldTimes:
    """Hold times of a contact."""
    possible = np.broadcast_to(contact.possible[:, None], contact.thin.shape[1:])
    at_least = np.minimum(possible, contact.time[-1])
    threshold = threshold_time(contact)
    injury = _within(injury_times(contact), at_least)
    thin = first_time(contact.time, contact.thin, PAIN)
    thick = first_time(contact.time, contact.thick, PAIN)
    thin, thin_word = _earliest(at_least, thin, injury, threshold)
    thick, thick_word = _earliest(at_least, thick, injury, threshold)
    return HoldTimes(thin, thick, injury, at_least, thin_word, thick_word)


def first_time(time: Floats, values: Floats, limit: Floats | float) -> Floats:
    """First time [s] at which `[t, ...]` reaches a limit (`[t, ...]` or one), linear in between."""
    above = np.asarray(values - limit)
    reached = above >= 0.0
    first = np.argmax(reached, axis=0)
    before = np.maximum(first - 1, 0)
    low, high = (np.take_along_axis(above, place[None], axis=0)[0] for place in (before, first))
    with np.errstate(divide="ignore", invalid="ignore"):
        share = np.where(high > low, -low / (high - low), 0.0)
    found = time[before] + np.clip(share, 0.0, 1.0) * (time[first] - time[before])
    return np.where(reached.any(axis=0), found, np.inf)


def threshold_time(contact: Contact) -> Floats:
    """Longest contact `[p, h]` [s] for which the free wall stays below the published threshold.

    Zero where the wall is hotter than the threshold of one second: nothing shorter is judged.
    """
    limits = np.array([surface_threshold(name, contact.time) for name in contact.classes]).T
    return first_time(contact.time, contact.free, limits[:, None, :])


def _within(times: Floats, at_least: Floats) -> Floats:
    return np.where(times <= at_least, times, np.inf)


def _earliest(
    at_least: Floats, pain: Floats, injury: Floats, threshold: Floats
) -> tuple[Floats, NDArray[np.str_]]:
    candidates = np.array([_within(each, at_least) for each in (pain, injury, threshold)])
    words = np.array([PAIN_WORD, INJURY_WORD, THRESHOLD_WORD, NOT_REACHED])
    earliest = candidates.min(axis=0)
    decided = np.where(np.isfinite(earliest), np.argmin(candidates, axis=0), 3)
    return earliest, words[decided]
