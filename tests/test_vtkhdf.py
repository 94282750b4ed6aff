"""All moments in one VTKHDF file, read back with vtkHDFReader."""

import sys
from pathlib import Path

import numpy as np
import pytest
import vtk
from test_exchange import arrays, misplaced_middles, texts
from vtk.util.numpy_support import vtk_to_numpy

import cupfem
from cupfem.exchange import write_fields, write_vtkhdf
from cupfem.exchange.heat_flux import HeatFlux
from cupfem.problem import properties

ROOT = Path(__file__).parents[1]


@pytest.fixture(scope="module")
def run():
    cup = cupfem.load_cup(ROOT / "geometries" / "double_wall.toml")
    return cupfem.pour(cup, cupfem.Serving(duration="60 s"), fineness=0.5, companion=False)


@pytest.fixture(scope="module")
def written(run, tmp_path_factory):
    return write_vtkhdf(run, tmp_path_factory.mktemp("hdf") / "fields.vtkhdf")


@pytest.fixture(scope="module")
def reader(written):
    reader = vtk.vtkHDFReader()
    reader.SetFileName(str(written))
    reader.UpdateInformation()
    return reader


def at(reader, time):
    reader.UpdateTimeStep(time)
    return reader.GetOutput()


def test_times(run, reader):
    steps = reader.GetOutputInformation(0).Get(vtk.vtkStreamingDemandDrivenPipeline.TIME_STEPS())
    assert list(steps) == list(run.snapshot_times)


def test_arrays_at_each_time(run, reader):
    flux = HeatFlux(run.mesh, properties(run.cup, run.mesh))
    for time, field in zip(run.snapshot_times, run.snapshots, strict=True):
        grid = at(reader, time)
        points, cells = arrays(grid.GetPointData()), arrays(grid.GetCellData())
        np.testing.assert_allclose(points["temperature_degC"], field, rtol=0.0, atol=1e-6)
        np.testing.assert_allclose(cells["heat_flux_W_m2"][:, :2].T, flux.at(field), rtol=1e-6)
        np.testing.assert_array_equal(points["wall_s_m"], run.mesh.wall_coordinates[0])
        for name, elements in run.mesh.regions.items():
            np.testing.assert_array_equal(np.flatnonzero(cells[name]), elements)


def test_mesh_and_names(run, reader):
    grid = at(reader, 60.0)
    assert {grid.GetCellType(n) for n in range(grid.GetNumberOfCells())} == {vtk.VTK_BIQUADRATIC_QUAD}
    assert misplaced_middles(grid) < 1e-12
    np.testing.assert_array_equal(vtk_to_numpy(grid.GetPoints().GetData())[:, :2].T, run.mesh.points)
    assert texts(grid, "region_names") == list(run.mesh.regions)
    assert texts(grid, "material_names") == ["cupstock board", "air"]


def test_it_is_smaller_than_the_single_files(run, written, tmp_path):
    write_fields(run, tmp_path / "fields.pvd")
    single = sum(file.stat().st_size for file in (tmp_path / "fields").iterdir())
    assert written.stat().st_size < 0.6 * single


def test_the_same_bytes_again(run, written, tmp_path):
    assert write_vtkhdf(run, tmp_path / "again.vtkhdf").read_bytes() == written.read_bytes()


def test_another_ending_is_refused(run, tmp_path):
    with pytest.raises(cupfem.InputError, match=r'must end in \.vtkhdf; write "fields\.vtkhdf"'):
        write_vtkhdf(run, tmp_path / "fields.hdf")


def test_a_missing_folder_is_told(run, tmp_path):
    with pytest.raises(cupfem.InputError, match="does not exist; make that folder first"):
        write_vtkhdf(run, tmp_path / "nowhere" / "fields.vtkhdf")


def test_without_h5py(run, tmp_path, monkeypatch):
    monkeypatch.setitem(sys.modules, "h5py", None)
    with pytest.raises(cupfem.InputError, match=r"VTKHDF files need h5py; install it with: pip install"):
        write_vtkhdf(run, tmp_path / "fields.vtkhdf")
    assert not any(tmp_path.iterdir())
