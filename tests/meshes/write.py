"""Write the mesh files of this folder from `tube.geo` with Gmsh 4.15 (GPL; not needed for anything else)."""

from pathlib import Path

import gmsh

HERE = Path(__file__).parent
FILES = {
    "tube_triangles.msh": (0, 1, 4.1, 1, 0),
    "tube_triangles_second.msh": (0, 2, 2.2, 1, 0),
    "tube_triangles_text.msh": (0, 1, 4.1, 0, 0),
    "tube_quads.msh": (1, 1, 4.1, 1, 0),
    "tube_quads_second.msh": (1, 2, 4.1, 1, 0),
    "tube_quads_eight.msh": (1, 2, 2.2, 1, 1),
}
"""Quadrilaterals, order, version of the format, binary, without middle nodes of cells."""


def write(name, quads, order, version, binary, incomplete):
    gmsh.initialize(["gmsh", "-setnumber", "quads", str(quads)])
    gmsh.option.setNumber("General.Terminal", 0)
    gmsh.option.setNumber("Mesh.SecondOrderIncomplete", incomplete)
    gmsh.option.setNumber("Mesh.MshFileVersion", version)
    gmsh.option.setNumber("Mesh.Binary", binary)
    gmsh.open(str(HERE / "tube.geo"))
    gmsh.model.mesh.generate(2)
    gmsh.model.mesh.setOrder(order)
    gmsh.write(str(HERE / name))
    gmsh.finalize()


if __name__ == "__main__":
    for name, settings in FILES.items():
        write(name, *settings)
