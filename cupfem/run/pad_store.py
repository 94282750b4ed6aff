"""Pads of a run as arrays and back; the mesh goes with its fields, for nothing else makes it here."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np
from numpy.typing import NDArray
from skfem import MeshQuad

from cupfem.mesh import Contact, GapFaces, SectionMesh
from cupfem.run.pads import PadField
from cupfem.serving import Pad

Arrays = dict[str, NDArray[Any]]

FIELDS = ("heights", "depths", "time", "skin", "wall", "snapshot_times", "snapshots")
MESH = ("element_dofs", "points", "along", "wall_coordinates")


def pad_arrays(pads: tuple[PadField, ...]) -> Arrays:
    """Arrays of all pads by the names "pad/number/..."."""
    out: Arrays = {}
    for number, field in enumerate(pads):
        start = f"pad/{number}"
        out |= {f"{start}/{name}": getattr(field, name) for name in FIELDS}
        out |= {f"{start}/mesh/{name}": values for name, values in _mesh_arrays(field.mesh).items()}
    return out


def pads_from(arrays: Mapping[str, NDArray[Any]], pads: tuple[Pad, ...]) -> tuple[PadField, ...]:
    """Pads from such arrays, each with the pad of the serving that it belongs to."""
    out = []
    for number, pad in enumerate(pads):
        start = f"pad/{number}"
        mesh = _mesh_from({name.removeprefix(f"{start}/mesh/"): values for name, values in arrays.items()
                           if name.startswith(f"{start}/mesh/")})  # fmt: skip
        out.append(PadField(pad, mesh, **{name: arrays[f"{start}/{name}"] for name in FIELDS}))
    return tuple(out)


def _mesh_arrays(mesh: SectionMesh) -> Arrays:
    out: Arrays = {name: getattr(mesh, name) for name in MESH}
    out |= {"vertices": mesh.grid.p, "cells": mesh.grid.t, "nodes": np.array([mesh.order, mesh.nodes_across])}
    out |= {f"region/{name}": elements for name, elements in mesh.regions.items()}
    out |= {f"edge/{name}": facets for name, facets in mesh.edges.items()}
    for name, gap in mesh.gaps.items():
        out |= {f"gap/{name}/{part}": getattr(gap, part) for part in ("elements", "inner", "outer")}
    for number, contact in enumerate(mesh.contacts):
        parts = {"inner": contact.inner, "outer": contact.outer, "conductance": contact.conductance}
        out |= {f"contact/{number}/{part}": np.asarray(values) for part, values in parts.items()}
    return out


def _mesh_from(arrays: Arrays) -> SectionMesh:
    order, across = (int(value) for value in arrays["nodes"])
    regions = _group(arrays, "region/")
    gaps = {name.rpartition("/")[0] for name in _group(arrays, "gap/")}
    contacts = {name.rpartition("/")[0] for name in _group(arrays, "contact/")}
    return SectionMesh(
        grid=MeshQuad(arrays["vertices"], arrays["cells"], sort_t=False, validate=False),
        order=order,
        regions=regions,
        edges=_group(arrays, "edge/"),
        nodes_across=across,
        gaps={name: GapFaces(**_group(arrays, f"gap/{name}/")) for name in sorted(gaps)},
        contacts=tuple(Contact(**_group(arrays, f"contact/{name}/")) for name in sorted(contacts, key=int)),
        pockets=tuple(name for name in regions if name.endswith(" pocket")),
        **{name: arrays[name] for name in MESH},
    )


def _group(arrays: Arrays, start: str) -> Arrays:
    return {name.removeprefix(start): values for name, values in arrays.items() if name.startswith(start)}
