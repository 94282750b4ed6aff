"""|2-D minus 1-D| over height and time.

Array shapes: t times of the run's series, p heights.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from cupfem.breakdown.errors import SETTLED

Floats = NDArray[np.float64]

BOUNDS = (1.0, 2.0, 5.0)
"""Within which shares of wall and time are told [K]."""


@dataclass(frozen=True, eq=False)
class Map:
    """Field minus radial estimate, both behind the run's own drink: `difference` `[t, p]` [K] at heights [m].

    `solves`: heights at which the estimate was solved; it is interpolated between them.
    """

    times: Floats
    heights: Floats
    difference: Floats
    solves: int

    def within(self, bound: float) -> float:
        """Share of wall and time whose |2-D minus 1-D| is within a bound [K]."""
        inside = np.abs(self.difference) <= bound
        return float(self._time_shares @ inside @ self._height_shares)

    def wall_within(self, bound: float) -> float:
        """Share of the wall's height that stays within a bound [K] from one second on."""
        late = self.times >= SETTLED
        return float((np.abs(self.difference[late]) <= bound).all(axis=0) @ self._height_shares)

    def worst_at(self, height: float) -> float:
        """Largest |2-D minus 1-D| [K] at a height [m] from one second on."""
        late = np.abs(self.difference[self.times >= SETTLED])
        return float(np.interp(height, self.heights, late.max(axis=0)))

    @cached_property
    def _time_shares(self) -> Floats:
        return _shares(self.times)

    @cached_property
    def _height_shares(self) -> Floats:
        return _shares(self.heights)


def _shares(places: Floats) -> Floats:
    """Trapezoidal weights that add to one."""
    steps = np.diff(places)
    weights = 0.5 * (np.append(steps, 0.0) + np.insert(steps, 0, 0.0))
    return np.asarray(weights / weights.sum())
