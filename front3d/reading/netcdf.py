"""How long a netCDF classic file ought to be, from its header.

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

_TYPE_SIZES = {1: 1, 2: 1, 3: 2, 4: 4, 5: 4, 6: 8, 7: 1, 8: 2, 9: 4, 10: 8, 11: 8}
_DIMENSION, _VARIABLE, _ATTRIBUTE = 10, 11, 12


def check_length(path: Path) -> None:
    """Raise ReadError if a netCDF classic file is shorter than its header says, or damaged."""
    with path.open("rb") as file:
        found = os.fstat(file.fileno()).st_size
        if file.read(3) != b"CDF":
            return  # netCDF-4 is HDF5, which checks itself
        try:
            expected = _Header(file, found).expected_length()
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


class _Header:
    def __init__(self, file: BinaryIO, length: int) -> None:
        self.file, self.length = file, length
        version = file.read(1)[0]
        self.wide = {1: False, 2: False, 5: True}[version]
        self.far = version != 1

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

    def _attributes(self) -> None:
        for _ in range(self._list(_ATTRIBUTE)):
            self._skip(self._count())
            size = _TYPE_SIZES[self._integer(False)]
            self._skip(self._count() * size)

    def expected_length(self) -> int:
        records = self._integer(self.wide)  # -1: the writer did not come back to fill it in
        dimensions = []
        for _ in range(self._list(_DIMENSION)):
            self._skip(self._count())
            dimensions.append(self._integer(self.wide))
        self._attributes()
        fixed_end, per_record = 0, []
        for _ in range(self._list(_VARIABLE)):
            self._skip(self._count())
            shape = [dimensions[self._count()] for _ in range(self._count())]
            self._attributes()
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
