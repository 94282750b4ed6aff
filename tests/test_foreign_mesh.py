"""Half sections meshed by Gmsh 4.15 (`meshes/tube.geo`): two layers, radii 30, 31 and 33 mm, 10 mm high."""

import random
import re
from pathlib import Path

import meshio
import numpy as np
import pytest
from oracles import radial
from verification.bodies import film, marched, solid, steady, system, uniform

import cupfem
from cupfem.conduction import Solid
from cupfem.exchange import read_section
from cupfem.exchange.fields import signed_areas
from cupfem.exchange.heat_flux import centre_shapes

MESHES = Path(__file__).parent / "meshes"
FILES = sorted(file.name for file in MESHES.glob("*.msh"))
LINER, BODY = 0.2, 0.08  # W/(m K)
DRINK, ROOM = 85.0, 22.0  # degC
INSIDE, OUTSIDE = 400.0, 11.0  # W/(m2 K)


def tube(name="tube_quads.msh", **settings):
    return read_section(MESHES / name, unit="mm", **settings)


def body(mesh, liner=None):
    solids = {"liner": liner or solid(LINER, 1e6), "body": solid(BODY, 1e6)}
    return system(mesh, solids, film("inside", INSIDE, DRINK), film("outside", OUTSIDE, ROOM))


def exact_heat_flow(liner=LINER):
    """Films and layers in series [W]; source in `oracles`."""
    layers = [30e-3, 31e-3, 33e-3], [liner, BODY]
    wall = radial.composite_cylinder(*layers, (INSIDE, DRINK), (OUTSIDE, ROOM))
    return 10e-3 * wall.heat_flow_per_length


def leaving(built, state):
    return built.loads(state, 0.0)[1]["outside"]


# -- what is read --------------------------------------------------------------------------------------------


def test_there_are_files_of_both_cells_both_orders_and_both_versions():
    kinds, versions = set(), set()
    for name in FILES:
        kinds |= {block.type for block in meshio.gmsh.read(MESHES / name).cells}
        versions.add((MESHES / name).read_bytes().split()[1])
    assert kinds == {"line", "line3", "triangle", "triangle6", "quad", "quad8", "quad9"}
    assert versions == {b"2.2", b"4.1"}


@pytest.mark.parametrize("name", FILES)
def test_regions_and_edges(name):
    mesh = tube(name)
    area = signed_areas(mesh)
    assert (area > 0.0).all()
    assert area[mesh.regions["liner"]].sum() == pytest.approx(1e-3 * 10e-3, rel=1e-9)
    assert area[mesh.regions["body"]].sum() == pytest.approx(2e-3 * 10e-3, rel=1e-9)
    for edge, length in (("inside", 10e-3), ("outside", 10e-3), ("heel", 3e-3), ("brim", 3e-3)):
        start, end, middle = mesh.points[:, mesh.edge(edge)].transpose(1, 0, 2)
        assert np.hypot(*(end - start)).sum() == pytest.approx(length, rel=1e-9)
        np.testing.assert_allclose(middle, 0.5 * (start + end), atol=1e-12)
    assert set(mesh.points[0, mesh.edge("outside")].ravel().round(9)) == {33e-3}


@pytest.mark.parametrize("name", FILES)
@pytest.mark.parametrize(("order", "allowed"), [(1, 2e-5), (2, 1e-8)])
def test_heat_through_two_layers(name, order, allowed):
    built = body(tube(name, order=order))
    assert leaving(built, steady(built)) == pytest.approx(exact_heat_flow(), rel=allowed)


@pytest.mark.parametrize("name", ["tube_triangles.msh", "tube_quads.msh"])
def test_a_march_comes_to_rest(name):
    built = body(tube(name))
    (state,) = marched(built, uniform(built, ROOM), [3000.0])
    assert leaving(built, state) == pytest.approx(exact_heat_flow(), rel=1e-5)


def test_directions_of_a_region():
    """A liner that conducts 0.2 W/(m K) through and 5 along is crossed through, or along once turned."""
    liner = Solid(LINER, 5.0, 1e6)
    for along, across in (({}, LINER), ({"liner": (2.0, 0.0)}, 5.0)):
        built = body(tube(along=along), liner)
        assert leaving(built, steady(built)) == pytest.approx(exact_heat_flow(across), rel=1e-8)


@pytest.mark.parametrize(("unit", "height"), [("mm", 10e-3), ("m", 10.0), ("in", 0.254)])
def test_units(unit, height):
    assert read_section(MESHES / FILES[0], unit=unit).points[1].max() == pytest.approx(height)


@pytest.mark.parametrize("name", ["tube_triangles.msh", "tube_quads.msh"])
def test_gradients_at_centres(name):
    """Of a linear field, and the shape functions add to one."""
    mesh = tube(name)
    values, slopes = centre_shapes(mesh)
    field = 3.0 * mesh.points[0] - 2.0 * mesh.points[1]
    gradient = np.einsum("dle,le->de", slopes, field[mesh.element_dofs])
    np.testing.assert_allclose(gradient, [[3.0], [-2.0]] * np.ones(gradient.shape[1]), atol=1e-9)
    assert values.sum() == pytest.approx(1.0)


def test_the_band_is_narrow():
    """Reverse Cuthill-McKee keeps a strip of 7 cells across to a band; numbers at random would not."""
    mesh = tube("tube_quads.msh")
    assert mesh.half_bandwidth < mesh.size / 3


# -- what is refused -----------------------------------------------------------------------------------------


def changed(tmp_path, change, name="tube_quads.msh"):
    """A copy of a file, changed and written by meshio in version 2.2."""
    raw = meshio.gmsh.read(MESHES / name)
    raw.cell_sets = {}
    change(raw)
    path = tmp_path / "changed.msh"
    meshio.gmsh.write(path, raw, fmt_version="2.2", binary=True)
    return path


def test_an_unchanged_copy_is_read(tmp_path):
    path = changed(tmp_path, lambda raw: None)
    assert set(read_section(path, unit="mm").regions) == {"liner", "body"}


def lift(raw):
    raw.points[0, 2] = 1.0


def cross_the_axis(raw):
    raw.points[:, 0] -= 31.0


def bend(raw):
    raw.points[raw.cells_dict["line3"][0, 2], 0] -= 0.1


def fold(raw):
    quad = raw.cells_dict["quad"][0]
    raw.points[quad[0]] = raw.points[quad[2]] + [0.01, 0.02, 0.0]


def part(raw):
    """The body gets points of its own where it meets the liner."""
    block = [block for block in raw.cells if block.type == "quad"][1]
    block.data[:] += len(raw.points)
    raw.points = np.concatenate([raw.points, raw.points])


def unname_edges(raw):
    raw.field_data = {name: value for name, value in raw.field_data.items() if value[1] == 2}


def unname_a_region(raw):
    del raw.field_data["body"]


def mix(raw):
    raw.cells.append(meshio.CellBlock("triangle", raw.cells_dict["quad"][:1, :3]))
    for tags in raw.cell_data.values():
        tags.append(tags[-1][:1])


def fill(raw):
    raw.cells.append(meshio.CellBlock("tetra", raw.cells_dict["quad"][:1]))
    for tags in raw.cell_data.values():
        tags.append(tags[-1][:1])


def name_twice(raw):
    """As Gmsh writes a surface of two groups in version 2.2: its cells twice."""
    raw.cells.append(raw.cells[-1])
    for tags in raw.cell_data.values():
        tags.append(tags[-1])


def stray_edge(raw):
    line = next(block for block in raw.cells if block.type == "line")
    line.data[0] = raw.cells_dict["quad"][0, [0, 2]]


@pytest.mark.parametrize(
    ("change", "why"),
    [
        (lift, "not in one plane; draw the half section in x (radius) and y (height)"),
        (cross_the_axis, "a point has a negative radius; draw only the half"),
        (fold, "is flat or folded; mesh it again"),
        (part, "7 points stand twice at one place, so that the parts are not joined"),
        (unname_edges, "no names of edges; name them as physical groups"),
        (unname_a_region, "some cells or edges have no name; put each into one physical group"),
        (mix, "holds triangles and quadrilaterals"),
        (fill, "holds cells of the kind tetra; mesh the flat half section"),
        (name_twice, "a surface lies in two physical groups"),
        (stray_edge, 'edge "inside" does not follow the sides of cells'),
    ],
)
def test_meshes_that_cannot_be_used(tmp_path, change, why):
    path = changed(tmp_path, change)
    with pytest.raises(cupfem.InputError, match=re.escape(why)) as caught:
        read_section(path, unit="mm")
    assert str(caught.value).startswith("mesh file: ")


def test_curved_sides(tmp_path):
    path = changed(tmp_path, bend, "tube_quads_second.msh")
    with pytest.raises(cupfem.InputError, match="a side is curved: its middle is off by 6 % of its length"):
        read_section(path, unit="mm")


def test_missing_names():
    with pytest.raises(cupfem.InputError, match=r'"liners" Did you mean "liner"\?; the file has: body, brim'):
        tube(needed=["liners"])
    with pytest.raises(cupfem.InputError, match='no physical group "lid"'):
        tube(along={"lid": (1.0, 0.0)})


@pytest.mark.parametrize(
    ("settings", "why"),
    [
        ({"order": 3}, "elements are linear or quadratic"),
        ({"along": {"body": (0.0, 0.0)}}, "not a direction"),
        ({"unit": "kg"}, "length"),
    ],
)
def test_settings(settings, why):
    with pytest.raises(cupfem.InputError, match=why):
        read_section(MESHES / FILES[0], **({"unit": "mm"} | settings))


@pytest.mark.parametrize(
    ("name", "why"),
    [
        ("none.msh", "does not exist"),
        ("mesh.stl", r"only Gmsh's \.msh files are read"),
        ("folder.msh", "a folder"),
    ],
)
def test_files_that_are_none(tmp_path, name, why):
    (tmp_path / "folder.msh").mkdir()
    with pytest.raises(cupfem.InputError, match=why):
        read_section(tmp_path / name, unit="mm")


@pytest.mark.parametrize("name", FILES)
def test_a_file_cut_short(tmp_path, name):
    """At fifty places, the last of them within the cells' own lines: one clear line each time."""
    whole = (MESHES / name).read_bytes()
    ends = whole.index(b"$EndElements")
    choose = random.Random(1)
    for cut in [0, 1, ends - 20, *(choose.randrange(2, ends - 20) for _ in range(47))]:
        (tmp_path / "cut.msh").write_bytes(whole[:cut])
        with pytest.raises(cupfem.InputError, match=r"^mesh file: [^\n]*$"):
            read_section(tmp_path / "cut.msh", unit="mm")


def test_the_example_of_the_page_runs(monkeypatch, capsys):
    text = (MESHES.parents[1] / "docs" / "howto" / "foreign_mesh.md").read_text(encoding="utf-8")
    (example,) = re.findall(r"^```python\n(.*?)^```$", text, re.MULTILINE | re.DOTALL)
    monkeypatch.chdir(MESHES)
    exec(compile(example, "foreign_mesh.md", "exec"), {})
    assert "outside" in capsys.readouterr().out
