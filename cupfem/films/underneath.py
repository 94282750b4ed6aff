"""Films on horizontal faces in air: the top of a lid, the underside of a base, the air in a recess."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import ClassVar, Literal

import numpy as np

from cupfem.errors import InputError
from cupfem.films import correlations as nu
from cupfem.films.base import (
    GRAVITY,
    SMOOTHING,
    STEFAN_BOLTZMANN,
    Applied,
    Validity,
    Values,
    fourth_power_difference,
    reached,
    require_positive,
    require_share,
    upward_share,
)
from cupfem.films.correlations import FluidState
from cupfem.films.outside import Convection, air_buoyancy, air_film
from cupfem.fluids import STANDARD_PRESSURE, air_conductivity
from cupfem.quantities import ZERO_CELSIUS

HORIZONTAL_ONSET = Validity("Rayleigh number (recess under a cold base)", 0.0, 1707.762)
TABLE_RESISTANCE = 1.0 / 30.0  # m2 K/W; between wood (1/12) and stone (1/60), scoping estimate, no source
HEEL_CONTACT = 200.0  # W/(m2 K); see `TableContact`
EARLIEST_CONTACT = 0.1  # s; a cup is not set down in less
RECESS_STEPS = 3  # Newton steps for the face of the table; the third changes it by less than 1e-9 K


def disk_length(diameter: float) -> float:
    """Characteristic length of a disk, area over perimeter [m] (Goldstein, Sparrow and Jones 1973)."""
    return 0.25 * diameter


@dataclass(frozen=True)
class HorizontalPlate(Convection):
    """Natural convection of air on a horizontal face, such as the top of a lid or an underside.

    Formula: the unstable side (hot facing up, cold facing down) `nusselt_plate_hot_side_up`; the stable
    side `nusselt_plate_hot_side_down`, or `..._radziemska` with stable_form "radziemska"; joined smoothly
    at zero difference.
    Parameters: length: area over perimeter [m], see `disk_length`; facing; stable_form; pressure [Pa].
    Returns: heat flux leaving the face [W/m2]; mean coefficient, local temperatures.
    Range: Rayleigh number, see `applied`; a cup's base and lid are often near its lower end.
    Example: Incropera Ex. 9.3: duct 0.75 m wide, 45 degC in 15 degC: top h = 5.47, bottom 2.07 W/(m2 K).
    Reference: McAdams, Heat Transmission, 3rd ed. 1954; Incropera, 6th ed. 2007, Eqs. 9.29-9.32.
    """

    length: float
    facing: Literal["up", "down"]
    stable_form: Literal["mcadams", "radziemska"] = "mcadams"
    pressure: float = STANDARD_PRESSURE
    label: ClassVar[str] = "natural convection, horizontal face"
    source: ClassVar[str] = "McAdams 1954, Lloyd and Moran 1974 (Incropera 6th ed. Eqs. 9.30-9.32)"

    def __post_init__(self) -> None:
        require_positive("area over perimeter", self.length, "m")

    def _numbers(self, surface: Values, surroundings: Values) -> tuple[FluidState, Values, Values]:
        air = air_film(surface, surroundings, self.pressure)
        rayleigh = nu.rayleigh_number(air, air_buoyancy(surface, surroundings), self.length)
        rising = surface - surroundings if self.facing == "up" else surroundings - surface
        return air, rayleigh, rising

    def coefficient(self, surface: Values, surroundings: Values, height: Values = 0.0) -> Values:
        air, rayleigh, rising = self._numbers(surface, surroundings)
        newer = self.stable_form == "radziemska"
        stable = nu.nusselt_plate_hot_side_down_radziemska if newer else nu.nusselt_plate_hot_side_down
        nusselt = nu.nusselt_horizontal_plate(rayleigh, upward_share(rising, SMOOTHING), stable)
        return nusselt * air.conductivity / self.length

    def applied(self, surface: Values, surroundings: Values) -> list[Applied]:
        _, rayleigh, rising = self._numbers(surface, surroundings)
        newer = self.stable_form == "radziemska"
        return nu.reached_by_plate(
            rayleigh, rising, nu.PLATE_HOT_DOWN_RADZIEMSKA if newer else nu.PLATE_HOT_DOWN
        )


@dataclass(frozen=True)
class ThickTable:
    """A thick table under a cup: a disk of one temperature on a half-space, from the moment it stands there.

    Formula: conductance = 4 k/(pi a) + k/(pi alpha t)^(1/2), the steady flow into the half-space and the
    early one, added.
    Parameters: conductivity k [W/(m K)], diffusivity alpha [m2/s], radius a of the disk [m], since [s]: when
    the cup was set down.
    Returns: `resistance` [m2 K/W] on the area of the disk, from its face to the table far away.
    Range: table thicker than some 2 a; both ends in time exact. A base that cools makes it less exact.
    Example: none in a textbook; wood under 27 mm: 0.14 m2 K/W in the end.
    Reference: steady: Carslaw and Jaeger, Conduction of Heat in Solids, 2nd ed. 1959, sec. 8.2, Q = 4 K a V;
    early: Incropera, 6th ed. 2007, Eq. 5.58; their sum: common practice, no source.
    """

    conductivity: float
    diffusivity: float
    radius: float
    since: float = 0.0

    def resistance(self, time: float) -> float:
        """At a time [s]."""
        standing = max(time - self.since, EARLIEST_CONTACT)
        early = 1.0 / math.sqrt(math.pi * self.diffusivity * standing)
        return 1.0 / (self.conductivity * (4.0 / (math.pi * self.radius) + early))


@dataclass(frozen=True)
class TableContact:
    """The heel on the table: a contact in series with the table.

    Formula: (Ts - Tsur) / (1/h + R).
    Parameters: contact conductance h [W/(m2 K)]: 100 to 300, scoping estimate, no source; table resistance R
    [m2 K/W] or `ThickTable`.
    """

    table: float | ThickTable = TABLE_RESISTANCE
    conductance: float = HEEL_CONTACT
    label: ClassVar[str] = "heel on the table"
    source: ClassVar[str] = "series of contact and table; contact conductance: scoping estimate, no source"

    def heat_flux(self, surface: Values, surroundings: Values, height: Values, time: float) -> Values:
        return (surface - surroundings) / (1.0 / self.conductance + resistance_of(self.table, time))


def resistance_of(table: float | ThickTable, time: float) -> float:
    """Resistance of a table [m2 K/W] at a time [s]."""
    return table if isinstance(table, float) else table.resistance(time)


@dataclass(frozen=True)
class CavityAir:
    """The shallow air in the recess under a base, with the table below it.

    Formula: k/d (Ts - Tt) + sigma (Ts^4 - Tt^4) / (1/e1 + 1/e2 - 1) = (Tt - Tsur) / R, solved for the face
    of the table Tt; air at rest, as it is under a hot base (stable); wide against its depth.
    Parameters: depth d [m]; emissivity of base e1 and table e2 [-]; table_resistance R [m2 K/W] from the
    table's face to the surroundings (its default is a scoping estimate without a source); pressure [Pa].
    Returns: heat flux leaving the underside of the base [W/m2].
    Range: any depth under a hot base; under a cold base the air starts to move at Ra = 1708 on the depth, see
    `applied` (8 mm: 36 K).
    Example: none in a textbook; black faces without air and R = 0 give sigma (Ts^4 - Tsur^4).
    Reference: Incropera, 6th ed. 2007, Eq. 13.19 (parallel plates) and sec. 9.8 (horizontal layer, onset).
    """

    depth: float
    base_emissivity: float = 0.92
    table_emissivity: float = 0.90
    table_resistance: float | ThickTable = TABLE_RESISTANCE
    pressure: float = STANDARD_PRESSURE
    label: ClassVar[str] = "recess air and table"
    source: ClassVar[str] = (
        "Incropera 6th ed. Eq. 13.19, conduction in still air; table: scoping estimate, no source"
    )

    def __post_init__(self) -> None:
        require_positive("depth of the recess", self.depth, "m")
        require_share("emissivity of the base", self.base_emissivity)
        require_share("emissivity of the table", self.table_emissivity)
        if isinstance(self.table_resistance, float) and not 0.0 <= self.table_resistance < math.inf:
            shown = f"{self.table_resistance:g} m2 K/W"
            raise InputError("table resistance", shown, "must be zero or positive", 'write "0.03 m^2 K/W"')

    @property
    def exchange_factor(self) -> float:
        """Of two large parallel gray plates [-]; zero if one of them is a perfect mirror."""
        if self.base_emissivity == 0.0 or self.table_emissivity == 0.0:
            return 0.0
        return 1.0 / (1.0 / self.base_emissivity + 1.0 / self.table_emissivity - 1.0)

    def heat_flux(self, surface: Values, surroundings: Values, height: Values, time: float) -> Values:
        air = air_conductivity(0.5 * (surface + surroundings)) / self.depth
        radiant = self.exchange_factor * STEFAN_BOLTZMANN
        resistance = resistance_of(self.table_resistance, time)
        table = surroundings
        for _ in range(RECESS_STEPS):
            flux = air * (surface - table) + radiant * fourth_power_difference(surface, table)
            slope = air + 4.0 * radiant * (table + ZERO_CELSIUS) ** 3
            residual = (table - surroundings) - resistance * flux
            table = table - residual / (1.0 + resistance * slope)
        return air * (surface - table) + radiant * fourth_power_difference(surface, table)

    def applied(self, surface: Values, surroundings: Values) -> list[Applied]:
        """Rayleigh number on the depth, zero where the base is the hotter face."""
        air = air_film(surface, surroundings, self.pressure)
        kelvin = 0.5 * (surface + surroundings) + ZERO_CELSIUS
        lightness = (surroundings - surface) / kelvin
        rayleigh = GRAVITY * self.depth**3 * lightness / (air.kinematic_viscosity * air.diffusivity)
        return [reached(HORIZONTAL_ONSET, np.maximum(rayleigh, 0.0))]
