"""Writes files that refer to others, surfaces, several pieces and ghosts with the VTK library.

usage: vtk-collections.py FOLDER
"""
import os
import sys

import vtk

folder = sys.argv[1]


def at(name):
    return os.path.join(folder, name)


def fill(target, name, count, value):
    array = vtk.vtkDoubleArray()
    array.SetName(name)
    for i in range(count):
        array.InsertNextValue(value(i))
    target.AddArray(array)


def save(writer, name, data, pieces=1):
    writer.SetFileName(at(name))
    writer.SetInputData(data)
    if pieces > 1:
        writer.SetNumberOfPieces(pieces)
    writer.SetDataModeToAppended()
    writer.EncodeAppendedDataOff()
    if writer.Write() != 1:
        sys.exit("cannot write " + name)


def bar(begin, count):
    """A row of unit cubes along x; points and cells carry x."""
    grid = vtk.vtkUnstructuredGrid()
    points = vtk.vtkPoints()
    for i in range(count + 1):
        for j, k in ((0, 0), (1, 0), (1, 1), (0, 1)):
            points.InsertNextPoint(begin + i, j, k)
    grid.SetPoints(points)
    for i in range(count):
        grid.InsertNextCell(vtk.VTK_HEXAHEDRON, 8, list(range(4 * i, 4 * i + 8)))
    fill(grid.GetPointData(), "x", grid.GetNumberOfPoints(), lambda i: begin + i // 4)
    fill(grid.GetCellData(), "middle", count, lambda i: begin + i + 0.5)
    return grid


def ghosts(grid, flags):
    array = vtk.vtkUnsignedCharArray()
    array.SetName("vtkGhostType")
    for flag in flags:
        array.InsertNextValue(flag)
    grid.GetCellData().AddArray(array)
    return grid


def image(extent):
    data = vtk.vtkImageData()
    data.SetExtent(*extent)
    data.SetSpacing(0.5, 1, 2)
    fill(data.GetPointData(), "x", data.GetNumberOfPoints(), lambda i: data.GetPoint(i)[0] + 100 * data.GetPoint(i)[2])
    fill(data.GetCellData(), "id", data.GetNumberOfCells(), lambda i: i)
    return data


def rectilinear():
    data = vtk.vtkRectilinearGrid()
    data.SetDimensions(6, 3, 4)
    for axis, count in zip("XYZ", (6, 3, 4)):
        array = vtk.vtkDoubleArray()
        for i in range(count):
            array.InsertNextValue(i * i)
        getattr(data, "Set%sCoordinates" % axis)(array)
    fill(data.GetCellData(), "id", data.GetNumberOfCells(), lambda i: i)
    return data


def curved():
    data = vtk.vtkStructuredGrid()
    data.SetDimensions(6, 3, 4)
    points = vtk.vtkPoints()
    points.SetDataTypeToDouble()
    for k in range(4):
        for j in range(3):
            for i in range(6):
                points.InsertNextPoint(i + 0.1 * j, j + 0.01 * k, k)
    data.SetPoints(points)
    fill(data.GetPointData(), "x", data.GetNumberOfPoints(), lambda i: data.GetPoint(i)[0])
    fill(data.GetCellData(), "id", data.GetNumberOfCells(), lambda i: i)
    return data


def notes(grid):
    for name, lines in (("Provenance", ["first", "second <&>"]), ("empty", [""]), ("letters", ["\u00e9\u03bb"])):
        array = vtk.vtkStringArray()
        array.SetName(name)
        for line in lines:
            array.InsertNextValue(line)
        grid.GetFieldData().AddArray(array)
    fill(grid.GetFieldData(), "TimeValue", 1, lambda i: 2.5)
    fill(grid.GetFieldData(), "residuals", 3, lambda i: 0.1 * i)
    return grid


# One grid in two parts, each with one cell of the other as a ghost.
save(vtk.vtkXMLUnstructuredGridWriter(), "part0.vtu", ghosts(bar(0, 4), [0, 0, 0, 1]))
save(vtk.vtkXMLUnstructuredGridWriter(), "part1.vtu", ghosts(bar(2, 3), [1, 0, 0]))
with open(at("parts.pvtu"), "w") as out:
    out.write("""<?xml version="1.0"?>
<VTKFile type="PUnstructuredGrid" version="1.0" byte_order="LittleEndian" header_type="UInt32">
  <PUnstructuredGrid GhostLevel="1">
    <PPointData><PDataArray type="Float64" Name="x"/></PPointData>
    <PCellData><PDataArray type="Float64" Name="middle"/></PCellData>
    <PPoints><PDataArray type="Float32" NumberOfComponents="3"/></PPoints>
    <Piece Source="part0.vtu"/>
    <Piece Source="part1.vtu"/>
  </PUnstructuredGrid>
</VTKFile>
""")
save(vtk.vtkXMLUnstructuredGridWriter(), "hidden.vtu", ghosts(bar(0, 3), [0, 32, 0]))
save(vtk.vtkXMLUnstructuredGridWriter(), "several.vtu", bar(0, 5), 3)
source = vtk.vtkRTAnalyticSource()
source.SetWholeExtent(-2, 3, 0, 3, 1, 5)
writer = vtk.vtkXMLImageDataWriter()
writer.SetFileName(at("several.vti"))
writer.SetInputConnection(source.GetOutputPort())
writer.SetNumberOfPieces(4)
writer.Write()
writer.SetFileName(at("single.vti"))
writer.SetNumberOfPieces(1)
writer.Write()


def cut(data, extract, extent, mark):
    """Part of a structured grid; cells outside the part's own i range are ghosts."""
    extract.SetInputData(data)
    extract.SetVOI(*extent)
    extract.Update()
    part = extract.GetOutput()
    if mark is not None:
        ni, nj, nk = (max(1, extent[2 * a + 1] - extent[2 * a]) for a in range(3))
        low, high = mark
        ghosts(part, [0 if low <= extent[0] + i < high else 1 for k in range(nk) for j in range(nj) for i in range(ni)])
        # The values of ghosts must not be used.
        ids = part.GetCellData().GetArray("id")
        for c in range(part.GetNumberOfCells()):
            if part.GetCellData().GetArray("vtkGhostType").GetValue(c):
                ids.SetValue(c, -1)
    return part


for suffix, type_name, data, writer_class, extract_class in (
        ("vti", "ImageData", image((2, 7, 0, 3, 1, 5)), vtk.vtkXMLImageDataWriter, vtk.vtkExtractVOI),
        ("vtr", "RectilinearGrid", rectilinear(), vtk.vtkXMLRectilinearGridWriter, vtk.vtkExtractRectilinearGrid),
        ("vts", "StructuredGrid", curved(), vtk.vtkXMLStructuredGridWriter, vtk.vtkExtractGrid)):
    save(writer_class(), "whole." + suffix, data)
    e = list(data.GetExtent())
    middle = e[0] + 2
    for kind, layer in (("tiles", 0), ("overlap", 1)):
        pieces = []
        for number, (low, high) in enumerate(((e[0], middle), (middle, e[1]))):
            extent = [max(e[0], low - layer), min(e[1], high + layer)] + e[2:]
            part = cut(data, extract_class(), extent, (low, high) if layer else None)
            name = "%s%d.%s" % (kind, number, suffix)
            save(writer_class(), name, part)
            pieces.append('<Piece Extent="%s" Source="%s"/>' % (" ".join(map(str, extent)), name))
        pieces.append('<Piece Extent="0 -1 0 -1 0 -1" Source="nothing.%s"/>' % suffix)
        with open(at("%s.p%s" % (kind, suffix)), "w") as out:
            out.write('<VTKFile type="P%s" version="1.0" byte_order="LittleEndian"><P%s WholeExtent="%s" GhostLevel="%d">'
                      % (type_name, type_name, " ".join(map(str, e)), layer))
            out.write("".join(pieces) + "</P%s></VTKFile>" % type_name)
for mode in ("ascii", "binary", "appended"):
    writer = vtk.vtkXMLUnstructuredGridWriter()
    writer.SetFileName(at("notes-%s.vtu" % mode))
    writer.SetInputData(notes(bar(0, 1)))
    getattr(writer, "SetDataModeTo" + mode.capitalize())()
    writer.Write()

surface = vtk.vtkPolyData()
points = vtk.vtkPoints()
for i in range(12):
    points.InsertNextPoint(i, i * i, 0)
surface.SetPoints(points)
for kind, lists in (("Verts", [[0], [1, 2]]), ("Lines", [[0, 1], [2, 3, 4]]), ("Polys", [[0, 1, 2], [3, 4, 5, 6], [1, 2, 3, 4, 5]]),
                    ("Strips", [[6, 7, 8, 9, 10]])):
    cells = vtk.vtkCellArray()
    for entry in lists:
        cells.InsertNextCell(len(entry))
        for point in entry:
            cells.InsertCellPoint(point)
    getattr(surface, "Set" + kind)(cells)
fill(surface.GetCellData(), "id", surface.GetNumberOfCells(), lambda i: 10 * i)
save(vtk.vtkXMLPolyDataWriter(), "surface.vtp", surface)

blocks = vtk.vtkMultiBlockDataSet()
inner = vtk.vtkMultiBlockDataSet()
inner.SetBlock(0, bar(10, 2))
inner.GetMetaData(0).Set(vtk.vtkCompositeDataSet.NAME(), "duct")
grid = curved()
fill(grid.GetCellData(), "middle", grid.GetNumberOfCells(), lambda i: -i)
inner.SetBlock(1, grid)
inner.GetMetaData(1).Set(vtk.vtkCompositeDataSet.NAME(), "bend")
blocks.SetBlock(0, bar(0, 3))
blocks.GetMetaData(0).Set(vtk.vtkCompositeDataSet.NAME(), "inlet")
blocks.SetBlock(1, inner)
blocks.GetMetaData(1).Set(vtk.vtkCompositeDataSet.NAME(), "body")
writer = vtk.vtkXMLMultiBlockDataWriter()
writer.SetFileName(at("blocks.vtm"))
writer.SetInputData(blocks)
writer.Write()

with open(at("series.pvd"), "w") as out:
    out.write("""<?xml version="1.0"?>
<VTKFile type="Collection" version="0.1">
  <Collection>
    <DataSet timestep="0.5" part="0" file="part1.vtu"/>
    <DataSet timestep="0.25" part="0" file="hidden.vtu"/>
    <DataSet timestep="0.5" part="1" file="several.vtu"/>
  </Collection>
</VTKFile>
""")
