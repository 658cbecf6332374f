"""The stacked panels over the position along a front that several charts share."""

from collections.abc import Sequence
from typing import TYPE_CHECKING

import numpy as np

from front3d.arrays import FloatArray
from front3d.output.charts.style import (
    INK,
    LAYER,
    MEDIUM,
    MODE_LABELS,
    MUTED,
    SMALL,
    dress,
    in_unit,
    layer_lengths,
    mathtext,
    second_unit,
    widen,
)
from front3d.output.formats import NOUGHT, place
from front3d.output.shape import ellipse_of
from front3d.results import FrontResult
from front3d.units import Units

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

POSITION_AXIS = 0.65
"""Inches that the axis of the position takes below the panels."""

LEAST_SPAN = 0.1
"""Least height of a panel of K, in parts of the largest K."""


def drawn_modes(fronts: Sequence[FrontResult]) -> list[int]:
    """The modes that are not nought throughout, by at least one method."""
    least = NOUGHT * largest_K(fronts)
    curves = [K for front in fronts for K in (front.K, *(m.K for m in front.methods.values()))]
    reach = np.nanmax([np.nanmax(np.abs(K), axis=0, initial=0.0) for K in curves], axis=0)
    return [k for k in range(3) if reach[k] > least] or [0]


def panel_heights(fronts: Sequence[FrontResult], modes: Sequence[int]) -> list[float]:
    """Inches of the panel of each mode: a high one for the largest, low ones for modes that hardly
    matter.
    """
    K = np.abs(np.concatenate([front.K[:, modes] for front in fronts]))
    reach = np.nanmax(K, axis=0, initial=0.0)
    heights = np.where(reach < LEAST_SPAN / 2 * reach.max(), 1.25, 1.7)
    heights[np.argmax(reach)] = 2.9
    return [float(height) for height in heights]


def left_out(modes: Sequence[int]) -> tuple[str, ...]:
    """A caption on the modes without a panel."""
    names = " and ".join(MODE_LABELS[k] for k in range(3) if k not in modes)
    if not names:
        return ()
    return (f"No panel for {names}: below {100 * NOUGHT:g} % of the largest K throughout.",)


def position_panels(
    figure: "Figure", front: FrontResult, units: Units, heights: Sequence[float]
) -> list["Axes"]:
    """Panels one above the other over s/L, with the ends and the free-surface layer marked, and the
    parametric angle above where the front is an ellipse.
    """
    panels = list(
        figure.subplots(
            len(heights), 1, sharex=True, squeeze=False, height_ratios=list(heights)
        ).ravel()
    )
    first, last = layer_lengths(front)
    for number, axes in enumerate(panels):
        dress(axes)
        axes.set_xlim(-0.015, 1.015)
        axes.axhline(0.0, color=MUTED, linewidth=0.8, zorder=0.5)
        spans = [(0.0, first / front.length), (1 - last / front.length, 1.0)]
        for low, high in spans:
            if high > low:
                axes.axvspan(low, high, color=LAYER, linewidth=0, zorder=0.1)
        if not front.closed:
            for x in (0.0, 1.0):
                axes.axvline(x, color=INK, linewidth=1, linestyle=(0, (2, 2)), zorder=0.4)
        if number == 0:
            _angle_axis(axes, front, units)
    _name_ends(panels[-1], front, units)
    return panels


def layer_entry(axes: "Axes", front: FrontResult) -> None:
    """The free-surface layer in the legend."""
    for name in layer_names(front):
        axes.fill_between([], [], [], color=LAYER, linewidth=0, label=name)


def layer_names(front: FrontResult) -> list[str]:
    """What the legend has for the free-surface layer: one entry, or none."""
    return ["free-surface layer"] if any(layer_lengths(front)) else []


def label_K(axes: "Axes", mode: int, units: Units) -> None:
    unit = mathtext(units.K_label) if units.named else ""
    # On two lines, for low panels.
    axes.set_ylabel(in_unit(MODE_LABELS[mode], unit, "\n"), fontsize=MEDIUM)
    second_unit(axes, units)


def fit_K(axes: "Axes", values: Sequence[FloatArray], largest: float) -> None:
    """Limits around all drawn `values`."""
    axes.set_ylim(*limits_of(values, largest))


def limits_of(values: Sequence[FloatArray], largest: float) -> tuple[float, float]:
    """Around all `values`, never closer than LEAST_SPAN of the `largest` K."""
    finite = np.concatenate([v[np.isfinite(v)] for v in map(np.ravel, values)] or [np.zeros(0)])
    if not finite.size:
        return 0.0, 1.0
    return widen(float(finite.min()), float(finite.max()), LEAST_SPAN * largest)


def largest_K(fronts: Sequence[FrontResult]) -> float:
    values = np.concatenate([np.abs(front.K[np.isfinite(front.K)]) for front in fronts])
    return float(values.max(initial=0.0))


def _name_ends(axes: "Axes", front: FrontResult, units: Units) -> None:
    unit = f" {units.length}".rstrip()
    axes.set_xlabel(
        f"position along the front, s / L   (L = {front.length:.4g}{unit}; "
        f"s = 0 at ({place(front.positions[0], front.length)}))",
        fontsize=MEDIUM,
        labelpad=20 if front.ends else 4,
    )
    for x, end, side in zip((0.0, 1.0), front.ends, ("left", "right"), strict=False):
        axes.annotate(
            end,
            (x, 0.0),
            xycoords=axes.get_xaxis_transform(),
            xytext=(0, -23),
            textcoords="offset points",
            ha=side,
            va="top",
            fontsize=SMALL,
            color=INK,
        )


def _angle_axis(axes: "Axes", front: FrontResult, units: Units) -> None:
    found = parametric_angle(front, units)
    if found is None:
        return
    angle, words = found
    x = front.s_rel
    if front.closed:
        turn = 360.0 if angle[-1] > angle[0] else -360.0
        angle, x = np.append(angle, angle[0] + turn), np.append(x, 1.0)
    if angle[-1] < angle[0]:
        angle, x = angle[::-1], x[::-1]
    span = float(angle[-1] - angle[0])
    step = 15.0 if span < 100 else 30.0 if span < 200 else 45.0
    first = np.ceil((angle[0] - 1e-6) / step)
    ticks = np.arange(first, np.floor((angle[-1] + 1e-6) / step) + 1) * step + 0.0  # no -0
    other = axes.secondary_xaxis("top")
    shown = ticks if span < 200 else ticks % 360
    other.set_xticks(np.interp(ticks, angle, x), [f"{t:.0f}\N{DEGREE SIGN}" for t in shown])
    other.tick_params(labelsize=SMALL)
    other.set_xlabel(words, fontsize=SMALL, color=INK)


def parametric_angle(front: FrontResult, units: Units) -> tuple[FloatArray, str] | None:
    """Angle of the stations in degrees, and its name: of the published solution compared with, if
    it has one, or of the front's own ellipse.
    """
    for comparison in front.comparisons:
        if np.isfinite(comparison.angle).all() and np.ptp(comparison.angle) > 0:
            steps = np.diff(comparison.angle)
            if (steps > 0).all() or (steps < 0).all():
                return comparison.angle, f"parametric angle as in {comparison.source}"
    ellipse = ellipse_of(front)
    if ellipse is None:
        return None
    steps = np.diff(ellipse.angle)
    if not ((steps > 0).all() or (steps < 0).all()):
        return None
    axes = f"semi-axes {ellipse.a:.3g} and {ellipse.c:.3g} {units.length}".rstrip()
    return ellipse.angle, f"parametric angle of the ellipse, {axes}"
