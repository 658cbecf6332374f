"""From a VTK data set to the raw model: which cells are solid, which arrays there are."""

import re
from collections import Counter
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from front3d.elements import BY_VTK_TYPE
from front3d.errors import ReadError
from front3d.reading.pieces import concatenated
from front3d.reading.raw import RawBlock, RawModel, merged

_VOXEL = 11
_VOXEL_TO_HEXAHEDRON = [0, 1, 3, 2, 4, 5, 7, 6]
_NO_SOLID = {
    0: "empty", 1: "vertex", 2: "polyvertex", 3: "line", 4: "polyline", 5: "triangle",
    6: "triangle strip", 7: "polygon", 8: "pixel", 9: "quadrilateral", 21: "quadratic line",
    22: "quadratic triangle", 23: "quadratic quadrilateral", 28: "biquadratic quadrilateral",
    30: "linear-quadratic quadrilateral", 34: "biquadratic triangle", 35: "cubic line",
    36: "quadratic polygon", 68: "Lagrange curve", 69: "Lagrange triangle",
    70: "Lagrange quadrilateral", 75: "Bezier curve", 76: "Bezier triangle",
    77: "Bezier quadrilateral",
}  # fmt: skip
_OTHER_SOLID = {
    15: "pentagonal prism", 16: "hexagonal prism", 31: "linear-quadratic wedge",
    32: "18-node wedge", 33: "24-node hexahedron", 37: "19-node pyramid", 42: "polyhedron",
    71: "Lagrange tetrahedron", 72: "Lagrange hexahedron", 73: "Lagrange wedge",
    74: "Lagrange pyramid", 79: "Bezier tetrahedron", 80: "Bezier hexahedron",
    81: "Bezier wedge", 82: "Bezier pyramid",
}  # fmt: skip


def to_grids(data: Any) -> list[Any]:
    """Unstructured grids from whatever a reader gave: its parts with solid cells, if it has any."""
    grids = [grid for leaf in _leaves(data) if (grid := _unstructured(leaf)) is not None]
    return [grid for grid in grids if has_solid(grid)] or grids[:1]


def _leaves(data: Any) -> list[Any]:
    import pyvista
    from vtkmodules.vtkCommonDataModel import vtkPartitionedDataSet, vtkPartitionedDataSetCollection

    if isinstance(data, vtkPartitionedDataSetCollection):
        parts = [
            data.GetPartitionedDataSet(k) for k in range(data.GetNumberOfPartitionedDataSets())
        ]
        return [leaf for part in parts for leaf in _leaves(part)]
    if isinstance(data, vtkPartitionedDataSet):
        return [
            leaf
            for k in range(data.GetNumberOfPartitions())
            for leaf in _leaves(data.GetPartition(k))
        ]
    _name_in_text(data)
    data = pyvista.wrap(data)
    if isinstance(data, pyvista.MultiBlock):
        return [leaf for k in range(data.n_blocks) for leaf in _leaves(data[k])]
    return [data]


def _name_in_text(data: Any) -> None:
    """Names that are no UTF-8, which VTK gives as bytes, are taken for Latin-1."""
    from vtkmodules.vtkCommonDataModel import vtkDataSet

    if isinstance(data, vtkDataSet):
        for arrays in (data.GetPointData(), data.GetCellData(), data.GetFieldData()):
            for k in range(arrays.GetNumberOfArrays()):
                array = arrays.GetAbstractArray(k)
                if isinstance(array.GetName(), bytes):
                    array.SetName(array.GetName().decode("latin-1"))


def _unstructured(data: Any) -> Any:
    """An unstructured grid; None if it is no grid of cells."""
    import pyvista

    if isinstance(data, pyvista.StructuredGrid | pyvista.RectilinearGrid | pyvista.ImageData):
        return data.cast_to_unstructured_grid()
    if isinstance(data, pyvista.PolyData):
        return pyvista.UnstructuredGrid(data) if data.n_points else None
    return data if isinstance(data, pyvista.UnstructuredGrid) else None


def has_solid(grid: Any) -> bool:
    return bool(np.isin(np.unique(grid.celltypes), [*_OTHER_SOLID, *BY_VTK_TYPE, _VOXEL]).any())


def _cells(grid: Any) -> tuple[list[RawBlock], Counter[str], Counter[str]]:
    """Solid cells by type, and the counts of ignored and of refused cells."""
    types = np.asarray(grid.celltypes)
    real = _not_ghosts(grid)
    blocks: list[RawBlock] = []
    ignored: Counter[str] = Counter()
    refused: Counter[str] = Counter()
    for number in map(int, np.unique(types)):
        rows = np.flatnonzero((types == number) & real)
        if not len(rows):
            continue
        element = BY_VTK_TYPE[12] if number == _VOXEL else BY_VTK_TYPE.get(number)
        if element is None:
            kinds, counts = (_NO_SOLID, ignored) if number in _NO_SOLID else (_OTHER_SOLID, refused)
            counts[kinds.get(number, f"VTK type {number}")] += len(rows)
            continue
        nodes = _connectivity(grid, rows, len(element.nodes), element.name)
        if number == _VOXEL:
            nodes = nodes[:, _VOXEL_TO_HEXAHEDRON]
        blocks.append(RawBlock(element.name, nodes, rows))
    return merged(blocks), ignored, refused


def _connectivity(grid: Any, rows: NDArray[Any], width: int, kind: str) -> NDArray[Any]:
    # The property was renamed from `offset` in pyvista 0.49.
    offsets = np.asarray(grid.cell_offsets if hasattr(grid, "cell_offsets") else grid.offset)
    connectivity = np.asarray(grid.cell_connectivity)
    widths = offsets[rows + 1] - offsets[rows]
    wrong = np.flatnonzero(widths != width)
    if len(wrong) or offsets[rows[-1] + 1] > len(connectivity):
        row = int(rows[wrong[0]]) if len(wrong) else int(rows[-1])
        raise ReadError(
            f"{kind} cell {row} has {offsets[row + 1] - offsets[row]} nodes, expected {width}; "
            "the cell list of the file is damaged"
        )
    first, last = offsets[rows[0]], offsets[rows[-1] + 1]
    if last - first == len(rows) * width:  # one run of cells: no copy
        return connectivity[first:last].reshape(-1, width)
    return connectivity[offsets[rows][:, None] + np.arange(width)]


def _not_ghosts(grid: Any) -> NDArray[Any]:
    """Which cells are this piece's own: copies of a neighbour's cells are marked in a byte array.

    The bits are those of VTK's vtkDataSetAttributes: 1 a copy, 32 hidden.
    """
    if "vtkGhostType" not in grid.cell_data:
        return np.ones(grid.n_cells, dtype=bool)
    return (np.asarray(grid.cell_data["vtkGhostType"]) & (1 | 32)) == 0


def to_model(grids: list[Any], path: Path) -> RawModel:
    """The raw model of one grid, or of several as pieces of one solid."""
    grids = [grid for grid in grids if grid.n_points]
    if not grids:
        raise ReadError(f"{path}: found no mesh, expected points and solid cells; export them")
    models = []
    for grid in grids:
        blocks, ignored, refused = _cells(grid)
        model = RawModel(np.asarray(grid.points), blocks, ignored, refused)
        model.check_nodes()
        model.global_ids = _global_ids(grid)
        models.append(model)
    return concatenated(models)


def _global_ids(grid: Any) -> NDArray[Any] | None:
    marked = grid.GetPointData().GetGlobalIds()
    names = [marked.GetName()] if marked is not None else []
    names += [n for n in grid.point_data if re.fullmatch(r"global_?(node|point)_?ids?", n.lower())]
    for name in names:
        ids = np.asarray(grid.point_data[name])
        if ids.dtype.kind in "iu" and ids.shape == (grid.n_points,):
            return ids
    return None


def point_arrays(grids: list[Any]) -> dict[str, NDArray[Any]]:
    """Point arrays that all grids have, in the order of the points of `to_model`."""
    found = [
        {
            name: a
            for name in grid.point_data
            if (a := np.asarray(grid.point_data[name])) is not None
        }
        for grid in grids
        if grid.n_points
    ]
    if len(found) == 1:
        return {name: a for name, a in found[0].items() if a.dtype.kind in "fiu"}
    return {
        name: np.concatenate([arrays[name] for arrays in found])
        for name in found[0]
        if all(name in arrays and arrays[name].dtype.kind in "fiu" for arrays in found)
        and len({arrays[name].shape[1:] for arrays in found}) == 1
    }


def cell_arrays(grids: list[Any]) -> dict[str, NDArray[Any]]:
    """Cell arrays as the cells are numbered; of pieces only where all their cells are solid ones,
    since pieces are numbered by these.
    """
    grids = [grid for grid in grids if grid.n_points]
    if len(grids) > 1:
        for grid in grids:
            solid = np.isin(grid.celltypes, [*BY_VTK_TYPE, _VOXEL])
            if not (solid & _not_ghosts(grid)).all():
                return {}
    return joined_cells(grids)


def joined_cells(grids: list[Any]) -> dict[str, NDArray[Any]]:
    """Cell arrays that all grids have, one after the other."""
    joined = {}
    for name in set.intersection(*(set(grid.cell_data) for grid in grids)) if grids else ():
        parts = [np.asarray(grid.cell_data[name]) for grid in grids]
        if all(p.dtype.kind in "fiu" for p in parts) and len({p.shape[1:] for p in parts}) == 1:
            joined[name] = np.concatenate(parts)
    return joined


def time_of(grids: list[Any]) -> float | None:
    values = [] if not grids else grids[0].field_data.get("TimeValue", [])
    return float(values[0]) if len(values) == 1 else None
