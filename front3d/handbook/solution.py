"""What an entry of the catalogue is."""

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np

from front3d.arrays import FloatArray
from front3d.handbook.placing import FrontShape, Placed

Values = Mapping[str, Any]
"""Arguments by name: numbers, and directions as (3,) arrays; those not given are None or inf."""

REQUIRED = "required"


@dataclass(frozen=True, slots=True)
class Argument:
    """An argument of a solution.

    Attributes
    ----------
    unit : "length", "stress", "force", "force x length", "direction", or "" for a pure number
    default : REQUIRED, a number, or None where it may be left out
    """

    meaning: str
    unit: str
    default: float | str | None = REQUIRED


@dataclass(frozen=True, slots=True)
class Solution:
    """A published solution that a front can be compared with.

    Attributes
    ----------
    what : one line
    arguments : by name, as the user writes them
    loads : names of the arguments that load the crack; at least one must be given
    place : (values, front) -> the front on the solution's curve, or FrontMismatch
    K : (values, front on its curve, Poisson's ratio) -> (n, 3), NaN for what it does not give
    source : authors and year
    claim : the accuracy claimed, in words, and by whom
    doubts : values -> what is known against it for these values
    at_free_ends : what is to be said where the front ends at a free surface
    average : whether it gives the average of the whole front, not K at each station
    poisson : Poisson's ratio it holds for; None where it is exact for any, or takes the material's
    """

    name: str
    what: str
    arguments: Mapping[str, Argument]
    loads: tuple[str, ...]
    place: Callable[[Values, FrontShape], Placed]
    K: Callable[[Values, Placed, float], FloatArray]
    source: str
    claim: str
    doubts: Callable[[Values], tuple[str, ...]] = lambda values: ()
    poisson: float | None = None
    at_free_ends: tuple[str, ...] = ()
    average: bool = False


def only(mode: int, K: FloatArray, n: int) -> FloatArray:
    """(n, 3) with one mode given (0 for K_I), a number or (n,), and nothing said of the others."""
    out = np.full((n, 3), np.nan)
    out[:, mode] = K
    return out


def length(meaning: str, default: float | str | None = REQUIRED) -> Argument:
    return Argument(meaning, "length", default)


def stress(meaning: str, default: float | str | None = 0.0) -> Argument:
    return Argument(meaning, "stress", default)


def direction(meaning: str, default: str | None = REQUIRED) -> Argument:
    return Argument(meaning, "direction", default)
