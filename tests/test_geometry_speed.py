"""Building a mesh takes no longer than assembling its matrices: a ridged, sleeved double wall.

Here at some 20,000 cells; `python tests/test_geometry_speed.py 15.5` does the same at 200,000.
"""

import sys
from pathlib import Path
from time import process_time

from cupfem.conduction import Conduction
from cupfem.cup import load_cup
from cupfem.meridian import build as build_meridian
from cupfem.mesh import build
from cupfem.problem import properties

GEOMETRIES = Path(__file__).parents[1] / "geometries"


def times(fineness):
    """Cells, and processor times of the mesh and of its matrices [s]."""
    cup = load_cup(GEOMETRIES / "double_wall.toml").wearing(GEOMETRIES / "sleeve_silicone.toml")
    start = process_time()
    mesh = build(build_meridian(cup), fineness)
    meshed = process_time()
    Conduction(mesh, properties(cup, mesh))
    return mesh.grid.t.shape[1], meshed - start, process_time() - meshed


def test_a_mesh_is_built_faster_than_its_matrices():
    cells, meshing, assembling = times(5.0)
    print(f"{cells} cells: mesh {meshing:.2f} s, matrices {assembling:.2f} s")
    assert cells > 15_000
    assert meshing < assembling


if __name__ == "__main__":
    print("{} cells: mesh {:.2f} s, matrices {:.2f} s".format(*times(float(sys.argv[1]))))
