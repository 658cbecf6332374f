"""MSH 2.2 and 4.1: meshio's parsers of the sections, joined by a loop of our own.

meshio's own loop keeps only the last time of a field, drops the times, and trusts node data to
stand in the order of the nodes; here every `$NodeData` section is placed by its node numbers.
"""

import os
import struct
from pathlib import Path
from typing import Any, BinaryIO

import numpy as np
from numpy.typing import NDArray

from front3d.errors import ReadError
from front3d.loads import PHYSICAL_GROUP
from front3d.reading.fields import DisplacementFinder
from front3d.reading.guard import python_library
from front3d.reading.meshio_family import mend_meshio, model
from front3d.reading.raw import RawModel


def read_msh(path: Path, finder: DisplacementFinder) -> RawModel:
    """Mesh and node data of an MSH file; every (time step, time) becomes one frame."""
    with python_library(path, "MSH"), path.open("rb") as file:
        mend_meshio()
        points, tags, cells, data, groups, names = _sections(file)
        if not len(points) or cells is None:
            raise ReadError(f"{path}: found no $Nodes or no $Elements section; export the mesh")
        rows = _rows(tags)
        frames: dict[tuple[int, float], dict[str, NDArray[Any]]] = {}
        for name, step, time, numbers, values in data:
            arrays = frames.setdefault((step, time), {})
            # A node without a value stays NaN and is refused later if a solid cell uses it.
            array = arrays.setdefault(name, np.full((len(points), values.shape[1]), np.nan))
            inside = (numbers >= 0) & (numbers < len(rows))
            if not inside.all() or (rows[numbers] < 0).any():
                raise ReadError(f"{path}: $NodeData {name!r} names a node that is not in $Nodes")
            array[rows[numbers]] = values
        for (_, time), arrays in sorted(frames.items(), key=lambda item: item[0]):
            finder.offer(arrays, time, {PHYSICAL_GROUP: groups})
        raw = model(points, cells)
        raw.node_numbers = tags + 1
        raw.groups.update(names)
        return raw


def _sections(file: BinaryIO) -> tuple[Any, Any, Any, list[Any], Any, dict[str, int]]:
    from meshio.gmsh import _gmsh22, _gmsh41, common

    version, ascii_, size = _header(file)
    points: Any = np.empty((0, 3))
    tags: Any = np.empty(0, dtype=np.int64)
    cells: Any = None
    data: list[Any] = []
    groups: Any = np.empty(0)
    names: dict[str, Any] = {}
    physical: Any = None
    bounding: Any = None
    while line := file.readline():
        section = line.decode("latin-1").strip()
        if not section:
            continue
        if not section.startswith("$"):
            raise ReadError(f"found the line {section[:40]!r}, expected the start of a section")
        section = section[1:]
        if section in ("Nodes", "Elements"):
            _check_counts(file, section)
        if section == "NodeData":
            data.append(_node_data(file, ascii_))
        elif section == "Entities" and version == "4.1":
            physical, bounding = _gmsh41._read_entities(file, ascii_, size)
        elif section == "Nodes":
            if version == "4.1":
                points, tags, _ = _gmsh41._read_nodes(file, ascii_, size)
            else:
                points, tags = _gmsh22._read_nodes(file, ascii_)
            # Only the parser of 4.1 counts from 0.
            tags = np.asarray(tags).astype(np.int64) - (version != "4.1")
        elif section == "Elements":
            cells, groups = _elements(file, version, ascii_, size, tags, physical, bounding)
        elif section == "PhysicalNames":
            common._read_physical_names(file, names)
        else:
            common._fast_forward_to_end_block(file, section)
    volumes = {name: int(number) for name, (number, dimension) in names.items() if dimension == 3}
    return points, tags, cells, data, groups, volumes


def _check_counts(file: BinaryIO, section: str) -> None:
    """The counts on the first line of a section cannot be larger than the file is long."""
    place, length = file.tell(), os.fstat(file.fileno()).st_size
    counts = [int(word) for word in file.read(80).split(b"\n")[0].split() if word.isdigit()]
    file.seek(place)
    # The parser of 4.1 counts blocks and entities first, then numbers from the lowest to the
    # highest, which may be far apart.
    if any(count > length for count in counts[:2]):
        raise ReadError(
            f"${section} claims {max(counts[:2])} entries in a file of {length} bytes, expected no "
            "more than fit into it: the file is damaged"
        )


def _elements(
    file: BinaryIO, version: str, ascii_: bool, size: int, tags: Any, physical: Any, bounding: Any
) -> tuple[list[tuple[str, Any]], NDArray[Any]]:
    """Cells, (type, nodes) a block, and the number of the physical group of every cell, 0 where it
    belongs to none.
    """
    from meshio.gmsh import _gmsh22, _gmsh41

    if version == "2.2":
        cells: list[tuple[str, Any]] = []
        _, by_type = _gmsh22._read_cells(file, cells, tags + 1, ascii_)
        return cells, _groups_by_type(cells, by_type.get("gmsh:physical", {}))
    blocks, found, _ = _gmsh41._read_elements(file, tags, physical, bounding, ascii_, size, {})
    cells = [(block.type, block.data) for block in blocks]
    parts = found.get("gmsh:physical", [])
    if [len(part) for part in parts] != [len(nodes) for _, nodes in cells]:
        # The parser leaves out the blocks without a group, and does not say which.
        parts = [np.zeros(len(nodes)) for _, nodes in cells]
    return cells, np.concatenate([*parts, np.empty(0)])


def _groups_by_type(cells: list[tuple[str, Any]], found: dict[str, Any]) -> NDArray[Any]:
    """The same from lists by cell type, whose cells stand in the order of the blocks."""
    total = {kind: sum(len(n) for k, n in cells if k == kind) for kind, _ in cells}
    passed = dict.fromkeys(total, 0)
    parts = [np.empty(0)]
    for kind, nodes in cells:
        start, passed[kind] = passed[kind], passed[kind] + len(nodes)
        whole = found.get(kind, ())
        complete = len(whole) == total[kind]
        parts.append(whole[start : passed[kind]] if complete else np.zeros(len(nodes)))
    return np.concatenate(parts)


def _header(file: BinaryIO) -> tuple[str, bool, int]:
    from meshio.gmsh import common, main

    line = file.readline().decode("latin-1").strip()
    while line != "$MeshFormat":
        if not line.startswith("$"):
            raise ReadError("found no $MeshFormat section at the start")
        common._fast_forward_to_end_block(file, line[1:])
        line = file.readline().decode("latin-1").strip()
    try:
        version, size, ascii_ = main._read_header(file)
    except (struct.error, IndexError, ValueError):
        raise ReadError("the $MeshFormat section is damaged") from None
    known = {"2": "2.2", "2.1": "2.2", "2.2": "2.2", "4.1": "4.1"}
    if version not in known:
        raise ReadError(f"found version {version}, expected 2.2 or 4.1; export it anew as one")
    return known[version], ascii_, size


def _node_data(file: BinaryIO, ascii_: bool) -> tuple[str, int, float, Any, Any]:
    """Name, time step, time, node numbers from 0, and values (nodes, components)."""

    def tag_lines() -> list[str]:
        count = int(file.readline())
        return [file.readline().decode("latin-1").strip() for _ in range(count)]

    names, reals, integers = tag_lines(), tag_lines(), [int(v) for v in tag_lines()]
    name = names[0].strip('"') if names else "unnamed"
    if len(integers) < 3:
        raise ReadError(f"$NodeData {name!r} has {len(integers)} integer tags, expected 3 or more")
    step, width, count = integers[:3]
    if not 0 <= width * count <= os.fstat(file.fileno()).st_size:
        raise ReadError(f"$NodeData {name!r} claims {count} nodes, more than fit into the file")
    if ascii_:
        table = np.fromfile(file, count=count * (1 + width), sep=" ").reshape(count, 1 + width)
        numbers, values = table[:, 0].astype(np.int64), table[:, 1:]
    else:
        record = np.dtype([("node", "<i4"), ("values", "<f8", (width,))])
        rows: NDArray[Any] = np.fromfile(file, count=count, dtype=record)
        if len(rows) != count:
            raise ReadError(f"$NodeData {name!r} holds {len(rows)} nodes, expected {count}")
        numbers, values = rows["node"].astype(np.int64), rows["values"]
    if not any(line.strip() == b"$EndNodeData" for line in file):
        raise ReadError(f"$NodeData {name!r} is not closed: the file is cut short")
    return name, step, float(reals[0]) if reals else 0.0, numbers - 1, values


def _rows(tags: NDArray[np.int64]) -> NDArray[np.int64]:
    """Row of each node number (from 0)."""
    rows = np.full(int(tags.max()) + 1, -1, dtype=np.int64)
    rows[tags] = np.arange(len(tags))
    return rows
