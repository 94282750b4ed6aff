"""Block grid of the half section -> scikit-fem mesh, with names from the drawing and a numbering that keeps
the band narrow.

The wall is a grid of stations (along) and lines (across); a layer that stops takes its lines with it. The
base is a second grid
whose last column is the wall's inside face at the joint. Unknowns are numbered station by station; the
columns of the base are
slipped between those of the wall below the joint, so that the band stays about as narrow as the wall's own.
"""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
from numpy.typing import NDArray

from cupfem.errors import InputError
from cupfem.meridian import Meridian
from cupfem.mesh.assemble import Assembler
from cupfem.mesh.section import Contact, GapFaces, SectionMesh
from cupfem.mesh.wall import Wall, default_fractions, default_stations

__all__ = ["Contact", "GapFaces", "SectionMesh", "build", "default_fractions", "default_stations"]

Floats = NDArray[np.float64]


def build(
    meridian: Meridian,
    fineness: float = 1.0,
    *,
    order: int = 2,
    stations: Floats | None = None,
    fractions: Mapping[str, Floats] | None = None,
) -> SectionMesh:
    """Mesh a half section.

    Parameters
    ----------
    fineness:
        Cells per length relative to the default, 0.25 to 16.
    stations:
        Heights [m] of the grid's columns instead of the automatic ones.
    fractions:
        For layers by name, where the lines across stand between 0 (inner face) and 1.
    """
    if not 0.1 <= fineness <= 32:
        raise InputError(
            "fineness", fineness, "it must lie between 0.1 and 32", "1 is the default, 2 halves each cell"
        )
    wall = Wall(meridian, fineness, stations, fractions or {})
    return Assembler(wall, fineness, order).mesh()
