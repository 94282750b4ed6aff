"""Closed forms of special walls: between two cones, laminated, flat between a fluid and a fixed face."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike

from ._series import Array


def conical_shell_flow(
    angles: tuple[float, float], slant: tuple[float, float], conductivity: float, drop: float
) -> float:
    """Heat flow [W] outwards through a wall between two coaxial cones with one apex.

    angles: half-angles of the inner and outer cone [rad]; slant: distances from the apex of the two insulated
    ends [m]; drop: inner minus outer temperature [K]. Laplace's equation in spherical coordinates depends on
    ln tan(theta/2) alone. Source: W.R. Van Sant, Conduction Heat Transfer Solutions, UCRL-52863, 1980, lists
    solutions of this type (from memory, not re-checked); derived here.
    """
    inner, outer = (np.log(np.tan(angle / 2)) for angle in angles)
    return float(2 * np.pi * conductivity * (slant[1] - slant[0]) * drop / (outer - inner))


def conical_shell_temperature(
    angle: ArrayLike, angles: tuple[float, float], faces: tuple[float, float]
) -> Array:
    """Temperature at a half-angle [rad]; faces: (inner, outer) temperature. Source: `conical_shell_flow`."""
    inner, outer = (np.log(np.tan(a / 2)) for a in angles)
    share = (np.log(np.tan(np.asarray(angle, dtype=float) / 2)) - inner) / (outer - inner)
    return np.asarray(faces[0] + (faces[1] - faces[0]) * share)


def laminate_conductivity(first: float, second: float, share_of_second: float) -> tuple[float, float]:
    """Conductivity of a layered medium across and along its layers [W/(m K)].

    Source: O. Wiener, Abh. Saechs. Ges. Wiss. 32 (1912) 509 (from memory, not re-checked): series and
    parallel bounds, both attained by layers.
    """
    across = 1 / ((1 - share_of_second) / first + share_of_second / second)
    return across, (1 - share_of_second) * first + share_of_second * second


def wall_to_fluid(
    thickness: float, conductivity: float, face: float, film: float, fluid: float
) -> tuple[float, float]:
    """Heat flux [W/m2] from a fluid into a plane wall with its far face held, and the wetted face [C].

    Source: AFNOR/SFM, Guide de validation, 1990, TPLL01.
    """
    flux = (fluid - face) / (1 / film + thickness / conductivity)
    return flux, fluid - flux / film


def heated_sheet(flux: float, fluid: float, film: float, beneath: tuple[float, ...]) -> float:
    """Temperature [C] of a thin sheet that gives off `flux` [W/m2], same film and fluid on both sides.

    `beneath`: area resistances [m2 K/W] between the sheet and the film below. Source: Incropera et al.,
    6th ed. 2007, Example 3.2.
    """
    return fluid + flux / (film + 1 / (sum(beneath) + 1 / film))


def critical_radius(conductivity: float, film: float) -> float:
    """Radius [m] of tube insulation of greatest loss, k/h. Source: Incropera et al., 6th ed., Ex. 3.5."""
    return conductivity / film
