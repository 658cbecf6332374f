"""`summary.json`: what was evaluated, with what, the extremes, and how far to trust them."""

import hashlib
import json
import platform
import re
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import asdict, is_dataclass
from importlib.metadata import PackageNotFoundError, version
from math import isfinite
from pathlib import Path
from typing import Any

import numpy as np

from front3d import __version__
from front3d.errors import ReadError
from front3d.output.deviation import deviation
from front3d.output.loads import ONLY_DISPLACEMENTS, load_words, material_words
from front3d.output.trust import agreement, rings_of
from front3d.results import CAUTION, MODES, Comparison, Evaluation, FrontResult
from front3d.units import Units

LIBRARIES = ("numpy", "scipy", "numba", "meshio", "pyvista", "vtk", "matplotlib", "h5py")

_INDEX_SUFFIXES = {".pvd", ".pvtu", ".xdmf", ".xmf", ".xml", ".case", ".encas"}


def summary(
    evaluation: Evaluation, inputs: Iterable[Path], files: Sequence[str], case_file: str = ""
) -> dict[str, Any]:
    """The content of `summary.json`: plain data only.

    `inputs` are the files that were read, `files` the names of the files written beside it,
    `case_file` the text of a case file that repeats the evaluation.
    """
    units, options = evaluation.units, plain(evaluation.options)
    return {
        "caution": CAUTION,
        "source": evaluation.source,
        "inputs": [
            {"file": path.name, "sha256": _sha256(path)}
            for given in inputs
            for path in (given, *companions(given))
        ],
        "case_file": case_file,
        "material": {
            "young": evaluation.material.young,
            "poisson": evaluation.material.poisson,
            "stated": dict(material_words(options, evaluation.material, units))["material"],
        },
        "loads": dict(load_words(options, units)) or ONLY_DISPLACEMENTS,
        "units": {"length": units.length, "stress": units.stress, "K": units.K_label},
        "options": options,
        "versions": versions(),
        "fronts": [front_summary(front, units) for front in evaluation.fronts],
        "warnings": list(evaluation.warnings),
        "files": list(files),
    }


def summary_json(
    evaluation: Evaluation, inputs: Iterable[Path], files: Sequence[str], case_file: str = ""
) -> bytes:
    content = plain(summary(evaluation, inputs, files, case_file))
    text = json.dumps(content, indent=2, allow_nan=False, ensure_ascii=False)
    return (text + "\n").encode()


def front_summary(front: FrontResult, units: Units) -> dict[str, Any]:
    """Extremes with their places, rings, agreement and warnings of one front in one step."""
    trust = agreement(front)
    rings = rings_of(front)
    return {
        "step": front.step,
        "time": front.time,
        "front": front.front,
        "stations": len(front),
        "closed": front.closed,
        "ends": list(front.ends),
        "length": front.length,
        "K": {mode: extremes(front, mode, units) for mode in MODES},
        "G_max": float(np.nanmax(front.G)) if np.isfinite(front.G).any() else None,
        "rings": None
        if rings is None
        else {
            "radii": [{"min": float(r.min()), "max": float(r.max())} for r in rings.radii],
            "spread_over_largest_K": trust.rings,
            "J_minus_G_over_largest_G": trust.J_and_G,
        },
        "methods": {name: method.variant for name, method in front.methods.items()},
        "K_from": {name: front.sources.count(name) for name in dict.fromkeys(front.sources)},
        "method_difference_over_largest_K": trust.methods,
        "comparisons": [compared(front, one) for one in front.comparisons],
        "flagged_stations": sum(bool(flag) for flag in front.flags),
        "warnings": list(front.warnings),
        "notes": list(front.notes),
    }


def compared(front: FrontResult, comparison: Comparison) -> dict[str, Any]:
    """A published solution: what it is, and how far K is from it at the stations judged."""
    found = deviation(front, comparison)
    worst = None
    if found.judged:
        i = found.station
        worst = {
            "percent": found.worst,
            "mode": found.mode,
            "station": i,
            "phi_deg": float(comparison.angle[i]),
            "position": front.positions[i].tolist(),
        }
    return {
        "solution": comparison.solution,
        "arguments": dict(comparison.arguments),
        "source": comparison.source,
        "claim": comparison.claim,
        "deviation_of": "K less the solution, in per cent of the solution's largest K of the front",
        "worst": worst,
        "mean_percent": found.mean,
        "mean_with_sign_percent": found.balance,
        "average": comparison.average,
        "average_percent": found.average,
        "stations_judged": found.judged,
        "stations_left_out": np.flatnonzero(~comparison.judged).tolist(),
        "notes": list(comparison.notes),
    }


def extremes(front: FrontResult, mode: str, units: Units) -> dict[str, dict[str, Any]]:
    """Largest and smallest value of one K along the front, each with its place."""
    values = front.K[:, MODES.index(mode)]
    if not np.isfinite(values).any():
        return {}
    found = {"max": int(np.nanargmax(values)), "min": int(np.nanargmin(values))}
    return {name: _station(front, i, float(values[i]), units) for name, i in found.items()}


def _station(front: FrontResult, i: int, value: float, units: Units) -> dict[str, Any]:
    place: dict[str, Any] = {
        "value": value,
        "station": i,
        "s": float(front.s[i]),
        "s_rel": float(front.s_rel[i]),
        "position": front.positions[i].tolist(),
        "flag": front.flags[i],
    }
    if units.K_factor is not None:
        place["MPa_sqrt_m"] = value * units.K_factor
    return place


def companions(path: Path) -> list[Path]:
    """The files that an index file (.pvd, .pvtu, .xdmf, .case) names, as far as they exist.

    The numbers stand in them, so a hash of the index alone would not tell two results apart.
    Whatever is wrong with the index is for its reader to say; here it names what can be found.
    """
    found: dict[Path, Path] = {path.resolve(): path}
    _gather(path, found)
    return [*found.values()][1:]


def _gather(path: Path, found: dict[Path, Path]) -> None:
    """Add what `path` names, and what is named there, each file once, by its resolved path."""
    if path.suffix.lower() not in _INDEX_SUFFIXES:
        return
    try:
        text = path.read_text(encoding="utf-8", errors="replace")
    except OSError:
        return
    names = re.findall(r"""(?:file|Source)\s*=\s*["']([^"']+)["']""", text)
    names += re.findall(r"([^\s<>:\"']+\.(?:h5|hdf5|hdf|bin)):/", text)
    if path.suffix.lower() in (".case", ".encas"):
        names += re.findall(r"^[\w ]+:.*?(\S+)[ \t]*$", text, re.MULTILINE)
    new = []
    for name in dict.fromkeys(names):
        for file in _files_called(name, path.parent):
            if file.resolve() not in found:
                found[file.resolve()] = file
                new.append(file)
    for file in new:
        _gather(file, found)


def _files_called(name: str, folder: Path) -> list[Path]:
    """The files of a name, or of a pattern with *, in a folder; none where it cannot be one."""
    try:
        files = sorted(folder.glob(name)) if "*" in name else [folder / name]
        return [file for file in files if file.is_file()]
    except (OSError, ValueError, NotImplementedError):  # too long, or an absolute pattern
        return []


def plain(value: Any) -> Any:
    """`value` as JSON can hold it: no arrays, no records, no nan."""
    if isinstance(value, Mapping):
        return {str(key): plain(item) for key, item in value.items()}
    if is_dataclass(value) and not isinstance(value, type):
        return plain(asdict(value))
    if isinstance(value, np.ndarray | np.generic):
        return plain(value.tolist())
    if isinstance(value, list | tuple | set | frozenset):
        return [plain(item) for item in value]
    if isinstance(value, float) and not isfinite(value):
        return None
    return value if isinstance(value, str | int | float | bool | None) else str(value)


def _sha256(path: Path) -> str:
    try:
        with path.open("rb") as stream:
            return hashlib.file_digest(stream, "sha256").hexdigest()
    except OSError as error:
        raise ReadError(
            f"{path}: cannot be read again for its hash ({error.strerror}); it has been moved or "
            "removed since the evaluation began"
        ) from error


def versions() -> dict[str, str]:
    found = {"front3d": __version__, "python": platform.python_version()}
    for library in LIBRARIES:
        try:
            found[library] = version(library)
        except PackageNotFoundError:
            continue
    return found
