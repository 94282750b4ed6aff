"""Fields of a run for ParaView: one `.pvd` with a `.vtu` file for each stored moment."""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from cupfem.cup import Cup
from cupfem.errors import InputError
from cupfem.exchange.files import explained
from cupfem.exchange.heat_flux import HeatFlux
from cupfem.exchange.vtu import Arrays, Grid, pvd_text, vtu_text
from cupfem.mesh import SectionMesh
from cupfem.run import Run

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
    """Write the stored fields of a run as `.pvd` with binary `.vtu` files in a folder of the same name
    beside it.

    Point arrays: `temperature_degC`, `wall_s_m`, `wall_n_m` (along and across the wall; NaN in the base).
    Cell arrays: one of 0 and 1 for each layer, by its name; `region_id` and `material_id`, which count in the
    file's `region_names` and `material_names`; `heat_flux_W_m2` at the centre. x is the radius r and y the
    height z, both in metres; the time is in seconds.

    Returns
    -------
    Path
        The `.pvd` file. It is written last, so that it names only files that are whole.

    Raises
    ------
    InputError
        If the name does not end in `.pvd`, or the place cannot be written to.
    """
    path = Path(path)
    if path.suffix != ".pvd":
        raise InputError("fields", str(path), "the name must end in .pvd", 'write "fields.pvd"')
    with explained(path):
        folder = path.with_suffix("")
        folder.mkdir(exist_ok=True)
        path.unlink(missing_ok=True)
        _clear(folder, path.stem)
        files = []
        for index, (time, text) in enumerate(_moments(run)):
            file = folder / f"{path.stem}_{index:04d}.vtu"
            file.write_text(text, encoding="utf-8")
            files.append((time, f"{folder.name}/{file.name}"))
        path.write_text(pvd_text(files), encoding="utf-8")
    return path


def _clear(folder: Path, stem: str) -> None:
    """Remove the files of an earlier writing, which may have had more moments; nothing else."""
    for file in folder.iterdir():
        if re.fullmatch(rf"{re.escape(stem)}_\d{{4,}}\.vtu", file.name):
            file.unlink()


def _moments(run: Run) -> Iterator[tuple[float, str]]:
    """Time [s] and file content of each stored field."""
    grid, flux = section_grid(run.mesh), HeatFlux(run)
    of_region, material_names = materials(run.cup, run.mesh)
    names = {"region_names": list(run.mesh.regions), "material_names": material_names}
    places, marks = _wall_places(run.mesh), _marks(run.mesh, of_region)
    for time, temperature in zip(run.snapshot_times, run.snapshots, strict=True):
        arrays = Arrays(
            points={"temperature_degC": temperature, **places},
            cells={**marks, "heat_flux_W_m2": _with_third(flux.at(temperature))},
            whole={"TimeValue": np.array([time]), **names},
        )
        yield float(time), vtu_text(grid, arrays)


def section_grid(mesh: SectionMesh) -> Grid:
    """Points `[dof, 3]` (r, z, 0) and counter-clockwise cells of a half section."""
    kind, cells = KINDS[len(mesh.element_dofs)], mesh.element_dofs.T.copy()
    clockwise = signed_areas(mesh) < 0.0
    cells[clockwise] = cells[clockwise][:, _TURNED[kind]]
    return Grid(_with_third(mesh.points), cells, kind)


def signed_areas(mesh: SectionMesh) -> Floats:
    """Area of each cell's corner polygon `[element]` [m2], positive if it runs counter-clockwise."""
    r, z = mesh.points[:, mesh.element_dofs[: mesh.grid.t.shape[0]]]
    return np.asarray(0.5 * (r * np.roll(z, -1, axis=0) - np.roll(r, -1, axis=0) * z).sum(axis=0))


def materials(cup: Cup, mesh: SectionMesh) -> tuple[dict[str, int], list[str]]:
    """Region -> place of its material in the list of names."""
    given = {layer.name: layer.material for layer in cup.layer}
    given |= dict.fromkeys(mesh.pockets, POCKET_MATERIAL)
    if cup.base_disc is not None:
        given["base"] = cup.base_disc.material
    names = list(dict.fromkeys(given[region] for region in mesh.regions))
    return {region: names.index(given[region]) for region in mesh.regions}, names


def _wall_places(mesh: SectionMesh) -> dict[str, Floats]:
    along, across = mesh.wall_coordinates
    return {"wall_s_m": along, "wall_n_m": across}


def _marks(mesh: SectionMesh, of_region: Mapping[str, int]) -> dict[str, NDArray[np.generic]]:
    """Which region and which material each cell belongs to."""
    region, material = np.zeros((2, mesh.element_dofs.shape[1]), dtype=np.int32)
    marks: dict[str, NDArray[np.generic]] = {"region_id": region, "material_id": material}
    for number, (name, elements) in enumerate(mesh.regions.items()):
        region[elements], material[elements] = number, of_region[name]
        inside = np.zeros(len(region), dtype=np.uint8)
        inside[elements] = 1
        marks[f"layer_{name}" if name in (*marks, "heat_flux_W_m2") else name] = inside
    return marks


def _with_third(vectors: Floats) -> Floats:
    """`[2, n]` to `[n, 3]` with a third component of zero."""
    return np.column_stack([*vectors, np.zeros(vectors.shape[1])])
