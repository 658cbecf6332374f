"""VTKHDF, Exodus and EnSight Gold: files of many times, through VTK's own readers."""

from collections.abc import Callable, Iterator
from pathlib import Path
from typing import Any

import numpy as np

from front3d.errors import ReadError
from front3d.reading.ensight import check_case
from front3d.reading.fields import DisplacementFinder
from front3d.reading.guard import vtk_library
from front3d.reading.netcdf import check_exodus
from front3d.reading.raw import RawModel
from front3d.reading.series import Series
from front3d.reading.vtk_grid import joined_cells, to_grids


def read_vtkhdf(path: Path, finder: DisplacementFinder) -> RawModel:
    from vtkmodules.vtkIOHDF import vtkHDFReader

    def opened() -> Any:
        reader = vtkHDFReader()
        reader.SetFileName(str(path))
        return reader

    return _read(path, finder, "VTKHDF", opened)


def read_ensight(path: Path, finder: DisplacementFinder) -> RawModel:
    """Parts of an EnSight file number their nodes for themselves: they are pieces."""
    from vtkmodules.vtkIOEnSight import vtkGenericEnSightReader

    def opened() -> Any:
        reader = vtkGenericEnSightReader()
        reader.SetCaseFileName(str(path))
        return reader

    check_case(path)
    return _read(path, finder, "EnSight Gold", opened)


def read_exodus(path: Path, finder: DisplacementFinder) -> RawModel:
    from vtkmodules.vtkIOExodus import vtkExodusIIReader

    def opened() -> Any:
        reader = vtkExodusIIReader()
        reader.SetFileName(str(path))
        reader.UpdateInformation()
        # The points stay undeformed, and every block keeps all of them: nothing to join.
        reader.ApplyDisplacementsOff()
        reader.SetSqueezePoints(False)
        nodal = vtkExodusIIReader.NODAL
        for sort in (nodal, vtkExodusIIReader.ELEM_BLOCK):
            for k in range(reader.GetNumberOfObjectArrays(sort)):
                reader.SetObjectArrayStatus(sort, reader.GetObjectArrayName(sort, k), 1)
        return reader

    check_exodus(path)
    model = _read(path, finder, "Exodus", opened, _united)
    model.single_if_exact = True
    return model


def _read(
    path: Path,
    finder: DisplacementFinder,
    library: str,
    opened: Callable[[], Any],
    joined: Callable[[list[Any]], list[Any]] = list,
) -> RawModel:
    """The model at every time of a reader; `joined` makes its grids what they are pieces of."""
    series = Series(path, finder)
    with vtk_library(path, library, native=True):
        reader = opened()
        for time in _update(reader):
            series.add(_copies(joined(to_grids(reader.GetOutputDataObject(0)))), time)
    return series.result()


def _update(reader: Any) -> Iterator[float | None]:
    """Set the reader to each of its times in turn; to the only one, None, if it names none."""
    from vtkmodules.vtkCommonExecutionModel import vtkStreamingDemandDrivenPipeline

    reader.UpdateInformation()
    info = reader.GetOutputInformation(0)
    key = vtkStreamingDemandDrivenPipeline.TIME_STEPS()
    if not info.Has(key):
        reader.Update()
        yield None
        return
    for time in info.Get(key):
        reader.UpdateTimeStep(float(time))
        yield float(time)


def _copies(grids: list[Any]) -> list[Any]:
    """The next time must not overwrite this one."""
    return [grid.copy(deep=False) for grid in grids]


def _united(grids: list[Any]) -> list[Any]:
    """One grid from blocks that all carry the same points."""
    import pyvista

    grids = [grid for grid in grids if grid.n_cells]
    if len(grids) < 2:
        return grids
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
    for name, values in joined_cells(grids).items():
        whole.cell_data[name] = values
    return [whole]
