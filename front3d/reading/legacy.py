"""Whether a VTK legacy file holds what it claims, before VTK makes room for it.

VTK trusts the counts, and the lengths in the list of cells, and walks beyond its memory where they
are wrong.  It reports nothing, either, when a file in ASCII ends inside an array of numbers: the
rest of the array is whatever stood in memory.  Only the last array can be cut short, so
only its numbers are counted.
"""

import mmap
import re
from contextlib import suppress
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from front3d.errors import ReadError
from front3d.reading.legacy_walk import UnreadableError, walk_binary

_DECLARATIONS = re.compile(rb"^(?!nan\b|inf\b)[A-Za-z_][^\n]*", re.MULTILINE | re.IGNORECASE)
# Numbers per point or cell after a line that begins with one of these words.
_PER_ENTITY = {"VECTORS": 3, "NORMALS": 3, "TENSORS": 9, "TENSORS6": 6}


_COUNTS = re.compile(
    rb"^(POINTS|CELLS|CELL_TYPES|POINT_DATA|CELL_DATA)[ \t]+(\S+)[ \t]*(\S*)[^\n]*\n", re.MULTILINE
)


def check_legacy(path: Path) -> None:
    """Raise ReadError if the file is cut short, or its counts or list of cells cannot be true."""
    try:
        _check_structure(path)
    except (ValueError, IndexError, KeyError):
        raise ReadError(
            f"{path}: found counts in it that make no sense, expected whole lists of points and "
            "cells: the file is damaged; transfer or export it again"
        ) from None
    check_tail(path)


def _check_structure(path: Path) -> None:
    with path.open("rb") as file, mmap.mmap(file.fileno(), 0, access=mmap.ACCESS_READ) as text:
        lines = text[:1024].split(b"\n")
        version = re.fullmatch(rb"# vtk DataFile Version ([1-5])\.\d\s*", lines[0])
        if version is None or len(lines) < 4 or len(lines[1]) > 256:
            raise ValueError
        ascii_ = len(lines) > 2 and lines[2].strip().upper() == b"ASCII"
        counts: dict[str, int] = {}
        for found in _COUNTS.finditer(text):
            word, n = found[1].decode(), int(found[2])
            # Two bytes or more for each number.
            if not 0 <= n * (6 if word == "POINTS" else 1) <= len(text):
                raise ValueError
            if counts.setdefault(word, n) != n:
                raise ValueError
            if word == "CELLS":
                after = text[found.end() : found.end() + 7].upper() == b"OFFSETS"
                if after != (int(version[1]) >= 5):
                    raise ValueError
                if not 0 <= int(found[3]) <= len(text):
                    raise ValueError
                if not after:
                    _walk_cells(_integers(text, found.end(), int(found[3]), ascii_), n)
        for one, other in (("POINTS", "POINT_DATA"), ("CELL_TYPES", "CELL_DATA")):
            if one in counts and counts.get(other, counts[one]) != counts[one]:
                raise ValueError
        if not ascii_:
            if lines[2].strip().upper() != b"BINARY":
                raise ValueError
            with suppress(UnreadableError):
                walk_binary(text, sum(len(line) + 1 for line in lines[:3]))


def _integers(text: mmap.mmap, start: int, count: int, ascii_: bool) -> NDArray[Any]:
    if not ascii_:
        return np.frombuffer(text[start : start + 4 * count], ">i4", count)
    # No number of a sound file takes more than twenty characters.
    words = text[start : start + 20 * count].split(maxsplit=count)[:count]
    return np.array(words, dtype=np.int64)


def _walk_cells(numbers: NDArray[Any], cells: int) -> None:
    """Walk over "length, nodes, length, nodes, ..", run by run of equal lengths."""
    place = done = 0
    while place < len(numbers):
        length = int(numbers[place])
        if length < 0:
            raise ValueError
        run = numbers[place :: length + 1] == length
        many = len(run) if run.all() else int(run.argmin())
        place, done = place + many * (length + 1), done + many
    if place != len(numbers) or done != cells:
        raise ValueError


def check_tail(path: Path) -> None:
    """Raise ReadError if the last array of an ASCII file lacks numbers; binary files pass."""
    with path.open("rb") as file:
        head = file.read(1024).split(b"\n")
        if len(head) < 3 or head[2].strip().upper() != b"ASCII":
            return
        with mmap.mmap(file.fileno(), 0, access=mmap.ACCESS_READ) as text:
            entities, last, end, previous = 0, "", 0, ""
            for match in _DECLARATIONS.finditer(text):
                previous, last, end = last, match[0].decode("latin-1").strip(), match.end()
                if last.upper().startswith(("POINT_DATA", "CELL_DATA")):
                    entities = int(last.split()[1]) if last.split()[1:] else 0
            expected = _expected(last, previous, entities)
            found = _count(text[end:]) if expected else 0
            open_end = bool(expected) and text[-1:].strip() != b""
    if found < expected:
        raise ReadError(
            f"{path}: found {found} numbers after the line {last!r}, expected {expected}: the file "
            "is cut short; was it written to the end and transferred whole?"
        )
    if open_end:
        raise ReadError(
            f"{path}: found no line break after the last number, which may have lost digits: the "
            "file is cut short, or was edited by hand; if it is whole, end it with a line break"
        )


def _expected(line: str, previous: str, entities: int) -> int:
    """How many numbers follow a declaration; 0 if it declares none."""
    words = line.split()
    if len(words) == 4 and words[1].isdigit() and words[2].isdigit() and words[3] != "string":
        return int(words[1]) * int(words[2])
    if words[:1] == ["LOOKUP_TABLE"] and previous.upper().startswith("SCALARS"):
        width = previous.split()[3:4]
        return entities * int(width[0] if width and width[0].isdigit() else 1)
    return _PER_ENTITY.get(words[0].upper(), 0) * entities if words else 0


def _count(text: bytes) -> int:
    """Number of words in a text."""
    blank = np.frombuffer(text, dtype=np.uint8) <= ord(" ")
    return int(np.count_nonzero(blank[:-1] & ~blank[1:])) + int(len(blank) > 0 and not blank[0])
