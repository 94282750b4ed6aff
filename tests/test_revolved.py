"""The section turned round its axis, read back with VTK."""

import math
from pathlib import Path

import numpy as np
import pytest
import vtk
from test_exchange import arrays, listed, read
from vtk.util.numpy_support import vtk_to_numpy

import cupfem
from cupfem.exchange.revolved import write_revolved

ROOT = Path(__file__).parents[1]
SECTORS = 12
POLYGON = SECTORS / (2.0 * math.pi) * math.sin(2.0 * math.pi / SECTORS)
"""Area of the polygon over that of its circle."""


@pytest.fixture(scope="module")
def run():
    cup = cupfem.load_cup(ROOT / "geometries" / "double_wall.toml")
    return cupfem.pour(cup, cupfem.Serving(duration="60 s"), fineness=0.25, companion=False)


@pytest.fixture(scope="module")
def grids(run, tmp_path_factory):
    path = write_revolved(run, tmp_path_factory.mktemp("cup") / "cup.pvd", sectors=SECTORS)
    return [(time, read(file)) for time, file in listed(path)]


def volumes(grid):
    """Volume that VTK finds for each cell."""
    sizes = vtk.vtkCellSizeFilter()
    sizes.SetInputData(grid)
    sizes.Update()
    return arrays(sizes.GetOutput().GetCellData())["Volume"]


def enclosed(grid, layer):
    """Volume within the outer sides of a layer's cells, by the divergence theorem; negative inside out."""
    part = vtk.vtkThreshold()
    part.SetInputData(grid)
    part.SetInputArrayToProcess(0, 0, 0, vtk.vtkDataObject.FIELD_ASSOCIATION_CELLS, layer)
    part.SetLowerThreshold(1.0)
    part.SetUpperThreshold(1.0)
    surface = vtk.vtkDataSetSurfaceFilter()
    surface.SetInputConnection(part.GetOutputPort())
    triangles = vtk.vtkTriangleFilter()
    triangles.SetInputConnection(surface.GetOutputPort())
    triangles.Update()
    found = triangles.GetOutput()
    corners = vtk_to_numpy(found.GetPolys().GetConnectivityArray()).reshape(-1, 3)
    return np.linalg.det(vtk_to_numpy(found.GetPoints().GetData())[corners]).sum() / 6.0


def test_cells_are_hexahedra_all_around(run, grids):
    grid = grids[0][1]
    kinds = [grid.GetCellType(number) for number in range(grid.GetNumberOfCells())]
    assert kinds == [vtk.VTK_HEXAHEDRON] * (SECTORS * run.mesh.element_dofs.shape[1])


def test_points_on_the_axis_are_there_once(grids):
    points = vtk_to_numpy(grids[0][1].GetPoints().GetData())
    assert len(np.unique(points.round(12), axis=0)) == len(points)


def frustum(height, lower, upper):
    return math.pi * height / 3.0 * (lower**2 + lower * upper + upper**2)


def test_volume_of_a_layer(grids):
    """The inner layer is the wall of the drawing: 0.33 mm thick, 95 mm high, radii 27.5 and 39 mm inside; its
    ends are cut square, so its centroid's way round (Pappus) times its area is its volume."""
    lean = math.atan2(11.5, 95.0)
    area = math.hypot(95e-3, 11.5e-3) * 0.33e-3
    around = 2.0 * math.pi * (0.5 * (27.5e-3 + 39e-3) + 0.5 * 0.33e-3 * math.cos(lean))
    grid = grids[0][1]
    inner = arrays(grid.GetCellData())["inner"] == 1
    assert volumes(grid)[inner].sum() == pytest.approx(POLYGON * area * around, rel=1e-6)
    assert enclosed(grid, "inner") == pytest.approx(POLYGON * area * around, rel=1e-6)


def test_volume_of_the_base(run, grids):
    """A cone's slice between the inside faces at 8 and 8.35 mm."""
    radii = [27.5e-3 + 11.5e-3 * z / 95.0 for z in (8.0, 8.35)]
    grid = grids[0][1]
    base = arrays(grid.GetCellData())["base"] == 1
    assert volumes(grid)[base].sum() == pytest.approx(POLYGON * frustum(0.35e-3, *radii), rel=1e-6)
    assert enclosed(grid, "base") == pytest.approx(POLYGON * frustum(0.35e-3, *radii), rel=1e-6)


def test_no_cell_is_inside_out(grids):
    assert volumes(grids[0][1]).min() > 0.0


def test_temperatures(run, grids):
    for (time, grid), moment, field in zip(grids, run.snapshot_times, run.snapshots, strict=True):
        assert time == moment
        points = vtk_to_numpy(grid.GetPoints().GetData())
        found = arrays(grid.GetPointData())["temperature_degC"]
        place = np.column_stack([np.hypot(points[:, 0], points[:, 1]), points[:, 2]])
        for number in range(0, len(points), 97):
            unknown = np.argmin(np.hypot(*(run.mesh.points - place[number][:, None])))
            assert found[number] == pytest.approx(field[unknown], abs=1e-6)


def test_heat_flows_outwards_all_around(grids):
    """Through the outer layer at mid height, along the radius of the cell's own centre."""
    grid = grids[-1][1]
    centres = vtk.vtkCellCenters()
    centres.SetInputData(grid)
    centres.Update()
    places = vtk_to_numpy(centres.GetOutput().GetPoints().GetData())
    cells = arrays(grid.GetCellData())
    chosen = (cells["outer"] == 1) & (abs(places[:, 2] - 50e-3) < 10e-3)
    flux, place = cells["heat_flux_W_m2"][chosen], places[chosen, :2]
    radial = place / np.linalg.norm(place, axis=1)[:, None]
    outwards = (flux[:, :2] * radial).sum(axis=1)
    assert chosen.sum() > 3 * SECTORS
    assert outwards.min() > 100.0
    np.testing.assert_allclose(np.linalg.norm(flux[:, :2], axis=1), outwards, rtol=1e-6)


@pytest.mark.parametrize("sectors", [2, 721, 4.0, True])
def test_sectors(run, tmp_path, sectors):
    with pytest.raises(cupfem.InputError, match="must be a whole number from 3 to 720"):
        write_revolved(run, tmp_path / "cup.pvd", sectors=sectors)
    assert not any(tmp_path.iterdir())
