"""The film of condensate on a colder wall: a bound for the dry wall above the drink.

In a cup the vapour's way through the air limits condensation, not this film: its 1e4 W/(m2 K) are in series
with two orders of magnitude less. The functions show that it may be left out.
"""

from __future__ import annotations

import numpy as np

from cupfem.films.base import GRAVITY, Values


def jakob_corrected_latent_heat(latent_heat: Values, specific_heat: Values, difference: Values) -> Values:
    """Latent heat with the subcooling of the film, hfg (1 + 0.68 Ja) [J/kg].

    Rohsenow 1956, Incropera 6th ed. Eq. 10.26.
    """
    return latent_heat + 0.68 * specific_heat * difference


def condensate_film_coefficient(
    difference: Values,
    length: float,
    *,
    density: Values,
    vapour_density: Values,
    conductivity: Values,
    viscosity: Values,
    latent_heat: Values,
) -> Values:
    """Laminar film of pure vapour condensing on a vertical wall.

    Formula: h = 0.943 [g rho (rho - rho_v) k^3 hfg' / (mu dT L)]^(1/4)
    Parameters: difference saturation - wall [K], length of the wall [m], liquid density [kg/m3], vapour
    density [kg/m3], liquid conductivity [W/(m K)], viscosity [Pa s], corrected latent heat [J/kg].
    Returns: coefficient [W/(m2 K)], mean over the length.
    Range: film Reynolds number up to 30, pure vapour.
    Example: Incropera Ex. 10.3, p. 648: 1 m, 100 degC on 50 degC, laminar alone 4094.8 W/(m2 K).
    Reference: Nusselt, VDI-Z. 60 (1916) 541-546; Incropera 6th ed. 2007, Eq. 10.30.
    """
    weight = GRAVITY * density * (density - vapour_density)
    return 0.943 * np.power(weight * conductivity**3 * latent_heat / (viscosity * difference * length), 0.25)


def wavy_film_reynolds(
    difference: Values,
    length: float,
    *,
    density: Values,
    conductivity: Values,
    viscosity: Values,
    latent_heat: Values,
) -> Values:
    """Film Reynolds number of a wavy laminar film on a vertical wall.

    Formula: Re = [3.70 k L dT / (mu hfg' (nu^2/g)^(1/3)) + 4.8]^0.82; then h = Re mu hfg' / (4 L dT)
    Parameters: as `condensate_film_coefficient`.
    Returns: Reynolds number of the film at the foot of the wall [-].
    Range: 30 to 1800.
    Example: Incropera Ex. 10.3, p. 648: Re = 1177.
    Reference: Kutateladze 1963; Incropera 6th ed. 2007, Eq. 10.43.
    """
    thickness = np.cbrt(np.square(viscosity / density) / GRAVITY)
    return np.power(
        3.70 * conductivity * length * difference / (viscosity * latent_heat * thickness) + 4.8, 0.82
    )
