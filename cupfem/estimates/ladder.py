"""The slab estimate of a station: effective properties, the network's outer coefficient, and the series."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from cupfem.estimates.effective import Effective, effective
from cupfem.estimates.network import steady
from cupfem.estimates.slab import Heated, time_to
from cupfem.estimates.station import Station


@dataclass(frozen=True)
class SlabEstimate:
    """A station as one slab: the series, effective properties, and the constant drink and room [degC]."""

    slab: Heated
    wall: Effective
    drink: float
    room: float

    def fourier(self, times: ArrayLike) -> NDArray[np.float64]:
        """Fourier number at times [s]."""
        return np.asarray(times, dtype=float) / self.wall.time_scale

    def outside(self, times: ArrayLike, terms: int | None = None) -> NDArray[np.float64]:
        """Temperature of the outer face at times [s] [degC]; `terms` = 1 for one term."""
        return self.room + (self.drink - self.room) * self.slab.temperature(self.fourier(times), 1.0, terms)

    def outer_heat_flux(self, times: ArrayLike, terms: int | None = None) -> NDArray[np.float64]:
        """Heat flux that leaves the outer face at times [s] [W/m2]."""
        scale = self.wall.conductance * (self.drink - self.room)
        return scale * self.slab.outer_heat_flux(self.fourier(times), terms)

    def time_to(self, target: float, terms: int | None = None) -> float:
        """Time [s] at which the outer face reaches a target [degC]; infinite if it never does."""
        return time_to(self.slab, target, self.drink, self.room, self.wall.time_scale, terms)


def slab_estimate(station: Station, inner_film: bool = False, drink: float | None = None) -> SlabEstimate:
    """The slab of a station: constant drink and room, films and gaps as they are in the steady state.

    Without `inner_film` the inner face takes the temperature of the drink at once, as in most hand estimates.
    """
    inside = station.inside if drink is None else drink
    network = steady(station, inside, plane=True)
    wall = effective(station, network.temperature.tolist())
    inner = network.inner_coefficient / wall.conductance if inner_film else math.inf
    start = (station.start_temperature - station.outside) / (inside - station.outside)
    slab = Heated(network.outer_coefficient / wall.conductance, inner, start)
    return SlabEstimate(slab, wall, inside, station.outside)
