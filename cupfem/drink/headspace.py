"""The headspace under a lid: quasi-steady temperature, vapour pressure and lid, term by term.

Three algebraic unknowns beside the drink's two: temperature of the gas, its vapour pressure, and temperature
of the lid's outer face. Their equations say that what enters leaves:

gas    0 = Q_surface + Q_wall - Q_lid - Q_hole + m_surface g(T_drink) - m_wall g(T_wall) - m_lid g(T_lid)
           - V (rho_v g(T) - rho_v,room g(T_room))
vapour 0 = m_surface - m_wall - m_lid - V (rho_v - rho_v,room)
lid    0 = Q_lid + m_lid h_fg(T_lid) + Q_radiation - Q_outside

with g = h + h_fg, the enthalpy of vapour, and V the flow through the holes. Neither gas nor lid stores heat:
0.3 and some 4 J/K beside the 1000 J/K of the drink. Condensate returns to the drink with h of the face that
it left, and h_fg stays there.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from cupfem.drink.lumped import Ambient, Lumped
from cupfem.drink.surface import surface_state
from cupfem.edges import CONDENSATE, DRY_TO_DRINK, DRY_TO_HEADSPACE, DRY_TO_LID, disk_to_disk
from cupfem.films import (
    STEFAN_BOLTZMANN,
    Film,
    HeadspaceConvection,
    Hole,
    SurfaceClosure,
    condensed,
    disk_length,
)
from cupfem.films.base import Values, fourth_power_difference
from cupfem.fluids import (
    GAS_CONSTANT_VAPOUR,
    Liquid,
    air_density,
    air_specific_heat,
    water_latent_heat,
    water_saturation_pressure,
)
from cupfem.quantities import ZERO_CELSIUS

Floats = NDArray[np.float64]

LATENT = 2.4e6
"""Scale [J/kg] that brings the vapour's balance to watts like its neighbours; it changes no result."""
FLOOR = 1e-12
"""Exchange of vapour with the room [kg/(s Pa)] of an empty cup under a sealed lid, whose vapour pressure
nothing else sets."""
SCALES = (1.0, 100.0, 1.0)
"""Changes of the three unknowns that weigh as one kelvin; 100 Pa is about what a kelvin is at 15 degC."""


COLDEST, HOTTEST = -60.0, 150.0
"""What gas and lid may be in an iteration on its way [degC]."""
DENSEST = 0.97
"""Share of the pressure that the vapour's may be in an iteration on its way."""


@dataclass(frozen=True, eq=False)
class Lid:
    """A lid: films from its outer face to the room by ledger name, resistance through it [m2 K/W],
    emissivity of its inside [-], holes, its area [m2] and its height above the table [m]."""

    films: Mapping[str, Film]
    resistance: float
    emissivity: float
    holes: tuple[Hole, ...]
    area: float
    height: float

    def leaving(self, face: float, room: float, time: float) -> dict[str, float]:
        """Heat flux leaving the outer face [W/m2], by ledger name."""
        return {name: float(f.heat_flux(face, room, self.height, time)) for name, f in self.films.items()}

    def inside(self, face: float, room: float) -> float:
        """Temperature of the inner face [degC] at one of the outer."""
        return face + self.resistance * sum(self.leaving(face, room, 0.0).values())


@dataclass(frozen=True, eq=False)
class Headspace:
    """Balances of gas, vapour and lid.

    `closure` passes heat and vapour from the surface to the gas; `emissivity` is the surface's.
    """

    liquid: Liquid
    closure: SurfaceClosure
    lid: Lid
    emissivity: float

    def start(self, ambient: Ambient, drink: float = math.nan) -> Floats:
        """Values to begin an iteration with: between room and drink [degC], or the room's without one."""
        room = np.array([ambient.temperature, ambient.vapour_pressure, ambient.temperature])
        if math.isnan(drink):
            return room
        surface = np.array([drink, float(water_saturation_pressure(drink)), drink])
        return np.asarray(0.4 * room + 0.6 * surface)

    def gas_enthalpy(self, temperature: Values) -> Values:
        """Enthalpy of vapour g [J/kg]."""
        enthalpy: Values = self.liquid.enthalpy(temperature) + water_latent_heat(temperature)
        return enthalpy

    def above(self, unknowns: Floats, ambient: Ambient) -> tuple[float, float, float]:
        """Temperature [degC] and vapour pressure [Pa] of the gas, temperature of the lid's inner face."""
        face = within(float(unknowns[2]), COLDEST, HOTTEST)
        gas = within(float(unknowns[0]), COLDEST, HOTTEST)
        vapour = within(float(unknowns[1]), 0.0, DENSEST * ambient.pressure)
        return gas, vapour, within(self.lid.inside(face, ambient.temperature), COLDEST, HOTTEST)

    def absent(self, unknowns: Floats, ambient: Ambient) -> Floats:
        """Balances without a lid: the unknowns are the room's."""
        return np.asarray((self.start(ambient) - unknowns) * np.array([1.0, 1e-2, 1.0]))

    def feeds(self, fluxes: Mapping[str, Floats], surface: Floats, drink: Lumped) -> Floats:
        """What drink, gas, vapour and lid receive from the dry wall per area, `[unknown, point]`."""
        out = np.zeros((5, len(surface)))
        if DRY_TO_HEADSPACE not in fluxes:
            return out
        mass = -fluxes[CONDENSATE] / water_latent_heat(surface)
        returned = mass if drink.present else np.zeros_like(mass)
        out[0] = returned
        out[1] = returned * self.liquid.enthalpy(surface) + fluxes[DRY_TO_DRINK]
        out[2] = fluxes[DRY_TO_HEADSPACE] - mass * self.gas_enthalpy(surface)
        out[3] = -LATENT * mass
        out[4] = fluxes[DRY_TO_LID]
        return out

    def rates(self, unknowns: Floats, drink: Lumped, time: float) -> tuple[Floats, dict[str, float]]:
        """Rates of drink, gas, vapour and lid without what the wall feeds; terms that leave the cup [W]."""
        out = np.zeros(5)
        if drink.present:
            self._surface(out, drink)
        self._lid(out, drink)
        terms = self._holes(out, drink)
        if not drink.present:
            out[3] -= LATENT * FLOOR * (drink.vapour_pressure - drink.ambient.vapour_pressure)
        room = drink.ambient.temperature
        face = within(float(unknowns[2]), COLDEST, HOTTEST)
        outside = {name: self.lid.area * q for name, q in self.lid.leaving(face, room, time).items()}
        out[4] -= sum(outside.values())
        return out, terms | outside

    def _surface(self, out: Floats, drink: Lumped) -> None:
        state = surface_state(drink, drink.headspace, drink.vapour_pressure)
        heat = drink.area * float(self.closure.sensible(state)) * (drink.temperature - drink.headspace)
        mass = drink.area * float(self.closure.vapour(state))
        enthalpy = mass * float(self.gas_enthalpy(drink.temperature))
        lower, upper = (math.sqrt(area / math.pi) for area in (drink.area, self.lid.area))
        seen = disk_to_disk(lower, upper, max(self.lid.height - drink.level, 1e-6))
        radiated = drink.area * seen * self.emissivity * self.lid.emissivity * STEFAN_BOLTZMANN
        radiated *= float(fourth_power_difference(drink.temperature, drink.lid))
        out += np.array([-mass, -heat - enthalpy - radiated, heat + enthalpy, LATENT * mass, radiated])

    def _lid(self, out: Floats, drink: Lumped) -> None:
        pressure, gas, face = drink.ambient.pressure, drink.headspace, drink.lid
        length = disk_length(2.0 * math.sqrt(self.lid.area / math.pi))
        plate = HeadspaceConvection(length, drink.vapour_pressure, pressure, "lid")
        coefficient = float(plate.coefficient(face, gas))
        heat = self.lid.area * coefficient * (gas - face)
        mass = self.lid.area * float(condensed(coefficient, face, gas, drink.vapour_pressure, pressure))
        returned = mass if drink.present else 0.0
        liquid, latent = float(self.liquid.enthalpy(face)), float(water_latent_heat(face))
        leaving = heat + mass * (liquid + latent)
        out += np.array([returned, returned * liquid, -leaving, -LATENT * mass, heat + mass * latent])

    def _holes(self, out: Floats, drink: Lumped) -> dict[str, float]:
        room, gas = drink.ambient, drink.headspace
        inside, outside = (gas, drink.vapour_pressure), (room.temperature, room.vapour_pressure)
        holes = self.lid.holes
        flow = sum(hole.volume_flow(*inside, *outside, room.pressure) for hole in holes)
        still = sum(hole.conduction(gas, room.temperature) for hole in holes)
        film = 0.5 * (gas + room.temperature)
        carried = flow * float(air_density(film, room.pressure)) * float(air_specific_heat(film))
        heat = (still + carried) * (gas - room.temperature)
        leaving, entering = _vapour_density(*inside), _vapour_density(*outside)
        vapour = flow * (leaving * self.gas_enthalpy(gas) - entering * self.gas_enthalpy(room.temperature))
        out[2] -= heat + vapour
        out[3] -= LATENT * flow * (leaving - entering)
        return {"vapour": float(vapour), "air through the lid": heat}


def _vapour_density(temperature: float, vapour_pressure: float) -> float:
    return vapour_pressure / (GAS_CONSTANT_VAPOUR * (temperature + ZERO_CELSIUS))


def within(value: float, low: float, high: float) -> float:
    """A value that an iteration may try."""
    return min(max(value, low), high)
