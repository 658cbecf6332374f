"""Tables of K along the front, kept as files beside the code; between its stations only.

A table holds cases (a/c, a/t, and r/t at holes) with a row per station of the front.  A case is
used as it stands: between cases K is not interpolated.
"""

import csv
from dataclasses import dataclass
from functools import cache
from importlib.resources import files
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike
from scipy.interpolate import CubicSpline
from scipy.special import ellipe

from front3d.arrays import FloatArray, frozen_floats
from front3d.errors import CaseError

SAME = 1e-4
"""How far, relatively, the ratios given may be from those of a case."""

FREE_SURFACE = 0.125
"""2 phi/pi below which, next to a free surface, no K exists that one could compare."""


@dataclass(frozen=True, slots=True, eq=False)
class TabulatedCase:
    """K along one front: K_I = factor * stress * sqrt(pi a / E(k)^2).

    Attributes
    ----------
    load : "tension" or "bending"
    ratios : a/c, a/t, and r/t where there is a hole
    phi : (n,) parametric angles, radians, rising from 0 to pi/2
    factor : (n,)
    flags : (n,) what the table says about a value; empty where nothing
    """

    load: str
    ratios: tuple[float, ...]
    phi: FloatArray
    factor: FloatArray
    flags: tuple[str, ...]


@cache
def table(name: str) -> tuple[TabulatedCase, ...]:
    """The cases of the table `name`, a file in handbook/tables without its suffix."""
    text = (files("front3d.handbook") / "tables" / f"{name}.csv").read_text(encoding="utf-8")
    rows: dict[tuple[str, tuple[float, ...]], list[tuple[float, float, str]]] = {}
    for row in csv.DictReader(line for line in text.splitlines() if not line.startswith("#")):
        ratios = tuple(float(row[k]) for k in ("a_c", "a_t", "r_t") if row.get(k))
        entry = (float(row["two_phi_over_pi"]), float(row["F"]), row.get("flags", ""))
        rows.setdefault((row["load"], ratios), []).append(entry)
    cases = []
    for (load, ratios), stations in rows.items():
        two_phi, factor, flags = zip(*sorted(stations), strict=True)
        phi = frozen_floats(np.array(two_phi) * np.pi / 2)
        cases.append(TabulatedCase(load, ratios, phi, frozen_floats(factor), flags))
    return tuple(cases)


def find_case(name: str, load: str, ratios: tuple[float, ...]) -> TabulatedCase:
    """The case with these ratios; CaseError that lists the ones there are."""
    cases = [case for case in table(name) if case.load == load]
    if not cases:
        loads = ", ".join(sorted({case.load for case in table(name)}))
        raise CaseError(f"table {name}: holds no {load}, only {loads}")
    for case in cases:
        if np.allclose(case.ratios, ratios, rtol=SAME, atol=0.0):
            return case
    symbols = ("a/c", "a/t", "r/t")
    nearest = min(cases, key=lambda case: _distance(case.ratios, ratios))
    raise CaseError(
        f"table {name}: found {_say(symbols, ratios)}, expected one of its cases, which are not "
        f"interpolated; the nearest is {_say(symbols, nearest.ratios)}"
    )


def tabulated(
    name: str,
    phi: ArrayLike,
    a: float,
    c: float,
    t: float,
    r: float | None = None,
    free_at: tuple[float, ...] = (0.0,),
    **loads: float,
) -> FloatArray:
    """K_I at the parametric angles `phi`, (n,), radians, from 0 to pi/2.

    Parameters
    ----------
    name : table
    a, c, t, r : sizes, as the head of the table's file says
    free_at : angles at which the front meets a free surface
    loads : remote stresses by the table's names, such as tension=100.0

    A cubic spline runs through the stations; next to a free surface (2 phi/pi nearer than 0.125),
    where the values mean little, a straight line.  With every second station left out, K at those
    is missed by at most 1.3 % of the front's largest.
    """
    ratios = (a / c, a / t) if r is None else (a / c, a / t, r / t)
    root = np.sqrt(np.pi * a) / ellipe(1.0 - (min(a, c) / max(a, c)) ** 2)
    phi = np.asarray(phi, dtype=np.float64)
    K = np.zeros_like(phi)
    for load, stress in loads.items():
        if stress:
            case = find_case(name, load, ratios)
            K = K + stress * root * interpolate(phi, case.phi, case.factor, free_at)
    return K


def interpolate(
    phi: FloatArray, at: FloatArray, values: FloatArray, free_at: tuple[float, ...]
) -> FloatArray:
    """`values`, known at the rising angles `at`, at the angles `phi`.

    Where pi/2 is no free surface, the front goes on as its own mirror image: the slope there is 0.
    """
    keep = np.ones(len(at), dtype=bool)
    keep[0] = not np.isclose(free_at, 0.0).any()
    keep[-1] = not np.isclose(free_at, np.pi / 2).any()
    # "clamped": no slope, by symmetry; "not-a-knot" where nothing is known about it.
    start: Literal["clamped", "not-a-knot"] = "clamped" if keep[0] else "not-a-knot"
    stop: Literal["clamped", "not-a-knot"] = "clamped" if keep[-1] else "not-a-knot"
    smooth = CubicSpline(at[keep], values[keep], bc_type=(start, stop))(phi)
    near = (phi < at[keep][0]) | (phi > at[keep][-1])
    return np.where(near, np.interp(phi, at, values), smooth)


def _distance(one: tuple[float, ...], other: tuple[float, ...]) -> float:
    return float(np.abs(np.log(np.divide(one, other))).sum())


def _say(symbols: tuple[str, ...], ratios: tuple[float, ...]) -> str:
    pairs = zip(symbols, ratios, strict=False)
    return ", ".join(f"{symbol} = {value:.4g}" for symbol, value in pairs)
