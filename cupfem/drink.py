"""The drink as one lumped node whose state is its mass and its enthalpy, balance term by term.

dm/dt = - m_vapour - m_drunk
dH/dt = P_wall - Q_convection - Q_radiation - m_vapour (h(T) + h_fg(T)) - m_drunk h(T),      H = m h(T), h =
0 at 0 degC

Enthalpy, not temperature, is the state: with a falling mass only H closes the balance. The level follows
from m / rho(T) and the
exact inside volume. Well mixed: a lumped drink is common practice for a stirred or sipped cup (Incropera et
al., Fundamentals of Heat and Mass Transfer, 6th ed. 2007, sec. 5.1, for the lumped balance).
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from cupfem.films import Film, SurfaceClosure
from cupfem.fluids import Liquid, water_latent_heat
from cupfem.meridian import Meridian

Floats = NDArray[np.float64]

MINIMUM_MASS = 1e-3
"""Below this mass [kg] (a gram, a film on the floor) the node retires: nothing is wetted any more."""


@dataclass(frozen=True)
class Ambient:
    """The room's air, constant between two breaks of the march: temperature [degC], vapour pressure and
    pressure [Pa]."""

    temperature: float = 22.0
    vapour_pressure: float = 0.0
    pressure: float = 101325.0


@dataclass(frozen=True)
class Lumped:
    """What the walls need to know of drink and room."""

    ambient: Ambient
    mass: float = 0.0
    temperature: float = np.nan
    level: float = -np.inf
    area: float = 0.0
    present: bool = False
    activity: float = 1.0


@dataclass(frozen=True, eq=False)
class Surface:
    """What the drink's surface exchanges with the room.

    `films` give heat fluxes by ledger name, to the room or to `surroundings` [degC] where given. A `closure`
    adds vapour and the convection that goes with it; it is absent where one film replaces all.
    """

    films: Mapping[str, Film]
    surroundings: float | None = None
    closure: SurfaceClosure | None = None

    def heat(self, drink: Lumped, time: float) -> dict[str, float]:
        """Sensible heat leaving [W], by ledger name."""
        around = drink.ambient.temperature if self.surroundings is None else self.surroundings
        terms = {
            name: drink.area * float(film.heat_flux(drink.temperature, around, drink.level, time))
            for name, film in self.films.items()
        }
        if self.closure is not None:
            coefficient = self.closure.heat_transfer_coefficient(*_closure_arguments(drink))
            terms["surface convection"] = drink.area * float(coefficient) * (drink.temperature - around)
        return terms

    def vapour(self, drink: Lumped) -> float:
        """Mass of vapour leaving [kg/s]."""
        if self.closure is None:
            return 0.0
        return drink.area * float(self.closure.mass_flux(*_closure_arguments(drink)))


def _closure_arguments(drink: Lumped) -> tuple[float, float, float, float, float, float]:
    air, diameter = drink.ambient, 2.0 * np.sqrt(drink.area / np.pi)
    return (
        drink.temperature,
        air.temperature,
        air.vapour_pressure,
        air.pressure,
        float(diameter),
        drink.activity,
    )


@dataclass(frozen=True, eq=False)
class Drink:
    """The lumped node; its state vector is `[mass, enthalpy]` [kg, J].

    `drinking` is the volume that is drunk steadily [m3/s], constant between two breaks of the march.
    """

    liquid: Liquid
    meridian: Meridian
    surface: Surface
    drinking: float = 0.0
    minimum_mass: float = MINIMUM_MASS

    def start(self, temperature: float, level: float) -> Floats:
        """State of a drink at a temperature [degC] filled to a level [m]."""
        mass = float(self.liquid.density(temperature)) * self.meridian.volume(level)
        return np.array([mass, mass * float(self.liquid.enthalpy(temperature))])

    def lumped(self, state: Floats, ambient: Ambient) -> Lumped:
        """Temperature, level and surface of a state."""
        mass = float(state[0])
        if mass <= self.minimum_mass:
            return Lumped(ambient, mass, level=self.meridian.floor)
        temperature = float(self.liquid.temperature(state[1] / mass))
        level = self.meridian.level(mass / float(self.liquid.density(temperature)))
        return Lumped(
            ambient,
            mass,
            temperature,
            level,
            self.meridian.surface_area(level),
            True,
            self.liquid.vapour_factor,
        )

    def rates(
        self, state: Floats, drink: Lumped, time: float, received: float
    ) -> tuple[Floats, dict[str, float]]:
        """Rates of the state, and the terms of the ledger: heat that leaves to the outside [W].

        `received` is what the wetted wall passes to the drink [W].
        """
        if not drink.present:
            return np.zeros(2), {}
        heat = self.surface.heat(drink, time)
        enthalpy = float(state[1]) / drink.mass
        vapour = self.surface.vapour(drink)
        drunk = self.drinking * float(self.liquid.density(drink.temperature))
        terms = {**heat, "vapour": vapour * (enthalpy + float(water_latent_heat(drink.temperature)))}
        terms["sips"] = drunk * enthalpy
        return np.array([-vapour - drunk, received - sum(terms.values())]), terms

    def sip(self, state: Floats, volume: float) -> tuple[Floats, float]:
        """State after a sip of a volume [m3] (at most all of it), and the enthalpy that went with it [J]."""
        mass = float(state[0])
        if mass <= self.minimum_mass:
            return state, 0.0
        density = float(self.liquid.density(self.liquid.temperature(state[1] / mass)))
        taken = min(1.0, volume * density / mass) * state
        return state - taken, float(taken[1])

    def scales(self, state: Floats) -> Floats:
        """Changes of the state that weigh as one kelvin: a fiftieth of the mass, and the heat of one
        kelvin."""
        mass = max(float(state[0]), self.minimum_mass)
        return np.array([mass / 50.0, mass * float(self.liquid.specific_heat(60.0))])

    def with_drinking(self, drinking: float) -> Drink:
        """The same node, drunk at another rate [m3/s]."""
        return replace(self, drinking=drinking)
