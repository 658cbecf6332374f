"""Which format a file has: by its suffix, checked against its first bytes.

A file is looked at before a library touches it, so that a wrong suffix, an empty file or plain
noise is reported in one sentence of ours.
"""

import re
from dataclasses import dataclass
from pathlib import Path

from front3d.errors import ReadError


@dataclass(frozen=True, slots=True)
class Format:
    """A file format: its name, its suffixes, the reader, and what its content looks like."""

    name: str
    suffixes: tuple[str, ...]
    reader: str
    contents: tuple[str, ...]


FORMATS: tuple[Format, ...] = (
    Format("VTU", (".vtu",), "vtu", ("VTU",)),
    Format("VTK legacy", (".vtk",), "vtk", ("VTK legacy",)),
    Format("VTKHDF", (".vtkhdf", ".hdf"), "vtkhdf", ("VTKHDF",)),
    Format("PVTU", (".pvtu",), "pvtu", ("PVTU",)),
    Format("PVD", (".pvd",), "pvd", ("PVD",)),
    Format("Exodus", (".e", ".ex2", ".exo", ".exii", ".exodus"), "exodus", ("Exodus", "netCDF")),
    Format("EnSight Gold", (".case", ".encas"), "ensight", ("EnSight",)),
    Format("MSH", (".msh",), "msh", ("MSH",)),
    Format("XDMF", (".xdmf", ".xmf"), "xdmf", ("XDMF",)),
    Format("MED", (".med", ".rmed"), "med", ("MED",)),
)

_SUFFIXES = {suffix: form for form in FORMATS for suffix in form.suffixes}
_HEAD = 8192


def supported() -> str:
    """The formats and their suffixes, for messages."""
    return ", ".join(f"{form.name} ({' '.join(form.suffixes)})" for form in FORMATS)


def identify(path: Path) -> Format:
    """The format of an existing, readable file; ReadError if its content is something else."""
    head = _head(path)
    form = _SUFFIXES.get(path.suffix.lower())
    content = _content(path, head)
    if form is None:
        known = [f for f in FORMATS if content in f.contents]
        advice = (
            f"its content is {content}: rename it to {path.stem}{known[0].suffixes[0]}"
            if known
            else "export the result in one of these formats"
        )
        raise ReadError(
            f"{path}: found the suffix {path.suffix or '(none)'!r}, expected one of "
            f"{supported()}; {advice}"
        )
    if content not in form.contents:
        known = [f for f in FORMATS if content in f.contents]
        advice = (
            f"rename it to {path.stem}{known[0].suffixes[0]}"
            if known
            else "check that it was transferred whole, or export it again"
        )
        raise ReadError(
            f"{path}: found {content or 'unrecognised data'}, expected {form.name} as its suffix "
            f"says; {advice}"
        )
    return form


def _head(path: Path) -> bytes:
    if path.is_dir():
        raise ReadError(f"{path}: found a directory, expected a result file; name a file in it")
    try:
        with path.open("rb") as file:
            head = file.read(_HEAD)
    except FileNotFoundError:
        raise ReadError(f"{path}: no such file; check the name and the directory") from None
    except PermissionError:
        raise ReadError(f"{path}: no permission to read this file; ask its owner") from None
    except (OSError, ValueError) as error:
        raise ReadError(f"{path}: cannot be opened: {error}") from None
    if not head.strip():
        raise ReadError(f"{path}: the file is empty; was it written to the end?")
    return head


def _content(path: Path, head: bytes) -> str:
    """What the first bytes say: a name in some `Format.contents`, a description, or ""."""
    text = head.decode("latin-1").lstrip("ï»¿ \t\r\n")
    if head.startswith(b"\x89HDF\r\n\x1a\n"):
        return _hdf_content(path)
    if head[:3] == b"CDF":
        return "netCDF"
    if text.startswith("# vtk DataFile"):
        return "VTK legacy"
    if text.startswith(("$MeshFormat", "$Comments")):
        return "MSH"
    if re.search(r"^\s*FORMAT\s*\n\s*type:\s*ensight", text, re.MULTILINE):
        return "EnSight"
    if "<Xdmf" in text:
        return "XDMF"
    found = re.search(r"<VTKFile\b[^>]*\btype\s*=\s*[\"'](\w+)", text)
    if found:
        known = {"UnstructuredGrid": "VTU", "Collection": "PVD"}
        known["PUnstructuredGrid"] = "PVTU"
        return known.get(found[1], f"a VTK file of type {found[1]}")
    return ""


def _hdf_content(path: Path) -> str:
    import h5py

    try:
        with h5py.File(path, "r") as file:
            if "VTKHDF" in file:
                return "VTKHDF"
            if "ENS_MAA" in file:
                return "MED"
            if "api_version" in file.attrs or "num_nodes" in file:
                return "Exodus"
            return f"HDF5 with {', '.join(map(str, list(file)[:5])) or 'nothing in it'}"
    except (OSError, RuntimeError, KeyError):
        return "a damaged HDF5 file (cut short?)"
