"""MED and XDMF, through meshio, and what meshio's meshes have in common."""

import re
import xml.etree.ElementTree as ET
from collections import Counter
from collections.abc import Callable, Iterable
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from front3d.elements import ELEMENTS
from front3d.errors import ReadError
from front3d.reading.fields import DisplacementFinder
from front3d.reading.guard import python_library
from front3d.reading.raw import RawBlock, RawModel, merged


def mend_meshio() -> None:
    """Add what meshio 5.3.5 lacks: two element types, MED's names, quadratic mixed XDMF cells."""
    from meshio import _mesh
    from meshio.med import _med
    from meshio.xdmf import main, time_series

    _mesh.topological_dimension.update(wedge15=3, pyramid13=3, triangle7=2)
    for name, kind in {"H27": "hexahedron27", "QU9": "quad9", "TR7": "triangle7"}.items():
        _med.med_to_meshio_type.setdefault(name, kind)
    _med.med_to_meshio_type.setdefault("P18", "wedge18")
    main.translate_mixed_cells = time_series.translate_mixed_cells = _mixed_cells


def _mixed_cells(data: NDArray[Any]) -> list[Any]:
    """Cells of an XDMF "Mixed" topology: type, (for lines a count,) nodes, type, nodes..."""
    from meshio import CellBlock
    from meshio._common import num_nodes_per_cell
    from meshio.xdmf.common import xdmf_idx_to_meshio_type

    data = np.asarray(data).ravel()
    # Not every type that XDMF numbers has an entry in meshio's table.
    widths = {"wedge15": 15, "pyramid13": 13} | num_nodes_per_cell
    cells: dict[str, list[int]] = {}
    place = 0
    while place < len(data):
        kind = xdmf_idx_to_meshio_type.get(int(data[place]))
        if kind is None or kind not in widths:
            raise ReadError(f"cell type {data[place]} of a mixed XDMF topology is not known")
        place += 2 if kind == "line" else 1
        cells.setdefault(kind, []).append(place)
        place += widths[kind]
    if place != len(data):
        raise ReadError("the list of mixed cells ends inside a cell")
    return [
        CellBlock(kind, data[np.array(starts)[:, None] + np.arange(widths[kind])])
        for kind, starts in cells.items()
    ]


def model(points: NDArray[Any], cells: Iterable[tuple[str, NDArray[Any]]]) -> RawModel:
    """Raw model from points and (meshio type, nodes) pairs."""
    from meshio._mesh import topological_dimension

    blocks: list[RawBlock] = []
    ignored: Counter[str] = Counter()
    refused: Counter[str] = Counter()
    count = 0
    for kind, nodes in cells:
        if kind in ELEMENTS:
            nodes = np.asarray(nodes).reshape(-1, len(ELEMENTS[kind].nodes)).astype(np.int64)
            blocks.append(RawBlock(kind, nodes, np.arange(count, count + len(nodes))))
        elif topological_dimension.get(kind, 3) < 3:
            ignored[kind] += len(nodes)
        else:
            refused[kind] += len(nodes)
        count += len(nodes)
    if points is None or not len(points):
        raise ReadError("found no points, expected a mesh")
    return RawModel(np.asarray(points), merged(blocks), ignored, refused)


def _arrays(point_data: dict[str, Any]) -> dict[str, NDArray[Any]]:
    return {name: np.asarray(values) for name, values in point_data.items()}


def _cell_arrays(cell_data: dict[str, Any]) -> dict[str, NDArray[Any]]:
    """Values of all blocks one after the other, as the cells are numbered."""
    joined = {}
    for name, parts in cell_data.items():
        values = [np.asarray(part) for part in parts]
        if len({(part.shape[1:], part.dtype.kind) for part in values}) == 1:
            joined[name] = np.concatenate(values)
    return joined


def read_med(path: Path, finder: DisplacementFinder) -> RawModel:
    """MED: fields of several times come as arrays named "NAME[k] - time"."""
    with python_library(path, "MED"):
        mend_meshio()
        from meshio.med import _med

        mesh = _med.read(path)
        raw = model(mesh.points, ((block.type, block.data) for block in mesh.cells))
        frames: dict[tuple[int, float] | None, dict[str, NDArray[Any]]] = {}
        for name, values in _arrays(mesh.point_data).items():
            match = re.fullmatch(r"(.*)\[(\d+)\] - (\S+)", name)
            moment = (int(match[2]), float(match[3])) if match else None
            frames.setdefault(moment, {})[match[1] if match else name] = values
        frames.get(None, {}).pop("point_tags", None)
        cells = _cell_arrays(mesh.cell_data)
        for moment, arrays in frames.items():
            if arrays:
                finder.offer(arrays, moment[1] if moment else None, cells)
    return raw


def read_xdmf(path: Path, finder: DisplacementFinder) -> RawModel:
    """XDMF, one grid or a temporal collection of them."""
    with python_library(path, "XDMF"):
        mend_meshio()
        from meshio.xdmf.main import XdmfReader
        from meshio.xdmf.time_series import TimeSeriesReader

        grids = ET.parse(path).getroot().iter("Grid")
        if not any(g.get("CollectionType") == "Temporal" for g in grids):
            mesh = XdmfReader(str(path)).read()
            finder.offer(_arrays(mesh.point_data), None, _cell_arrays(mesh.cell_data))
            return model(mesh.points, ((block.type, block.data) for block in mesh.cells))
        with TimeSeriesReader(path) as reader:
            points, cells = reader.read_points_cells()
            raw = model(points, ((block.type, block.data) for block in cells))
            for k in range(reader.num_steps):
                time, point_data, cell_data = reader.read_data(k)
                finder.offer(_arrays(point_data), time, _cell_arrays(cell_data))
        return raw


READERS: dict[str, Callable[[Path, DisplacementFinder], RawModel]] = {
    "med": read_med,
    "xdmf": read_xdmf,
}
