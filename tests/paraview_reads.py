"""Run by ParaView's own Python: ``pvpython tests/paraview_reads.py FIELDS.pvd TIME LAYER X Y``.

Prints as JSON what ParaView finds: times, arrays, the cells of a layer by its array, and a probed point.
"""

import json
import sys

from paraview import simple


def main(path: str, time: float, layer: str, x: float, y: float) -> None:
    reader = simple.PVDReader(FileName=path)
    reader.UpdatePipelineInformation()
    reader.UpdatePipeline(time)
    points, cells = reader.PointData, reader.CellData
    threshold = simple.Threshold(Input=reader, Scalars=["CELLS", layer])
    threshold.LowerThreshold = threshold.UpperThreshold = 1.0
    threshold.UpdatePipeline(time)
    probe = simple.ProbeLocation(Input=reader, ProbeType="Fixed Radius Point Source")
    probe.ProbeType.Center = [x, y, 0.0]
    probe.ProbeType.NumberOfPoints = 1
    probe.ProbeType.Radius = 0.0
    probe.UpdatePipeline(time)
    found = probe.PointData["temperature_degC"]
    print(
        json.dumps(
            {
                "times": list(reader.TimestepValues),
                "point_arrays": sorted(points.keys()),
                "cell_arrays": sorted(cells.keys()),
                "cells": reader.GetDataInformation().GetNumberOfCells(),
                "layer_cells": threshold.GetDataInformation().GetNumberOfCells(),
                "layer_bounds": list(threshold.GetDataInformation().GetBounds()),
                "temperature": found.GetRange(0)[0],
                "valid": probe.PointData["vtkValidPointMask"].GetRange(0)[0],
            }
        )
    )


main(sys.argv[1], float(sys.argv[2]), sys.argv[3], float(sys.argv[4]), float(sys.argv[5]))
