"""What a section is made of and what acts on it."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from typing import Any

import numpy as np
from numpy.typing import NDArray

from cupfem.films import Film
from cupfem.gaps import Gap

Floats = NDArray[np.float64]
Ints = NDArray[np.int_]
Conductivity = float | Callable[[Floats], Floats]
Surroundings = float | Callable[[Floats, float, Any], Any]
"""A temperature [degC], or a function of height `[point]`, time and the lumped state."""
Feeds = Callable[[Mapping[str, Floats], Floats, Any], Floats]
"""Rates per area `[unknown, point]` that drink and headspace receive over an edge, in the order of their
unknowns, from the fluxes by film, the surface temperatures and the lumped state."""
Window = Callable[[Any, float], tuple[float, float]]
"""Lower and upper height [m] of the part of an edge that counts, from the lumped state and the time."""


@dataclass(frozen=True)
class Solid:
    """Properties of a region: conductivities [W/(m K)] through and along the wall, heat capacity [J/(m3
    K)]."""

    through: Conductivity
    along: Conductivity
    heat_capacity: float


@dataclass(frozen=True)
class GasLayer:
    """Properties of a gap: its conductance model, the heat capacity of the gas [J/(m3 K)] and its height
    [m]."""

    gap: Gap
    heat_capacity: float
    height: float = np.inf


@dataclass(frozen=True, eq=False)
class Exchange:
    """Heat exchange on an edge: films by ledger name, all to the same surroundings, over the part that
    `window` gives.

    The films may depend on the lumped state (the wetted height sets the length of the drink's film). With
    `to_drink` all the heat goes to the drink's enthalpy, the second of its unknowns; `feeds` tells anything
    else that drink and headspace receive.
    """

    edge: str
    films: Mapping[str, Film] | Callable[[Any], Mapping[str, Film]]
    surroundings: Surroundings
    window: Window | None = None
    to_drink: bool = False
    feeds: Feeds | None = None

    @property
    def follows_drink(self) -> bool:
        """Whether it changes with the drink's state."""
        return self.to_drink or self.window is not None or self.feeds is not None or callable(self.films)


@dataclass(frozen=True, eq=False)
class FixedTemperature:
    """Prescribed temperature [degC] on an edge: a number or a function of r, z and time."""

    edge: str
    value: float | Callable[[Floats, Floats, float], Floats]


@dataclass(frozen=True, eq=False)
class FixedFlux:
    """Prescribed heat flux into the body [W/m2] on an edge, optionally between two heights [m]."""

    edge: str
    value: float | Callable[[Floats, float], Floats]
    low: float = -np.inf
    high: float = np.inf
    label: str = "prescribed flux"


@dataclass(frozen=True, eq=False)
class Conditions:
    """All that acts on a section."""

    exchanges: tuple[Exchange, ...] = ()
    temperatures: tuple[FixedTemperature, ...] = ()
    fluxes: tuple[FixedFlux, ...] = ()
    sources: Mapping[str, Any] = field(default_factory=dict)


NOTHING = Conditions()
