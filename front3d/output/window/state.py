"""What the window shows, as one record; and what each key or button makes of it."""

from collections.abc import Callable, Mapping
from dataclasses import dataclass, replace

import numpy as np

from front3d.output.charts.style import mathtext
from front3d.output.formats import place
from front3d.output.scene.drawing import Place
from front3d.output.scene.quantity import LABELS, QUANTITIES, shown_value, values_of
from front3d.output.scene.surface import steps_of
from front3d.results import MODES, Evaluation, FrontResult

POSITION, DEPTH = "position", "depth"
MOST = 2.0
"""The opening at the slider's end, in parts of what suits the picture."""


@dataclass(frozen=True, slots=True)
class Shown:
    """The choice of quantity, step (its number), front (among those of the step) and station.

    opening : in parts of the enlargement that suits the picture, 0 to MOST
    against : what the chart's axis is: POSITION along the front, or DEPTH
    rings, ribbon : whether they are drawn
    """

    quantity: str
    step: int
    front: int
    station: int
    opening: float = 1.0
    against: str = POSITION
    rings: bool = False
    ribbon: bool = False


def first_shown(evaluation: Evaluation) -> Shown:
    """K_I of the step and front with the largest K, at its station."""
    fronts = evaluation.fronts
    largest = max(fronts, key=lambda front: float(np.nanmax(np.abs(front.K), initial=0.0)))
    step = steps_of(fronts).index(largest.step)
    shown = Shown(MODES[0], step, fronts_of(evaluation, step).index(largest), 0)
    return replace(shown, station=_peak(largest, shown.quantity))


def fronts_of(evaluation: Evaluation, step: int) -> tuple[FrontResult, ...]:
    name = steps_of(evaluation.fronts)[step]
    return tuple(front for front in evaluation.fronts if front.step == name)


def front_of(evaluation: Evaluation, shown: Shown) -> FrontResult:
    return fronts_of(evaluation, shown.step)[shown.front]


def at(shown: Shown, place: Place) -> Shown:
    """With the station picked: (which front of the step, which station)."""
    return replace(shown, front=place[0], station=place[1])


def with_quantity(shown: Shown, quantity: str) -> Shown:
    return replace(shown, quantity=quantity)


def with_opening(shown: Shown, part: float) -> Shown:
    """`part` of the slider, 0 to 1."""
    return replace(shown, opening=MOST * min(1.0, max(0.0, part)))


def next_step(evaluation: Evaluation, shown: Shown) -> Shown:
    step = (shown.step + 1) % len(steps_of(evaluation.fronts))
    fronts = fronts_of(evaluation, step)
    front = min(shown.front, len(fronts) - 1)
    station = min(shown.station, len(fronts[front]) - 1)
    return replace(shown, step=step, front=front, station=station)


def next_front(evaluation: Evaluation, shown: Shown) -> Shown:
    fronts = fronts_of(evaluation, shown.step)
    front = (shown.front + 1) % len(fronts)
    return replace(shown, front=front, station=_peak(fronts[front], shown.quantity))


def next_station(evaluation: Evaluation, shown: Shown, by: int) -> Shown:
    """Around a closed front; up to the ends of another."""
    front = front_of(evaluation, shown)
    i = shown.station + by
    i = i % len(front) if front.closed else min(max(i, 0), len(front) - 1)
    return replace(shown, station=i)


def _other_axis(_: Evaluation, shown: Shown) -> Shown:
    return replace(shown, against=DEPTH if shown.against == POSITION else POSITION)


Change = Callable[[Evaluation, Shown], Shown]


def _to_quantity(quantity: str) -> Change:
    return lambda _, shown: with_quantity(shown, quantity)


CHANGES: Mapping[str, Change] = {
    **{quantity: _to_quantity(quantity) for quantity in QUANTITIES},
    "next step": next_step,
    "next front": next_front,
    "station before": lambda evaluation, shown: next_station(evaluation, shown, -1),
    "station after": lambda evaluation, shown: next_station(evaluation, shown, 1),
    "other axis": _other_axis,
    "rings": lambda _, shown: replace(shown, rings=not shown.rings),
    "ribbon": lambda _, shown: replace(shown, ribbon=not shown.ribbon),
    "open more": lambda _, shown: with_opening(shown, shown.opening / MOST + 0.1),
    "open less": lambda _, shown: with_opening(shown, shown.opening / MOST - 0.1),
}
"""What buttons and keys do to what is shown, by name."""

KEYS: Mapping[str, str] = {
    **{str(i + 1): q for i, q in enumerate(QUANTITIES)},
    "n": "next step",
    "f": "next front",
    "Left": "station before",
    "Right": "station after",
    "a": "other axis",
    "i": "rings",
    "g": "ribbon",
    "plus": "open more",
    "minus": "open less",
    "s": "save picture",
    "h": "look again",
    "q": "close",
}
"""Names of keys, and of the change or the window's own doing that they ask for."""


def numbers(evaluation: Evaluation, shown: Shown) -> tuple[str, str, str]:
    """All of the picked station on three lines."""
    front, i, units = front_of(evaluation, shown), shown.station, evaluation.units
    unit = f" {mathtext(units.K_label)}" if units.named else ""
    length = f" {units.length}".rstrip()
    K = ", ".join(f"{LABELS[m]} {shown_value((front,), front, i, m):.4g}" for m in MODES)
    energy = f" {units.stress} {units.length}".rstrip()
    psi = shown_value((front,), front, i, "psi")
    angle = f"{psi:.3g}\N{DEGREE SIGN}" if np.isfinite(psi) else "none (mode III alone)"
    said = f", {front.flags[i]}" if front.flags[i] else ""
    return (
        f"front {front.front}, station {i} of {len(front)}{said}: s {front.s[i]:.4g}{length}, "
        f"s/L {front.s_rel[i]:.3f}",
        f"at ({place(front.positions[i], front.length)})   "
        rf"$G$ {front.G[i]:.4g}{energy}, $\psi$ {angle}",
        f"{K}{unit}",
    )


def _peak(front: FrontResult, quantity: str) -> int:
    values = np.abs(values_of(front, quantity)) if quantity != "flag" else front.K[:, 0]
    return int(np.nanargmax(values)) if np.isfinite(values).any() else 0
