"""VTU, VTK legacy, VTKHDF, PVD and Exodus, through VTK's own readers."""

import xml.etree.ElementTree as ET
from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from front3d.errors import ReadError
from front3d.reading.fields import DisplacementFinder
from front3d.reading.files import identify
from front3d.reading.guard import python_library, vtk_library
from front3d.reading.legacy import check_tail
from front3d.reading.netcdf import check_length
from front3d.reading.raw import RawModel
from front3d.reading.vtk_grid import (
    cell_arrays,
    has_solid,
    point_arrays,
    time_of,
    to_grid,
    to_model,
)


def _load_vtu(path: Path) -> Any:
    from vtkmodules.vtkIOXML import vtkXMLUnstructuredGridReader

    with vtk_library(path, "VTU"):
        reader = vtkXMLUnstructuredGridReader()
        reader.SetFileName(str(path))
        reader.Update()
        return to_grid(reader.GetOutput())


def _load_legacy(path: Path) -> Any:
    from vtkmodules.vtkIOLegacy import vtkGenericDataObjectReader

    check_tail(path)
    with vtk_library(path, "VTK legacy"):
        reader = vtkGenericDataObjectReader()
        reader.SetFileName(str(path))
        # Only the first array of each sort is read unless asked for.
        reader.ReadAllScalarsOn()
        reader.ReadAllVectorsOn()
        reader.ReadAllFieldsOn()
        reader.ReadAllTensorsOn()
        reader.Update()
        return to_grid(reader.GetOutput())


def _read_single(load: Callable[[Path], Any]) -> Callable[[Path, DisplacementFinder], RawModel]:
    def read(path: Path, finder: DisplacementFinder) -> RawModel:
        grid = load(path)
        model = to_model(grid, path)
        finder.offer(point_arrays(grid), time_of(grid), cell_arrays(grid))
        return model

    return read


class _Series:
    """The mesh of the first time; later times must have the same one."""

    def __init__(self, path: Path, finder: DisplacementFinder) -> None:
        self.path, self.finder = path, finder
        self.model: RawModel | None = None

    def add(self, grid: Any, time: float | None) -> None:
        model = to_model(grid, self.path)
        if self.model is None:
            self.model = model
        elif not _same_mesh(self.model, model):
            raise ReadError(
                f"{self.path}: the mesh at time {time} differs from the first one, expected the "
                "same undeformed mesh at every time; export without remeshing or deformed points"
            )
        self.finder.offer(point_arrays(grid), time, cell_arrays(grid))

    def result(self) -> RawModel:
        if self.model is None:
            raise ReadError(f"{self.path}: found no times in it, expected at least one")
        return self.model


def _same_mesh(a: RawModel, b: RawModel) -> bool:
    def same(one: NDArray[Any], other: NDArray[Any]) -> bool:
        return one.shape == other.shape and bool((one == other).all())

    return (
        a.points.shape == b.points.shape
        and np.array_equal(a.points, b.points, equal_nan=True)
        and len(a.blocks) == len(b.blocks)
        and all(
            p.kind == q.kind and same(p.nodes, q.nodes)
            for p, q in zip(a.blocks, b.blocks, strict=True)
        )
    )


def _read_vtkhdf(path: Path, finder: DisplacementFinder) -> RawModel:
    from vtkmodules.vtkIOHDF import vtkHDFReader

    series = _Series(path, finder)
    with vtk_library(path, "VTKHDF", native=True):
        reader = vtkHDFReader()
        reader.SetFileName(str(path))
        reader.UpdateInformation()
        times: list[float | None] = [*_times(reader)] or [None]
        for time in times:
            if time is None:
                reader.Update()
            else:
                reader.UpdateTimeStep(time)
            series.add(_copy(to_grid(reader.GetOutputDataObject(0))), time)
    return series.result()


def _read_exodus(path: Path, finder: DisplacementFinder) -> RawModel:
    from vtkmodules.vtkIOExodus import vtkExodusIIReader

    check_length(path)
    series = _Series(path, finder)
    with vtk_library(path, "Exodus", native=True):
        reader = vtkExodusIIReader()
        reader.SetFileName(str(path))
        reader.UpdateInformation()
        # The points stay undeformed, and every block keeps all of them: nothing to merge.
        reader.ApplyDisplacementsOff()
        reader.SetSqueezePoints(False)
        nodal = vtkExodusIIReader.NODAL
        for sort in (nodal, vtkExodusIIReader.ELEM_BLOCK):
            for k in range(reader.GetNumberOfObjectArrays(sort)):
                reader.SetObjectArrayStatus(sort, reader.GetObjectArrayName(sort, k), 1)
        times: list[float | None] = [*_times(reader)] or [None]
        for time in times:
            if time is None:
                reader.Update()
            else:
                reader.UpdateTimeStep(time)
            series.add(_copy(_united(reader.GetOutputDataObject(0))), time)
    model = series.result()
    model.single_if_exact = True
    return model


def _times(reader: Any) -> list[float]:
    from vtkmodules.vtkCommonExecutionModel import vtkStreamingDemandDrivenPipeline

    info = reader.GetOutputInformation(0)
    key = vtkStreamingDemandDrivenPipeline.TIME_STEPS()
    return [float(t) for t in info.Get(key)] if info.Has(key) else []


def _copy(grid: Any) -> Any:
    """The next time must not overwrite this one."""
    return None if grid is None else grid.copy(deep=False)


def _united(data: Any) -> Any:
    """One grid from blocks that all carry the same points."""
    import pyvista

    grids = [g for g in _leaves(pyvista.wrap(data)) if g.n_cells]
    if len(grids) < 2:
        return grids[0] if grids else None
    if any(g.n_points != grids[0].n_points for g in grids):
        raise ReadError("the blocks do not share one list of nodes; merge them by node number")
    whole = pyvista.UnstructuredGrid(
        np.concatenate([np.asarray(grid.cells) for grid in grids]),
        np.concatenate([np.asarray(grid.celltypes) for grid in grids]),
        grids[0].points,
    )
    for grid in reversed(grids):
        for name in grid.point_data:
            whole.point_data[name] = grid.point_data[name]
    for name in set.intersection(*(set(grid.cell_data) for grid in grids)):
        parts = [np.asarray(grid.cell_data[name]) for grid in grids]
        if len({part.shape[1:] for part in parts}) == 1:
            whole.cell_data[name] = np.concatenate(parts)
    return whole


def _leaves(data: Any) -> list[Any]:
    import pyvista

    if isinstance(data, pyvista.MultiBlock):
        return [leaf for k in range(data.n_blocks) for leaf in _leaves(data[k])]
    return [data] if isinstance(data, pyvista.UnstructuredGrid) else []


def _read_pvd(path: Path, finder: DisplacementFinder) -> RawModel:
    with python_library(path, "PVD"):
        entries = [
            (float(e.get("timestep") or "0"), path.parent / e.attrib["file"])
            for e in ET.parse(path).getroot().iter("DataSet")
        ]
    series = _Series(path, finder)
    for time in dict.fromkeys(t for t, _ in entries):
        parts = [file for t, file in entries if t == time]
        grids = [_load_part(path, file) for file in parts]
        solid = [g for g in grids if g is not None and has_solid(g)]
        if len(solid) > 1:
            raise ReadError(
                f"{path}: found {len(solid)} parts with solid cells at time {time:g}, expected "
                "one: nodes on their borders are doubled and would look like a crack; merge the "
                "parts by node number"
            )
        series.add(solid[0] if solid else grids[0], time)
    return series.result()


def _load_part(path: Path, file: Path) -> Any:
    try:
        reader = identify(file).reader
    except ReadError as error:
        raise ReadError(f"{path} names a file that cannot be used: {error}") from None
    loaders = {"vtu": _load_vtu, "vtk": _load_legacy}
    if reader not in loaders:
        raise ReadError(f"{path} names {file.name}, expected VTU or VTK legacy files in a PVD")
    return loaders[reader](file)


READERS: dict[str, Callable[[Path, DisplacementFinder], RawModel]] = {
    "vtu": _read_single(_load_vtu),
    "vtk": _read_single(_load_legacy),
    "vtkhdf": _read_vtkhdf,
    "pvd": _read_pvd,
    "exodus": _read_exodus,
}
