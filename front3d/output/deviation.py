"""How far a front's K is from a published solution."""

from dataclasses import dataclass

import numpy as np

from front3d.arrays import FloatArray
from front3d.results import MODES, Comparison, FrontResult


@dataclass(frozen=True, slots=True, eq=False)
class Deviation:
    """K less the solution, in per cent of the solution's largest K of the front.

    Attributes
    ----------
    percent : (n, 3), NaN where the solution says nothing
    worst : the largest in magnitude among the stations judged, with its sign; NaN if there is none
    mode, station : where that is
    mean : mean magnitude over the stations judged, of the mode that is worst in this
    balance : per mode given, its mean with the sign, each station weighted by its share of the
        front: near zero where K only scatters about the solution
    judged : number of stations judged
    average : root mean square of K_I over the whole front, as from the average J, less the
        solution, in per cent; None where the solution is not an average
    """

    percent: FloatArray
    worst: float
    mode: str
    station: int
    mean: float
    balance: dict[str, float]
    judged: int
    average: float | None = None


def deviation(front: FrontResult, comparison: Comparison) -> Deviation:
    """The deviation at all stations; worst and mean over those that are judged."""
    finite = comparison.K[np.isfinite(comparison.K)]
    scale = float(np.abs(finite).max()) if finite.size else float("nan")
    if not scale > 0:
        scale = float("nan")
    percent = 100.0 * (front.K - comparison.K) / scale
    judged = np.where(comparison.judged[:, None], percent, np.nan)
    known = np.isfinite(judged)
    if not known.any():
        nan = float("nan")
        return Deviation(percent, nan, "", -1, nan, {}, 0)
    station, mode = np.unravel_index(int(np.nanargmax(np.abs(judged))), judged.shape)
    weight = _weights(front)
    given = [k for k in range(len(MODES)) if known[:, k].any()]
    means = [float(np.abs(judged[known[:, k], k]).mean()) for k in given]
    balance = {
        MODES[k]: float(np.average(judged[known[:, k], k], weights=weight[known[:, k]]))
        for k in given
    }
    return Deviation(
        percent,
        float(judged[station, mode]),
        MODES[mode],
        int(station),
        max(means),
        balance,
        int(known.any(axis=1).sum()),
        _average(front, comparison) if comparison.average else None,
    )


def _average(front: FrontResult, comparison: Comparison) -> float:
    square = np.average(front.K[:, 0] ** 2, weights=_weights(front))
    expected = float(np.abs(comparison.K[:, 0]).mean())
    return float(100.0 * (np.sqrt(square) / expected - 1.0))


def _weights(front: FrontResult) -> FloatArray:
    """Length of front that each station stands for, (n,)."""
    step = np.diff(front.s)
    if front.closed:
        step = np.append(step, front.length - front.s[-1])
        weight: FloatArray = (step + np.roll(step, 1)) / 2
        return weight
    return (np.append(step, 0.0) + np.append(0.0, step)) / 2
