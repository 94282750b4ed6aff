"""ParaView itself opens the fields: times, arrays, a layer by its array, a point by its temperature."""

import json
import subprocess
from pathlib import Path

import numpy as np
import pytest

import cupfem
from cupfem.serving import Serving

pytestmark = pytest.mark.paraview

READS = Path(__file__).parent / "paraview_reads.py"
CLOSE = 1e-5  # K, of the run's own value at a node
WHEN = 60.0


@pytest.fixture(scope="module")
def run():
    return cupfem.pour(
        cupfem.load_cup("geometries/double_wall.toml"),
        Serving.from_text('duration = "2 min"'),
        companion=False,
        hold=False,
    )


def inner_point(run) -> int:
    """A node in the middle of the outer board, half way up: inside the mesh, where the search for a point is
    safe, and where a cell spans little: VTK finds places in quadratic cells to some 1e-5 of their size."""
    s, n = run.mesh.wall_coordinates
    known = np.nan_to_num(np.abs(s - 0.05), nan=1.0) + 10 * np.nan_to_num(np.abs(n - 1.48e-3), nan=1.0)
    return int(np.argmin(known))


@pytest.fixture(scope="module")
def told(run, tmp_path_factory):
    path = tmp_path_factory.mktemp("fields") / "fields.pvd"
    cupfem.write_fields(run, path)
    x, y = run.mesh.points[:, inner_point(run)]
    line = ["pvpython", str(READS), str(path), f"{WHEN}", "gap", f"{x:.17g}", f"{y:.17g}"]
    done = subprocess.run(line, capture_output=True, text=True, timeout=300, check=False)
    assert done.returncode == 0, done.stderr[-2000:]
    return json.loads(done.stdout.splitlines()[-1])


def test_times(run, told):
    assert told["times"] == pytest.approx(list(run.snapshot_times))


def test_arrays(told):
    assert {"temperature_degC", "wall_s_m", "wall_n_m"} <= set(told["point_arrays"])
    assert {"inner", "gap", "outer", "base", "heat_flux_W_m2", "material_id"} <= set(told["cell_arrays"])


def test_a_layer_by_its_array(run, told):
    assert told["layer_cells"] == len(run.mesh.regions["gap"])
    assert 0 < told["layer_cells"] < told["cells"]
    _, _, low, high, _, _ = told["layer_bounds"]
    assert low == pytest.approx(14e-3, abs=4e-3)  # the gap of the file: 14 to 88 mm, and its blend of 3 mm
    assert high == pytest.approx(88e-3, abs=4e-3)


def test_a_point(run, told):
    snapshot = int(np.argmin(np.abs(run.snapshot_times - WHEN)))
    assert run.snapshot_times[snapshot] == WHEN
    assert told["valid"] == 1.0
    assert told["temperature"] == pytest.approx(run.snapshots[snapshot][inner_point(run)], abs=CLOSE)
