"""What skin feels at the first touch: two half-spaces that meet, by their effusivities.

H. S. Carslaw and J. C. Jaeger, Conduction of Heat in Solids, 2nd ed. 1959, sec. 2.14 (perfect contact, and
the form with a contact resistance). Holds as long as neither body has felt its far side: t << L^2 / alpha.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.special import erfcx

from cupfem.errors import InputError
from cupfem.materials import Material

SKIN_EFFUSIVITY = math.sqrt(0.37 * 1060.0 * 3770.0)
"""Of skin, k rho c from bioheat papers, from memory, not re-checked [W s^0.5/(m2 K)]."""


def effusivity(conductivity: float, density: float, specific_heat: float) -> float:
    """sqrt(k rho c) [W s^0.5/(m2 K)]."""
    return math.sqrt(conductivity * density * specific_heat)


def effusivity_of(material: Material) -> float:
    """Effusivity of a material, through the wall [W s^0.5/(m2 K)]."""
    through, density = material.conductivity_through.value, material.density.value
    return effusivity(through, density, material.specific_heat.value)


@dataclass(frozen=True)
class HalfSpace:
    """A body without a far side: effusivity [W s^0.5/(m2 K)] and temperature before the touch [degC]."""

    effusivity: float
    temperature: float

    def __post_init__(self) -> None:
        if not 0.0 < self.effusivity < math.inf:
            shown = f"{self.effusivity:g} W s^0.5/(m2 K)"
            raise InputError("effusivity", shown, "must be positive and finite", "write sqrt(k rho c)")


def contact_temperature(first: HalfSpace, second: HalfSpace) -> float:
    """Temperature of the interface in perfect contact, constant in time [degC]."""
    weights = first.effusivity + second.effusivity
    return (first.effusivity * first.temperature + second.effusivity * second.temperature) / weights


def touched_surface(
    time: ArrayLike, skin: HalfSpace, body: HalfSpace, conductance: float
) -> NDArray[np.float64]:
    """Surface of the skin [degC] after times [s] of contact through a conductance [W/(m2 K)].

    T = T_skin + (T_contact - T_skin) [1 - exp(a^2 t) erfc(a sqrt t)], a = conductance (1/e_skin + 1/e_body).
    """
    rate = conductance * (1.0 / skin.effusivity + 1.0 / body.effusivity)
    share = 1.0 - erfcx(rate * np.sqrt(np.asarray(time, dtype=float)))
    return np.asarray(skin.temperature + (contact_temperature(skin, body) - skin.temperature) * share)
