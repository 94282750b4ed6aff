"""What the walls need to know of room, drink and headspace."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np


@dataclass(frozen=True)
class Ambient:
    """Room and circumstances, constant between two breaks of the march.

    Temperature [degC], vapour pressure and pressure [Pa] of the room's air; whether a lid is on, whether
    pouring or a spoon moves the drink, and whether the cup stands on the table, since when [s].
    """

    temperature: float = 22.0
    vapour_pressure: float = 0.0
    pressure: float = 101325.0
    lidded: bool = False
    stirred: bool = False
    on_table: bool = True
    since: float = 0.0


@dataclass(frozen=True)
class Lumped:
    """Drink and headspace as the walls see them.

    Temperatures [degC] of drink, headspace and inside of the lid; vapour pressure of the headspace [Pa];
    surface: level [m] and area [m2]; activity: vapour pressure of the drink over that of water.
    """

    ambient: Ambient
    mass: float = 0.0
    temperature: float = np.nan
    level: float = -np.inf
    area: float = 0.0
    present: bool = False
    activity: float = 1.0
    headspace: float = np.nan
    vapour_pressure: float = np.nan
    lid: float = np.nan

    @property
    def lidded(self) -> bool:
        """Whether the wall above the level sees a headspace under a lid, not the room."""
        return self.ambient.lidded
