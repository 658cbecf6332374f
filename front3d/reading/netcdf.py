"""Whether a netCDF classic file is as long, and an Exodus file as complete, as its header says.

The netCDF library fills what is missing from a file cut short with zeros, and may walk through a
damaged header for long; a result file must not be read that way.  Source: the published grammar
of the classic formats CDF-1, CDF-2 and CDF-5.
"""

import os
import struct
from math import prod
from pathlib import Path
from typing import BinaryIO

from front3d.errors import ReadError
from front3d.reading.guard import python_library

_TYPE_SIZES = {1: 1, 2: 1, 3: 2, 4: 4, 5: 4, 6: 8, 7: 1, 8: 2, 9: 4, 10: 8, 11: 8}
# Nodes of the Exodus element types, by how their names begin; None: any number.
_NODES: dict[str, tuple[int, ...] | None] = {
    "HEX": (8, 20, 27), "TET": (4, 10), "WED": (6, 15, 18), "PYR": (5, 13, 14), "SPH": (1,),
    "CIR": (1,), "BAR": (2, 3), "BEA": (2, 3), "TRU": (2, 3), "EDG": (2, 3), "TRI": (3, 6, 7),
    "QUA": (4, 8, 9), "SHE": (3, 4, 6, 8, 9), "NSI": None, "NFA": None,
}  # fmt: skip
_DIMENSION, _VARIABLE, _ATTRIBUTE = 10, 11, 12


def check_exodus(path: Path) -> None:
    """Raise ReadError if the file is shorter than its header says, or lacks parts of its mesh."""
    with path.open("rb") as file:
        found = os.fstat(file.fileno()).st_size
        if file.read(3) != b"CDF":
            _check_netcdf4(path)
            return
        try:
            header = _Header(file, found)
            expected = header.expected_length()
        except (struct.error, IndexError, KeyError, ValueError):
            raise ReadError(
                f"{path}: the header of this netCDF (Exodus) file is damaged or cut short; "
                "transfer or export it again"
            ) from None
    if found < expected:
        raise ReadError(
            f"{path}: found {found} bytes, expected {expected} as its header says: the file is cut "
            "short; was it written to the end and transferred whole?"
        )
    _check_parts(path, header.sizes, header.shapes, header.kinds)


def _check_netcdf4(path: Path) -> None:
    """The same for netCDF-4, which is HDF5: lengths are checked there, parts are not."""
    import h5py

    with python_library(path, "Exodus"), h5py.File(path, "r") as file:
        found = {name: item for name, item in file.items() if isinstance(item, h5py.Dataset)}
        sizes = {name: item.shape[0] for name, item in found.items() if item.ndim == 1}
        shapes = {name: item.shape for name, item in found.items() if item.dtype.kind in "fiu"}
        kinds = {name: item.attrs.get("elem_type", b"") for name, item in found.items()}
        text = {
            n: k.decode("latin-1") if isinstance(k, bytes) else str(k) for n, k in kinds.items()
        }
        _check_parts(path, sizes, shapes, text)


def _check_parts(
    path: Path, sizes: dict[str, int], shapes: dict[str, tuple[int, ...]], kinds: dict[str, str]
) -> None:
    """The Exodus library, and VTK after it, walk into nothing where a block lacks a dimension or
    its list of nodes, or is of a type that they do not know.

    Names: Exodus II manual (Sandia, SAND92-2137).
    """
    nodes = sizes.get("num_nodes")
    for block in range(1, sizes.get("num_el_blk", 0) + 1):
        cells, width = (sizes.get(f"{n}{block}") for n in ("num_el_in_blk", "num_nod_per_el"))
        name = f"connect{block}"
        if cells == 0 or width == 0:
            continue
        if shapes.get(name) != (cells, width):
            raise ReadError(
                f"{path}: found no whole list of cells of block {block} ({name}), expected "
                "one: the file is damaged; transfer or export it again"
            )
        kind = kinds.get(name, "").strip("\0 ")
        allowed = _NODES.get(kind[:3].upper(), ())
        if allowed is not None and width not in allowed:
            raise ReadError(
                f"{path}: found cells of the type {kind!r} with {width} nodes in block {block}, "
                "expected one of the Exodus types with its number of nodes; export it again"
            )
    for name, shape in shapes.items():
        of_nodes = name.startswith(("coord", "vals_nod_var"))
        if of_nodes and nodes is not None and nodes not in shape:
            raise ReadError(
                f"{path}: {name} has the shape {shape}, expected {nodes} nodes: the file is "
                "damaged; transfer or export it again"
            )


class _Header:
    def __init__(self, file: BinaryIO, length: int) -> None:
        self.file, self.length = file, length
        version = file.read(1)[0]
        self.wide = {1: False, 2: False, 5: True}[version]
        self.far = version != 1
        self.sizes: dict[str, int] = {}
        self.shapes: dict[str, tuple[int, ...]] = {}
        self.kinds: dict[str, str] = {}

    def _integer(self, wide: bool) -> int:
        size, code = (8, ">q") if wide else (4, ">i")
        return int(struct.unpack(code, self.file.read(size))[0])

    def _count(self) -> int:
        count = self._integer(self.wide)
        if not 0 <= count <= self.length:
            raise ValueError(count)
        return count

    def _list(self, tag: int) -> int:
        found, count = self._integer(False), self._count()
        if found != tag and (found, count) != (0, 0):
            raise ValueError(found)
        return count

    def _skip(self, size: int) -> None:
        """Skip bytes that are padded to a multiple of four."""
        self.file.seek(-(-size // 4) * 4, os.SEEK_CUR)
        if self.file.tell() > self.length:
            raise ValueError(size)

    def _name(self) -> str:
        length = self._count()
        name = self.file.read(length).decode("utf-8")
        self.file.seek(-length % 4, os.SEEK_CUR)
        return name

    def _attributes(self, variable: str = "") -> None:
        for _ in range(self._list(_ATTRIBUTE)):
            name = self._name()
            size = _TYPE_SIZES[self._integer(False)]
            length = self._count() * size
            if name == "elem_type":
                self.kinds[variable] = self.file.read(length).decode("latin-1")
                self.file.seek(-length % 4, os.SEEK_CUR)
            else:
                self._skip(length)

    def expected_length(self) -> int:
        records = self._integer(self.wide)  # -1: the writer did not come back to fill it in
        dimensions = []
        for _ in range(self._list(_DIMENSION)):
            name = self._name()
            self.sizes[name] = self._integer(self.wide)
            if self.sizes[name] < 0:
                raise ValueError(name)
            dimensions.append(self.sizes[name])
        self._attributes()
        fixed_end, per_record = 0, []
        for _ in range(self._list(_VARIABLE)):
            name = self._name()
            shape = [dimensions[self._count()] for _ in range(self._count())]
            self.shapes[name] = tuple(shape)
            self._attributes(name)
            size = _TYPE_SIZES[self._integer(False)]
            self._integer(self.wide)  # the size, unreliable for large variables
            begin = self._integer(self.far)
            if shape and shape[0] == 0:  # the length 0 marks the record dimension
                per_record.append((begin, size * prod(shape[1:])))
            else:
                fixed_end = max(fixed_end, begin + size * prod(shape))
        if not per_record or records < 1:
            return fixed_end
        stride = sum(-(-size // 4) * 4 for _, size in per_record)
        if len(per_record) == 1:
            stride = per_record[0][1]
        ends = [begin + (records - 1) * stride + size for begin, size in per_record]
        return max(fixed_end, *ends)
