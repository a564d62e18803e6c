"""Writes every kind of VTK XML data set in every encoding with the VTK library, and the truth beside them as JSON.

usage: vtk-generate.py FOLDER
"""
import json
import math
import os
import sys

import vtk
from vtk.util.numpy_support import vtk_to_numpy

folder = sys.argv[1]


def add_arrays(data, points, cells):
    def add(target, cls, name, components, count, value):
        array = cls()
        array.SetName(name)
        array.SetNumberOfComponents(components)
        array.SetNumberOfTuples(count)
        for i in range(count):
            for c in range(components):
                array.SetComponent(i, c, value(i, c))
        target.AddArray(array)

    pd, cd = data.GetPointData(), data.GetCellData()
    add(pd, vtk.vtkDoubleArray, "TurbulentEnergyKinetic", 1, points, lambda i, c: math.sin(i) + 2)
    add(pd, vtk.vtkFloatArray, "Velocity", 3, points, lambda i, c: 0.25 * i - c)
    add(pd, vtk.vtkTypeInt64Array, "label a-b", 1, points, lambda i, c: i * 1000003)
    add(cd, vtk.vtkDoubleArray, "Pressure", 1, cells, lambda i, c: math.exp(-i / 7))
    add(cd, vtk.vtkShortArray, "mark", 2, cells, lambda i, c: (-1) ** i * (i + c))
    add(cd, vtk.vtkUnsignedCharArray, "byte", 1, cells, lambda i, c: i % 251)


def mixed_grid():
    grid = vtk.vtkUnstructuredGrid()
    points = vtk.vtkPoints()
    points.SetDataTypeToDouble()
    count = 24
    for i in range(count):
        points.InsertNextPoint(math.cos(i) * 3, i * 0.1, math.sqrt(i))
    grid.SetPoints(points)
    grid.InsertNextCell(vtk.VTK_HEXAHEDRON, 8, list(range(8)))
    grid.InsertNextCell(vtk.VTK_TETRA, 4, [8, 9, 10, 11])
    grid.InsertNextCell(vtk.VTK_WEDGE, 6, [6, 7, 8, 9, 10, 11])
    grid.InsertNextCell(vtk.VTK_PYRAMID, 5, [12, 13, 14, 15, 16])
    grid.InsertNextCell(vtk.VTK_VOXEL, 8, list(range(12, 20)))
    grid.InsertNextCell(vtk.VTK_QUAD, 4, [0, 1, 2, 3])
    grid.InsertNextCell(vtk.VTK_QUADRATIC_TETRA, 10, list(range(10, 20)))
    return grid


def polyhedra():
    grid = mixed_grid()
    faces = [[0, 3, 2, 1], [4, 5, 6, 7], [0, 1, 5, 4], [1, 2, 6, 5], [2, 3, 7, 6], [3, 0, 4, 7]]
    ids = vtk.vtkIdList()
    ids.InsertNextId(len(faces))
    for face in faces:
        ids.InsertNextId(len(face))
        for p in face:
            ids.InsertNextId(p + 16)
    grid.InsertNextCell(vtk.VTK_POLYHEDRON, ids)
    grid.InsertNextCell(vtk.VTK_TETRA, 4, [0, 1, 2, 3])
    return grid


def image():
    data = vtk.vtkImageData()
    data.SetExtent(1, 4, 0, 2, -1, 1)
    data.SetOrigin(0.5, 1, 2)
    data.SetSpacing(0.1, 0.2, 0.3)
    return data


def rectilinear():
    data = vtk.vtkRectilinearGrid()
    data.SetDimensions(4, 3, 2)
    for axis, count in zip("XYZ", (4, 3, 2)):
        array = vtk.vtkDoubleArray()
        for i in range(count):
            array.InsertNextValue(i * i * 0.5 + 0.1)
        getattr(data, "Set%sCoordinates" % axis)(array)
    return data


def structured():
    data = vtk.vtkStructuredGrid()
    data.SetDimensions(4, 3, 2)
    points = vtk.vtkPoints()
    for k in range(2):
        for j in range(3):
            for i in range(4):
                points.InsertNextPoint(i + 0.1 * j, j + 0.2 * k, k)
    data.SetPoints(points)
    return data


makers = {
    "vtu": (mixed_grid, vtk.vtkXMLUnstructuredGridWriter),
    "poly.vtu": (polyhedra, vtk.vtkXMLUnstructuredGridWriter),
    "vti": (image, vtk.vtkXMLImageDataWriter),
    "vtr": (rectilinear, vtk.vtkXMLRectilinearGridWriter),
    "vts": (structured, vtk.vtkXMLStructuredGridWriter),
}
compressors = {"none": "SetCompressorTypeToNone", "zlib": "SetCompressorTypeToZLib", "lz4": "SetCompressorTypeToLZ4",
               "lzma": "SetCompressorTypeToLZMA"}
truth = {}
for kind, (make, writer_class) in makers.items():
    data = make()
    add_arrays(data, data.GetNumberOfPoints(), data.GetNumberOfCells())
    points = [list(data.GetPoint(i)) for i in range(data.GetNumberOfPoints())]
    cells = []
    for i in range(data.GetNumberOfCells()):
        cell = data.GetCell(i)
        ids = [cell.GetPointId(j) for j in range(cell.GetNumberOfPoints())]
        cells.append({"type": data.GetCellType(i), "points": ids})
    arrays = {}
    for place, source in (("point", data.GetPointData()), ("cell", data.GetCellData())):
        for i in range(source.GetNumberOfArrays()):
            array = source.GetArray(i)
            values = vtk_to_numpy(array).astype(float).ravel().tolist()
            arrays[place + ":" + array.GetName()] = values
    files = []
    for mode in ("ascii", "inline", "raw", "base64"):
        for compressor, setter in compressors.items():
            for order in ("little", "big"):
                for header in (32, 64):
                    if mode == "ascii" and (compressor != "none" or order != "little" or header != 32):
                        continue
                    name = "%s-%s-%s-%d.%s" % (mode, compressor, order, header, kind)
                    writer = writer_class()
                    writer.SetFileName(os.path.join(folder, name))
                    writer.SetInputData(data)
                    getattr(writer, setter)()
                    writer.SetBlockSize(64)
                    if mode == "ascii":
                        writer.SetDataModeToAscii()
                    elif mode == "inline":
                        writer.SetDataModeToBinary()
                    else:
                        writer.SetDataModeToAppended()
                        writer.SetEncodeAppendedData(mode == "base64")
                    (writer.SetByteOrderToLittleEndian if order == "little" else writer.SetByteOrderToBigEndian)()
                    (writer.SetHeaderTypeToUInt32 if header == 32 else writer.SetHeaderTypeToUInt64)()
                    writer.Write()
                    files.append(name)
    truth[kind] = {"files": files, "points": points, "cells": cells, "arrays": arrays}
with open(os.path.join(folder, "truth.json"), "w") as out:
    json.dump(truth, out)
