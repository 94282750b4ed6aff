"""Two time scales: the wall's own and that of the cooling drink.

Lumped bodies: Incropera, DeWitt, Bergman, Lavine, Fundamentals of Heat and Mass Transfer, 6th ed. 2007, sec.
5.1. Two nodes: linear systems theory; common practice, no source for a cup.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.integrate import solve_ivp

from cupfem.cup import Cup
from cupfem.errors import InputError
from cupfem.estimates.course import wetted_station
from cupfem.estimates.drink import lumped_drink, volume_at, wetted_area
from cupfem.estimates.effective import effective
from cupfem.estimates.network import steady
from cupfem.estimates.station import Station
from cupfem.serving import Serving

Floats = NDArray[np.float64]

WALL_POINTS = 9  # temperatures of the drink at which the network is solved


def lumped_time(time_constant: float, start: float, end: float, surroundings: float) -> float:
    """Time [s] for a body of one temperature to go from start to end [degC]; infinite if it never does.

    t = tau ln[(start - surroundings) / (end - surroundings)], tau = C / (h A) [s]; Incropera, 6th ed. 2007,
    Eq. 5.5.
    """
    share = (end - surroundings) / (start - surroundings)
    if share >= 1.0:
        return 0.0
    return -time_constant * math.log(share) if share > 0.0 else math.inf


@dataclass(frozen=True)
class TwoNode:
    """Drink and wall, each of one temperature: C_l T_l' = G (T_w - T_l), C_w T_w' = G (T_l - T_w) - L T_w.

    capacities of drink and wall [J/K], `coupling` G between them and `loss` L of the wall [W/K];
    temperatures above those of the surroundings.
    """

    capacities: tuple[float, float]
    coupling: float
    loss: float

    def __post_init__(self) -> None:
        for value in (*self.capacities, self.coupling, self.loss):
            if not 0.0 < value < math.inf:
                raise InputError("two-node model", value, "must be positive and finite", "write 3.0")

    @cached_property
    def _modes(self) -> tuple[Floats, Floats]:
        """Rates [1/s], falling, and their vectors; by the symmetric form, so that they are real."""
        root = np.sqrt(np.array(self.capacities))
        conductance = np.array([[self.coupling, -self.coupling], [-self.coupling, self.coupling + self.loss]])
        rates, vectors = np.linalg.eigh(conductance / np.outer(root, root))
        return rates[::-1], vectors[:, ::-1] / root[:, None]

    @property
    def time_constants(self) -> tuple[float, float]:
        """The short one (wall against drink) and the long one (cooling) [s]."""
        short, long = 1.0 / self._modes[0]
        return float(short), float(long)

    def temperatures(self, times: ArrayLike, start: tuple[float, float]) -> Floats:
        """Temperature [..., 2] of drink and wall at times [s]."""
        rates, vectors = self._modes
        amplitudes = np.linalg.solve(vectors, np.array(start, dtype=float))
        decay = np.exp(-rates * np.asarray(times, dtype=float)[..., None])
        return np.asarray((decay * amplitudes) @ vectors.T)


def two_node(cup: Cup, serving: Serving) -> TwoNode:
    """The two nodes of a serving at the pour, without evaporation.

    Half of the wall's resistance lies on each side of its node.
    """
    place = wetted_station(cup, serving)
    area, capacity = _size(cup, serving)
    network = steady(place)
    half = 0.5 * float(network.resistance[1:-1].sum())
    stored = sum(layer.heat_capacity * layer.thickness for layer in place.layers)
    coupling = area / (float(network.resistance[0]) + half)
    return TwoNode((capacity, area * stored), coupling, area / (half + float(network.resistance[-1])))


@dataclass(frozen=True)
class TimeScales:
    """How fast wall and drink follow.

    wall: L^2/alpha [s]; drink: m c over its heat loss per kelvin [s]; drop of the drink over the wall's [K].
    """

    wall: float
    drink: float
    drop: float

    @property
    def ratio(self) -> float:
        """Wall over drink; small where the drink may be taken as constant."""
        return self.wall / self.drink


def time_scales(cup: Cup, serving: Serving) -> TimeScales:
    """The two time scales of a serving at the pour, evaporation included."""
    place = wetted_station(cup, serving)
    network = steady(place)
    area, capacity = _size(cup, serving)
    hot = serving.drink.temperature
    lost = area * network.heat_flux + lumped_drink(cup, serving).loss(0.0, hot)
    wall = effective(place, network.temperature.tolist()).time_scale
    return TimeScales(wall, capacity * (hot - place.outside) / lost, lost * wall / capacity)


def lumped_cooling(cup: Cup, serving: Serving, times: ArrayLike, evaporation: bool = True) -> Floats:
    """Drink temperature [degC] at times [s] of a lumped drink behind a wall without heat capacity.

    The wall passes what the steady network passes; the volume is that of the pour. Without evaporation the
    open surface is adiabatic.
    """
    place, (area, _) = wetted_station(cup, serving), _size(cup, serving)
    through = _wall_curve(place, serving.drink.temperature)
    drink = lumped_drink(cup, serving)

    def rate(time: float, temperature: Floats) -> list[float]:
        now = float(temperature[0])
        loss = drink.loss(0.0, now) if evaporation else 0.0
        return [-(area * through(now) + loss) / drink.heat_capacity(0.0, now)]

    at = np.asarray(times, dtype=float)
    end = max(float(at.max()), 1e-9)
    found = solve_ivp(rate, (0.0, end), [serving.drink.temperature], dense_output=True, rtol=1e-7, atol=1e-6)
    curve = found.sol
    assert curve is not None  # dense_output was asked for
    return np.asarray(curve(at.ravel())[0].reshape(at.shape))


def _wall_curve(place: Station, hottest: float) -> Callable[[float], float]:
    """Steady heat flux through the wall [W/m2] against the drink's temperature, between room and pour."""
    grid = np.sort(np.linspace(place.outside, hottest, WALL_POINTS))
    overall = [steady(place, inside=float(temperature)).overall_coefficient for temperature in grid]
    return lambda temperature: float(np.interp(temperature, grid, overall)) * (temperature - place.outside)


def _size(cup: Cup, serving: Serving) -> tuple[float, float]:
    """Wetted area [m2] and heat capacity [J/K] of the drink at the pour."""
    volume = volume_at(cup, serving, 0.0)
    capacity = lumped_drink(cup, serving).heat_capacity(0.0, serving.drink.temperature)
    return wetted_area(cup, cup.level(volume)), capacity
