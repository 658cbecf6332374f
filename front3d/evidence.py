"""How the methods vouch for each other: which K is reported, where they differ, who is suspect.

The rule for the value without a suffix: at each station the interaction integral's, where its
rings agree within RING_TOLERANCE of the front's largest K.  Where they do not, and both further
methods have a value, that of the method whose G lies between the other two: a single method that
is wrong can then not set the value.  At a free surface it stays the interaction integral's.
"""

from collections.abc import Mapping
from dataclasses import dataclass
from itertools import combinations

import numpy as np

from front3d.arrays import BoolArray, FloatArray
from front3d.crack.cells import FrontCells
from front3d.crack.front import FREE_SURFACE, Front
from front3d.methods.closure import UNBALANCED
from front3d.results import MethodResult, energy_release_rate, free_surface_layer
from front3d.solid import Constants
from front3d.units import percent

REPORTED = "interaction"
"""The method whose K is reported where nothing speaks against it."""

RING_TOLERANCE = 0.02
"""Spread of K over the rings beyond the first, in parts of the front's largest K, above which a
station is flagged and another method may speak for it."""

J_TOLERANCE = 0.03
"""Difference of J and G, in parts of the front's largest G, above which a station is flagged."""

_JUSTIFIED = {  # structured, quadratic, quarter-points: percent for closure, opening
    (True, True, True): (2.0, 3.0),
    (True, True, False): (3.0, 3.0),
    (True, False, False): (5.0, 8.0),
    (False, True, True): (3.0, 3.0),
    (False, True, False): (3.0, 3.0),
    (False, False, False): (10.0, 10.0),
}
"""How far each further method may be from the interaction integral, in percent of the largest K.

From what was measured on models with known K and a usual fineness (tables in README.md), rounded
up; on linear tetrahedra no method is accurate.
"""

NEARER = 0.25
"""Gap of two methods over the gap to the third one, below which the third is the odd one out."""

MAX_TURN = 20.0
"""Turn of the front from edge to edge, degrees, above which a mesh is called coarse: the opening
was up to 10 % off on such meshes."""

SMALL_ANGLE = 10.0
"""Angle of a cell at the front, degrees, below which its shape is called poor: common practice."""


@dataclass(frozen=True, slots=True, eq=False)
class Evidence:
    """What is reported, and what must be said of it.

    Attributes
    ----------
    K : (n, 3) reported
    source : (n,) the method it comes from
    apart : (n,) where another method differs by more than the cells at the front justify
    warnings : sentences on methods that differ, with the one that is more likely wrong
    """

    K: FloatArray
    source: tuple[str, ...]
    apart: BoolArray
    warnings: tuple[str, ...]


def weigh(
    front: Front, cells: FrontCells, methods: Mapping[str, MethodResult], material: Constants
) -> Evidence:
    """Compare the methods along one front in one step."""
    own = methods[REPORTED]
    restless = own.columns["ring_spread"] > RING_TOLERANCE * float(np.nanmax(np.abs(own.K)))
    K, source = _reported(front, methods, restless, material)
    largest = float(np.abs(K).max())
    layer = free_surface_layer(front.corner_s, front.length, front.ends)
    gaps = {
        pair: np.nanmax(
            np.nan_to_num(np.abs(methods[pair[0]].K - methods[pair[1]].K)), axis=1, initial=0.0
        )
        for pair in combinations(methods, 2)
    }
    apart = np.zeros(len(K), bool)
    warnings = []
    for name in methods:
        if name == REPORTED or not largest > 0:
            continue
        allowed = justified(cells, name)
        far = (gaps[REPORTED, name] > allowed * largest) & ~layer
        if not far.any():
            continue
        apart |= far
        worst = float(gaps[REPORTED, name][far].max()) / largest
        others = {pair: float(gap[far].max()) / largest for pair, gap in gaps.items()}
        warnings.append(
            f"{name} and interaction differ by up to {percent(worst)} of the largest K at "
            f"{int(far.sum())} of {len(K)} stations, where {' and '.join(cells.kinds)} cells at "
            f"the front justify {100 * allowed:.0f} %: "
            + _verdict(name, others, cells, methods, restless[far], material)
        )
    return Evidence(K, source, apart, tuple(warnings))


def justified(cells: FrontCells, method: str) -> float:
    """Difference from the interaction integral that the cells justify, in parts of largest K."""
    quarter_points = cells.quadratic and cells.quarter_points
    row = _JUSTIFIED[cells.structured, cells.quadratic, quarter_points]
    return row[0 if method == "closure" else 1] / 100.0


def _reported(
    front: Front, methods: Mapping[str, MethodResult], restless: BoolArray, material: Constants
) -> tuple[FloatArray, tuple[str, ...]]:
    """K and the method it comes from, by the rule of this module."""
    K = methods[REPORTED].K.copy()
    names = list(methods)
    source = [REPORTED] * len(K)
    for where, end in zip((0, len(K) - 1), front.ends, strict=False):
        if end == FREE_SURFACE:
            restless = restless & (np.arange(len(K)) != where)
    if len(names) < 3:
        return K, tuple(source)
    for i in np.flatnonzero(restless):
        here = np.stack([methods[name].K[i] for name in names])
        if np.isfinite(here).all():
            middle = int(
                np.argsort(energy_release_rate(here, material.at(int(i))))[len(names) // 2]
            )
            K[i], source[i] = here[middle], names[middle]
    return K, tuple(source)


def _verdict(
    name: str,
    others: Mapping[tuple[str, str], float],
    cells: FrontCells,
    methods: Mapping[str, MethodResult],
    restless: BoolArray,
    material: Constants,
) -> str:
    """Which of `name` and the interaction integral is more likely wrong, and why."""
    against = {
        REPORTED: _against_interaction(methods[REPORTED], restless, material),
        name: _against_further(name, cells),
    }
    third = next((m for m in methods if m not in (REPORTED, name)), None)
    cause = _cause(methods)
    suspect = ""
    if third is not None:
        limit = justified(cells, third)
        apart = others.get((REPORTED, third), np.inf)
        between = min(others.get(pair, np.inf) for pair in ((name, third), (third, name)))
        to_reported = _nearness(apart, limit, between)
        to_name = _nearness(between, max(limit, justified(cells, name)), apart)
        if to_reported and not to_name:
            suspect, why = name, [f"{third} {to_reported} interaction", *against[name]]
        elif to_name and not to_reported:
            suspect, why = REPORTED, [f"{third} {to_name} {name}", *against[REPORTED]]
            cause = cause or "as with a load on the crack faces not given, or of another sign"
    elif bool(against[REPORTED]) != bool(against[name]):
        suspect = REPORTED if against[REPORTED] else name
        why = against[suspect]
    if suspect:
        return f"{suspect} is more likely wrong ({'; '.join([*why, *filter(None, [cause])])})"
    reasons = [*against[REPORTED], *against[name], *filter(None, [cause])]
    if reasons:
        return f"none is cleared ({'; '.join(reasons)})"
    return (
        "no figure tells which is wrong; a load on the crack faces, a body force or a thermal "
        "strain that was not given moves them apart, too"
    )


def _nearness(gap: float, limit: float, other: float) -> str:
    """How near two methods are, `other` being the gap of one of them to the remaining method."""
    if gap <= limit:
        return "agrees with"
    return "is much nearer to" if gap < NEARER * other else ""


def _cause(methods: Mapping[str, MethodResult]) -> str:
    """What puts all methods in doubt: the stresses are not in balance with the displacements."""
    if "closure" not in methods or "closure_unbalance" not in methods["closure"].columns:
        return ""
    left = float(methods["closure"].columns["closure_unbalance"].max())
    if not left > UNBALANCED:
        return ""
    return (
        f"the forces on the two sides of the front leave {100 * left:.0f} % unbalanced, as with a "
        "wrong Poisson's ratio, or a body force or thermal strain that was not given"
    )


def _against_interaction(
    interaction: MethodResult, restless: BoolArray, material: Constants
) -> list[str]:
    found = []
    if restless.any():
        found.append("its rings disagree")
    if interaction.rings is not None and len(interaction.rings.radii) < 3:
        found.append(f"it has too few rings, {len(interaction.rings.radii)}")
    G = energy_release_rate(interaction.K, material)
    if float(np.abs(interaction.columns["J_interaction"] - G).max()) > J_TOLERANCE * G.max():
        found.append("J differs from its G, as it does with a wrong Poisson's ratio")
    return found


def _against_further(name: str, cells: FrontCells) -> list[str]:
    found = []
    if cells.turn > MAX_TURN:
        found.append(f"the front turns {cells.turn:.0f} degrees from edge to edge, a coarse mesh")
    if not cells.quadratic:
        found.append("linear cells hold the square-root field poorly")
    if name == "closure" and cells.smallest_angle < SMALL_ANGLE:
        kind, number = cells.worst
        found.append(
            f"cells at the front are distorted, {kind} cell {number} down to "
            f"{cells.smallest_angle:.0f} degrees"
        )
    return found
