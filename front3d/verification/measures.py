"""How the answers of a case are compared with what is known."""

from collections.abc import Iterator, Sequence
from dataclasses import replace

import numpy as np

from front3d.arrays import FloatArray
from front3d.errors import CaseError
from front3d.handbook import compact_specimen
from front3d.output.deviation import deviation
from front3d.results import MODES, FrontResult, free_surface_layer
from front3d.verification.case import Measured, Outcome


def beside_solutions(outcomes: Sequence[Outcome]) -> list[Measured]:
    """Every method in every load against the solutions asked for, in per cent of their largest K.

    Stations at which the solution is not judged (free surfaces) are left out, and for the opening
    the whole layer at a free surface, where it is known to be too high.
    """
    found = []
    several = len({front.front for front in _fronts(outcomes[0])}) > 1
    for front in _fronts(outcomes[0]):
        load = f"{front.step}, front {front.front}" if several else front.step
        inside = ~free_surface_layer(front.s, front.length, front.ends)
        for comparison in front.comparisons:
            for name, result in front.methods.items():
                judged = comparison.judged & (inside | (name != "opening"))
                about = deviation(replace(front, K=result.K), replace(comparison, judged=judged))
                if not about.judged:
                    continue
                where = f"{about.mode} at s/L {front.s_rel[about.station]:.3f}"
                found.append(Measured(name, load, about.judged, about.worst, where, about.mean))
    return found


def same_as_full(outcomes: Sequence[Outcome]) -> list[Measured]:
    """Parts of a model against the full model, the first outcome, at the same places.

    Ends on symmetry planes count; those at a free surface of both do, too.
    """
    found = []
    for part in outcomes[1:]:
        for front, full in _same_steps(part, outcomes[0]):
            at = _nearest(front.positions, full.positions, front.length)
            for name in front.methods:
                expected = full.methods[name].K[at]
                # A half model holds mode I only.
                modes = slice(0, 1) if "crack_plane" in part.sample.case["options"] else slice(None)
                gap = (front.methods[name].K - expected)[:, modes]
                load = f"{front.step}, {part.run.part}"
                found.append(_measured(name, load, front, gap, np.abs(expected).max()))
    return found


def superposed(outcomes: Sequence[Outcome]) -> list[Measured]:
    """K of the third load against the first less the second, in per cent of the first's largest K.

    The end stations on a free surface count for the integral, too: it must be linear there.
    """
    found = []
    for whole, less in _same_steps(outcomes[0], outcomes[1]):
        (third,) = _fronts(outcomes[2])
        for name in whole.methods:
            expected = whole.methods[name].K - less.methods[name].K
            scale = float(np.nanmax(np.abs(whole.methods[name].K)))
            gap = third.methods[name].K - expected
            found.append(_measured(name, third.step, third, gap, scale))
    return found


def beside_interaction(outcomes: Sequence[Outcome]) -> list[Measured]:
    """Every method against the interaction integral, at every station."""
    found = []
    for front in _fronts(outcomes[0]):
        expected = front.methods["interaction"].K
        for name, result in front.methods.items():
            gap, scale = result.K - expected, float(np.abs(expected).max())
            if name != "interaction":
                found.append(_measured(name, front.step, front, gap, scale))
    return found


def thickness_average(outcomes: Sequence[Outcome]) -> list[Measured]:
    """Mean J over the thickness of a compact specimen against K^2/E' of ASTM E399, in per cent of
    K; and whether K is above its average in the middle and drops at the faces, where they are free.

    With free faces the mean lies between plane strain and plane stress: at the usual thickness of
    W/2 about 3 % of K above the former (J is what the compliance says, and stiffness of the arms
    is nearer to plane stress), at 2 W within 1 %.
    """
    sample = outcomes[0].sample
    values = sample.parameters
    (front,) = _fronts(outcomes[0])
    K = compact_specimen(values["force"], values["thickness"], values["width"], values["crack"])
    found = []
    for name, result in front.methods.items():
        known = np.isfinite(result.K).all(axis=1)
        G = np.interp(front.s, front.s[known], (result.K[known] ** 2).sum(axis=1))
        mean = float(np.sqrt(np.trapezoid(G, front.s) / front.length))
        worst = 100.0 * (mean / float(K) - 1.0)
        found.append(Measured(name, front.step, len(front), worst, "average", abs(worst)))
    k1 = front.methods["interaction"].K[:, 0]
    middle, faces = k1[len(k1) // 2], k1[[0, -1]]
    average = float(np.trapezoid(k1, front.s) / front.length)
    free = values["free_sides"] > 0 and sample.material.poisson > 0
    if free and not (middle > average and (faces < average).all()):
        raise CaseError(
            f"{sample.name}: found K_I {middle:.4g} in the middle and {faces.max():.4g} at the "
            f"faces, expected them above and below the average {average:.4g}"
        )
    return found


def _fronts(outcome: Outcome) -> tuple[FrontResult, ...]:
    return outcome.evaluation.fronts


def _same_steps(one: Outcome, other: Outcome) -> Iterator[tuple[FrontResult, FrontResult]]:
    by_step = {front.step: front for front in _fronts(other)}
    for front in _fronts(one):
        yield front, by_step.get(front.step, next(iter(by_step.values())))


def _nearest(places: FloatArray, among: FloatArray, length: float) -> list[int]:
    """Rows of `among` at `places`; CaseError unless each has one."""
    gap = np.linalg.norm(places[:, None] - among[None], axis=2)
    if gap.min(axis=1).max() > 1e-6 * length:
        raise CaseError("found stations of a part that the full model lacks, expected the same")
    return [int(k) for k in gap.argmin(axis=1)]


def _measured(
    method: str, load: str, front: FrontResult, gap: FloatArray, scale: float
) -> Measured:
    """A difference at all stations where it is a number, in per cent of `scale`."""
    percent = 100.0 * gap / scale
    station, mode = np.unravel_index(int(np.nanargmax(np.abs(percent))), percent.shape)
    return Measured(
        method,
        load,
        int(np.isfinite(percent).any(axis=1).sum()),
        float(percent[station, mode]),
        f"{MODES[mode]} at s/L {front.s_rel[station]:.3f}",
        float(np.nanmean(np.abs(percent))),
    )
