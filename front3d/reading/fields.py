"""Finding the displacement among the point arrays of a file.

Three shapes of it are known: one array of three components, three scalars (u_x, u_y, u_z), and
several such arrays whose names differ by a suffix, one per load case.
"""

import re
from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

import numpy as np
from numpy.typing import NDArray

from front3d.errors import ReadError
from front3d.solid import Step

Arrays = Mapping[str, NDArray[Any]]

# In order of preference, as `plain_name` writes them.
_BASES = (
    "displacement", "displacements", "displacement_vector", "nodal_displacement",
    "nodal_displacements", "node_displacement", "total_displacement", "displacement_field",
    "displ", "disp", "depl", "deplacement", "deplacements", "u",
)  # fmt: skip
# Alone they mean something else, but their components are displacements.
_SCALAR_BASES = (*_BASES, "d")
_NOT_A_CASE = frozenset(
    {
        "magnitude", "mag", "norm", "error", "velocity", "rate", "acceleration", "increment",
        "gradient", "grad", "previous",
    }
)  # fmt: skip
_COMPONENTS = (("x", "y", "z"), ("1", "2", "3"), ("0", "1", "2"))
_HOW = (
    "choose it by name (--displacement NAME; from Python displacement=NAME), three scalars by "
    "NAME_X,NAME_Y,NAME_Z"
)


def plain_name(name: str) -> str:
    """A name in small letters and digits, joined by underscores."""
    return re.sub(r"[^a-z0-9]+", "_", name.lower()).strip("_")


def _width(array: NDArray[Any]) -> int:
    return 1 if array.ndim == 1 else int(np.prod(array.shape[1:]))


@dataclass(frozen=True, slots=True, eq=False)
class Kept:
    """Further arrays of one frame that were asked for: by point, and by cell number of the file."""

    points: dict[str, NDArray[Any]] = field(default_factory=dict)
    cells: dict[str, NDArray[Any]] = field(default_factory=dict)

    def with_missing(self, others: "Kept") -> "Kept":
        """With what `others` has besides."""
        return Kept(others.points | self.points, others.cells | self.cells)


@dataclass(frozen=True, slots=True, eq=False)
class _Found:
    case: str
    values: NDArray[Any]
    time: float | None
    kept: "Kept"


@dataclass(slots=True, eq=False)
class DisplacementFinder:
    """Collects the displacement of each frame (time) that a reader offers.

    `keep` names further arrays, by point or by cell, that are kept beside it.  A frame that holds
    no displacement may hold them: then they serve every frame that lacks them.
    """

    wanted: str | tuple[str, ...] | None = None
    keep: tuple[str, ...] = ()
    notes: list[str] = field(default_factory=list)
    _found: list[_Found] = field(default_factory=list)
    _seen: dict[str, int] = field(default_factory=dict)
    _frames: int = 0
    _without: int = 0
    _loose: Kept = field(default_factory=Kept)

    def offer(self, arrays: Arrays, time: float | None = None, cells: Arrays | None = None) -> None:
        """Take the displacements out of the point arrays of one frame, (n,) or (n, components),
        and the arrays to keep out of them and of the cell arrays.
        """
        arrays = {name: a for name, a in arrays.items() if a.dtype.kind in "fiu" and a.ndim >= 1}
        self._seen |= {name: _width(array) for name, array in arrays.items()}
        taken = self._chosen(arrays)
        self._frames += 1
        self._without += not taken
        kept = Kept(_numbers(arrays, self.keep), _numbers(cells or {}, self.keep))
        if not taken:
            self._loose = self._loose.with_missing(kept)
        self._found += [_Found(case, _vectors(case, v), time, kept) for case, v in taken.items()]

    def kept(self, count: int) -> list[Kept]:
        """The arrays kept for each of `count` steps; where these come from elsewhere, those of
        the first frame serve them all.
        """
        by_step = [found.kept.with_missing(self._loose) for found in self._found]
        if len(by_step) != count:
            return [by_step[0] if by_step else self._loose] * count
        return by_step

    def steps(self, needed: bool) -> list[Step]:
        """The steps found, with distinct names; ReadError if one is needed and there is none."""
        if not self._found:
            if needed or self.wanted:
                raise ReadError(self._missing())
            return []
        if self._without:
            self.notes.append(f"{self._without} of {self._frames} times hold no displacement")
        several_times = len({f.time for f in self._found}) > 1
        several_cases = len({f.case for f in self._found}) > 1
        names: list[str] = []
        for found in self._found:
            time = f"{found.time:.12g}" if several_times and found.time is not None else ""
            case = found.case if several_cases or not time else ""
            name = " ".join(part for part in (case, time) if part) or "1"
            if name in names:
                name = next(f"{name} #{k}" for k in range(2, 10**9) if f"{name} #{k}" not in names)
            names.append(name)
        return [
            Step(name, found.values, found.time or 0.0)
            for name, found in zip(names, self._found, strict=True)
        ]

    def _missing(self, names: tuple[str, ...] = ()) -> str:
        listing = ", ".join(
            f"{name} ({width} component{'s' * (width > 1)})" for name, width in self._seen.items()
        )
        if self.wanted and not names:
            names = (self.wanted,) if isinstance(self.wanted, str) else self.wanted
        wanted = f"named {' or '.join(map(repr, names))}" if names else "of a usual name"
        return (
            f"no displacement {wanted}; found the point arrays: {listing or 'none'}; expected one "
            f"of three components on the points: {_HOW}"
            if self._seen
            else f"no displacement {wanted}: the file holds no point arrays; expected one of three "
            "components; write the displacement on the nodes into the file"
        )

    def _chosen(self, arrays: Arrays) -> dict[str, NDArray[Any]]:
        """Displacements of one frame by load case."""
        if not self.wanted:
            return self._usual(arrays)
        if isinstance(self.wanted, str):
            return self._named(arrays, self.wanted)
        found: dict[str, NDArray[Any]] = {}
        for name in self.wanted:
            here = self._named(arrays, name)
            if not here:
                raise ReadError(self._missing((name,)))
            found |= {f"{name} {case}".strip(): values for case, values in here.items()}
        return found

    def _named(self, arrays: Arrays, wanted: str) -> dict[str, NDArray[Any]]:
        parts = [part.strip() for part in wanted.split(",")]
        if len(parts) == 3 and wanted not in arrays:
            scalars = [_pick(arrays, part) for part in parts]
            if any(s is not None and _width(s) != 1 for s in scalars):
                raise ReadError(f"displacement {wanted!r}: expected the names of three scalars")
            found = [s for s in scalars if s is not None]
            return {"": _stack(found)} if len(found) == 3 else {}
        array = _pick(arrays, wanted)
        if array is not None:
            return {"": array}
        return _scalars(arrays, (plain_name(wanted),)) or _cases(arrays, (plain_name(wanted),))

    def _usual(self, arrays: Arrays) -> dict[str, NDArray[Any]]:
        by_name = {
            plain_name(name): name for name in reversed(list(arrays)) if _width(arrays[name]) > 1
        }
        exact = [by_name[base] for base in _BASES if base in by_name]
        others = _cases(arrays, _BASES)
        if exact:
            spare = exact[1:] + [case for case in others if case]
            note = f"displacement taken from {exact[0]}; {', '.join(spare)} not used ({_HOW})"
            if spare and note not in self.notes:
                self.notes.append(note)
            return {"": arrays[exact[0]]}
        return others or _scalars(arrays, _SCALAR_BASES)


def _numbers(arrays: Arrays, names: tuple[str, ...]) -> dict[str, NDArray[Any]]:
    """(n, components) float64 of those that are there and hold numbers."""
    found = {name: _pick(arrays, name) for name in names}
    return {
        name: np.asarray(array, dtype=np.float64).reshape(len(array), -1)
        for name, array in found.items()
        if array is not None and array.dtype.kind in "fiu" and array.ndim >= 1
    }


def _pick(arrays: Arrays, name: str) -> NDArray[Any] | None:
    """The array of exactly this name, or of it in other letters."""
    if name in arrays:
        return arrays[name]
    alike = [array for other, array in arrays.items() if other.lower() == name.lower()]
    return alike[0] if len(alike) == 1 else None


def _cases(arrays: Arrays, bases: tuple[str, ...]) -> dict[str, NDArray[Any]]:
    """Arrays of one base name and distinct suffixes (or prefixes), by what distinguishes them."""
    for base in bases:
        found = {}
        patterns = [rf"{base}_(.+)", rf"{base}(\d+)"]
        if len(base) > 3:
            patterns.append(rf"(.+)_{base}")
        for name, array in arrays.items():
            plain = plain_name(name)
            match = next((m for p in patterns if (m := re.fullmatch(p, plain))), None)
            if match is None or _width(array) == 1 or plain in _BASES:
                continue
            if _NOT_A_CASE.isdisjoint(match[1].split("_")):
                # The case keeps its own capitals and marks where that is easy.
                start, end = match.span(1)
                found[name[start:end] if len(plain) == len(name) else match[1]] = array
        if found:
            return found
    return {}


def _scalars(arrays: Arrays, bases: tuple[str, ...]) -> dict[str, NDArray[Any]]:
    """Three scalars of one base name, such as u_x, u_y, u_z or UX, UY, UZ."""
    scalars = {plain_name(name): array for name, array in arrays.items() if _width(array) == 1}
    for base in bases:
        for letters in _COMPONENTS:
            for joint in ("_", "", f"_{base}", f"_{base}_"):
                names = [f"{base}{joint}{letter}" for letter in letters]
                found = [scalars[name] for name in names if name in scalars]
                if len(found) == 3:
                    return {"": _stack(found)}
                if len(found) == 2 and letters[0] == "x" and names[2] not in scalars:
                    raise ReadError(
                        f"found the displacement components {names[0]} and {names[1]} only, "
                        f"expected {names[2]} too: front3d needs a three-dimensional result"
                    )
    return {}


def _stack(scalars: list[NDArray[Any]]) -> NDArray[Any]:
    return np.stack([s.reshape(-1).astype(np.float64) for s in scalars], axis=1)


def _vectors(case: str, values: NDArray[Any]) -> NDArray[Any]:
    """(n, 3) float64 of a displacement array, or the reason why it is none."""
    if values.ndim == 2 and values.shape[1] == 3:
        return np.array(values, dtype=np.float64)
    what = f"displacement {case}".strip()
    if _width(values) == 2:
        raise ReadError(
            f"{what}: found two components per point, expected three: a two-dimensional model has "
            "no crack front; extrude it or model a solid"
        )
    raise ReadError(f"{what}: found an array of shape {values.shape}, expected (points, 3); {_HOW}")
