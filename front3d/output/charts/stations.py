"""K at chosen stations of a front against its steps."""

from collections.abc import Sequence
from textwrap import fill
from typing import TYPE_CHECKING

import numpy as np

from front3d.arrays import FloatArray
from front3d.output.charts.panels import (
    drawn_modes,
    fit_K,
    label_K,
    largest_K,
    left_out,
    panel_heights,
)
from front3d.output.charts.style import (
    BLACK,
    BLUE,
    GREEN,
    MEDIUM,
    MUTED,
    SMALL,
    VERMILION,
    dress,
    legend,
    legend_rows,
    new_figure,
    plain_text,
)
from front3d.output.formats import place
from front3d.results import FrontResult
from front3d.units import Units

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

_STYLES = tuple(
    {"color": color, "linestyle": line, "marker": marker}
    for line, markers in (("-", "os^D"), ("--", "v<>p"))
    for color, marker in zip((BLUE, VERMILION, GREEN, BLACK), markers, strict=True)
)
_NAMED = 8
"""Steps whose names fit below the axis."""

_AXIS = 0.8  # inches below the panels
_COLUMNS = 2


def at_stations(fronts: Sequence[FrontResult], stations: Sequence[int], units: Units) -> "Figure":
    """One front in all its steps, a curve for each of up to eight stations.

    Where the steps have times that grow, K stands over the time, otherwise over the steps in their
    order, whose points no line joins: load cases have no order.
    """
    shown = list(stations)[: len(_STYLES)]
    in_time = [front for front in fronts if np.isfinite(front.time)]
    timed = len(in_time) > 1 and bool((np.diff([f.time for f in in_time]) > 0).all())
    sums = len(fronts) - len(in_time) if timed else 0
    fronts = in_time if timed else fronts
    x = np.array([f.time for f in fronts]) if timed else np.arange(1.0, len(fronts) + 1)
    modes = drawn_modes(fronts)
    heights = panel_heights(fronts, modes)
    captions = left_out(modes)
    if len(shown) < len(stations):
        captions = (*captions, f"{len(stations) - len(shown)} more stations stand in steps.csv.")
    if sums:
        captions = (*captions, f"Left out, as combinations have no time: {sums}.")
    names = [_name(fronts, i) for i in shown]
    figure = new_figure(
        sum(heights) + _AXIS,
        f"Stress intensity at stations of front {fronts[0].front}, {len(fronts)} steps",
        captions,
        legend_rows(names, _COLUMNS),
    )
    panels = figure.subplots(len(modes), 1, sharex=True, squeeze=False, height_ratios=heights)
    largest = largest_K(fronts)
    for axes, mode in zip(panels.ravel(), modes, strict=True):
        dress(axes)
        axes.axhline(0.0, color=MUTED, linewidth=0.8, zorder=0.5)
        values = [np.array([front.K[i, mode] for front in fronts]) for i in shown]
        for number, (name, K) in enumerate(zip(names, values, strict=True)):
            style = dict(_STYLES[number])
            if not timed:
                style["linestyle"] = "none"
            axes.plot(
                x if timed else _beside(x, number, len(shown)),
                K,
                label=name,
                markersize=6,
                markerfacecolor="none",
                linewidth=1.8,
                **style,
            )
        fit_K(axes, values, largest)
        label_K(axes, mode, units)
    _name_steps(panels.ravel()[-1], fronts, x, timed)
    legend(figure, panels.ravel()[0], _COLUMNS)
    figure.align_ylabels(panels.ravel())
    return figure


def _beside(x: FloatArray, number: int, of: int) -> FloatArray:
    """Points of one step side by side, so that none hides another."""
    return x + 0.12 * (number - (of - 1) / 2) / max(1.0, of / 4)


def _name(fronts: Sequence[FrontResult], i: int) -> str:
    """The station by its place, with its flag where it has one that all steps share."""
    front = fronts[0]
    shared = set.intersection(*(set(f.flags[i].split("; ")) for f in fronts)) - {""}
    end = f", {', '.join(sorted(shared))}" if shared else ""
    return f"s/L {front.s_rel[i]:.3f} ({place(front.positions[i], front.length)}){end}"


def _name_steps(axes: "Axes", fronts: Sequence[FrontResult], x: FloatArray, timed: bool) -> None:
    from matplotlib.ticker import MaxNLocator

    if timed:
        axes.set_xlabel("time", fontsize=MEDIUM)
        return
    axes.set_xlim(0.5, len(fronts) + 0.5)
    if len(fronts) <= _NAMED:
        room = max(8, 64 // len(fronts))
        names = [fill(plain_text(front.step, 2 * room - 4), room) for front in fronts]
        axes.set_xticks(x, names, fontsize=SMALL)
        axes.set_xlabel("step", fontsize=MEDIUM)
    else:
        axes.xaxis.set_major_locator(MaxNLocator(integer=True))
        axes.set_xlabel("number of the step", fontsize=MEDIUM)
