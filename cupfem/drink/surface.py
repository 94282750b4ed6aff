"""The drink's open surface."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass

from cupfem.drink.lumped import Lumped
from cupfem.films import Film, SurfaceClosure, SurfaceState
from cupfem.fluids import water_saturation_pressure


def surface_state(drink: Lumped, air: float, vapour_pressure: float) -> SurfaceState:
    """Both sides of the air layer on the drink; the air's temperature [degC] and vapour pressure [Pa]."""
    at_surface = drink.activity * float(water_saturation_pressure(drink.temperature))
    diameter = 2.0 * math.sqrt(drink.area / math.pi)
    return SurfaceState(drink.temperature, air, at_surface, vapour_pressure, drink.ambient.pressure, diameter)


@dataclass(frozen=True, eq=False)
class Surface:
    """What the drink's surface exchanges with the room.

    `films` give heat fluxes by ledger name, to the room or to `surroundings` [degC] where given. A `closure`
    adds vapour and the convection that goes with it; it is absent where one film replaces all.
    """

    films: Mapping[str, Film]
    surroundings: float | None = None
    closure: SurfaceClosure | None = None

    def exchange(self, drink: Lumped, time: float) -> tuple[dict[str, float], float]:
        """Sensible heat leaving [W], by ledger name, and the vapour leaving [kg/s]."""
        room = drink.ambient
        around = room.temperature if self.surroundings is None else self.surroundings
        terms = {
            name: drink.area * float(film.heat_flux(drink.temperature, around, drink.level, time))
            for name, film in self.films.items()
        }
        if self.closure is None:
            return terms, 0.0
        state = surface_state(drink, room.temperature, room.vapour_pressure)
        coefficient = float(self.closure.sensible(state))
        terms["surface convection"] = drink.area * coefficient * (drink.temperature - room.temperature)
        return terms, drink.area * float(self.closure.vapour(state))
