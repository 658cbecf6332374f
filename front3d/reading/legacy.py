"""Whether a VTK legacy file in ASCII holds its last array whole.

VTK reports nothing when such a file ends inside an array of numbers: the rest of the array is
whatever stood in memory.  Only the last array can be cut short, so only its numbers are counted.
"""

import mmap
import re
from pathlib import Path

import numpy as np

from front3d.errors import ReadError

_DECLARATIONS = re.compile(rb"^(?!nan\b|inf\b)[A-Za-z_][^\n]*", re.MULTILINE | re.IGNORECASE)
# Numbers per point or cell after a line that begins with one of these words.
_PER_ENTITY = {"VECTORS": 3, "NORMALS": 3, "TENSORS": 9, "TENSORS6": 6}


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
