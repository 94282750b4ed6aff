"""Published correlations as pure functions of the dimensionless numbers.

Numbers: Nusselt Nu = h L / k, Rayleigh Ra = g beta dT L^3 / (nu alpha), Grashof Gr = Ra / Pr, Prandtl Pr,
Reynolds Re = V D / nu. All properties at the film temperature unless said. Scalars or arrays. "Incropera"
is Incropera, DeWitt, Bergman, Lavine, Fundamentals of Heat and Mass Transfer, 6th ed., Wiley 2007. Its
worked examples are recomputed in the tests; the numbers of its equations and sections, and the forms where
nothing else is said, are from memory.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import NamedTuple

import numpy as np

from cupfem.films.base import GRAVITY, Applied, Validity, Values, reached, smooth_maximum

VERTICAL_PLATE = Validity("Rayleigh number (vertical plate)", 0.1, 1e12)
VERTICAL_PLATE_LAMINAR = Validity("Rayleigh number (vertical plate, laminar)", 0.0, 1e9)
SLENDER_CYLINDER = Validity("Prandtl number (slender cylinder)", 0.01, 100.0)
HORIZONTAL_CYLINDER = Validity("Rayleigh number (horizontal cylinder)", 0.0, 1e12)
CROSS_FLOW = Validity("Reynolds times Prandtl number (cross flow)", 0.2, np.inf)
PLATE_HOT_UP = Validity("Rayleigh number (plate, hot side up)", 1e4, 1e11)
PLATE_HOT_DOWN = Validity("Rayleigh number (plate, hot side down)", 1e5, 1e10)
PLATE_HOT_DOWN_RADZIEMSKA = Validity("Rayleigh number (plate, hot side down)", 1e4, 1e9)

JOIN_WIDTH = 0.005  # share of the Nusselt number over which two branches are joined


class FluidState(NamedTuple):
    """What a convection film needs to know of its fluid, at the film temperature."""

    conductivity: Values  # W/(m K)
    kinematic_viscosity: Values  # m2/s
    diffusivity: Values  # m2/s, thermal

    @property
    def prandtl(self) -> Values:
        return self.kinematic_viscosity / self.diffusivity


def rayleigh_number(fluid: FluidState, buoyancy: Values, length: Values) -> Values:
    """Ra = g B L^3 / (nu alpha).

    B is the relative density difference, positive [-]: beta |dT|, or |drho|/rho.
    """
    cube = GRAVITY * (length * length * length)
    return cube * buoyancy / (fluid.kinematic_viscosity * fluid.diffusivity)


def nusselt_vertical_plate(rayleigh: Values, prandtl: Values) -> Values:
    """Natural convection on a vertical isothermal plate, laminar and turbulent.

    Formula: Nu = {0.825 + 0.387 Ra^(1/6) / [1 + (0.492/Pr)^(9/16)]^(8/27)}^2
    Parameters: rayleigh, prandtl [-], on the height of the plate.
    Returns: Nusselt number [-], mean over the height, on the height.
    Range: Ra below 1e12, any Pr (`VERTICAL_PLATE`).
    Example: Incropera Ex. 9.2, p. 572: Ra = 1.813e9, Pr = 0.690 give Nu = 147.
    Reference: Churchill and Chu, Int. J. Heat Mass Transfer 18 (1975) 1323-1329; Incropera Eq. 9.26.
    """
    spread = np.power(1.0 + np.power(0.492 / prandtl, 9 / 16), -8 / 27)
    return np.square(0.825 + 0.387 * spread * np.power(rayleigh, 1 / 6))


def nusselt_vertical_plate_laminar(rayleigh: Values, prandtl: Values) -> Values:
    """Natural convection on a vertical isothermal plate, laminar only, and there slightly closer.

    Formula: Nu = 0.68 + 0.670 Ra^(1/4) / [1 + (0.492/Pr)^(9/16)]^(4/9)
    Parameters: rayleigh, prandtl [-], on the height of the plate.
    Returns: Nusselt number [-], mean over the height, on the height.
    Range: Ra up to 1e9, any Pr (`VERTICAL_PLATE_LAMINAR`).
    Example: Incropera Ex. 9.3, p. 577: sides of a duct, Ra = 7.07e7, Pr = 0.71 give h = 4.23 W/(m2 K).
    Reference: Churchill and Chu, Int. J. Heat Mass Transfer 18 (1975) 1323-1329; Incropera Eq. 9.27.
    """
    spread = np.power(1.0 + np.power(0.492 / prandtl, 9 / 16), -4 / 9)
    return 0.68 + 0.670 * spread * np.sqrt(np.sqrt(rayleigh))


def slender_cylinder_factor(grashof: Values, prandtl: Values, length_over_diameter: Values) -> Values:
    """How much a vertical slender cylinder gives off more than a plate of its height.

    Formula: Nu/Nu_plate = 1 + B [32^(1/2) Gr^(-1/4) L/D]^C, B = 0.0571322 + 0.20305 Pr^(-0.43),
    C = 0.9165 - 0.0043 Pr^(1/2) + 0.01333 ln Pr + 0.0004809 / Pr
    Parameters: grashof (on the length), prandtl, length over diameter [-].
    Returns: factor [-] on the mean Nusselt number of the plate.
    Range: laminar, Pr 0.01 to 100 (`SLENDER_CYLINDER`).
    Example: none in a textbook; Pr = 0.7, Gr = 1e10, L/D = 2.5 give 228.8979 with Eq. 9.26 in the library
    `ht`.
    Reference: Popiel, Wojtkowiak and Bober, Exp. Thermal Fluid Sci. 32 (2007) 607-613, as given by the
    library `ht` (which notes that later reviews misprint the power of 32); the paper itself was not
    re-checked.
    """
    b = 0.0571322 + 0.20305 * np.power(prandtl, -0.43)
    c = 0.9165 - 0.0043 * np.sqrt(prandtl) + 0.01333 * np.log(prandtl) + 0.0004809 / prandtl
    thickness = np.sqrt(32.0) * length_over_diameter / np.sqrt(np.sqrt(grashof))
    factor: Values = 1.0 + b * np.power(thickness, c)
    return factor


def leading_edge_shape(distance: Values, length: float, offset: float) -> Values:
    """Local over mean coefficient along a laminar plate, regularised at the leading edge, mean exactly one.

    Formula: d/dx of the heat flow of the first x, which goes as (x + e)^(3/4):
    h/h_mean = (3/4) L (x + e)^(-1/4) / [(L + e)^(3/4) - e^(3/4)]. Without e the edge value is infinite.
    Parameters: distance x from the leading edge, length L, offset e [m].
    Returns: ratio [-]; its mean from 0 to L is 1 for any e.
    Range: laminar (`VERTICAL_PLATE_LAMINAR`). For e = L/50 the ratio is 2.07 at the edge and 0.78 at the end.
    Example: e = 0 gives h = (3/4) h_mean at the end, Incropera Eq. 9.21.
    Reference: Incropera Eqs. 9.19-9.21 (similarity solution of Ostrach); the offset is common practice, no
    source.
    """
    whole = (length + offset) ** 0.75 - offset**0.75
    shape: Values = 0.75 * length / whole / np.sqrt(np.sqrt(distance + offset))
    return shape


def nusselt_horizontal_cylinder(rayleigh: Values, prandtl: Values) -> Values:
    """Natural convection on a long horizontal isothermal cylinder, such as the curl of a brim.

    Formula: Nu = {0.60 + 0.387 Ra^(1/6) / [1 + (0.559/Pr)^(9/16)]^(8/27)}^2
    Parameters: rayleigh, prandtl [-], on the diameter.
    Returns: Nusselt number [-], mean around the cylinder, on the diameter.
    Range: Ra up to 1e12 (`HORIZONTAL_CYLINDER`).
    Example: Incropera Ex. 9.4, p. 580: Ra = 5.076e6, Pr = 0.697 give Nu = 23.09, h = 7.23 W/(m2 K).
    Reference: Churchill and Chu, Int. J. Heat Mass Transfer 18 (1975) 1049-1053; Incropera Eq. 9.34.
    """
    spread = np.power(1.0 + np.power(0.559 / prandtl, 9 / 16), -8 / 27)
    return np.square(0.60 + 0.387 * spread * np.power(rayleigh, 1 / 6))


def nusselt_cross_flow(reynolds: Values, prandtl: Values) -> Values:
    """Forced convection on a cylinder across an air stream.

    Formula: Nu = 0.3 + 0.62 Re^(1/2) Pr^(1/3) / [1 + (0.4/Pr)^(2/3)]^(1/4) [1 + (Re/282000)^(5/8)]^(4/5)
    Parameters: reynolds (on the diameter), prandtl [-].
    Returns: Nusselt number [-], mean around the cylinder, on the diameter.
    Range: Re Pr above 0.2 (`CROSS_FLOW`).
    Example: Incropera Ex. 7.4, third part: Re = 6071, Pr = 0.70 give Nu = 40.6.
    Reference: Churchill and Bernstein, J. Heat Transfer 99 (1977) 300-306; Incropera Eq. 7.54.
    """
    spread = np.cbrt(prandtl) * np.power(1.0 + np.power(0.4 / prandtl, 2 / 3), -1 / 4)
    wake = np.power(1.0 + np.power(reynolds / 282000.0, 5 / 8), 4 / 5)
    return 0.3 + 0.62 * spread * np.sqrt(reynolds) * wake


def nusselt_plate_hot_side_up(rayleigh: Values) -> Values:
    """Natural convection above a hot plate (or below a cold one), the unstable side.

    Formula: Nu = 0.54 Ra^(1/4) for Ra 1e4 to 1e7, 0.15 Ra^(1/3) for Ra 1e7 to 1e11; joined smoothly where
    they cross (Ra = 4.7e6): the larger of the two, rounded over 0.5 %, at most 0.25 % high at the joint.
    Parameters: rayleigh [-] on L = area / perimeter.
    Returns: Nusselt number [-], mean over the plate, on the same length.
    Range: Ra 1e4 to 1e11 (`PLATE_HOT_UP`).
    Example: Incropera Ex. 9.3, p. 577: top of a duct, Ra = 1.38e8, h = 5.47 W/(m2 K).
    Reference: McAdams, Heat Transmission, 3rd ed. 1954; Goldstein, Sparrow and Jones 1973 and Lloyd and
    Moran 1974 for the length; Incropera Eqs. 9.30, 9.31.
    """
    turbulent = 0.15 * np.cbrt(rayleigh)
    return smooth_maximum(0.54 * np.sqrt(np.sqrt(rayleigh)), turbulent, JOIN_WIDTH * turbulent)


def nusselt_plate_hot_side_down(rayleigh: Values) -> Values:
    """Natural convection below a hot plate (or above a cold one), the stable side.

    Formula: Nu = 0.27 Ra^(1/4)
    Parameters: rayleigh [-] on L = area / perimeter.
    Returns: Nusselt number [-], mean over the plate, on the same length.
    Range: Ra 1e5 to 1e10 (`PLATE_HOT_DOWN`); a cup's base is often below it.
    Example: Incropera Ex. 9.3, p. 577: bottom of a duct, Ra = 1.38e8, h = 2.07 W/(m2 K).
    Reference: McAdams, Heat Transmission, 3rd ed. 1954; Incropera Eq. 9.32.
    """
    nusselt: Values = 0.27 * np.sqrt(np.sqrt(rayleigh))
    return nusselt


def nusselt_plate_hot_side_down_radziemska(rayleigh: Values) -> Values:
    """Natural convection below a hot plate, the newer form.

    Formula: Nu = 0.52 Ra^(1/5)
    Parameters: rayleigh [-] on L = area / perimeter.
    Returns: Nusselt number [-], mean over the plate, on the same length.
    Range: Ra 1e4 to 1e9, Pr from 0.7 (`PLATE_HOT_DOWN_RADZIEMSKA`).
    Example: none found; Ra = 2.446632e4 gives 3.924.
    Reference: Radziemska and Lewandowski, Applied Energy 68 (2001) 347-366; Bergman et al., Incropera's
    Principles, 7th ed. 2011, Eq. 9.32. From memory, not re-checked.
    """
    return 0.52 * np.power(rayleigh, 1 / 5)


def nusselt_horizontal_plate(
    rayleigh: Values,
    unstable: Values,
    stable: Callable[[Values], Values] = nusselt_plate_hot_side_down,
) -> Values:
    """A horizontal face, hotter or colder: `unstable` goes smoothly from 0 to 1, see `upward_share`."""
    quiet = stable(rayleigh)
    return quiet + unstable * (nusselt_plate_hot_side_up(rayleigh) - quiet)


def reached_by_plate(rayleigh: Values, lightness: Values, stable: Validity = PLATE_HOT_DOWN) -> list[Applied]:
    """What was reached of the ranges of the two sides; unstable where `lightness` is positive."""
    rayleighs, rising = np.broadcast_arrays(np.atleast_1d(rayleigh), np.atleast_1d(lightness) > 0.0)
    sides = ((PLATE_HOT_UP, rayleighs[rising]), (stable, rayleighs[~rising]))
    return [reached(validity, values) for validity, values in sides if values.size]


def blend(first: Values, second: Values, exponent: float = 3.0) -> Values:
    """Two coefficients that work together: (a^n + b^n)^(1/n).

    Parameters: two coefficients or Nusselt numbers on one length, exponent n [-].
    Returns: the blended coefficient, in the same unit and on the same length.
    Range: forced and natural flow in the same sense or across each other. n = 3 is the usual choice; 7/2
    and 4 are reported for cross flow over plates and cylinders.
    Example: equal parts give 2^(1/3) = 1.26 of either.
    Reference: Churchill and Usagi, AIChE J. 18 (1972) 1121; Incropera sec. 9.9, Eq. 9.64.
    """
    if exponent == 3.0:
        cubes: Values = np.cbrt(first * first * first + second * second * second)
        return cubes
    blended: Values = np.power(np.power(first, exponent) + np.power(second, exponent), 1.0 / exponent)
    return blended
