"""Catalogue: through cracks with a straight front, and specimens of ASTM E399."""

from collections.abc import Callable
from functools import partial

import numpy as np

from front3d.arrays import FloatArray
from front3d.handbook import rows, specimens, through
from front3d.handbook.placing import (
    SYMMETRY,
    TOLERANCE,
    FrontMismatch,
    FrontShape,
    Placed,
    place_straight,
)
from front3d.handbook.solution import Argument, Solution, Values, direction, length, only, stress

_TENSION = stress("remote tension across the crack (gross stress)")
_HALF = length("half-length of the crack")
_ALONG = direction("direction in which it pulls the upper side (e2), along the front")
_SPECIMEN = {
    "force": Argument("force on the whole thickness", "force", 0.0),
    "B": length("thickness"),
    "W": length("width, from the load line"),
    "a": length("crack length, from the load line"),
}
_UNSEEN = (
    "the length of the crack and the width of the plate are taken as given: one front does not "
    "show them"
)
_TADA = "Tada, Paris and Irwin (1985)"


def _place(values: Values, shape: FrontShape) -> Placed:
    return place_straight(shape)


def _unseen(values: Values) -> tuple[str, ...]:
    return (_UNSEEN,)


def _averaged(values: Values) -> tuple[str, ...]:
    return (
        "a, W and the force are taken as given: one front does not show them; B was checked "
        "against the front",
        "an average over the thickness: the root mean square of K_I over the whole front, as from "
        "the average J, is what to compare",
    )


_AT_FREE_SIDES = (
    "K is above the average in the middle of the thickness and below it at free faces",
    "the average J lies between plane strain, K^2 (1 - nu^2)/E, and plane stress, K^2/E, where "
    "the side faces are free: K from it by the plane-strain modulus may then stand above the "
    "solution by up to 1/sqrt(1 - nu^2), 4.8 % for nu = 0.3",
)


def _place_specimen(values: Values, shape: FrontShape) -> Placed:
    """A straight front across the thickness, or half of it up to a symmetry plane."""
    placed = place_straight(shape)
    B, symmetric = values["B"], SYMMETRY in shape.ends
    halves = {2: (B,), 1: (B / 2,), 0: (B, B / 2)}[len(shape.free)]  # a slice may be of either
    if min(abs(shape.length - size) for size in halves) > TOLERANCE * B:
        expected = " or ".join(f"{size:g}" for size in halves)
        reason = "half of B up to a symmetry plane" if symmetric else "B between free surfaces"
        raise FrontMismatch(
            f"the front is {shape.length:.4g} long, expected {expected}, within "
            f"{100 * TOLERANCE:g} % of B = {B:g} ({reason})"
        )
    return placed


def _opening(formula: Callable[..., FloatArray]) -> Callable[[Values, Placed, float], FloatArray]:
    """K_I by a formula whose first argument is the stress."""

    def K(values: Values, placed: Placed, poisson: float) -> FloatArray:
        sizes = {k: v for k, v in values.items() if k != "tension"}
        return only(0, formula(values["tension"], **sizes), len(placed.phi))

    return K


def _edge(values: Values, placed: Placed, poisson: float) -> FloatArray:
    a, b = values["a"], values["b"]
    K = through.edge_crack(values["tension"], a, b)
    if values["bending"]:  # its range is the narrower one
        K = K + through.edge_crack_bending(values["bending"], a, b)
    return only(0, K, len(placed.phi))


def _inclined(values: Values, placed: Placed, poisson: float) -> FloatArray:
    """The load's own angle to e2 at each station, positive towards e1; the part of it along the
    front tears the crack.
    """
    e1, e2, e3 = np.moveaxis(placed.frames, 1, 0)
    load, a = values["load"], values["a"]
    towards, across, tear = e1 @ load, e2 @ load, e3 @ load
    in_plane = np.hypot(towards, across)
    beta = np.arctan2(towards, across)
    stress_in_plane = values["tension"] * in_plane**2
    k1, k2 = through.inclined_through_crack(stress_in_plane, a, beta, values["lateral"])
    k3 = through.antiplane_through_crack(values["tension"] * across * tear, a)
    return np.stack([k1, k2, k3], axis=1)


def _antiplane(values: Values, placed: Placed, poisson: float) -> FloatArray:
    tau = values["shear"] * (placed.frames[:, 2] @ values["along"])
    K = through.antiplane_through_crack(tau, values["a"], values["b"])
    return only(2, K, len(placed.phi))


def _specimen(
    formula: Callable[..., FloatArray], values: Values, placed: Placed, poisson: float
) -> FloatArray:
    return only(0, formula(**values), len(placed.phi))


def _mode_one(
    name: str,
    what: str,
    sizes: dict[str, Argument],
    formula: Callable[..., FloatArray],
    source: str,
    claim: str,
) -> Solution:
    arguments = {**sizes, "tension": _TENSION}
    K = _opening(formula)
    return Solution(name, what, arguments, ("tension",), _place, K, source, claim, _unseen)


ENTRIES: tuple[Solution, ...] = (
    _mode_one(
        "through-crack",
        "through crack in an infinite plate",
        {"a": _HALF},
        through.through_crack,
        "Griffith (1921), Irwin (1957)",
        "exact",
    ),
    Solution(
        "inclined-through-crack",
        "through crack in an infinite plate, tension in any direction",
        {
            "a": _HALF,
            "tension": stress("remote uniaxial tension"),
            "load": direction("direction of that tension, such as 0.5/0.866/0"),
            "lateral": stress("stress in the plate at right angles to it"),
        },
        ("tension",),
        _place,
        _inclined,
        "Griffith (1921), Irwin (1957); the stress turned to the crack",
        "exact for open faces",
        _unseen,
    ),
    Solution(
        "antiplane-centre-crack",
        "centre crack in a strip under antiplane shear: K_III alone",
        {
            "a": _HALF,
            "b": length("half-width of the strip", np.inf),
            "shear": stress("remote shear stress"),
            "along": _ALONG,
        },
        ("shear",),
        _place,
        _antiplane,
        _TADA,
        "exact",
        lambda values: (_UNSEEN,),
    ),
    _mode_one(
        "centre-crack",
        "centre crack in a strip, tension",
        {"a": _HALF, "b": length("half-width of the strip")},
        through.centre_crack,
        _TADA,
        "within 0.1 %",
    ),
    Solution(
        "edge-crack",
        "crack at one edge of a strip, tension and bending, ends free to turn",
        {
            "a": length("depth of the crack"),
            "b": length("width of the strip"),
            "tension": _TENSION,
            "bending": stress("outer-fibre bending stress, tensile at the crack"),
        },
        ("tension", "bending"),
        _place,
        _edge,
        f"{_TADA}; bending: Brown and Srawley (1966)",
        "within 0.5 %; bending (from memory), a/b <= 0.6: within 0.2 % (0.4 % was found)",
        _unseen,
    ),
    _mode_one(
        "double-edge-crack",
        "cracks at both edges of a strip, tension",
        {"a": length("depth of each crack"), "b": length("half-width of the strip")},
        through.double_edge_crack,
        _TADA,
        "within 0.5 % (0.7 % was found)",
    ),
    _mode_one(
        "collinear-row",
        "endless row of collinear through cracks",
        {"a": _HALF, "b": length("half of their period")},
        rows.collinear_row,
        "Westergaard (1939), Irwin (1957)",
        "exact",
    ),
    Solution(
        "compact-specimen",
        "compact specimen of ASTM E399",
        _SPECIMEN,
        ("force",),
        _place_specimen,
        partial(_specimen, specimens.compact_specimen),
        "Srawley (1976), ASTM E399",
        "within 0.5 % for a/W >= 0.2",
        _averaged,
        at_free_ends=_AT_FREE_SIDES,
        average=True,
    ),
    Solution(
        "bend-specimen",
        "three-point bend specimen of ASTM E399, span 4 W",
        {**_SPECIMEN, "W": length("depth of the beam"), "a": length("crack length")},
        ("force",),
        _place_specimen,
        partial(_specimen, specimens.bend_specimen),
        "Srawley (1976), ASTM E399",
        "within 0.5 % (0.7 % was found at a/W = 0.5)",
        _averaged,
        at_free_ends=_AT_FREE_SIDES,
        average=True,
    ),
)
