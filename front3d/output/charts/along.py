"""K_I, K_II and K_III along a front: by every method, with the range over the rings."""

from typing import TYPE_CHECKING, Any

import numpy as np

from front3d.arrays import FloatArray
from front3d.output.charts.panels import (
    POSITION_AXIS,
    drawn_modes,
    fit_K,
    label_K,
    largest_K,
    layer_entry,
    left_out,
    panel_heights,
    position_panels,
)
from front3d.output.charts.style import (
    BLACK,
    BLUE,
    GREEN,
    INK,
    VERMILION,
    closed_up,
    layer_lengths,
    legend,
    legend_rows,
    mark_every,
    new_figure,
    plain_text,
)
from front3d.output.trust import rings_of
from front3d.results import FrontResult
from front3d.units import Units

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

METHOD_NAMES = {
    "interaction": "interaction integral",
    "closure": "closure",
    "opening": "opening profile",
}
_REPORTED: dict[str, Any] = {"color": BLUE, "linestyle": "-", "linewidth": 2.4, "marker": "o"}
_OTHERS: tuple[dict[str, Any], ...] = (
    {"color": VERMILION, "linestyle": "--", "marker": "x"},
    {"color": GREEN, "linestyle": "-.", "marker": "^"},
    {"color": BLACK, "linestyle": (0, (3, 1, 1, 1, 1, 1)), "marker": "v"},
)
_PUBLISHED: tuple[dict[str, Any], ...] = (
    {"color": BLACK, "linestyle": ":", "marker": "D"},
    {"color": BLACK, "linestyle": (0, (6, 2)), "marker": "s"},
)


def along_front(front: FrontResult, units: Units) -> "Figure":
    """Three panels over s/L; a mode that is nought throughout has none."""
    modes = drawn_modes([front])
    captions = left_out(modes)
    if any(layer_lengths(front)):
        captions += ("Shaded: K has no strict meaning where the front meets a free surface.",)
    heights = panel_heights([front], modes)
    entries = (
        1
        + (rings_of(front) is not None)
        + len(_other_methods(front))
        + len(front.comparisons)
        + any(front.flags)
        + any(layer_lengths(front))
    )
    title = f"Stress intensity along front {front.front}, step {plain_text(front.step)}"
    figure = new_figure(sum(heights) + POSITION_AXIS, title, captions, legend_rows(entries))
    panels = position_panels(figure, front, units, heights)
    largest = largest_K([front])
    for axes, mode in zip(panels, modes, strict=True):
        _draw(axes, front, mode)
        fit_K(axes, [front.K[:, mode], *_also_fitted(front, mode)], largest)
        label_K(axes, mode, units)
    _circle_flagged(panels[0], front)
    layer_entry(panels[0], front)
    legend(figure, panels[0])
    figure.align_ylabels(panels)
    return figure


def _draw(axes: "Axes", front: FrontResult, mode: int) -> None:
    x = closed_up(front.s_rel, front, 1.0)
    every = mark_every(front)
    axes.plot(
        x,
        closed_up(front.K[:, mode], front),
        markersize=5,
        markevery=every,
        label=f"reported ({reported_by(front)})",
        **_REPORTED,
    )
    rings = rings_of(front)
    if rings is not None:
        compared = rings.K[rings.compared, :, mode]
        axes.fill_between(
            x,
            closed_up(compared.min(axis=0), front),
            closed_up(compared.max(axis=0), front),
            color=BLUE,
            alpha=0.25,
            linewidth=0,
            label="range over rings",
        )
    # Thin, and above the reported curve, which would hide those that agree with it.
    thin: dict[str, Any] = {
        "linewidth": 1.3,
        "markersize": 4.5,
        "markerfacecolor": "none",
        "zorder": 3,
    }
    for number, (name, K) in enumerate(_other_methods(front).items()):
        axes.plot(
            x,
            closed_up(K[:, mode], front),
            label=METHOD_NAMES.get(name, name),
            markevery=(every // 2, every),
            **thin,
            **_OTHERS[number % len(_OTHERS)],
        )
    for number, comparison in enumerate(front.comparisons):
        axes.plot(
            x,
            closed_up(comparison.K[:, mode], front),
            label=plain_text(comparison.source.partition(", from memory")[0], 30),
            markevery=(every // 3, every),
            **thin,
            **_PUBLISHED[number % len(_PUBLISHED)],
        )


def _other_methods(front: FrontResult) -> dict[str, FloatArray]:
    """K of the methods whose K is not the reported one everywhere."""
    return {
        name: method.K for name, method in front.methods.items() if set(front.sources) != {name}
    }


def reported_by(front: FrontResult) -> str:
    """Name of the method whose K is reported, or of those that take turns."""
    names = dict.fromkeys(front.sources)
    return " / ".join(METHOD_NAMES.get(name, name) for name in names)


def _also_fitted(front: FrontResult, mode: int) -> list[FloatArray]:
    """Other curves as far as they set the limits: not their ends at a free surface, where they may
    run away.
    """
    inside = slice(None) if front.closed else slice(1, -1)
    curves = [method.K[inside, mode] for method in front.methods.values()]
    return curves + [comparison.K[inside, mode] for comparison in front.comparisons]


def _circle_flagged(axes: "Axes", front: FrontResult) -> None:
    flagged = np.array([bool(flag) for flag in front.flags])
    if flagged.any():
        axes.plot(
            front.s_rel[flagged],
            front.K[flagged, 0],
            linestyle="none",
            marker="o",
            markersize=11,
            markerfacecolor="none",
            markeredgecolor=INK,
            label="flagged",
        )
