"""The drink as one lumped node whose state is its mass and its enthalpy, balance term by term.

dm/dt = m_poured + m_condensate - m_vapour - m_drunk
dH/dt = P_wall - Q_convection - Q_radiation + m_poured h(T_poured) + m_condensate h(T_face)
        - m_vapour (h(T) + h_fg(T)) - m_drunk h(T),          H = m h(T), h = 0 at 0 degC

Enthalpy, not temperature, is the state: with a falling mass only H closes the balance. The level follows
from m / rho(T) and the
exact inside volume. Well mixed: a lumped drink is common practice for a stirred or sipped cup (Incropera et
al., Fundamentals of Heat and Mass Transfer, 6th ed. 2007, sec. 5.1, for the lumped balance).
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import cached_property
from typing import Any

import numpy as np
from numpy.typing import NDArray

from cupfem.drink.headspace import SCALES, Headspace
from cupfem.drink.lumped import Ambient, Lumped
from cupfem.drink.surface import Surface
from cupfem.errors import InputError
from cupfem.fluids import Liquid, water_latent_heat
from cupfem.meridian import Meridian

Floats = NDArray[np.float64]

MINIMUM_MASS = 1e-3
"""Below this mass [kg] (a gram, a film on the floor) the node retires: nothing is wetted any more."""


@dataclass(frozen=True, eq=False)
class Drink:
    """The lumped node; its unknowns are `[mass, enthalpy]` [kg, J], and with a headspace its three.

    `drinking` is the volume that is drunk steadily [m3/s], `pouring` the volume that is poured in [m3/s] at a
    temperature [degC]; both are constant between two breaks of the march.
    """

    liquid: Liquid
    meridian: Meridian
    surface: Surface
    drinking: float = 0.0
    minimum_mass: float = MINIMUM_MASS
    headspace: Headspace | None = None
    pouring: tuple[float, float] = (0.0, 0.0)

    @cached_property
    def capacities(self) -> Floats:
        """Factor of each unknown's rate: one, or zero for an algebraic unknown."""
        return np.array([1.0, 1.0] if self.headspace is None else [1.0, 1.0, 0.0, 0.0, 0.0])

    def start(self, temperature: float, level: float, ambient: Ambient | None = None) -> Floats:
        """State of a drink at a temperature [degC] filled to a level [m]; `ambient` for a headspace."""
        mass = float(self.liquid.density(temperature)) * self.meridian.volume(level)
        state = np.array([mass, mass * float(self.liquid.enthalpy(temperature))])
        if self.headspace is None:
            return state
        return self.guessed(np.concatenate([state, np.zeros(3)]), ambient or Ambient())

    def guessed(self, state: Floats, ambient: Ambient) -> Floats:
        """The state with values to begin an iteration of the headspace with, where it has one."""
        if self.headspace is None:
            return state
        mass = float(state[0])
        empty = mass <= self.minimum_mass or not ambient.lidded
        drink = np.nan if empty else float(self.liquid.temperature(float(state[1]) / mass))
        return np.concatenate([state[:2], self.headspace.start(ambient, drink)])

    def lumped(self, state: Floats, ambient: Ambient) -> Lumped:
        """Temperatures, level and surface of a state."""
        mass = float(state[0])
        if mass <= self.minimum_mass:
            return Lumped(ambient, mass, level=self.meridian.floor, **self._above(state, ambient))
        temperature = float(self.liquid.temperature(float(state[1]) / mass))
        level = self.meridian.level(mass / float(self.liquid.density(temperature)))
        return Lumped(
            ambient,
            mass,
            temperature,
            level,
            self.meridian.surface_area(level),
            True,
            self.liquid.vapour_factor,
            **self._above(state, ambient),
        )

    def _above(self, state: Floats, ambient: Ambient) -> dict[str, Any]:
        if self.headspace is None or not ambient.lidded:
            return {}
        found = self.headspace.above(state[2:], ambient)
        return dict(zip(("headspace", "vapour_pressure", "lid"), found, strict=True))

    def rates(
        self, state: Floats, drink: Lumped, time: float, received: Floats
    ) -> tuple[Floats, dict[str, float]]:
        """Rates of the unknowns, and the terms of the ledger: heat that leaves to the outside [W].

        `received` is what the walls pass to each unknown.
        """
        out = received.copy()
        terms: dict[str, float] = {}
        if self.headspace is not None and not drink.lidded:
            out[2:] += self.headspace.absent(state[2:], drink.ambient)
        if self.headspace is not None and drink.lidded:
            rates, terms = self.headspace.rates(state[2:], drink, time)
            out += rates
        elif drink.present:
            terms = self._open(out, state, drink, time)
        if not drink.present:
            out[:2] = 0.0
        self._flows(out, terms, state, drink)
        return out, terms

    def _open(self, out: Floats, state: Floats, drink: Lumped, time: float) -> dict[str, float]:
        terms, vapour = self.surface.exchange(drink, time)
        latent = float(water_latent_heat(drink.temperature))
        terms["vapour"] = vapour * (float(state[1]) / drink.mass + latent)
        out[0] -= vapour
        out[1] -= sum(terms.values())
        return terms

    def _flows(self, out: Floats, terms: dict[str, float], state: Floats, drink: Lumped) -> None:
        """Steady drinking and pouring."""
        if drink.present and self.drinking:
            drunk = self.drinking * float(self.liquid.density(drink.temperature))
            terms["sips"] = drunk * float(state[1]) / drink.mass
            out[:2] -= drunk, terms["sips"]
        volume, temperature = self.pouring
        if volume:
            poured = volume * float(self.liquid.density(temperature))
            terms["refills"] = -poured * float(self.liquid.enthalpy(temperature))
            out[:2] += poured, -terms["refills"]

    def sip(self, state: Floats, volume: float) -> tuple[Floats, float]:
        """State after a sip of a volume [m3] (at most all of it), and the enthalpy that went with it [J]."""
        mass = float(state[0])
        if mass <= self.minimum_mass:
            return state, 0.0
        density = float(self.liquid.density(self.liquid.temperature(float(state[1]) / mass)))
        share = min(1.0, volume * density / mass)
        left = state.copy()
        left[:2] *= 1.0 - share
        return left, share * float(state[1])

    def refill(self, state: Floats, volume: float, temperature: float) -> tuple[Floats, float]:
        """State after a volume [m3] of a temperature [degC] was poured in, and its enthalpy [J].

        Raises InputError if it does not fit below the brim.
        """
        mass = volume * float(self.liquid.density(temperature))
        heat = mass * float(self.liquid.enthalpy(temperature))
        full = state.copy()
        full[:2] += mass, heat
        mixed = float(self.liquid.temperature(float(full[1] / full[0])))
        room = self.meridian.brimful_capacity - float(full[0] / self.liquid.density(mixed))
        if room < 0.0:
            why = f"above the brim by {-1e6 * room:.3g} ml"
            shown = f"{1e6 * volume:.3g} ml"
            raise InputError("event.refill", shown, why, "write less, or drink more before")
        return full, heat

    def scales(self, state: Floats) -> Floats:
        """Changes of the unknowns that weigh as one kelvin: a fiftieth of the mass, and the heat of one
        kelvin."""
        mass = max(float(state[0]), self.minimum_mass)
        own = (mass / 50.0, mass * float(self.liquid.specific_heat(60.0)))
        return np.array(own if self.headspace is None else [*own, *SCALES])

    def with_flows(self, drinking: float, pouring: tuple[float, float] = (0.0, 0.0)) -> Drink:
        """The same node, drunk and poured into at other rates."""
        return replace(self, drinking=drinking, pouring=pouring)
