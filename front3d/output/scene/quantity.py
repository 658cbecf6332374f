"""What the colours along a front stand for, and their scale."""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from front3d.arrays import FloatArray
from front3d.output.charts.style import mathtext
from front3d.output.formats import NOUGHT
from front3d.results import MODES, FrontResult
from front3d.units import Units

QUANTITIES = (*MODES, "G", "psi", "flag")
"""What can be drawn: K by mode, energy release rate, mode-mix angle, what is said of a station."""

LABELS = {
    "K_I": "$K_I$",
    "K_II": "$K_{II}$",
    "K_III": "$K_{III}$",
    "G": "$G$",
    "psi": r"$\psi$ = atan2($K_{II}$, $K_I$)",
    "flag": "flag",
}
SHORT = LABELS | {"psi": r"$\psi$"}
"""The same for narrow places."""

NO_FLAG = "no flag"
NO_VALUE = "#b0b0b0"
_LEAST_SPAN = 0.1  # of the largest magnitude
_LEAST_DEGREES = 5.0


@dataclass(frozen=True, slots=True)
class Scale:
    """Colours of a quantity: the range of its values; for flags, the words of each colour."""

    quantity: str
    low: float
    high: float
    words: tuple[str, ...] = ()

    @property
    def mode(self) -> int:
        """Which K, counted from 0."""
        return MODES.index(self.quantity)


def drawn_mode(fronts: Sequence[FrontResult]) -> int:
    """K_I, unless it is below a twentieth of another mode: then the largest mode."""
    largest = np.nanmax([np.nanmax(np.abs(front.K), axis=0) for front in fronts], axis=0)
    return 0 if largest[0] >= 0.05 * largest.max() else int(np.argmax(largest))


def values_of(front: FrontResult, quantity: str, words: Sequence[str] = ()) -> FloatArray:
    """(n,) values; of a flag, its number in `words`."""
    if quantity in MODES:
        return front.K[:, MODES.index(quantity)]
    if quantity == "G":
        return front.G
    if quantity == "psi":
        return front.mode_angles[:, 0]
    return np.array([words.index(flag or NO_FLAG) for flag in front.flags], dtype=float)


def unit_of(quantity: str, units: Units) -> str:
    """As text with mathematics; empty where there is none or it has no name."""
    if quantity == "psi":
        return "\N{DEGREE SIGN}"
    if quantity == "flag" or not units.named:
        return ""
    return f"{units.stress} {units.length}" if quantity == "G" else mathtext(units.K_label)


def colour_scale(fronts: Sequence[FrontResult], quantity: str | None = None) -> Scale:
    """From the smallest to the largest value, so that the peak has the last colour; but never so
    short that scatter looks like a variation: a tenth of the largest magnitude, five degrees.
    """
    quantity = quantity or MODES[drawn_mode(fronts)]
    if quantity == "flag":
        words = dict.fromkeys([NO_FLAG, *(f for front in fronts for f in front.flags if f)])
        return Scale(quantity, -0.5, len(words) - 0.5, tuple(words))
    values = np.concatenate([values_of(front, quantity) for front in fronts])
    values = values[np.isfinite(values)]
    values = np.where(np.abs(values) > _noise(fronts, quantity), values, 0.0)
    low, high = (float(values.min()), float(values.max())) if len(values) else (0.0, 0.0)
    largest = max(abs(low), abs(high))
    if largest == 0.0 and quantity != "psi":
        return Scale(quantity, -1.0, 1.0)  # nought stands in the middle
    short = (_LEAST_DEGREES if quantity == "psi" else _LEAST_SPAN * largest) - (high - low)
    if short > 0:  # the value of largest magnitude keeps the end of the scale
        low, high = (low - short, high) if high >= -low else (low, high + short)
    return Scale(quantity, low, high) if high > low else Scale(quantity, low, low + 1.0)


def _noise(fronts: Sequence[FrontResult], quantity: str) -> float:
    """Below this, a value is nought, as in the charts; or a hundredth of a degree."""
    if quantity not in MODES:
        return 1e-2 if quantity == "psi" else 0.0
    return NOUGHT * float(np.nanmax([np.nanmax(np.abs(f.K), initial=0.0) for f in fronts]))


def shown_value(fronts: Sequence[FrontResult], front: FrontResult, i: int, quantity: str) -> float:
    """The value at a station, nought where it is nought against those of all fronts."""
    value = float(values_of(front, quantity)[i])
    return 0.0 if abs(value) <= _noise(fronts, quantity) else value


def colours(scale: Scale | None = None) -> Any:
    """Dark is high: the peak stands out on a light body, in grey too.  One colour per flag."""
    from matplotlib import colormaps
    from matplotlib.colors import ListedColormap

    steps = 256 if scale is None or not scale.words else len(scale.words)
    return ListedColormap(colormaps["viridis_r"](np.linspace(0.08, 1.0, steps)))


def colour_of(front: FrontResult, station: int, scale: Scale) -> Any:
    """The colour that the front has at a station."""
    value = float(values_of(front, scale.quantity, scale.words)[station])
    if not np.isfinite(value):
        return NO_VALUE
    return colours(scale)(np.clip((value - scale.low) / (scale.high - scale.low), 0.0, 1.0))


def extremes(fronts: Sequence[FrontResult], scale: Scale) -> list[tuple[str, int, int]]:
    """What to mark: (word, which of `fronts`, station) of the largest and the smallest value, the
    largest magnitude first; one where all are alike, none of flags.
    """
    if scale.words:
        return []
    found = []
    for word, best, over in (("largest", np.nanargmax, max), ("smallest", np.nanargmin, min)):
        ends = []
        for number, front in enumerate(fronts):
            values = values_of(front, scale.quantity)
            if np.isfinite(values).any():
                i = int(best(values))
                ends.append((float(values[i]), number, i))
        if ends:
            value, number, i = over(ends)
            found.append((abs(value), word, number, i))
    if all(shown_value(fronts, fronts[n], i, scale.quantity) == 0 for _, _, n, i in found):
        return []
    found.sort(key=lambda one: -one[0])
    if len(found) == 2:
        first, second = (values_of(fronts[n], scale.quantity)[i] for _, _, n, i in found)
        if abs(first - second) <= 0.01 * (scale.high - scale.low):
            found.pop()
    return [(word, number, i) for _, word, number, i in found]
