"""Opens a VTK XML file with the VTK library and prints what it finds as JSON.

usage: vtk-open.py FILE
"""
import json
import sys

import vtk
from vtk.util.numpy_support import vtk_to_numpy

path = sys.argv[1]
readers = {"vtu": vtk.vtkXMLUnstructuredGridReader, "vti": vtk.vtkXMLImageDataReader,
           "vtr": vtk.vtkXMLRectilinearGridReader, "vts": vtk.vtkXMLStructuredGridReader}
reader = readers[path.rsplit(".", 1)[1]]()
reader.SetFileName(path)
reader.Update()
if reader.GetErrorCode():
    sys.exit("error %d" % reader.GetErrorCode())
data = reader.GetOutput()
arrays = {}
for place, source in (("point", data.GetPointData()), ("cell", data.GetCellData())):
    for i in range(source.GetNumberOfArrays()):
        array = source.GetArray(i)
        arrays[place + ":" + array.GetName()] = vtk_to_numpy(array).astype(float).ravel().tolist()
notes = {}
fields = data.GetFieldData()
for i in range(fields.GetNumberOfArrays()):
    array = fields.GetAbstractArray(i)
    if isinstance(array, vtk.vtkStringArray):
        notes[array.GetName()] = array.GetValue(0)
cells = []
for i in range(data.GetNumberOfCells()):
    cell = data.GetCell(i)
    cells.append({"type": data.GetCellType(i),
                  "points": [cell.GetPointId(j) for j in range(cell.GetNumberOfPoints())]})
json.dump({"points": [list(data.GetPoint(i)) for i in range(data.GetNumberOfPoints())], "cells": cells,
           "arrays": arrays, "notes": notes}, sys.stdout)
