"""Fields for ParaView, read back with VTK's own reader (vtkXMLUnstructuredGridReader)."""

import dataclasses
import math
import re
import shutil
import subprocess
import sys
import xml.etree.ElementTree as ET
from pathlib import Path

import numpy as np
import pytest
import vtk
from vtk.util.numpy_support import vtk_to_numpy

import cupfem
from cupfem.exchange import write_fields
from cupfem.exchange.fields import section_grid
from cupfem.exchange.heat_flux import HeatFlux
from cupfem.exchange.vtu import Arrays, Grid, vtu_text
from cupfem.gaps import Gap
from cupfem.problem import properties

ROOT = Path(__file__).parents[1]
CUP = ROOT / "geometries" / "double_wall.toml"
UNIT = re.compile(r"_(degC|m|W_m2)$")


@pytest.fixture(scope="module")
def run():
    serving = cupfem.Serving(duration="10 min", drink=cupfem.Drink(temperature="85 degC"))
    return cupfem.pour(cupfem.load_cup(CUP), serving, fineness=0.5, companion=False)


@pytest.fixture(scope="module")
def written(run, tmp_path_factory):
    return write_fields(run, tmp_path_factory.mktemp("fields") / "fields.pvd")


@pytest.fixture(scope="module")
def held():
    """A run with two pads, the second of them between two stored moments."""
    pads = [
        {"height": "50 mm", "width": "6 mm", "pick_up": "10 s"},
        {"height": "70 mm", "width": "6 mm", "pick_up": "12 s", "release": "15 s"},
    ]
    serving = cupfem.Serving(duration="60 s", pad=pads)
    return cupfem.pour(cupfem.load_cup(CUP), serving, fineness=0.25, companion=False)


def heat_flux(run, field):
    """Heat flux of a field of the free wall `[2, element]`."""
    return HeatFlux(run.mesh, properties(run.cup, run.mesh)).at(field)


def listed(path):
    """Time and file of each entry of a `.pvd`."""
    entries = ET.parse(path).getroot().findall("Collection/DataSet")
    return [(float(entry.attrib["timestep"]), path.parent / entry.attrib["file"]) for entry in entries]


def read(path):
    reader = vtk.vtkXMLUnstructuredGridReader()
    reader.SetFileName(str(path))
    reader.Update()
    assert reader.GetErrorCode() == 0
    return reader.GetOutput()


def arrays(data):
    """Name -> array of point or cell data."""
    names = [data.GetArrayName(index) for index in range(data.GetNumberOfArrays())]
    return {name: vtk_to_numpy(data.GetArray(name)) for name in names}


def texts(grid, name):
    values = grid.GetFieldData().GetAbstractArray(name)
    return [values.GetValue(index) for index in range(values.GetNumberOfValues())]


def sides(grid, number):
    """Start, end and middle node `[side, 3]` of a cell, as VTK orders them."""
    cell = grid.GetCell(number)
    return np.array(
        [
            [cell.GetEdge(side).GetPointId(node) for node in range(3)]
            for side in range(cell.GetNumberOfEdges())
        ]
    )


def misplaced_middles(grid):
    """Largest distance of a side's middle node from the middle of its ends, over all cells [m]."""
    points = vtk_to_numpy(grid.GetPoints().GetData())
    start, end, middle = np.concatenate([sides(grid, n) for n in range(grid.GetNumberOfCells())]).T
    return np.abs(points[middle] - 0.5 * (points[start] + points[end])).max()


# -- times, names and values ---------------------------------------------------------------------------------


def test_the_list_names_every_stored_time(run, written):
    times, files = zip(*listed(written), strict=True)
    assert list(times) == list(run.snapshot_times)
    assert sorted(files) == sorted(written.with_suffix("").iterdir())


def test_each_file_holds_its_time(written):
    for time, file in listed(written):
        assert read(file).GetFieldData().GetArray("TimeValue").GetValue(0) == time


def test_temperatures_are_those_of_the_run(run, written):
    for (_, file), field in zip(listed(written), run.snapshots, strict=True):
        found = arrays(read(file).GetPointData())["temperature_degC"]
        np.testing.assert_allclose(found, field, rtol=0.0, atol=1e-6)


def test_places_are_those_of_the_mesh(run, written):
    grid = read(listed(written)[0][1])
    points, data = vtk_to_numpy(grid.GetPoints().GetData()), arrays(grid.GetPointData())
    np.testing.assert_array_equal(points[:, :2].T, run.mesh.points)
    assert not points[:, 2].any()
    np.testing.assert_array_equal([data["wall_s_m"], data["wall_n_m"]], run.mesh.wall_coordinates)
    at_axis = points[:, 0] == 0.0
    assert at_axis.any()
    assert np.isnan(data["wall_s_m"][at_axis]).all()


def test_arrays_of_numbers_with_a_dimension_carry_their_unit(written):
    grid = read(listed(written)[0][1])
    assert all(UNIT.search(name) for name in arrays(grid.GetPointData()))
    floats = {n for n, a in arrays(grid.GetCellData()).items() if np.issubdtype(a.dtype, np.floating)}
    assert floats == {"heat_flux_W_m2"}


def test_one_array_of_zero_and_one_for_each_region(run, written):
    grid = read(listed(written)[-1][1])
    cells = arrays(grid.GetCellData())
    names = texts(grid, "region_names")
    assert names == list(run.mesh.regions) == ["inner", "gap", "outer", "base"]
    marks = np.array([cells[name] for name in names])
    assert marks.dtype == np.uint8
    assert set(marks.ravel()) == {0, 1}
    assert (marks.sum(axis=0) == 1).all()
    np.testing.assert_array_equal(marks.argmax(axis=0), cells["region_id"])


def test_material_names(written):
    grid = read(listed(written)[0][1])
    cells, names = arrays(grid.GetCellData()), texts(grid, "material_names")
    assert {names[i] for i in cells["material_id"][cells["gap"] == 1]} == {"air"}
    assert {names[i] for i in cells["material_id"][cells["gap"] == 0]} == {"cupstock board"}


def test_a_layer_may_be_called_like_an_array_of_the_file(tmp_path):
    text = CUP.read_text(encoding="utf-8").replace('name = "inner"', 'name = "material_id"')
    (tmp_path / "cup.toml").write_text(text, encoding="utf-8")
    serving = cupfem.Serving(duration="10 s")
    odd = cupfem.pour(cupfem.load_cup(tmp_path / "cup.toml"), serving, fineness=0.25, companion=False)
    cells = arrays(read(listed(write_fields(odd, tmp_path / "odd.pvd"))[0][1]).GetCellData())
    assert cells["layer_material_id"].sum() == len(odd.mesh.regions["material_id"])
    assert cells["material_id"].dtype == np.int32


# -- geometry ------------------------------------------------------------------------------------------------


def test_cells_are_biquadratic_and_their_nodes_in_vtk_s_order(written):
    grid = read(listed(written)[0][1])
    assert {grid.GetCellType(n) for n in range(grid.GetNumberOfCells())} == {vtk.VTK_BIQUADRATIC_QUAD}
    assert misplaced_middles(grid) < 1e-12


def test_a_wrong_order_of_nodes_is_seen(run, tmp_path):
    """Planted fault: two middle nodes exchanged."""
    grid = section_grid(run.mesh)
    ((_, cells),) = grid.blocks
    cells[3, [4, 5]] = cells[3, [5, 4]]
    (tmp_path / "odd.vtu").write_text(vtu_text(grid, Arrays()), encoding="utf-8")
    assert misplaced_middles(read(tmp_path / "odd.vtu")) > 1e-5


def shoelace(points, cells):
    x, y = points[cells[:, :4], 0], points[cells[:, :4], 1]
    return 0.5 * (x * np.roll(y, -1, axis=1) - np.roll(x, -1, axis=1) * y).sum(axis=1)


@pytest.mark.parametrize("turned", [False, True])
def test_cells_run_counter_clockwise(run, tmp_path, turned):
    """Otherwise normals point away from the viewer; a mesh with clockwise cells is turned."""
    order = [0, 3, 2, 1, 7, 6, 5, 4, 8] if turned else slice(None)
    mesh = dataclasses.replace(run.mesh, element_dofs=run.mesh.element_dofs[order])
    grid = section_grid(mesh)
    assert (shoelace(grid.points, grid.blocks[0][1]) > 0.0).all()
    (tmp_path / "mesh.vtu").write_text(vtu_text(grid, Arrays()), encoding="utf-8")
    assert misplaced_middles(read(tmp_path / "mesh.vtu")) < 1e-12


def test_area_of_a_layer(written):
    """VTK's own areas against slant length times thickness of the drawing (95 mm high, radii 39 and 27.5 mm,
    0.33 mm thick, ends cut square)."""
    sizes = vtk.vtkCellSizeFilter()
    sizes.SetInputData(read(listed(written)[0][1]))
    sizes.Update()
    cells = arrays(sizes.GetOutput().GetCellData())
    area = cells["Area"][cells["inner"] == 1].sum()
    assert area == pytest.approx(math.hypot(95e-3, 11.5e-3) * 0.33e-3, rel=1e-9)


# -- heat flux -----------------------------------------------------------------------------------------------


def test_heat_flux_in_a_solid(run):
    """-k grad T of a linear field, split along and across a wall that leans by atan(11.5 / 95)."""
    gradient = np.array([3000.0, 500.0])
    flux = heat_flux(run, gradient @ run.mesh.points)
    board = run.cup.material("cupstock board")
    lean = math.atan2(11.5, 95.0)
    along, across = np.array([math.sin(lean), math.cos(lean)]), np.array([math.cos(lean), -math.sin(lean)])
    expected = -board.conductivity_along.value * (gradient @ along) * along
    expected -= board.conductivity_through.value * (gradient @ across) * across
    for element in run.mesh.regions["inner"]:
        np.testing.assert_allclose(flux[:, element], expected, rtol=1e-9)


def outward_flow(run, region):
    """Heat that crosses a region between 25 and 75 mm along the wall [W], mean over its rows of cells."""
    mesh = run.mesh
    elements = mesh.regions[region]
    elements = elements[abs(mesh.wall_coordinates[0, mesh.element_dofs[8, elements]] - 50e-3) < 25e-3]
    low, high, centre = (mesh.points[:, mesh.element_dofs[node, elements]] for node in (4, 6, 8))
    along = mesh.along[:, elements]
    across = (heat_flux(run, run.snapshots[-1])[:, elements] * [along[1], -along[0]]).sum(axis=0)
    rows = len(np.unique(np.round(mesh.wall_coordinates[1, mesh.element_dofs[8, elements]], 7)))
    return (across * 2.0 * math.pi * centre[0] * np.hypot(*(high - low))).sum() / rows


def test_heat_crosses_gap_and_layers_alike(run, monkeypatch):
    """Well after the pour, nearly the same heat crosses inner layer, gap and outer layer between two heights.
    Planted fault: the gas alone as the gap's conductivity."""
    inner, gap, outer = (outward_flow(run, region) for region in ("inner", "gap", "outer"))
    assert inner == pytest.approx(gap, rel=0.01)
    assert outer == pytest.approx(gap, rel=0.01)
    monkeypatch.setattr(Gap, "through_conductivity", lambda gap, t, *_: gap.along_conductivity(t))
    assert outward_flow(run, "gap") < 0.8 * gap


def test_heat_flux_under_the_surface_carries_what_leaves_it(run):
    """Over the whole height, against convection and radiation of the march's own edge integrals; 1 %: the
    centres of the outermost cells lie a little under the surface, and the wall is cooling."""
    mesh, elements = run.mesh, run.mesh.regions["outer"]
    place, across = mesh.wall_coordinates[:, mesh.element_dofs[8, elements]]
    same_place = abs(place[:, None] - place) < 1e-7
    outermost = elements[across >= np.where(same_place, across, 0.0).max(axis=1) - 1e-9]
    low, high, centre = (mesh.points[:, mesh.element_dofs[node, outermost]] for node in (4, 6, 8))
    along = mesh.along[:, outermost]
    flux = (heat_flux(run, run.snapshots[-1])[:, outermost] * [along[1], -along[0]]).sum(axis=0)
    leaving = run.series.powers["outside convection"][-1] + run.series.powers["outside radiation"][-1]
    assert (flux * 2.0 * math.pi * centre[0] * np.hypot(*(high - low))).sum() == pytest.approx(
        leaving, rel=0.01
    )


def test_heat_flux_in_the_file(run, written):
    for number in (0, -1):
        found = arrays(read(listed(written)[number][1]).GetCellData())["heat_flux_W_m2"]
        np.testing.assert_allclose(found[:, :2].T, heat_flux(run, run.snapshots[number]), rtol=1e-6)
        assert not found[:, 2].any()


# -- fingers -------------------------------------------------------------------------------------------------


def test_a_pad_has_fields_of_its_own(held, tmp_path):
    path = write_fields(held, tmp_path / "fields.pvd")
    assert sorted(file.name for file in tmp_path.iterdir()) == ["fields", "fields.pvd", "fields_pad1.pvd"]
    found = listed(tmp_path / "fields_pad1.pvd")
    assert [time for time, _ in found] == [10.0, 20.0, 30.0, 60.0]
    for (_, file), field in zip(found, held.pads[0].snapshots, strict=True):
        grid = read(file)
        temperature = arrays(grid.GetPointData())["temperature_degC"]
        np.testing.assert_allclose(temperature, field, rtol=0.0, atol=1e-6)
        assert misplaced_middles(grid) < 1e-12
    assert {"inner", "outer", "epidermis", "dermis"} < set(texts(grid, "region_names"))
    assert {"cupstock board", "air", "epidermis"} < set(texts(grid, "material_names"))
    assert [time for time, _ in listed(path)] == list(held.snapshot_times)


def test_heat_flux_into_the_skin(held, tmp_path):
    """In the middle of the pad, what the outer layer's last cells carry is what the first of the skin take:
    within 3 %, since their centres lie apart and the skin is still warming."""
    write_fields(held, tmp_path / "fields.pvd")
    cells = arrays(read(listed(tmp_path / "fields_pad1.pvd")[-1][1]).GetCellData())
    mesh = held.pads[0].mesh
    place, across = mesh.wall_coordinates[:, mesh.element_dofs[8]]
    along = mesh.along
    flux = (cells["heat_flux_W_m2"][:, :2].T * [along[1], -along[0]]).sum(axis=0)
    skin = np.flatnonzero(cells["epidermis"])
    middle = skin[np.argmin(abs(place[skin] - 50.4e-3))]
    column = np.flatnonzero(abs(place - place[middle]) < 1e-7)
    first = min((c for c in column if cells["epidermis"][c]), key=lambda c: across[c])
    last = max((c for c in column if cells["outer"][c]), key=lambda c: across[c])
    assert flux[first] > 100.0
    assert flux[last] == pytest.approx(flux[first], rel=0.03)


def test_fewer_pads_leave_no_old_files(held, run, tmp_path):
    write_fields(held, tmp_path / "fields.pvd")
    write_fields(run, tmp_path / "fields.pvd")
    assert {file.name for file in tmp_path.iterdir()} == {"fields", "fields.pvd"}
    assert not list((tmp_path / "fields").glob("*pad*"))


# -- the writer alone ----------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("kind", "number", "nodes"),
    [
        ("triangle", vtk.VTK_TRIANGLE, 3),
        ("quad", vtk.VTK_QUAD, 4),
        ("triangle6", vtk.VTK_QUADRATIC_TRIANGLE, 6),
    ],
)
def test_other_cells(tmp_path, kind, number, nodes):
    grid = Grid(np.arange(3.0 * nodes).reshape(nodes, 3), ((kind, np.arange(nodes)[None]),))
    (tmp_path / "one.vtu").write_text(vtu_text(grid, Arrays()), encoding="utf-8")
    cell = read(tmp_path / "one.vtu").GetCell(0)
    assert (cell.GetCellType(), cell.GetNumberOfPoints()) == (number, nodes)


@pytest.mark.parametrize("count", [1, 131072, 131073, 300000])
def test_arrays_of_any_length(tmp_path, count):
    """Shorter than a block of the packed form, exactly one, one more, and several."""
    grid = Grid(np.random.default_rng(1).random((count, 3)), (("triangle", np.zeros((1, 3), dtype=int)),))
    values = {"v": np.arange(count, dtype=np.float64)}
    whole = {"names": ["board", "cartón", ""]}
    (tmp_path / "long.vtu").write_text(vtu_text(grid, Arrays(points=values, whole=whole)), encoding="utf-8")
    found = read(tmp_path / "long.vtu")
    np.testing.assert_array_equal(vtk_to_numpy(found.GetPoints().GetData()), grid.points)
    np.testing.assert_array_equal(arrays(found.GetPointData())["v"], values["v"])
    assert texts(found, "names") == whole["names"]


def test_the_same_bytes_again(run, written, tmp_path):
    again = write_fields(run, tmp_path / "fields.pvd")
    for (_, old), (_, new) in zip(listed(written), listed(again), strict=True):
        assert old.read_bytes() == new.read_bytes()


# -- places --------------------------------------------------------------------------------------------------


def test_a_second_writing_leaves_no_old_moments(run, tmp_path):
    path = write_fields(run, tmp_path / "fields.pvd")
    (tmp_path / "fields" / "notes.txt").write_text("mine", encoding="utf-8")
    short = dataclasses.replace(run, snapshot_times=run.snapshot_times[:2], snapshots=run.snapshots[:2])
    write_fields(short, path)
    names = {file.name for file in (tmp_path / "fields").iterdir()}
    assert names == {"fields_0000.vtu", "fields_0001.vtu", "notes.txt"}


def test_another_ending_is_refused(run, tmp_path):
    with pytest.raises(cupfem.InputError, match=r'must end in \.pvd; write "fields\.pvd"'):
        write_fields(run, tmp_path / "fields.vtu")
    assert not any(tmp_path.iterdir())


def test_a_missing_folder_is_told(run, tmp_path):
    with pytest.raises(cupfem.InputError, match="does not exist; make that folder first"):
        write_fields(run, tmp_path / "nowhere" / "fields.pvd")


def test_writing_loads_no_meshio():
    """Nor matplotlib: fields are written on machines without a screen."""
    code = "import cupfem, sys; cupfem.write_fields; print({'meshio', 'matplotlib'} & set(sys.modules))"
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True, cwd=ROOT)
    assert done.stdout.strip() == "set()"


# -- the pages -----------------------------------------------------------------------------------------------


@pytest.mark.parametrize("page", ["fields", "run_folder"])
def test_the_examples_of_the_pages_run(tmp_path, monkeypatch, page):
    text = (ROOT / "docs" / "howto" / f"{page}.md").read_text(encoding="utf-8")
    example, *_ = re.findall(r"^```python\n(.*?)^```$", text, re.MULTILINE | re.DOTALL)
    shutil.copytree(ROOT / "geometries", tmp_path / "geometries")
    monkeypatch.chdir(tmp_path)
    exec(compile(example, page, "exec"), {})
    assert any(tmp_path.glob("**/fields.pvd"))


def test_the_page_names_every_array(written):
    """Layers apart, which the cup file names."""
    grid = read(listed(written)[0][1])
    data = [grid.GetPointData(), grid.GetCellData(), grid.GetFieldData()]
    names = {part.GetAbstractArray(n).GetName() for part in data for n in range(part.GetNumberOfArrays())}
    table = [
        line.split("|")[1]
        for line in (ROOT / "docs/howto/fields.md").read_text(encoding="utf-8").splitlines()
        if line.startswith("| ")
    ]
    told = set(re.findall(r"`(\w+)`", " ".join(table)))
    assert names - told == {"outer"}
    assert told <= names
