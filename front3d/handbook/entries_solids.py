"""Catalogue: penny and elliptical cracks in an infinite solid, and cracks around a ligament.

The remote load acts on the crack by the traction that it would put on the uncracked plane:
t = stress (load . e2) load for a tension along `load`, t = stress along for a shear.
"""

from collections.abc import Callable
from functools import partial

import numpy as np

from front3d.arrays import FloatArray
from front3d.handbook import bars, infinite
from front3d.handbook.placing import FrontShape, Placed, place_ellipse
from front3d.handbook.solution import Argument, Solution, Values, direction, length, only, stress

_RADIUS = {"a": length("radius")}
_AXES = {"a": length("one semi-axis"), "c": length("the other semi-axis")}
_TENSION = stress("remote tension across the crack, or pressure on its faces")
_INCLINED = {
    "tension": stress("remote uniaxial tension"),
    "load": direction("direction of that tension, such as 0/0.5/0.866"),
}
_SHEAR = {
    "shear": stress("remote shear stress"),
    "along": direction("direction in which it pulls the upper side (e2), in the crack plane"),
}


def _semi_axes(values: Values) -> tuple[float, float]:
    return values["a"], values.get("c", values["a"])


def _place(values: Values, shape: FrontShape) -> Placed:
    return place_ellipse(shape, *_semi_axes(values), "embedded")


def _tension(values: Values, placed: Placed, poisson: float) -> FloatArray:
    K = infinite.ellipse_tension(values["tension"], *_semi_axes(values), placed.phi)
    return only(0, K, len(placed.phi))


def _inclined(values: Values, placed: Placed, poisson: float) -> FloatArray:
    normal = placed.frames[:, 1].mean(axis=0)
    load = values["load"]
    return _of_traction(values["tension"] * (load @ normal) * load, values, placed, poisson)


def _shear(values: Values, placed: Placed, poisson: float) -> FloatArray:
    K = _of_traction(values["shear"] * values["along"], values, placed, poisson)
    K[:, 0] = np.nan
    return K


def _of_traction(t: FloatArray, values: Values, placed: Placed, poisson: float) -> FloatArray:
    """K, (n, 3), of the traction t, (3,), on the uncracked plane seen from its lower side."""
    a, c = _semi_axes(values)
    normal = placed.frames[:, 1].mean(axis=0)
    normal = normal / np.linalg.norm(normal)
    # The solution's axes are right-handed: along c, along a, e2.
    turn = np.sign(np.cross(placed.long, placed.deep) @ normal)
    phi, deep = turn * placed.phi, turn * placed.deep
    k1 = infinite.ellipse_tension(t @ normal, a, c, phi)
    k2, k3 = infinite.ellipse_shear(t @ placed.long, t @ deep, a, c, phi, poisson)
    return np.stack([k1, k2, k3], axis=1)


def _closed(values: Values) -> tuple[str, ...]:
    return ("exact for open faces in an infinite solid; a finite body adds its own part",)


def _exact(
    name: str,
    what: str,
    arguments: dict[str, Argument],
    loads: tuple[str, ...],
    K: Callable[[Values, Placed, float], FloatArray],
    source: str,
) -> Solution:
    return Solution(name, what, arguments, loads, _place, K, source, "exact", _closed)


def _place_ligament(values: Values, shape: FrontShape) -> Placed:
    return place_ellipse(shape, values["a"], values["a"], "ligament")


def _ligament(
    mode: int, formula: Callable[..., FloatArray], values: Values, placed: Placed, poisson: float
) -> FloatArray:
    return only(mode, formula(**values), len(placed.phi))


def _bar_tension(values: Values) -> tuple[str, ...]:
    return (
        "the formula itself is low by up to 2.9 % for Poisson's ratio 0.3 and 4.2 % for 0 (a/b "
        "near 0.8; 0.7 % at a/b = 0.3), by axisymmetric finite elements computed for front3d",
    )


def _bar_torsion(values: Values) -> tuple[str, ...]:
    if values["a"] <= 0.5 * values["b"]:
        return ()
    return (
        "the formula itself is high for a/b > 0.5, by up to 1.9 % (near a/b = 0.85), by "
        "axisymmetric finite elements computed for front3d",
    )


_LIGAMENT = {"a": length("radius of the LIGAMENT")}
_BAR = {**_LIGAMENT, "b": length("radius of the bar")}
_FORCE = Argument("axial force", "force", 0.0)
_TORQUE = Argument(
    "torque, right-handed about the outward normal of each end", "force x length", 0.0
)
_TADA = "Tada, Paris and Irwin (1985)"

ENTRIES: tuple[Solution, ...] = (
    _exact(
        "penny",
        "penny crack in an infinite solid, tension across it",
        {**_RADIUS, "tension": _TENSION},
        ("tension",),
        _tension,
        "Sneddon (1946)",
    ),
    _exact(
        "penny-inclined",
        "penny crack in an infinite solid, tension in any direction",
        {**_RADIUS, **_INCLINED},
        ("tension",),
        _inclined,
        "Sneddon (1946), Kassir and Sih (1966)",
    ),
    _exact(
        "penny-shear",
        "penny crack in an infinite solid, shear",
        {**_RADIUS, **_SHEAR},
        ("shear",),
        _shear,
        "Kassir and Sih (1966)",
    ),
    _exact(
        "ellipse",
        "elliptical crack in an infinite solid, tension across it",
        {**_AXES, "tension": _TENSION},
        ("tension",),
        _tension,
        "Irwin (1962)",
    ),
    _exact(
        "ellipse-inclined",
        "elliptical crack in an infinite solid, tension in any direction",
        {**_AXES, **_INCLINED},
        ("tension",),
        _inclined,
        "Irwin (1962), Kassir and Sih (1966)",
    ),
    _exact(
        "ellipse-shear",
        "elliptical crack in an infinite solid, shear",
        {**_AXES, **_SHEAR},
        ("shear",),
        _shear,
        "Kassir and Sih (1966)",
    ),
    Solution(
        "round-bar-tension",
        "round bar with a crack all around, tension",
        {**_BAR, "force": _FORCE},
        ("force",),
        _place_ligament,
        partial(_ligament, 0, bars.round_bar_tension),
        _TADA,
        "within 1 % (claim from memory)",
        _bar_tension,
    ),
    Solution(
        "round-bar-torsion",
        "round bar with a crack all around, torsion: K_III alone",
        {**_BAR, "torque": _TORQUE},
        ("torque",),
        _place_ligament,
        partial(_ligament, 2, bars.round_bar_torsion),
        _TADA,
        "within 1 % (claim from memory)",
        _bar_torsion,
    ),
    Solution(
        "external-crack-tension",
        "two half-spaces joined over a circle, tension",
        {**_LIGAMENT, "force": _FORCE},
        ("force",),
        _place_ligament,
        partial(_ligament, 0, bars.external_crack_tension),
        _TADA,
        "exact",
    ),
    Solution(
        "external-crack-torsion",
        "two half-spaces joined over a circle, torsion: K_III alone",
        {**_LIGAMENT, "torque": _TORQUE},
        ("torque",),
        _place_ligament,
        partial(_ligament, 2, bars.external_crack_torsion),
        _TADA,
        "exact",
    ),
)
