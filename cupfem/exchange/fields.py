"""Fields of a run for ParaView: one `.pvd` with a `.vtu` file for each stored moment."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from cupfem.conduction import GasLayer, Solid
from cupfem.exchange.heat_flux import HeatFlux
from cupfem.exchange.pvd import write_pvd
from cupfem.exchange.vtu import Arrays, Grid, Template
from cupfem.meridian import Meridian
from cupfem.mesh import SectionMesh
from cupfem.problem import properties
from cupfem.run import Run
from cupfem.skin import get_skin
from cupfem.touch.section import pad_properties

Floats = NDArray[np.float64]

KINDS = {3: "triangle", 4: "quad", 6: "triangle6", 9: "quad9"}
"""Cell by its number of nodes."""
POCKET_MATERIAL = "air"
"""What fills the room beside a layer that ends under others."""
_TURNED = {
    "triangle": (0, 2, 1),
    "quad": (0, 3, 2, 1),
    "triangle6": (0, 2, 1, 5, 4, 3),
    "quad9": (0, 3, 2, 1, 7, 6, 5, 4, 8),
}
"""Nodes of a cell, walked round the other way from the same first corner."""


def write_fields(run: Run, path: str | Path = "fields.pvd") -> Path:
    """Write the stored fields of a run as `.pvd`, with binary `.vtu` files in a folder of the same name.

    Point arrays: `temperature_degC`, `wall_s_m`, `wall_n_m` (along and across the wall; NaN in the base).
    Cell arrays: one of 0 and 1 for each layer, by its name; `region_id` and `material_id`, which count in the
    file's `region_names` and `material_names`; `heat_flux_W_m2` at the centre. x is the radius r and y the
    height z, both in metres; the time is in seconds.

    What stands under a finger, wall and skin, goes to a `.pvd` of its own: `fields_pad1.pvd` for the first
    pad, if a moment was stored while it was held.

    Returns
    -------
    Path
        The `.pvd` file of the free wall. A `.pvd` file is written after those that it names.

    Raises
    ------
    InputError
        If the name does not end in `.pvd`, or the place cannot be written to.
    """
    parts = {part: _moments(held) for part, held in sections(run).items() if len(held.times) or not part}
    return write_pvd(path, parts)


@dataclass(frozen=True, eq=False)
class Fields:
    """Fields `[k, dof]` on a mesh at times `[k]`, and what the mesh is made of."""

    mesh: SectionMesh
    times: Floats
    temperatures: Floats
    properties: Mapping[str, Solid | GasLayer]
    materials: Mapping[str, str]


def sections(run: Run) -> dict[str, Fields]:
    """What a run holds fields of, by the end of the file's name: the free wall, and each pad."""
    materials = wall_materials(run.meridian, run.mesh)
    given = properties(run.cup, run.mesh)
    found = {"": Fields(run.mesh, run.snapshot_times, run.snapshots, given, materials)}
    for number, field in enumerate(run.pads, 1):
        skin = get_skin(field.pad.skin)
        given = pad_properties(run.cup, field.pad, skin, field.mesh)
        tissues = {tissue.name: tissue.name for tissue in skin.layers}
        found[f"_pad{number}"] = Fields(
            field.mesh, field.snapshot_times, field.snapshots, given, {**materials, **tissues}
        )
    return found


def wall_materials(meridian: Meridian, mesh: SectionMesh) -> dict[str, str]:
    """Region -> name of its material."""
    given = {layer.name: layer.material.name for layer in meridian.layers}
    given |= dict.fromkeys(mesh.pockets, POCKET_MATERIAL)
    return given | ({} if meridian.base is None else {"base": meridian.base.material.name})


def _moments(section: Fields) -> Iterator[tuple[float, str]]:
    """Time [s] and file content of each stored field."""
    mesh = section.mesh
    flux, (marks, names) = HeatFlux(mesh, section.properties), marks_and_names(section)
    along, across = mesh.wall_coordinates
    fixed = Arrays(points={"wall_s_m": along, "wall_n_m": across}, cells=marks, whole=names)
    template = Template(section_grid(mesh), fixed)
    for time, temperature in zip(section.times, section.temperatures, strict=True):
        changing = Arrays(
            points={"temperature_degC": temperature},
            cells={"heat_flux_W_m2": with_third(flux.at(temperature))},
            whole={"TimeValue": np.array([time])},
        )
        yield float(time), template.text(changing)


def section_grid(mesh: SectionMesh) -> Grid:
    """Points `[dof, 3]` (r, z, 0) and counter-clockwise cells of a half section."""
    kind, cells = KINDS[len(mesh.element_dofs)], mesh.element_dofs.T.copy()
    clockwise = signed_areas(mesh) < 0.0
    cells[clockwise] = cells[clockwise][:, _TURNED[kind]]
    return Grid(with_third(mesh.points), ((kind, cells),))


def signed_areas(mesh: SectionMesh) -> Floats:
    """Area of each cell's corner polygon `[element]` [m2], positive if it runs counter-clockwise."""
    r, z = mesh.points[:, mesh.element_dofs[: mesh.grid.t.shape[0]]]
    return np.asarray(0.5 * (r * np.roll(z, -1, axis=0) - np.roll(r, -1, axis=0) * z).sum(axis=0))


def marks_and_names(section: Fields) -> tuple[dict[str, NDArray[np.generic]], dict[str, list[str]]]:
    """Cell arrays of region and material, one of 0 and 1 per region, and the lists of names they count in."""
    mesh = section.mesh
    materials = list(dict.fromkeys(section.materials[region] for region in mesh.regions))
    region, material = np.zeros((2, mesh.element_dofs.shape[1]), dtype=np.int32)
    marks: dict[str, NDArray[np.generic]] = {"region_id": region, "material_id": material}
    for number, (name, elements) in enumerate(mesh.regions.items()):
        region[elements], material[elements] = number, materials.index(section.materials[name])
        inside = np.zeros(len(region), dtype=np.uint8)
        inside[elements] = 1
        marks[f"layer_{name}" if name in (*marks, "heat_flux_W_m2") else name] = inside
    return marks, {"region_names": list(mesh.regions), "material_names": materials}


def with_third(vectors: Floats) -> Floats:
    """`[2, n]` to `[n, 3]` with a third component of zero."""
    return np.column_stack([*vectors, np.zeros(vectors.shape[1])])
