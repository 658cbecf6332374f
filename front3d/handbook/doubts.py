"""What is known against the fitted equations: their differences from the tables beside them.

The tables were computed for this project with high-order finite elements, and are not published.
An equation is judged at the tabulated cases around the one asked for.
"""

from collections.abc import Callable, Mapping

import numpy as np

from front3d.arrays import FloatArray
from front3d.handbook.tabulated import FREE_SURFACE, TabulatedCase, table

Equation = Callable[[FloatArray, tuple[float, ...], str], FloatArray]
"""(phi, ratios of a case, load) -> K_I of the equation over stress sqrt(pi a)/E(k)."""

OFF = 0.04
"""Difference beyond which an equation is called off, in parts of the front's largest K."""


def worst_difference(
    case: TabulatedCase, equation: Equation, free_at: tuple[float, ...]
) -> tuple[float, float]:
    """The equation less the table over the table's largest K, away from free surfaces: the
    largest such difference with its sign, and its 2 phi/pi.
    """
    away = np.ones(len(case.phi), dtype=bool)
    for angle in free_at:
        away &= np.abs(case.phi - angle) * 2 / np.pi >= FREE_SURFACE - 1e-9
    found = equation(case.phi, case.ratios, case.load) - case.factor
    relative = np.where(away, found / np.abs(case.factor).max(), 0.0)
    i = int(np.argmax(np.abs(relative)))
    return float(relative[i]), float(case.phi[i] * 2 / np.pi)


def doubts(
    name: str,
    equation: Equation,
    ratios: tuple[float, ...],
    loads: Mapping[str, float],
    free_at: tuple[float, ...],
    good: Mapping[str, Callable[[float, float], bool]],
    good_in_words: str,
) -> tuple[str, ...]:
    """A sentence per load under which the equation is not known to hold for these ratios: how far
    it is from the tables around them, and that it is off where this is more than OFF.

    `good` says per load for which a/c and a/t it is; a load it does not name is never good.
    """
    sentences = []
    for load, stress in loads.items():
        holds = good.get(load)
        if not stress or (holds is not None and holds(*ratios[:2])):
            continue
        cases = around([case for case in table(name) if case.load == load], ratios)
        worst = [(*worst_difference(case, equation, free_at), case) for case in cases]
        value, place, case = max(worst, key=lambda found: abs(found[0]))
        where = f"a/c = {case.ratios[0]:g}, a/t = {case.ratios[1]:g}"
        if len(case.ratios) > 2:
            where += f", r/t = {case.ratios[2]:g}"
        off = f"the equation itself is known to be off here: {good_in_words}; "
        # With the sign of the deviations beside it: K less the equation.
        sentences.append(
            f"{off if abs(value) > OFF else ''}under {load} around this shape K of high-order "
            f"finite elements less the equation is up to {-100 * value:+.1f} % of the front's "
            f"largest K ({where}, 2 phi/pi = {place:g}); they were computed for front3d and are "
            f"not published (table {name})"
        )
    return tuple(sentences)


def around(cases: list[TabulatedCase], ratios: tuple[float, ...]) -> list[TabulatedCase]:
    """The cases whose ratios are next to the ones given, on either side of each."""
    for k, ratio in enumerate(ratios):
        there = sorted({case.ratios[k] for case in cases})
        near = {
            max((v for v in there if v <= ratio * (1 + 1e-9)), default=there[0]),
            min((v for v in there if v >= ratio * (1 - 1e-9)), default=there[-1]),
        }
        cases = [case for case in cases if case.ratios[k] in near]
    return cases
