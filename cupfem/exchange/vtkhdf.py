"""All moments of a run in one VTKHDF file, which holds the mesh once.

Format: VTKHDF 2.0, unstructured grid with steps, of VTK's file format pages (VTK 9.3 and ParaView 5.12 on).
"""

from __future__ import annotations

import io
from collections.abc import Mapping, Sequence
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from cupfem.errors import InputError
from cupfem.exchange.fields import Fields, marks_and_names, section_grid, sections, with_third
from cupfem.exchange.files import explained
from cupfem.exchange.heat_flux import HeatFlux
from cupfem.exchange.vtu import CELL_TYPES, Grid
from cupfem.run import Run

Array = NDArray[Any]
Floats = NDArray[np.float64]

VERSION = (2, 0)


def write_vtkhdf(run: Run, path: str | Path = "fields.vtkhdf") -> Path:
    """Write the stored fields of the free wall into one file, with the arrays of `write_fields`.

    Raises
    ------
    InputError
        If the name does not end in `.vtkhdf`, h5py is not installed, or the place cannot be written to.
    """
    path = Path(path)
    if path.suffix != ".vtkhdf":
        raise InputError("fields", str(path), "the name must end in .vtkhdf", 'write "fields.vtkhdf"')
    content = _content(sections(run)[""])
    with explained(path):
        path.write_bytes(content)
    return path


def _content(section: Fields) -> bytes:
    """Bytes of the file."""
    try:
        import h5py
    except ImportError:
        raise InputError(
            "fields", None, "VTKHDF files need h5py", "install it with: pip install 'cupfem[vtkhdf]'"
        ) from None
    store = io.BytesIO()
    with h5py.File(store, "w", libver=("earliest", "v110")) as file:
        root = file.create_group("VTKHDF")
        root.attrs["Version"] = np.array(VERSION)
        root.attrs.create("Type", b"UnstructuredGrid", dtype=h5py.string_dtype("ascii", 16))
        _write_grid(root, section_grid(section.mesh))
        _write_steps(root, section.times)
        _write_arrays(root, section)
        texts = {name: h5py.string_dtype("ascii") for name in ("region_names", "material_names")}
        _write_texts(root, marks_and_names(section)[1], texts, len(section.times))
    return store.getvalue()


def _write_grid(root: Any, grid: Grid) -> None:
    """The mesh, once: one part that every step refers to."""
    ((kind, cells),) = grid.blocks
    nodes, number = CELL_TYPES[kind]
    sizes = {"Points": len(grid.points), "Cells": len(cells), "ConnectivityIds": cells.size}
    for name, size in sizes.items():
        root.create_dataset(f"NumberOf{name}", data=np.array([size], dtype=np.int64))
    _put(root, "Points", grid.points)
    _put(root, "Connectivity", cells.ravel().astype(np.int64))
    _put(root, "Offsets", nodes * np.arange(len(cells) + 1, dtype=np.int64))
    _put(root, "Types", np.full(len(cells), number, dtype=np.uint8))


def _write_steps(root: Any, times: Floats) -> None:
    steps = root.create_group("Steps")
    count = len(times)
    steps.attrs["NSteps"] = count
    steps.create_dataset("Values", data=times)
    steps.create_dataset("NumberOfParts", data=np.ones(count, dtype=np.int64))
    for name in ("PartOffsets", "PointOffsets"):
        steps.create_dataset(name, data=np.zeros(count, dtype=np.int64))
    for name in ("CellOffsets", "ConnectivityIdOffsets"):
        steps.create_dataset(name, data=np.zeros((count, 1), dtype=np.int64))


def _write_arrays(root: Any, section: Fields) -> None:
    flux = HeatFlux(section.mesh, section.properties)
    along, across = section.mesh.wall_coordinates
    temperatures = section.temperatures
    fluxes = [with_third(flux.at(temperature)) for temperature in temperatures]
    _write_fixed(root, "PointData", {"wall_s_m": along, "wall_n_m": across}, len(section.times))
    _write_fixed(root, "CellData", marks_and_names(section)[0], len(section.times))
    _write_changing(root, "PointData", "temperature_degC", list(temperatures))
    _write_changing(root, "CellData", "heat_flux_W_m2", fluxes)


def _write_fixed(root: Any, kind: str, arrays: Mapping[str, Array], steps: int) -> None:
    """Arrays that are the same at each step: each step begins at the first value."""
    for name, values in arrays.items():
        _put(root.require_group(kind), name, values)
        offsets = root["Steps"].require_group(f"{kind}Offsets")
        offsets.create_dataset(name, data=np.zeros(steps, dtype=np.int64))


def _write_changing(root: Any, kind: str, name: str, values: Sequence[Array]) -> None:
    """Arrays of all steps, one after the other."""
    _put(root.require_group(kind), name, np.concatenate(values))
    starts = np.cumsum([0, *map(len, values[:-1])], dtype=np.int64)
    root["Steps"].require_group(f"{kind}Offsets").create_dataset(name, data=starts)


def _write_texts(root: Any, texts: Mapping[str, Sequence[str]], kinds: Mapping[str, Any], steps: int) -> None:
    """Lists of names, the same at each step. VTK reads ASCII only: another character becomes "?"."""
    for name, values in texts.items():
        plain = [text.encode("ascii", "replace") for text in values]
        root.require_group("FieldData").create_dataset(name, data=plain, dtype=kinds[name])
        offsets = root["Steps"].require_group("FieldDataOffsets")
        offsets.create_dataset(name, data=np.zeros(steps, dtype=np.int64))
        sizes = root["Steps"].require_group("FieldDataSizes")
        sizes.create_dataset(name, data=np.tile(np.array([1, len(values)], dtype=np.int64), (steps, 1)))


def _put(group: Any, name: str, values: Array) -> None:
    group.create_dataset(name, data=values, compression="gzip", shuffle=True)
