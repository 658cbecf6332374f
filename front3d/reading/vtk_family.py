"""VTU, VTK legacy, and the files that name them: PVTU (pieces) and PVD (times, pieces)."""

import xml.etree.ElementTree as ET
from collections.abc import Callable, Mapping
from functools import partial
from pathlib import Path
from typing import Any

from front3d.errors import ReadError
from front3d.reading.around_crack import around_crack, joined
from front3d.reading.fields import DisplacementFinder
from front3d.reading.files import identify
from front3d.reading.guard import python_library, vtk_library
from front3d.reading.legacy import check_legacy
from front3d.reading.pieces import concatenated
from front3d.reading.raw import RawModel
from front3d.reading.series import Series
from front3d.reading.vtk_grid import cell_arrays, point_arrays, time_of, to_grids, to_model
from front3d.reading.vtk_series import read_ensight, read_exodus, read_vtkhdf
from front3d.reading.vtu import check_vtu


def _load_vtu(path: Path) -> list[Any]:
    from vtkmodules.vtkIOXML import vtkXMLUnstructuredGridReader

    check_vtu(path)
    with vtk_library(path, "VTU"):
        reader = vtkXMLUnstructuredGridReader()
        reader.SetFileName(str(path))
        reader.Update()
        return to_grids(reader.GetOutput())


def _load_legacy(path: Path) -> list[Any]:
    from vtkmodules.vtkIOLegacy import vtkGenericDataObjectReader

    check_legacy(path)
    with vtk_library(path, "VTK legacy"):
        reader = vtkGenericDataObjectReader()
        reader.SetFileName(str(path))
        # Only the first array of each sort is read unless asked for.
        reader.ReadAllScalarsOn()
        reader.ReadAllVectorsOn()
        reader.ReadAllFieldsOn()
        reader.ReadAllTensorsOn()
        reader.Update()
        return to_grids(reader.GetOutput())


def _load_pvtu(path: Path) -> list[Any]:
    """The pieces one by one: VTK's own reader would append them without their borders."""
    return [grid for piece in _pieces(path) for grid in piece()]


def _pieces(path: Path) -> list[Callable[[], list[Any]]]:
    """What loads each of the pieces that a PVTU file names."""
    with python_library(path, "PVTU"):
        files = [e.attrib["Source"] for e in ET.parse(path).getroot().iter("Piece")]
    if not files:
        raise ReadError(f"{path}: names no pieces, expected at least one; export it again")
    return [partial(_load_named, path, file, {"vtu": _load_vtu}) for file in files]


def _read_pvtu(path: Path, finder: DisplacementFinder) -> RawModel:
    """Of a large solid in pieces the cells around the crack, else all of them."""
    pieces = _pieces(path)
    found = around_crack(pieces, path) if len(pieces) > 1 else None
    if found is None:
        return _read_single(_load_pvtu)(path, finder)
    kept, note = found
    model = concatenated([part.model for part in kept])
    model.notes.append(note)
    points, cells = (joined([getattr(p, of) for p in kept]) for of in ("points", "cells"))
    finder.offer(points, None, cells)
    return model


def _load_named(path: Path, file: str, loaders: Mapping[str, Callable[[Path], list[Any]]]) -> Any:
    """Load a file that `path` names."""
    try:
        reader = identify(path.parent / file).reader
    except ReadError as error:
        raise ReadError(f"{path} names a file that cannot be used: {error}") from None
    if reader not in loaders:
        raise ReadError(
            f"{path} names {file}, expected files of these sorts in it: {', '.join(loaders)}"
        )
    return loaders[reader](path.parent / file)


def _read_single(
    load: Callable[[Path], list[Any]],
) -> Callable[[Path, DisplacementFinder], RawModel]:
    def read(path: Path, finder: DisplacementFinder) -> RawModel:
        grids = load(path)
        model = to_model(grids, path)
        finder.offer(point_arrays(grids), time_of(grids), cell_arrays(grids))
        return model

    return read


def _read_pvd(path: Path, finder: DisplacementFinder) -> RawModel:
    with python_library(path, "PVD"):
        entries = [
            (float(e.get("timestep") or "0"), e.attrib["file"])
            for e in ET.parse(path).getroot().iter("DataSet")
        ]
    loaders = {"vtu": _load_vtu, "vtk": _load_legacy, "pvtu": _load_pvtu}
    series = Series(path, finder)
    for time in dict.fromkeys(t for t, _ in entries):
        files = [file for t, file in entries if t == time]
        series.add([g for file in files for g in _load_named(path, file, loaders)], time)
    return series.result()


READERS: dict[str, Callable[[Path, DisplacementFinder], RawModel]] = {
    "vtu": _read_single(_load_vtu),
    "vtk": _read_single(_load_legacy),
    "pvtu": _read_pvtu,
    "pvd": _read_pvd,
    "vtkhdf": read_vtkhdf,
    "exodus": read_exodus,
    "ensight": read_ensight,
}
