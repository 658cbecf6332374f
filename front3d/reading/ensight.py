"""Whether the files of an EnSight Gold case are there, and long enough for what they claim.

Layout: the published description of the EnSight Gold format ("C Binary" and ASCII).
"""

import re
from pathlib import Path

import numpy as np

from front3d.errors import ReadError

_WIDTHS = {"point": 1, "bar2": 2, "bar3": 3, "tria3": 3, "tria6": 6, "quad4": 4, "quad8": 8}
_WIDTHS |= {"tetra4": 4, "tetra10": 10, "pyramid5": 5, "pyramid13": 13}
_WIDTHS |= {"penta6": 6, "penta15": 15, "hexa8": 8, "hexa20": 20}
_COUNTED = "|".join(["coordinates", *(f"(?:g_)?{kind}" for kind in _WIDTHS)])

_LONGEST = 200

# The lines that a case file may have.
_LINE = r"|#.*|FORMAT|GEOMETRY|VARIABLE|TIME|FILE|MATERIAL|BLOCK|SCRIPTS|[-+.\deE\s]+"
_LINE += r"|(?:type|model|measured|match|boundary|rigid_body|constant per case(?: file)?"
_LINE += r"|(?:scalar|vector|tensor (?:a?symm?)) per (?:measured )?(?:node|element)"
_LINE += r"|complex (?:scalar|vector) per (?:node|element)|time set|number of steps"
_LINE += r"|filename start number|filename increment|filename numbers|time values|file set"
_LINE += r"|filename index|metadata|maximum time steps):(?:[ \t].*)?"


def check_case(path: Path) -> None:
    """Raise ReadError if the case file is no EnSight Gold, or names files that cannot be read."""
    text = path.read_text(encoding="latin-1")
    if not re.search(r"^type:[ \t]+ensight[ \t]+gold[ \t\r]*$", text, re.MULTILINE):
        raise ReadError(f"{path}: found no line 'type: ensight gold', expected EnSight Gold")
    if re.search(r"^\s*model:.*change_coords_only", text, re.MULTILINE):
        raise ReadError(
            f"{path}: found a mesh that moves with time, expected the undeformed mesh; export it so"
        )
    for line in text.splitlines():
        # VTK copies words into rooms of fixed length, and their names are text.
        name_of_array = " ".join(line.split(":", 1)[-1].split()[:-1]) if " per " in line else ""
        sound = len(line) <= _LONGEST and name_of_array.isascii() and name_of_array.isprintable()
        if not (sound and re.fullmatch(_LINE, line.strip())):
            raise ReadError(f"{path}: found the line {line[:60]!r}, expected EnSight Gold")
    _check_steps(path, text)
    named = re.findall(r"^\s*(model|\w+ per (?:measured )?\w+):(.*)$", text, re.MULTILINE)
    if not any(what == "model" for what, _ in named):
        raise ReadError(f"{path}: names no geometry file (model: ...), expected one")
    named.sort(key=lambda found: found[0] != "model")
    nodes: list[int] | None = None
    for what, words in named:
        name = words.split()[-1:] if what != "model" else _model_name(words)
        if not name or (what != "model" and len(words.split()) < 2):
            raise ReadError(f"{path}: found the line {what}: without a name or a file name")
        pattern = name[0].strip('"')
        relative = pattern and not Path(pattern).is_absolute()
        files = sorted(path.parent.glob(pattern.replace("*", "?"))) if relative else []
        if not files:
            raise ReadError(f"{path}: names {pattern}, which is not there; transfer it too")
        for file in files:
            if what == "model":
                nodes = _check_length(path, file, geometry=True, size=None)
            else:
                width = {"scalar per node": 1, "vector per node": 3}.get(what)
                size = None
                if nodes and width:
                    size = 80 + sum(164 + 4 * width * n for n in nodes)
                _check_length(path, file, geometry=False, size=size)


def _check_steps(path: Path, text: str) -> None:
    """ReadError where a time set claims more steps than there is text for: VTK would count them."""
    for found in re.findall(r"^\s*(?:number of|maximum time) steps:(.*)$", text, re.MULTILINE):
        if not (found.strip().isdecimal() and int(found) <= len(text)):
            raise ReadError(
                f"{path}: found {found.strip()[:30]!r} steps, expected the number of time values "
                "that follow; the file is damaged: transfer or export it again"
            )


def _model_name(words: str) -> list[str]:
    """The file name after optional time set and file set numbers."""
    return [word for word in words.split() if not word.isdigit()][:1]


def _check_length(case: Path, file: Path, geometry: bool, size: int | None) -> list[int] | None:
    """Nodes of each part of a binary geometry; of a variable, `size` is its length in bytes."""
    try:
        data = np.memmap(file, mode="r") if file.stat().st_size else np.empty(0, np.uint8)
    except OSError as error:
        raise ReadError(f"{case}: names {file.name}, which cannot be read: {error}") from None
    head = bytes(data[:80])
    try:
        if not len(data):
            raise ValueError
        if geometry and head.startswith(b"C Binary"):
            return _walk(data)
        if geometry:
            text = bytes(data)
            if b"\0" in text or not text.isascii():
                raise ValueError
            _check_claims(text)
        elif size is not None and size != len(data) and bytes(data[:16]) != b"BEGIN TIME STEP\0":
            raise ValueError
    except (ValueError, IndexError, UnicodeDecodeError):
        raise ReadError(
            f"{case}: {file.name} is damaged or cut short, expected as many numbers as it claims; "
            "transfer or export it again"
        ) from None
    return None


def _check_claims(text: bytes) -> None:
    """Counts in an ASCII geometry cannot be larger than the file is long."""
    for found in re.findall(rf"^\s*(?:{_COUNTED})\s*\n\s*(\S+)".encode(), text, re.MULTILINE):
        if not 0 <= int(found) <= len(text):
            raise ValueError


def _walk(data: np.ndarray) -> list[int] | None:
    """Walk over a binary geometry file, whose first part says how long everything is."""
    place = 0

    def line() -> str:
        nonlocal place
        place += 80
        if place > len(data):
            raise ValueError
        return bytes(data[place - 80 : place]).split(b"\0")[0].decode("ascii").strip()

    def count() -> int:
        nonlocal place
        place += 4
        n = int(np.frombuffer(bytes(data[place - 4 : place]), order)[0])
        if not 0 <= n <= len(data):
            raise ValueError
        return n

    def skip(numbers: int) -> None:
        nonlocal place
        place += 4 * numbers
        if place > len(data):
            raise ValueError

    order, nodes = "<i4", []
    line()
    line(), line()
    ids = []
    for what in ("node id ", "element id "):
        said = line()
        if said.removeprefix(what) not in ("off", "given", "assign", "ignore"):
            raise ValueError
        ids.append(said.endswith(("given", "ignore")))
    word = line()
    if word == "extents":
        skip(6)
        word = line()
    # Part numbers are small in the order of bytes that the file has.
    if not 0 <= int(np.frombuffer(bytes(data[place : place + 4]), "<i4")[0]) < 65536:
        order = ">i4"
    while word == "part":
        count()
        line()
        word = line()
        if word != "coordinates":
            return None  # structured: left to the reader
        n = count()
        nodes.append(n)
        skip(n * (3 + ids[0]))
        word = line() if place < len(data) else ""
        while word.removeprefix("g_") in _WIDTHS:
            n = count()
            skip(n * (_WIDTHS[word.removeprefix("g_")] + ids[1]))
            word = line() if place < len(data) else ""
    if word and word != "END TIME STEP":
        raise ValueError
    return nodes
