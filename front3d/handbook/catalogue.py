"""The published solutions by name, and what a user writes to ask for one."""

import re
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from difflib import get_close_matches
from math import isfinite
from types import MappingProxyType
from typing import Any

import numpy as np

from front3d.arrays import FloatArray
from front3d.errors import CaseError
from front3d.handbook import entries_plates, entries_solids, entries_through
from front3d.handbook.solution import REQUIRED, Argument, Solution, Values

SOLUTIONS: Mapping[str, Solution] = MappingProxyType(
    {
        entry.name: entry
        for entries in (entries_plates, entries_solids, entries_through)
        for entry in entries.ENTRIES
    }
)

STEP = "step"
"""The argument that every solution takes: the step that its loads belong to."""


@dataclass(frozen=True, slots=True, eq=False)
class Request:
    """A solution with its arguments, as asked for by `text`; `step` None for every step."""

    text: str
    solution: Solution
    values: Values
    step: str | None

    @property
    def numbers(self) -> dict[str, float | tuple[float, ...]]:
        """The arguments that say something: numbers, and directions as three of them."""
        said: dict[str, float | tuple[float, ...]] = {}
        for name, value in self.values.items():
            if isinstance(value, np.ndarray):
                said[name] = tuple(value.tolist())
            elif value is not None and isfinite(value):
                said[name] = value
        return said


def parse(text: str) -> Request:
    """Read a text such as "newman-raju-surface:a=6,c=10,t=15,tension=100,step=pull".

    The name of a step may stand in double quotes.  CaseError says what is wrong and what comes
    nearest.
    """
    name, _, rest = text.partition(":")
    solution = SOLUTIONS.get(name.strip())
    if solution is None:
        raise CaseError(
            f"comparison {text!r}: found no solution {name.strip()!r}"
            f"{_nearest(name.strip(), SOLUTIONS)} (--compare help lists them all)"
        )
    where = f"comparison with {solution.name}"
    given: dict[str, str] = {}
    for part in re.findall(r'(?:[^,"]|"[^"]*")+', rest):
        key, equals, value = (piece.strip() for piece in part.partition("="))
        if not equals or not value:
            raise CaseError(f"{where}: found {part.strip()!r}, expected name=value")
        if key != STEP and key not in solution.arguments:
            raise CaseError(
                f"{where}: found no argument {key!r}{_nearest(key, solution.arguments)}; it takes "
                f"{', '.join(solution.arguments)} and {STEP}"
            )
        if key in given:
            raise CaseError(f"{where}: found {key} twice, expected it once")
        given[key] = value
    step = given.pop(STEP, None)
    values = {
        key: _value(f"{where}, {key}", argument, given.get(key))
        for key, argument in solution.arguments.items()
    }
    missing = [k for k, v in values.items() if isinstance(v, str)]
    if missing:
        meanings = ", ".join(f"{k} ({solution.arguments[k].meaning})" for k in missing)
        raise CaseError(f"{where}: found no {meanings}")
    if not any(values[load] for load in solution.loads):
        raise CaseError(
            f"{where}: found no load, expected {' or '.join(solution.loads)} other than zero"
        )
    return Request(text, solution, values, None if step is None else step.strip('"'))


def described() -> list[str]:
    """Every solution with its arguments, source and claim, for a reader; one line each."""
    lines = []
    for solution in SOLUTIONS.values():
        lines += ["", f"{solution.name}: {solution.what}"]
        lines += [f"  source: {solution.source}; claimed: {solution.claim}"]
        for name, about in solution.arguments.items():
            unit = f" [{about.unit}]" if about.unit else ""
            lines.append(f"  {name:<8} {about.meaning}{unit}{_optional(solution, name, about)}")
    return lines[1:]


def _optional(solution: Solution, name: str, about: Argument) -> str:
    if name in solution.loads and len(solution.loads) > 1:
        return " (one load at least)"
    if about.default == REQUIRED or name in solution.loads:
        return ""
    if isinstance(about.default, float) and isfinite(about.default):
        return f" (default {about.default:g})"
    return " (optional)" if about.default is None else " (default: very large)"


def _value(where: str, argument: Argument, text: str | None) -> Any:
    """What stands for an argument: a number, a direction, or the text "required"."""
    if text is None:
        return argument.default
    if argument.unit == "direction":
        return _direction(where, text)
    try:
        number = float(text)
        if not isfinite(number):
            raise ValueError
    except ValueError:
        expected = f"a number ({argument.meaning})"
        raise CaseError(f"{where}: found {text!r}, expected {expected}") from None
    return number


def _direction(where: str, text: str) -> FloatArray:
    """A unit vector from "x", "-y" or "0/0.5/0.866"."""
    sign, axis = (-1.0, text[1:]) if text.startswith("-") else (1.0, text)
    if axis in ("x", "y", "z"):
        return sign * np.eye(3)["xyz".index(axis)]
    try:
        vector = np.array([float(part) for part in text.split("/")])
        length = float(np.linalg.norm(vector))
        if vector.shape != (3,) or not (isfinite(length) and length > 0):
            raise ValueError
    except ValueError:
        raise CaseError(
            f"{where}: found {text!r}, expected a direction: an axis such as z or -x, or three "
            "numbers such as 0/0.5/0.866"
        ) from None
    return vector / length


def _nearest(word: str, known: Iterable[str]) -> str:
    near = get_close_matches(word, list(known), n=1, cutoff=0.7)
    return f", did you mean {near[0]!r}?" if near else ""
