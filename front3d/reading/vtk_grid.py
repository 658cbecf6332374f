"""From a VTK data set to the raw model: which cells are solid, which arrays there are."""

from collections import Counter
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from front3d.elements import BY_VTK_TYPE
from front3d.errors import ReadError
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


def to_grid(data: Any) -> Any:
    """An unstructured grid from whatever a reader gave; None if it is no grid of cells."""
    import pyvista

    data = pyvista.wrap(data)
    if isinstance(data, pyvista.MultiBlock):
        grids = [g for g in (to_grid(data[k]) for k in range(data.n_blocks)) if g is not None]
        solid = [g for g in grids if has_solid(g)]
        if len(solid) > 1:
            raise ReadError(
                f"found {len(solid)} separate parts with solid cells, expected one: nodes on their "
                "borders are doubled and would look like a crack; merge the parts by node number"
            )
        return next(iter(solid or grids), None)
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
    blocks: list[RawBlock] = []
    ignored: Counter[str] = Counter()
    refused: Counter[str] = Counter()
    for number in map(int, np.unique(types)):
        rows = np.flatnonzero(types == number)
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


def to_model(grid: Any, path: Path) -> RawModel:
    if grid is None or not grid.n_points:
        raise ReadError(f"{path}: found no mesh, expected points and solid cells; export them")
    blocks, ignored, refused = _cells(grid)
    return RawModel(np.asarray(grid.points), blocks, ignored, refused)


def point_arrays(grid: Any) -> dict[str, NDArray[Any]]:
    data = grid.point_data
    return {name: np.asarray(data[name]) for name in data if data[name].dtype.kind in "fiu"}


def cell_arrays(grid: Any) -> dict[str, NDArray[Any]]:
    data = grid.cell_data
    return {name: np.asarray(data[name]) for name in data if data[name].dtype.kind in "fiu"}


def time_of(grid: Any) -> float | None:
    values = grid.field_data.get("TimeValue", [])
    return float(values[0]) if len(values) == 1 else None
