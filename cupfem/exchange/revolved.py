"""The half section turned round its axis: a cup of straight-sided cells to look at in three dimensions."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from cupfem.errors import InputError
from cupfem.exchange.fields import Fields, marks_and_names, section_grid, sections
from cupfem.exchange.heat_flux import HeatFlux
from cupfem.exchange.pvd import write_pvd
from cupfem.exchange.vtu import Arrays, Grid, Template
from cupfem.run import Run

Floats = NDArray[np.float64]
Ints = NDArray[np.int_]

FEWEST, MOST = 3, 720


def write_revolved(run: Run, path: str | Path = "cup.pvd", sectors: int = 48) -> Path:
    """Write the free wall of a run as a body of hexahedra, one `.vtu` file for each moment.

    The arrays are those of `write_fields`, at the corners of the cells only. x and y are level, z is the
    height. Every radius is that of the section; between two of the `sectors` planes the body is straight, so
    that its volume falls short by the share 1 - sin(a)/a, a = 2 pi / sectors (0.3 % for 48).

    Raises
    ------
    InputError
        If the number of sectors is no whole number from 3 to 720, the name does not end in `.pvd`, or the
        place cannot be written to.
    """
    if isinstance(sectors, bool) or not isinstance(sectors, int) or not FEWEST <= sectors <= MOST:
        raise InputError("sectors", sectors, f"must be a whole number from {FEWEST} to {MOST}", 'write "48"')
    return write_pvd(path, {"": _moments(sections(run)[""], sectors)})


@dataclass(frozen=True, eq=False)
class Revolution:
    """How points and cells of a section become those of the body.

    Attributes
    ----------
    grid:
        The body.
    dof:
        `[point]`, unknown of the section that each point of the body comes from.
    element, angle:
        `[cell]`, cell of the section, and angle of the middle of each cell of the body [rad].
    """

    grid: Grid
    dof: Ints
    element: Ints
    angle: Floats


def revolve(section: Grid, sectors: int) -> Revolution:
    """Turn a section of quadrilaterals round its axis.

    A point on the axis stays one point, so that cells there are hexahedra with corners in common. (Wedges
    would do, but VTK 9.7 reads their order in two ways: one for volumes, another for the sides it draws.)
    """
    cells = section.blocks[0][1][:, :4]
    radius = section.points[:, 0]
    used = np.unique(cells)
    fixed, moving = used[radius[used] == 0.0], used[radius[used] > 0.0]
    number = np.zeros((sectors, len(section.points)), dtype=int)
    number[:, fixed] = np.arange(len(fixed))
    number[:, moving] = len(fixed) + np.arange(sectors * len(moving)).reshape(sectors, -1)
    dof = np.concatenate([fixed, np.tile(moving, sectors)])
    angles = 2.0 * np.pi * np.arange(sectors) / sectors
    turned = np.concatenate([np.zeros(len(fixed)), np.repeat(angles, len(moving))])
    points = np.column_stack(
        [radius[dof] * np.cos(turned), radius[dof] * np.sin(turned), section.points[dof, 1]]
    )
    # The counter-clockwise section faces backwards, so the next plane comes first in VTK's order.
    swept = [np.concatenate([there[cells], here[cells]], axis=1) for here, there in _neighbours(number)]
    grid = Grid(points, (("hexahedron", np.concatenate(swept)),))
    middle = np.repeat(angles + np.pi / sectors, len(cells))
    return Revolution(grid, dof, np.tile(np.arange(len(cells)), sectors), middle)


def _neighbours(number: Ints) -> Iterator[tuple[Ints, Ints]]:
    """Each plane's points and those of the next."""
    return zip(number, np.roll(number, -1, axis=0), strict=True)


def _moments(section: Fields, sectors: int) -> Iterator[tuple[float, str]]:
    """Time [s] and file content of each stored field."""
    mesh = section.mesh
    body = revolve(section_grid(mesh), sectors)
    flux, (marks, names) = HeatFlux(mesh, section.properties), marks_and_names(section)
    along, across = mesh.wall_coordinates[:, body.dof]
    fixed = Arrays(
        points={"wall_s_m": along, "wall_n_m": across},
        cells={name: values[body.element] for name, values in marks.items()},
        whole=names,
    )
    template = Template(body.grid, fixed)
    for time, temperature in zip(section.times, section.temperatures, strict=True):
        outwards, upwards = flux.at(temperature)[:, body.element]
        vectors = [outwards * np.cos(body.angle), outwards * np.sin(body.angle), upwards]
        changing = Arrays(
            points={"temperature_degC": temperature[body.dof]},
            cells={"heat_flux_W_m2": np.column_stack(vectors)},
            whole={"TimeValue": np.array([time])},
        )
        yield float(time), template.text(changing)
