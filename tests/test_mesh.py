"""Meshes of the shipped cups and of plain shapes: volumes, areas, names, numbering.

Closed forms: frusta and the Pappus-Guldin theorem (any handbook of geometry).
"""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from shipped import CUPS
from verification.bodies import section

import cupfem
from cupfem import meridian
from cupfem.axisymmetry import EdgeQuadrature, Measure, volume_moments
from cupfem.mesh import build

STRAIGHT = [
    cup
    for cup in map(cupfem.load_cup, CUPS)
    if not cup.outline.inner_profile and not cup.layer[0].thickness_along
]
WHOLE_EDGES = ("inside", "outside", "heel", "brim", "floor", "underside", "skirt")


@pytest.fixture(scope="module", params=CUPS, ids=lambda path: path.stem)
def cup(request):
    return cupfem.load_cup(request.param)


@pytest.fixture(scope="module")
def mesh(cup):
    return build(meridian.build(cup))


def frustum(height, lower, upper):
    return np.pi / 3 * height * (lower**2 + lower * upper + upper**2)


def cone_area(start, end):
    """Lateral area of a frustum between two points (r, z)."""
    return np.pi * (start[0] + end[0]) * np.hypot(end[0] - start[0], end[1] - start[1])


def area(mesh, edge):
    return EdgeQuadrature(mesh, mesh.edge(edge), Measure()).whole().area


def test_there_are_cups():
    assert len(CUPS) >= 5


class TestShippedCups:
    def test_half_bandwidth(self, mesh):
        """At most three times the nodes across the wall: a careless order at the base would make it ten
        times wider.
        """
        assert mesh.half_bandwidth <= 3 * mesh.nodes_across

    def test_jacobians_are_positive(self, mesh):
        """At the corners, where a cell would fold first: twice the area of the triangle of a corner and its
        neighbours.
        """
        corner = mesh.grid.p[:, mesh.grid.t]
        for n in range(4):
            before, after = corner[:, n - 1] - corner[:, n], corner[:, (n + 1) % 4] - corner[:, n]
            assert np.all(after[0] * before[1] - after[1] * before[0] > 0)

    def test_every_unknown_has_its_own_number(self, mesh):
        assert np.array_equal(np.unique(mesh.element_dofs), np.arange(mesh.size))

    def test_regions_cover_each_cell_once(self, cup, mesh):
        cells = np.concatenate(list(mesh.regions.values()))
        assert np.array_equal(np.sort(cells), np.arange(mesh.grid.t.shape[1]))
        solids_and_gaps = {layer.name for layer in cup.layer}
        assert solids_and_gaps <= set(mesh.regions)

    def test_edges_cover_the_boundary(self, cup, mesh):
        """Each boundary facet is on one named edge, but for the axis and the slits at the tips of layers
        that end in the wall.
        """
        named = np.concatenate([mesh.edges[name] for name in WHOLE_EDGES if name in mesh.edges], axis=1)
        facets = {tuple(sorted(pair)) for pair in named[:2].T}
        assert len(facets) == named.shape[1]
        for contact in mesh.contacts:
            facets |= {tuple(sorted(pair)) for face in (contact.inner, contact.outer) for pair in face[:2].T}
        rest = [pair for pair in boundary_of(mesh) if pair not in facets]
        assert facets <= boundary_of(mesh)
        for pair in rest:
            assert np.all(mesh.points[0, list(pair)] < 1e-12) or inside_the_wall(cup, mesh, pair)
        assert sum(bool(np.any(mesh.points[0, list(pair)] > 1e-12)) for pair in rest) <= 16 * len(cup.layer)

    def test_edges_are_not_empty(self, cup, mesh):
        expected = WHOLE_EDGES if cup.base_disc else WHOLE_EDGES[:4]
        for name in expected:
            assert mesh.edge(name).shape[1] > 0

    def test_parts_by_layer_make_up_the_edge(self, mesh):
        for edge in ("inside", "outside"):
            parts = [area(mesh, name) for name in mesh.edges if name.startswith(f"{edge}.")]
            assert sum(parts) == pytest.approx(area(mesh, edge), rel=1e-12)


class TestStraightCups:
    """Closed forms of straight walls: the shipped cups whose inside is one cone and whose innermost layer
    is even."""

    @pytest.fixture(params=STRAIGHT, ids=lambda cup: cup.title)
    def cup(self, request):
        return request.param

    @pytest.fixture
    def mesh(self, cup):
        return build(meridian.build(cup))

    def test_inside_and_base(self, cup, mesh):
        """Straight faces: areas of inside, skirt, floor and underside, and the volume of the base."""
        base = cup.base_disc
        if base is None:
            assert area(mesh, "inside") == pytest.approx(face_area(cup, 0.0, cup.height), rel=1e-9)
            return
        top, r = base.recess + base.thickness, cup.inner_radius
        assert area(mesh, "inside") == pytest.approx(face_area(cup, top, cup.height), rel=1e-9)
        assert area(mesh, "skirt") == pytest.approx(face_area(cup, 0.0, base.recess), rel=1e-9)
        assert area(mesh, "floor") == pytest.approx(np.pi * r(top) ** 2, rel=1e-9)
        assert area(mesh, "underside") == pytest.approx(np.pi * r(base.recess) ** 2, rel=1e-9)
        volume, _ = volume_moments(mesh, mesh.regions["base"], Measure())
        assert volume == pytest.approx(frustum(base.thickness, r(base.recess), r(top)), rel=1e-9)

    def test_innermost_layer(self, cup, mesh):
        """A layer of even thickness on a cone: a rectangle turned about the axis (Pappus-Guldin)."""
        layer = cup.layer[0]
        low, high = cup.layer_range(layer)
        slant = np.hypot(high - low, cup.inner_radius(high) - cup.inner_radius(low))
        across = layer.thickness * (high - low) / slant  # r component of the thickness
        centre = 0.5 * (cup.inner_radius(low) + cup.inner_radius(high)) + 0.5 * across
        volume, centroid = volume_moments(mesh, mesh.regions[layer.name], Measure())
        assert volume == pytest.approx(2 * np.pi * centre * layer.thickness * slant, rel=1e-9)
        assert centroid[0] > 0

    def test_drink_volume(self, cup):
        """Frustum from the floor to the level; the level of a volume is its inverse."""
        shape = meridian.build(cup)
        for share in (0.0, 0.1, 0.5, 1.0):
            level = shape.floor + share * (shape.height - shape.floor)
            exact = frustum(level - shape.floor, cup.inner_radius(shape.floor), cup.inner_radius(level))
            assert shape.volume(level) == pytest.approx(exact, rel=1e-12, abs=1e-18)
            assert shape.level(shape.volume(level)) == pytest.approx(level, abs=1e-13)


def boundary_of(mesh):
    """Pairs of unknowns of the facets that belong to one cell only, by counting."""
    sides = np.concatenate([mesh.element_dofs[[n, (n + 1) % 4]] for n in range(4)], axis=1)
    pairs, counts = np.unique(np.sort(sides, axis=0), axis=1, return_counts=True)
    return {tuple(pair) for pair in pairs[:, counts == 1].T}


def inside_the_wall(cup, mesh, pair):
    """Whether a facet's middle lies within the wall's outline, away from its faces and ends."""
    s, n = mesh.wall_coordinates[:, list(pair)].mean(axis=1)
    profile = cup.profile
    height = np.interp(s, profile.arc_length_at(profile.height), profile.height)
    return 0.0 < height < cup.height and 0.0 < n < float(meridian.build(cup).outer_offset_at(height))


def face_area(cup, low, high):
    return cone_area((cup.inner_radius(low), low), (cup.inner_radius(high), high))


R, T, H, LEAN = (
    0.03,
    2e-3,
    0.09,
    np.radians(7.0),
)  # a plain frustum: inner foot radius, thickness, height, taper


@pytest.fixture(scope="module", params=[1, 2])
def plain(request):
    return section(np.linspace(R, R + T, 5), np.linspace(0.0, H, 12), lean=LEAN, order=request.param)


def corners():
    across = T * np.array([np.cos(LEAN), -np.sin(LEAN)])
    foot, brim = np.array([R, 0.0]), np.array([R + H * np.tan(LEAN), H])
    return {"foot": foot, "brim": brim, "outer foot": foot + across, "outer brim": brim + across}


class TestPlainFrustum:
    """One layer of even thickness on a cone: every area and volume in closed form."""

    @pytest.mark.parametrize(
        ("edge", "start", "end"),
        [
            ("inside", "foot", "brim"),
            ("outside", "outer foot", "outer brim"),
            ("heel", "foot", "outer foot"),
            ("brim", "brim", "outer brim"),
        ],
    )
    def test_areas(self, plain, edge, start, end):
        at = corners()
        assert area(plain, edge) == pytest.approx(cone_area(at[start], at[end]), rel=1e-12)

    def test_volume_and_centroid(self, plain):
        centre = np.mean(list(corners().values()), axis=0)
        slant = H / np.cos(LEAN)
        volume, centroid = volume_moments(plain, plain.regions["wall"], Measure())
        assert volume == pytest.approx(2 * np.pi * centre[0] * T * slant, rel=1e-12)
        plane, middle = volume_moments(plain, plain.regions["wall"], Measure(plane=True))
        assert plane == pytest.approx(T * slant, rel=1e-12)
        np.testing.assert_allclose(middle, centre, rtol=1e-12)
        assert centroid[0] > middle[0]

    @given(ends=st.tuples(st.floats(0.0, H), st.floats(0.0, H)))
    def test_part_of_an_edge(self, plain, ends):
        """The inside between any two heights: a frustum, cut anywhere within a facet."""
        low, high = sorted(ends)
        part = EdgeQuadrature(plain, plain.edge("inside"), Measure()).between(low, high).area
        radius = lambda z: R + z * np.tan(LEAN)  # noqa: E731
        exact = cone_area((radius(low), low), (radius(high), high))
        assert part == pytest.approx(exact, rel=1e-11, abs=1e-16)
