"""A walk over a binary VTK legacy file: whether every section is as long as it claims.

VTK believes the counts, the kinds of numbers and the list of cells of a binary file, and walks
beyond its memory where they are wrong.  So the whole file is walked here first, section by section
to its very end; what does not add up is not handed on.  Layout: "VTK File Formats" (Kitware),
legacy format, versions 1 to 5.1.
"""

import mmap

import numpy as np
from numpy.typing import NDArray

_BYTES = {"char": 1, "signed_char": 1, "unsigned_char": 1, "short": 2, "unsigned_short": 2}
_BYTES |= {"int": 4, "unsigned_int": 4, "float": 4, "double": 8, "long": 8, "unsigned_long": 8}
_BYTES |= {"vtktypeint64": 8, "vtktypeuint64": 8, "vtktypeint32": 4, "vtkidtype": 4}
_BYTES |= {"long_long": 8, "unsigned_long_long": 8}

# Components of an attribute, by its word.
_WIDTHS = {"VECTORS": 3, "NORMALS": 3, "TENSORS": 9, "TENSORS6": 6, "GLOBAL_IDS": 1}
_WIDTHS |= {"PEDIGREE_IDS": 1, "EDGE_FLAGS": 1}

_POLYHEDRON = 42
_LONGEST = 1024
"""Bytes of a line: none of the format's own is longer, but for the names of arrays."""


class UnreadableError(Exception):
    """A section that this walk cannot judge: text arrays, whose lengths are written in them."""


class _Walker:
    """A place in the file that moves forward."""

    def __init__(self, text: mmap.mmap, start: int) -> None:
        self.text, self.place = text, start

    def words(self) -> list[str]:
        """The words of the next line that has any; none at the end of the file."""
        while self.place < len(self.text):
            end = self.text.find(b"\n", self.place, self.place + _LONGEST)
            if end < 0:
                end = min(self.place + _LONGEST, len(self.text))
                if end < len(self.text):
                    raise ValueError
            line = self.text[self.place : end]
            self.place = end + 1
            if line.strip():
                return line.decode("latin-1").split()
        return []

    def skip(self, count: int, kind: str) -> int:
        """Pass over `count` numbers; returns where they begin."""
        start = self.place
        if kind == "bit":
            size = (count + 7) // 8
        elif kind in ("string", "utf8_string", "variant"):
            raise UnreadableError
        else:
            size = count * _BYTES[kind]
        if count < 0 or start + size > len(self.text):
            raise ValueError
        self.place += size
        return start

    def integers(self, count: int, kind: str) -> NDArray[np.int64]:
        start = self.skip(count, kind)
        size = _BYTES[kind]
        numbers = np.frombuffer(self.text[start : start + count * size], f">i{size}")
        return numbers.astype(np.int64)


def walk_binary(text: mmap.mmap, start: int) -> None:
    """Walk from the line DATASET to the end.

    ValueError, KeyError, IndexError or AttributeError where the file is not what it claims;
    UnreadableError where nothing can be said.
    """
    walker = _Walker(text, start)
    if [word.upper() for word in walker.words()] != ["DATASET", "UNSTRUCTURED_GRID"]:
        return  # of another sort, which is refused by its name once it is read
    points = cells = entities = -1
    while words := walker.words():
        word = words[0].upper()
        if word == "POINTS":
            points = int(words[1])
            walker.skip(3 * points, words[2].lower())
        elif word == "CELLS":
            cells = _walk_cells(walker, int(words[1]), int(words[2]), points)
        elif word == "CELL_TYPES":
            types = walker.integers(int(words[1]), "int")
            if len(types) != cells or (types < 0).any() or (types > 100).any():
                raise ValueError
            if (types == _POLYHEDRON).any():
                raise UnreadableError
        elif word in ("POINT_DATA", "CELL_DATA"):
            entities = int(words[1])
            if entities != (points if word == "POINT_DATA" else cells):
                raise ValueError
        elif word == "METADATA":
            _skip_metadata(walker)
        else:
            _skip_arrays(walker, word, words, entities)
    if points < 0 or cells < 0:
        raise ValueError


def _walk_cells(walker: _Walker, first: int, second: int, points: int) -> int:
    """The list of cells, of either version: offsets and nodes, or the length of each and nodes.
    Returns their number.
    """
    here = walker.place
    words = walker.words()
    if words[0].upper() == "OFFSETS":
        offsets = walker.integers(first, words[1].lower())
        words = walker.words()
        if words[0].upper() != "CONNECTIVITY":
            raise ValueError
        nodes = walker.integers(second, words[1].lower())
        if not len(offsets) or offsets[0] != 0 or offsets[-1] != second:
            raise ValueError
        if (np.diff(offsets) < 0).any() or (nodes < 0).any() or (nodes >= points).any():
            raise ValueError
        return first - 1
    walker.place = here
    walker.skip(second, "int")  # their lengths are walked over elsewhere
    return first


def _skip_metadata(walker: _Walker) -> None:
    """A block of text that ends with an empty line."""
    end = walker.text.find(b"\n\n", walker.place)
    if end < 0:
        raise ValueError
    walker.place = end + 2


def _skip_arrays(walker: _Walker, word: str, words: list[str], entities: int) -> None:
    if word == "FIELD":
        for _ in range(int(words[2])):
            head = walker.words()
            if head[0].upper() == "METADATA":
                _skip_metadata(walker)
                head = walker.words()
            walker.skip(int(head[1]) * int(head[2]), head[3].lower())
        return
    if entities < 0:
        raise ValueError
    if word == "SCALARS":
        width = int(words[3]) if len(words) > 3 else 1
        if walker.words()[0].upper() != "LOOKUP_TABLE" or not 1 <= width <= 4:
            raise ValueError
        walker.skip(width * entities, words[2].lower())
    elif word in _WIDTHS:
        walker.skip(_WIDTHS[word] * entities, words[2].lower())
    elif word == "TEXTURE_COORDINATES":
        walker.skip(int(words[2]) * entities, words[3].lower())
    elif word == "LOOKUP_TABLE":
        walker.skip(4 * int(words[2]), "unsigned_char")
    elif word == "COLOR_SCALARS":
        walker.skip(int(words[2]) * entities, "unsigned_char")
    else:
        raise ValueError
