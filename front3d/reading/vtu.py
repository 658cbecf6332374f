"""Whether the sizes that a VTU file claims fit into it, before VTK makes room for them.

VTK takes counts, offsets and block sizes on trust: a damaged one ends in an allocation of many
gigabytes or in a walk beyond the data.  Layout: the published description of VTK's XML formats.
"""

import base64
import binascii
import lzma
import mmap
import re
import zlib
from pathlib import Path
from typing import NoReturn

import numpy as np

from front3d.errors import ReadError

_TAG = re.compile(rb"<(Piece|DataArray|PointData|CellData|Points|Cells|AppendedData)\b([^<>]*)>")
_ATTRIBUTE = re.compile(rb"(\w+)\s*=\s*[\"']([^\"']*)[\"']")
# Bytes that one byte may unpack to, rounded up: the best that each algorithm can do.
_RATIO = {"": 1, "vtkZLibDataCompressor": 1100, "vtkLZ4DataCompressor": 260}
_RATIO["vtkLZMADataCompressor"] = 10000
_TEXT = re.compile(rb"[^<]*")


def check_vtu(path: Path) -> None:
    """Raise ReadError if a count, an offset or a block of the file cannot be true."""
    with path.open("rb") as file, mmap.mmap(file.fileno(), 0, access=mmap.ACCESS_READ) as text:
        try:
            _File(path, text).check()
        except (ValueError, IndexError, KeyError, binascii.Error, zlib.error, lzma.LZMAError):
            _refuse(path, "found sizes in it that make no sense, expected whole arrays")


def _refuse(path: Path, what: str) -> NoReturn:
    raise ReadError(
        f"{path}: {what}: the file is damaged or cut short; transfer or export it again"
    )


def _attributes(text: bytes) -> dict[str, str]:
    return {k.decode(): v.decode("latin-1") for k, v in _ATTRIBUTE.findall(text)}


class _File:
    def __init__(self, path: Path, text: mmap.mmap) -> None:
        self.path, self.text = path, text
        head = re.search(rb"<VTKFile\b([^>]*)>", text[:8192])
        given = _attributes(head[1]) if head else {}
        order = ">" if given.get("byte_order") == "BigEndian" else "<"
        self.word = np.dtype(order + ("u8" if given.get("header_type") == "UInt64" else "u4"))
        self.order = order
        self.compressor = given.get("compressor", "")
        self.room = len(text) * _RATIO[self.compressor]
        appended = text.rfind(b"<AppendedData")
        self.end = appended if appended >= 0 else len(text)
        self.data, self.encoded = len(text), True
        if appended >= 0:
            head = re.compile(rb"<AppendedData\b([^>]*)>\s*_").match(text, appended)
            if head is None:
                raise ValueError
            self.data = head.end()
            self.encoded = _attributes(head[1]).get("encoding") != "raw"

    def check(self) -> None:
        counts = {"PointData": 0, "CellData": 0, "Points": 0, "Cells": 0}
        inside = ""
        for tag in _TAG.finditer(self.text, 0, self.end):
            name, given = tag[1].decode(), _attributes(tag[2])
            if name == "Piece":
                points, cells = (int(given[f"NumberOf{k}"]) for k in ("Points", "Cells"))
                # A point takes six bytes or more ("0 0 0 "), a cell one for its type.
                for what, n, size in (("points", points, 6), ("cells", cells, 1)):
                    if not 0 <= n * size <= self.room:
                        _refuse(
                            self.path,
                            f"found a claim of {n} {what} in a file of {len(self.text)} bytes, "
                            "expected no more than fit into it",
                        )
                counts = dict.fromkeys(("PointData", "Points"), points)
                counts |= dict.fromkeys(("CellData", "Cells"), cells)
            elif name == "DataArray":
                self._array(given, inside, counts.get(inside, 0), tag.end())
            else:
                inside = name

    def _array(self, given: dict[str, str], inside: str, entities: int, start: int) -> None:
        name, width = given.get("Name", ""), int(given.get("NumberOfComponents", 1) or 1)
        if not 0 <= width * entities <= self.room:
            raise ValueError
        form = given.get("format", "ascii")
        if form == "ascii":
            if inside == "Cells" and name == "offsets":
                match = _TEXT.match(self.text, start)
                words = self.text[max(start, match.end() - 60) : match.end()].split()  # type: ignore[union-attr]
                self._last_offset(int(words[-1]) if words else 0)
            return
        appended = form == "appended"
        place = self.data + int(given["offset"]) if appended else start
        if not self.data <= place < len(self.text) if appended else place >= self.end:
            raise ValueError
        last = self._blocks(place, self.encoded if appended else True, not appended)
        if inside == "Cells" and name == "offsets" and last:
            kind = np.dtype(self.order + {"Int64": "i8", "Int32": "i4"}[given["type"]])
            self._last_offset(int(np.frombuffer(last[-kind.itemsize :], kind)[0]))

    def _last_offset(self, last: int) -> None:
        if not 0 <= last <= self.room:
            raise ValueError

    def _bytes(self, place: int, start: int, stop: int, encoded: bool) -> bytes:
        """Bytes start to stop of the data at `place`."""
        if not encoded:
            found = self.text[place + start : place + stop]
        else:
            first = start // 3 * 4
            part = self.text[place + first : place + -(-stop // 3) * 4]
            found = base64.b64decode(part, validate=True)[start % 3 : start % 3 + stop - start]
        if len(found) < stop - start:
            raise ValueError
        return found

    def _words(self, place: int, start: int, count: int, encoded: bool) -> list[int]:
        size = self.word.itemsize
        found = self._bytes(place, start * size, (start + count) * size, encoded)
        return [int(v) for v in np.frombuffer(found, self.word)]

    def _blocks(self, place: int, encoded: bool, inline: bool) -> bytes:
        """Walk over an array; its last bytes, or b"" where they cannot be had cheaply."""
        if encoded:
            place = re.compile(rb"\s*").match(self.text, place).end()  # type: ignore[union-attr]
        left = len(self.text) - place
        size = self.word.itemsize
        if not self.compressor:
            (length,) = self._words(place, 0, 1, encoded)
            if length > left:
                raise ValueError
            if inline:  # a byte too many moves all that follow it
                text = _TEXT.match(self.text, place)
                given = len(text[0].rstrip()) if text else 0
                if given != -(-(size + length) // 3) * 4:
                    raise ValueError
            return self._bytes(place, max(size, size + length - 8), size + length, encoded)
        blocks, whole, last = self._words(place, 0, 3, encoded)
        if blocks * size > left or blocks * whole > self.room or last > whole:
            raise ValueError
        if not blocks:
            return b""
        sizes = self._words(place, 3, blocks, encoded)
        head = (3 + blocks) * size
        if encoded:  # the header is encoded by itself
            place, head = place + -(-head // 3) * 4, 0
        total = sum(sizes)
        if total > left:
            raise ValueError
        expected = last or whole
        packed = self._bytes(place, head + total - sizes[-1], head + total, encoded)
        return self._unpack(packed, expected)

    def _unpack(self, packed: bytes, expected: int) -> bytes:
        if self.compressor == "vtkZLibDataCompressor":
            found = zlib.decompressobj().decompress(packed, expected + 1)
        elif self.compressor == "vtkLZMADataCompressor":
            found = lzma.LZMADecompressor().decompress(packed, expected + 1)
        else:
            return b""
        if len(found) != expected:
            raise ValueError
        return found
