"""VTK's XML file of an unstructured grid (`.vtu`) and the list of its times (`.pvd`).

Format: VTK User's Guide, 11th edition (2010), "VTK XML file formats", and the VTK file format pages of its
documentation (version 1.0, zlib blocks, 64-bit headers). Every array stands in its own element as base64, so
that the file stays well-formed XML.
"""

from __future__ import annotations

import base64
import struct
import zlib
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any
from xml.sax.saxutils import quoteattr

import numpy as np
from numpy.typing import NDArray

Array = NDArray[Any]
Named = Mapping[str, Array | Sequence[str]]

CELL_TYPES = {
    "triangle": (3, 5),
    "quad": (4, 9),
    "hexahedron": (8, 12),
    "triangle6": (6, 22),
    "quad9": (9, 28),
}
"""Cell -> number of nodes, number of the type (vtkCellType.h)."""
BLOCK = 1 << 20
"""Bytes compressed at once."""
_TYPES = {
    "f8": "Float64",
    "f4": "Float32",
    "i8": "Int64",
    "i4": "Int32",
    "u1": "UInt8",
}


@dataclass(frozen=True, eq=False)
class Grid:
    """Points and blocks of cells, one kind each.

    Attributes
    ----------
    points:
        `[point, 3]` [m].
    blocks:
        Key of `CELL_TYPES`, and points `[cell, node]` in VTK's order: of a flat cell the corners
        counter-clockwise, then the middles of the sides from the first corner on, then the centre.
    """

    points: Array
    blocks: tuple[tuple[str, Array], ...]


@dataclass(frozen=True, eq=False)
class Arrays:
    """Named arrays at points and cells, and of the file as a whole: numbers or a list of texts."""

    points: Mapping[str, Array] = field(default_factory=dict)
    cells: Mapping[str, Array] = field(default_factory=dict)
    whole: Mapping[str, Array | Sequence[str]] = field(default_factory=dict)


class Template:
    """A `.vtu` file whose grid and fixed arrays are packed once, for many moments."""

    def __init__(self, grid: Grid, fixed: Arrays | None = None):
        fixed = fixed or Arrays()
        self._whole = _elements(fixed.whole, whole=True)
        self._points, self._cells = _elements(fixed.points), _elements(fixed.cells)
        self._grid = _grid_elements(grid)
        count = sum(len(cells) for _, cells in grid.blocks)
        self._piece = f'<Piece NumberOfPoints="{len(grid.points)}" NumberOfCells="{count}">'

    def text(self, changing: Arrays) -> str:
        """Content of the file of a moment."""
        parts = [
            '<?xml version="1.0"?>',
            '<VTKFile type="UnstructuredGrid" version="1.0" byte_order="LittleEndian" header_type="UInt64" '
            'compressor="vtkZLibDataCompressor">',
            "<UnstructuredGrid>",
            *_section("FieldData", _elements(changing.whole, whole=True) + self._whole),
            self._piece,
            *_section("PointData", _elements(changing.points) + self._points),
            *_section("CellData", self._cells + _elements(changing.cells)),
            *self._grid,
            "</Piece>",
            "</UnstructuredGrid>",
            "</VTKFile>",
        ]
        return "\n".join(parts) + "\n"


def vtu_text(grid: Grid, arrays: Arrays) -> str:
    """Content of a single `.vtu` file."""
    return Template(grid).text(arrays)


def _grid_elements(grid: Grid) -> list[str]:
    counts = [len(cells) for _, cells in grid.blocks]
    nodes, types = np.repeat([CELL_TYPES[kind] for kind, _ in grid.blocks], counts, axis=0).T
    cells: Named = {
        "connectivity": np.concatenate([cells.ravel() for _, cells in grid.blocks]).astype(np.int64),
        "offsets": np.cumsum(nodes, dtype=np.int64),
        "types": types.astype(np.uint8),
    }
    points: Named = {"Points": grid.points}
    return [*_section("Points", _elements(points)), *_section("Cells", _elements(cells))]


def pvd_text(files: Iterable[tuple[float, str]]) -> str:
    """Content of a `.pvd` file: time [s] and relative address of each `.vtu`."""
    lines = [f'<DataSet timestep="{time!r}" part="0" file={quoteattr(name)}/>' for time, name in files]
    head = '<VTKFile type="Collection" version="0.1" byte_order="LittleEndian">'
    return "\n".join(['<?xml version="1.0"?>', head, "<Collection>", *lines, "</Collection>", "</VTKFile>\n"])


def _section(tag: str, elements: list[str]) -> list[str]:
    return [f"<{tag}>", *elements, f"</{tag}>"]


def _elements(arrays: Named, whole: bool = False) -> list[str]:
    return [_data_array(name, given, whole) for name, given in arrays.items()]


def _data_array(name: str, given: Array | Sequence[str], whole: bool) -> str:
    if isinstance(given, np.ndarray):
        values = np.ascontiguousarray(given.astype(given.dtype.newbyteorder("<"), copy=False))
        kind, raw = _TYPES[values.dtype.str[1:]], values.tobytes()
        shape = f' NumberOfComponents="{values.shape[1]}"' if values.ndim == 2 else ""
    else:
        kind, raw, shape = "String", b"".join(text.encode() + b"\0" for text in given), ""
    if whole:
        shape += f' NumberOfTuples="{len(given)}"'
    head = f'<DataArray type="{kind}" Name={quoteattr(name)}{shape} format="binary">'
    return f"{head}{_packed(raw)}</DataArray>"


def _packed(raw: bytes) -> str:
    """Blocks compressed one by one, behind a header: number, size, size of a partial last one, packed
    sizes."""
    blocks = [zlib.compress(raw[start : start + BLOCK]) for start in range(0, len(raw), BLOCK)]
    header = [len(blocks), BLOCK, len(raw) % BLOCK, *map(len, blocks)]
    packed = struct.pack(f"<{len(header)}Q", *header)
    return (base64.b64encode(packed) + base64.b64encode(b"".join(blocks))).decode("ascii")
