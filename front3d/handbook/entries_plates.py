"""Catalogue: surface, corner and embedded cracks in plates, and corner cracks at holes."""

from collections.abc import Callable
from functools import partial

import numpy as np
from scipy.special import ellipe

from front3d.arrays import FloatArray
from front3d.handbook import corners, plates
from front3d.handbook.doubts import Equation, doubts
from front3d.handbook.placing import FrontShape, Placed, place_ellipse
from front3d.handbook.solution import Argument, Solution, Values, direction, length, only, stress
from front3d.handbook.tabulated import find_case, tabulated

_NAMED = "named where a and c are alike, such as depth=y"
_TENSION = stress("remote tension (gross stress)")
_BENDING = stress("remote bending stress at the cracked surface")
_DEPTH = direction(f"direction of the semi-axis a, {_NAMED}", None)
_SURFACE = {
    "a": length("depth"),
    "c": length("half-length on the surface"),
    "t": length("thickness of the plate"),
}
_CORNER = {
    "a": length("semi-axis along the thickness"),
    "c": length("semi-axis along the width"),
    "t": length("thickness of the plate"),
}
_EMBEDDED = {
    "a": length("semi-axis along the thickness"),
    "c": length("semi-axis along the width"),
    "t": length("HALF the thickness of the plate"),
}
_HOLE = {
    "a": length("semi-axis along the thickness"),
    "c": length("semi-axis away from the hole"),
    "t": length("thickness of the plate"),
    "r": length("radius of the hole"),
}
_LOADS = {
    "surface": ("tension", "bending"),
    "corner": ("tension", "bending"),
    "embedded": ("tension",),
    "hole": ("tension",),
}
_FREE = {
    "surface": (0.0,),
    "corner": (0.0, np.pi / 2),
    "embedded": (),
    "hole": (0.0, np.pi / 2),
}
_KIND = {"surface": "surface", "corner": "corner", "embedded": "embedded", "hole": "corner"}


def _place(family: str, values: Values, shape: FrontShape) -> Placed:
    a, c = values["a"], values["c"]
    told_apart = family != "surface"
    return place_ellipse(shape, a, c, _KIND[family], values.get("depth"), directed=told_apart)


# --- the fitted equations ---------------------------------------------------------------------

Formula = Callable[..., FloatArray]
_FORMULA: dict[str, Formula] = {
    "surface": plates.surface_crack,
    "corner": corners.corner_crack,
    "embedded": plates.embedded_crack,
    "hole": corners.corner_crack_at_hole,
}


def _equation(family: str, values: Values, placed: Placed, poisson: float) -> FloatArray:
    given = {k: v for k, v in values.items() if k != "depth"}
    return only(0, _FORMULA[family](placed.phi, **given), len(placed.phi))


def _at_case(family: str) -> Equation:
    """The equation at the cases of the table, for the plates that the table was computed for."""

    def equation(phi: FloatArray, ratios: tuple[float, ...], load: str) -> FloatArray:
        a, c, t = 1.0, 1.0 / ratios[0], 1.0 / ratios[1]
        sizes = {"a": a, "c": c, "t": t}
        sizes |= {"r": ratios[2] * t} if family == "hole" else {"b": 10.0 * max(a, c)}
        e = ellipe(1.0 - (min(a, c) / max(a, c)) ** 2)
        return _FORMULA[family](phi, **sizes, **{load: 1.0}) * e / np.sqrt(np.pi)

    return equation


_GOOD_WORDS = {
    "surface": "it holds within 4 % in tension for a/c >= 0.4 and a/t <= 0.6",
    "corner": "it holds within 4.1 % in tension for a/c >= 0.4 and a/t <= 0.5",
    "embedded": "it holds within 4 % for a/c >= 0.4 and a/t <= 0.6",
    "hole": "at holes by up to 5 % for a/c >= 1 and 8.4 % for a/c = 0.5",
}
_DEEPEST_GOOD = {"surface": 0.6, "corner": 0.5, "embedded": 0.6}


def _doubts(family: str, values: Values) -> tuple[str, ...]:
    ratios: tuple[float, ...] = (values["a"] / values["c"], values["a"] / values["t"])
    if family == "hole":
        ratios = (*ratios, values["r"] / values["t"])
    good: dict[str, Callable[[float, float], bool]] = {}
    if family in _DEEPEST_GOOD:
        limit = _DEEPEST_GOOD[family]
        good["tension"] = lambda a_c, a_t: a_c >= 0.4 - 1e-9 and a_t <= limit + 1e-9
    loads = {load: values[load] for load in _LOADS[family]}
    words = _GOOD_WORDS[family]
    return doubts(f"fe3d_{family}", _at_case(family), ratios, loads, _FREE[family], good, words)


def _newman_raju(
    family: str, what: str, arguments: dict[str, Argument], source: str, claim: str
) -> Solution:
    return Solution(
        f"newman-raju-{family}",
        what,
        arguments,
        _LOADS[family],
        partial(_place, family),
        partial(_equation, family),
        source,
        claim,
        partial(_doubts, family),
        poisson=0.3,
    )


# --- tables -----------------------------------------------------------------------------------


def _from_table(family: str, name: str, values: Values, placed: Placed, _: float) -> FloatArray:
    phi = np.arctan2(np.abs(np.sin(placed.phi)), np.abs(np.cos(placed.phi)))
    sizes = {k: values[k] for k in ("a", "c", "t", "r") if k in values}
    loads = {load: values[load] for load in _LOADS[family] if load in values}
    K = tabulated(name, phi, free_at=_FREE[family], **sizes, **loads)
    return only(0, K, len(phi))


def _computed(family: str, arguments: dict[str, Argument], plate: str) -> Solution:
    loads = _LOADS[family]
    apart = {} if family == "surface" else {"depth": _DEPTH}
    strength = {"tension": _TENSION, "bending": _BENDING}
    return Solution(
        f"computed-{family}",
        f"table computed for front3d, NOT published: the crack of newman-raju-{family}",
        {**arguments, **{load: strength[load] for load in loads}, **apart},
        loads,
        partial(_place, family),
        partial(_from_table, family, f"fe3d_{family}"),
        "computed for front3d, not published: high-order finite elements",
        "0.5 % of the largest K away from free surfaces, by two integration domains and the exact "
        "ellipse",
        lambda values: (f"the table is for {plate}",),
        poisson=0.3,
    )


def _recalled(values: Values) -> tuple[str, ...]:
    ratios = (values["a"] / values["c"], values["a"] / values["t"])
    case = find_case("raju_newman_1979", "tension", ratios)
    flagged = [
        f"2 phi/pi = {2 * phi / np.pi:g} ({flag.replace('>', ' differs by more than ')})"
        for phi, flag in zip(case.phi, case.flags, strict=True)
        if flag and flag != "free-surface point"
    ]
    notes: tuple[str, ...] = (
        "every value of this table is from memory, not checked against the paper",
    )
    if flagged:
        meaning = "equation: Newman and Raju 1981; fe: finite elements computed for front3d"
        notes += (f"doubtful entries at {', '.join(flagged)}; {meaning}",)
    return notes


_B_HALF = length("half-width of the plate", np.inf)
_PLATE = "a plate of half-width 10 times the larger of a and c"

ENTRIES: tuple[Solution, ...] = (
    _newman_raju(
        "surface",
        "semi-elliptical surface crack in a plate, fitted equation",
        {**_SURFACE, "b": _B_HALF, "tension": _TENSION, "bending": _BENDING},
        "Newman and Raju (1981)",
        "within 5 % of the finite elements it was fitted to",
    ),
    _newman_raju(
        "corner",
        "quarter-elliptical corner crack in a plate, fitted equation",
        {
            **_CORNER,
            "b": length("FULL width of the plate", np.inf),
            "tension": _TENSION,
            "bending": _BENDING,
            "depth": _DEPTH,
        },
        "Newman and Raju (1984, 1986)",
        "within 5 % of the finite elements it was fitted to (the equation is from memory)",
    ),
    _newman_raju(
        "embedded",
        "elliptical crack at mid-thickness of a plate, fitted equation",
        {**_EMBEDDED, "b": _B_HALF, "tension": _TENSION, "depth": _DEPTH},
        "Newman and Raju (1981, 1984)",
        "within 3 % of the finite elements it was fitted to, for a/t < 0.8 (the equation is from "
        "memory)",
    ),
    _newman_raju(
        "hole",
        "quarter-elliptical corner cracks at a circular hole in a plate, fitted equation",
        {
            **_HOLE,
            "b": _B_HALF,
            "tension": _TENSION,
            "cracks": Argument("2 on opposite sides of the hole, or 1", "", 2.0),
            "depth": _DEPTH,
        },
        "Newman and Raju (1981, 1984)",
        "within 5 % of the finite elements it was fitted to, for two cracks (the equation is from "
        "memory)",
    ),
    Solution(
        "raju-newman-table",
        "semi-elliptical surface crack in a plate under tension, finite-element table of 1979",
        {**_SURFACE, "tension": _TENSION},
        ("tension",),
        partial(_place, "surface"),
        partial(_from_table, "surface", "raju_newman_1979"),
        "Raju and Newman (1979)",
        "not recalled (the table is from memory)",
        _recalled,
        poisson=0.3,
    ),
    _computed("surface", _SURFACE, _PLATE),
    _computed("corner", _CORNER, "a plate of full width 10 times the larger of a and c"),
    _computed("embedded", _EMBEDDED, _PLATE),
    _computed("hole", _HOLE, "two equal cracks in a very wide plate"),
)
