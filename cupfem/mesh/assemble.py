"""Wall and base -> scikit-fem mesh: vertices, cells, names and numbering."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray
from skfem import Basis, ElementQuad1, ElementQuad2, MeshQuad

from cupfem.errors import InputError
from cupfem.meridian import LayerBand
from cupfem.mesh.section import Contact, GapFaces, SectionMesh
from cupfem.mesh.wall import BASE_CELLS, STATION_SPACING, Wall

Floats = NDArray[np.float64]
Ints = NDArray[np.int_]


class Assembler:
    """Vertices, cells, names and numbering of wall and base."""

    def __init__(self, wall: Wall, fineness: float, order: int):
        self.wall = wall
        self.order = order
        self.fineness = fineness
        self.base = wall.meridian.base
        self._number_vertices()
        self._make_wall_cells()
        self._make_base_cells()

    # -- vertices --------------------------------------------------------------------------------------------

    def _number_vertices(self) -> None:
        wall = self.wall
        code = np.arange(len(wall.z))[:, None] * wall.lines + wall.line
        codes, inverse = np.unique(code, return_inverse=True)
        self.vertex = inverse.reshape(code.shape)
        station, line = codes // wall.lines, codes % wall.lines
        self.vertices = wall.points()[:, station, line]
        self.keys = np.array([2.0 * station, 2.0 * line])
        arc = wall.meridian.profile.arc_length_at(wall.z)
        along = arc[station] + wall.shifts[station, line]
        self.wall_coordinates = np.array([along, wall.offsets[station, line]])
        cells, doubled = wall.nodes_across
        self.nodes_across = cells * self.order + 1 + doubled

    # -- cells of the wall -----------------------------------------------------------------------------------

    def _make_wall_cells(self) -> None:
        self.cells: list[Ints] = []
        self.names: list[str] = []
        self.counts: list[int] = []
        self.gap_lines: dict[str, tuple[Ints, Ints]] = {}
        for index, layer in enumerate(self.wall.meridian.layers):
            self._layer_cells(index, layer)

    def _layer_cells(self, index: int, layer: LayerBand) -> None:
        start, stop = int(self.wall.first_line[index]), int(self.wall.last_line[index])
        middle = 0.5 * (self.wall.z[:-1] + self.wall.z[1:])
        body = layer.is_full(middle)
        if layer.material.kind == "gas":
            parts = {layer.name: self.wall.present[index]}
        else:
            parts = {
                layer.name: self.wall.present[index] & body,
                f"{layer.name} pocket": self.wall.present[index] & ~body,
            }
        for name, where in parts.items():
            intervals = np.flatnonzero(where)
            if len(intervals):
                self._add_wall_cells(name, intervals, start, stop)

    def _add_wall_cells(self, name: str, intervals: Ints, start: int, stop: int) -> None:
        i, a = (grid.ravel() for grid in np.meshgrid(intervals, np.arange(start, stop), indexing="ij"))
        v = self.vertex
        self.cells.append(np.array([v[i, a], v[i, a + 1], v[i + 1, a + 1], v[i + 1, a]]))
        self.names.append(name)
        self.counts.append(len(i))
        self.gap_lines[name] = (
            np.array([v[i, start], v[i + 1, start]]),
            np.array([v[i, stop], v[i + 1, stop]]),
        )

    # -- cells of the base -----------------------------------------------------------------------------------

    def _make_base_cells(self) -> None:
        self.joint: tuple[int, int] | None = None
        self.base_first_cell = sum(self.counts)
        if self.base is None:
            return
        z = self.wall.z
        low, high = int(np.argmin(abs(z - self.base.recess))), int(np.argmin(abs(z - self.base.top)))
        self.joint = (low, high)
        joint = self.vertex[low : high + 1, 0]
        columns = self._base_columns(float(self.vertices[0, joint].min()))
        grid = self._base_vertices(joint, columns)
        d, j = (g.ravel() for g in np.meshgrid(np.arange(len(columns)), np.arange(high - low), indexing="ij"))
        self.cells.append(np.array([grid[d + 1, j], grid[d, j], grid[d, j + 1], grid[d + 1, j + 1]]))
        self.names.append("base")
        self.counts.append(len(d))
        self.base_grid = grid

    def _base_columns(self, radius: float) -> Floats:
        """Fractions of the inside radius from the joint to the axis: fine at the wall, coarser inwards."""
        spacing, positions = STATION_SPACING / self.fineness, [0.0]
        while positions[-1] < radius:
            positions.append(positions[-1] + spacing)
            spacing = min(spacing * 1.3, 4.0 * STATION_SPACING / self.fineness)
        return 1.0 - np.array(positions[1:]) / positions[-1]

    def _base_vertices(self, joint: Ints, columns: Floats) -> Ints:
        """`[column, row]` vertex numbers, column 0 the joint; the axis last."""
        first = self.vertices.shape[1]
        rows = len(joint)
        new = np.arange(first, first + len(columns) * rows).reshape(len(columns), rows)
        edge = self.vertices[:, joint]
        points = np.array([columns[:, None] * edge[0], np.broadcast_to(edge[1], (len(columns), rows))])
        self.vertices = np.concatenate([self.vertices, points.reshape(2, -1)], axis=1)
        nothing = np.full((2, new.size), np.nan)
        self.keys = np.concatenate([self.keys, nothing], axis=1)
        self.wall_coordinates = np.concatenate([self.wall_coordinates, nothing], axis=1)
        grid = np.concatenate([joint[None, :], new])
        self.base_place = np.full(self.vertices.shape, np.nan)
        column, row = np.meshgrid(np.arange(len(grid)), np.arange(rows), indexing="ij")
        self.base_place[:, grid] = 2.0 * np.array([column, row])
        return grid

    def _base_keys(self, column: Floats, row: Floats) -> Floats:
        """Place in the numbering of the base's unknowns, half-columns from the joint and half-rows up.

        Two half-columns go between two columns of the wall, starting at the middle of the joint, so that
        neither arm waits for the other. Where the joint has many rows, the base is numbered in waves from its
        upper corner instead, as the wall is from the brim: each half-row of the wall takes a wave with it.
        """
        assert self.joint is not None
        low, high = self.joint
        if high - low <= BASE_CELLS:
            pair = (column + 1) // 2
            return np.array([low + high - 0.5 - 2.0 * (pair - 1) - 0.1 * (column % 2 == 0), row])
        return np.array([2.0 * high - np.maximum(2.0 * (high - low) - row, column), row - column - 1e4])

    # -- the mesh --------------------------------------------------------------------------------------------

    def mesh(self) -> SectionMesh:
        cells = np.concatenate(self.cells, axis=1)
        grid = MeshQuad(np.ascontiguousarray(self.vertices), cells, sort_t=False, validate=False)
        rank, element_dofs, points, coordinates = self._number_unknowns(grid)
        facet_of = _FacetIndex(grid, rank, self.order, self._facet_dofs)
        regions = self._regions()
        return SectionMesh(
            grid=grid,
            order=self.order,
            element_dofs=element_dofs,
            points=points,
            regions=regions,
            edges={name: facet_of(pairs) for name, pairs in self._edges(grid, facet_of).items()},
            along=self._along(cells),
            wall_coordinates=coordinates,
            nodes_across=self.nodes_across,
            gaps=self._gaps(regions, facet_of),
            contacts=self._contacts(facet_of),
            pockets=tuple(name for name in regions if name.endswith(" pocket")),
        )

    def _number_unknowns(self, grid: MeshQuad) -> tuple[Ints, Ints, Floats, Floats]:
        element = ElementQuad2() if self.order == 2 else ElementQuad1()
        basis = Basis(grid, element, intorder=2)
        keys = self._unknown_keys(grid, basis)
        sequence = np.lexsort((keys[1], keys[0]))
        rank = np.empty_like(sequence)
        rank[sequence] = np.arange(len(sequence))
        self._facet_dofs = basis.facet_dofs
        coordinates = self._spread(grid, basis, self.wall_coordinates)[:, sequence]
        return rank, rank[basis.element_dofs], basis.doflocs[:, sequence], coordinates

    def _spread(self, grid: MeshQuad, basis: Basis, at_vertices: Floats) -> Floats:
        """Values at all unknowns from values at vertices: means over the facet or the cell."""
        values = np.empty((len(at_vertices), basis.N))
        values[:, basis.nodal_dofs[0]] = at_vertices
        if self.order == 2:
            values[:, basis.facet_dofs[0]] = at_vertices[:, grid.facets].mean(axis=1)
            values[:, basis.interior_dofs[0]] = at_vertices[:, grid.t].mean(axis=1)
        return values

    def _unknown_keys(self, grid: MeshQuad, basis: Basis) -> Floats:
        keys = self._spread(grid, basis, self.keys)
        if self.joint is not None:
            column, row = self._spread(grid, basis, self.base_place)
            inside = column > 0.0
            keys[:, inside] = self._base_keys(column[inside], row[inside])
        return keys

    def _regions(self) -> dict[str, Ints]:
        ends = np.cumsum(self.counts)
        return {
            name: np.arange(end - count, end)
            for name, end, count in zip(self.names, ends, self.counts, strict=True)
        }

    def _along(self, cells: Ints) -> Floats:
        """Unit vectors along the wall (along the radius in the base), from the middles of opposite sides."""
        corner = self.vertices[:, cells]
        upward = 0.5 * (corner[:, 3] + corner[:, 2] - corner[:, 0] - corner[:, 1])
        outward = 0.5 * (corner[:, 1] + corner[:, 2] - corner[:, 0] - corner[:, 3])
        vector = np.where(np.arange(cells.shape[1]) < self.base_first_cell, upward, outward)
        return np.asarray(vector / np.linalg.norm(vector, axis=0))

    def _edges(self, grid: MeshQuad, facet_of: _FacetIndex) -> dict[str, Ints]:
        """Pairs of vertices of each named edge."""
        v, last = self.vertex, len(self.wall.z) - 1
        face = np.array([v[:-1, 0], v[1:, 0]])
        edges = {"inside": face}
        if self.joint is not None:
            low, high = self.joint
            edges["inside"] = face[:, high:]
            edges["skirt"] = face[:, :low]
            edges["floor"] = np.array([self.base_grid[:-1, -1], self.base_grid[1:, -1]])[::-1, ::-1]
            edges["underside"] = np.array([self.base_grid[:-1, 0], self.base_grid[1:, 0]])[::-1, ::-1]
        edges["heel"], edges["brim"] = self._end(0), self._end(last)
        hidden = [pairs for inner, outer, _ in self._contact_pairs(facet_of) for pairs in (inner, outer)]
        slits = facet_of.existing(self._slits())
        taken = facet_of.indices(np.concatenate([*edges.values(), slits, *hidden], axis=1))
        rest = np.setdiff1d(grid.boundary_facets(), taken)
        outside = grid.facets[:, rest]
        outside = outside[:, (self.vertices[0, outside] > 1e-12).any(axis=0)]
        edges["outside"] = self._upward(outside)
        for name in ("inside", "outside"):
            edges |= self._by_layer(name, edges[name], grid, facet_of)
        return edges

    def _end(self, station: int) -> Ints:
        """Facets across the layers that stand at a station."""
        wall, v = self.wall, self.vertex[station]
        pairs = [np.zeros((2, 0), dtype=int)]
        for index in np.flatnonzero(wall.standing[:, station]):
            across = v[wall.first_line[index] : wall.last_line[index] + 1]
            pairs.append(np.array([across[:-1], across[1:]]))
        return np.concatenate(pairs, axis=1)

    def _by_layer(self, name: str, pairs: Ints, grid: MeshQuad, facet_of: _FacetIndex) -> dict[str, Ints]:
        """The parts of an edge that belong to each layer, as `edge.layer`."""
        owner = grid.f2t[0, facet_of.indices(pairs)]
        return {
            f"{name}.{region}": pairs[:, np.isin(owner, elements)]
            for region, elements in self._regions().items()
            if np.isin(owner, elements).any()
        }

    def _upward(self, pairs: Ints) -> Ints:
        order = np.argsort(self.keys[0, pairs], axis=0, kind="stable")
        pairs = np.take_along_axis(pairs, order, axis=0)
        return np.asarray(
            pairs[:, np.lexsort((self.keys[1, pairs].sum(axis=0), self.keys[0, pairs].sum(axis=0)))]
        )

    def _slits(self) -> Ints:
        """Facets around the tip of a layer that tapers to nothing: the last cell is left out, its sides
        carry no heat."""
        pairs = [np.zeros((2, 0), dtype=int)]
        v = self.vertex
        for index in range(len(self.wall.fractions) - 1):
            start, stop = int(self.wall.first_line[index]), int(self.wall.last_line[index])
            inside = self.wall.line_inside(index)
            present = self.wall.present[index].astype(int)
            outside = np.asarray(self.wall.present[index + 1 :].any(axis=0))
            for i in np.flatnonzero(np.diff(present)):
                station, empty = i + 1, (i if present[i] == 0 else i + 1)
                if outside[empty]:
                    column = v[station, start : stop + 1]
                    pairs.append(np.array([column[:-1], column[1:]]))
                    pairs.append(
                        np.array(
                            [[v[empty, inside], v[empty, stop]], [v[empty + 1, inside], v[empty + 1, stop]]]
                        )
                    )
        return np.concatenate(pairs, axis=1)

    def _gaps(self, regions: dict[str, Ints], facet_of: _FacetIndex) -> dict[str, GapFaces]:
        gases = {layer.name for layer in self.wall.meridian.layers if layer.material.kind == "gas"}
        wanted = [name for name in regions if name in gases or name.endswith(" pocket")]
        return {
            name: GapFaces(regions[name], *(facet_of(pairs) for pairs in self.gap_lines[name]))
            for name in wanted
        }

    def _contact_pairs(self, facet_of: _FacetIndex) -> list[tuple[Ints, Ints, float | Floats]]:
        """Pairs of vertices of the facets inside and outside of each contact, and its conductance."""
        wall = self.wall
        found: list[tuple[Ints, Ints, float | Floats]] = []
        middle = 0.5 * (wall.z[:-1] + wall.z[1:])
        for index, layer in enumerate(wall.meridian.layers):
            inside, start, stop = wall.line_inside(index), wall.first_line[index], wall.last_line[index]
            apart = wall.keeps_apart(index)
            i = self._touching(np.flatnonzero(apart[:-1] & apart[1:]), inside, int(stop), facet_of)
            found.append((*self._facing(i, inside, int(stop)), layer.closing_conductance))
            if index and layer.loose:
                i = self._touching(np.flatnonzero(wall.present[index]), inside, int(start), facet_of)
                conductance = layer.inner_conductance_at(middle[i])
                found.append((*self._facing(i, inside, int(start)), conductance))
        return [contact for contact in found if contact[0].shape[1]]

    def _touching(self, intervals: Ints, inner: int, outer: int, facet_of: _FacetIndex) -> Ints:
        """The intervals at which two lines are faces that lie on each other: not where one spans a step."""
        faces = self._facing(intervals, inner, outer)
        both = facet_of.are_facets(faces[0]) & facet_of.are_facets(faces[1])
        distance = np.abs(self.vertices[:, faces[0]] - self.vertices[:, faces[1]]).max(axis=(0, 1))
        return np.asarray(intervals[both & (distance < 1e-9)])

    def _facing(self, intervals: Ints, inner: int, outer: int) -> tuple[Ints, Ints]:
        v, i = self.vertex, intervals
        return np.array([v[i, inner], v[i + 1, inner]]), np.array([v[i, outer], v[i + 1, outer]])

    def _contacts(self, facet_of: _FacetIndex) -> tuple[Contact, ...]:
        return tuple(
            Contact(facet_of(inner), facet_of(outer), conductance)
            for inner, outer, conductance in self._contact_pairs(facet_of)
        )


class _FacetIndex:
    """Facets by their two vertices."""

    def __init__(self, grid: MeshQuad, rank: Ints, order: int, facet_dofs: Ints):
        self._count = grid.p.shape[1]
        ends = np.sort(grid.facets, axis=0).astype(np.int64)
        codes = ends[0] * self._count + ends[1]
        self._order = np.argsort(codes)
        self._codes = codes[self._order]
        self._rank, self._facet_dofs, self._degree = rank, facet_dofs, order

    def existing(self, pairs: Ints) -> Ints:
        """The pairs that are facets of the mesh."""
        return pairs[:, self.are_facets(pairs)]

    def are_facets(self, pairs: Ints) -> NDArray[np.bool_]:
        """Whether each pair is a facet of the mesh."""
        return self._find(pairs)[1]

    def indices(self, pairs: Ints) -> Ints:
        place, found = self._find(pairs)
        if not found.all():
            raise InputError(
                "mesh", None, "an edge of the drawing is no edge of the mesh", "report this cup file"
            )
        return np.asarray(self._order[place])

    def _find(self, pairs: Ints) -> tuple[Ints, NDArray[np.bool_]]:
        ends = np.sort(pairs, axis=0).astype(np.int64)
        codes = ends[0] * self._count + ends[1]
        place = np.searchsorted(self._codes, codes)
        return place, self._codes[np.minimum(place, len(self._codes) - 1)] == codes

    def __call__(self, pairs: Ints) -> Ints:
        """Unknowns `[3, facet]` (start, end, middle), `[2, facet]` for linear elements. Vertices come first
        in the numbering."""
        ends = self._rank[pairs]
        if self._degree == 1:
            return np.asarray(ends)
        return np.concatenate([ends, self._rank[self._facet_dofs[0, self.indices(pairs)]][None, :]])
