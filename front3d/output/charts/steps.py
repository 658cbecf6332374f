"""K along a front in several steps: a family of curves."""

from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

from front3d.output.charts.panels import (
    POSITION_AXIS,
    drawn_modes,
    fit_K,
    label_K,
    largest_K,
    layer_entry,
    layer_names,
    left_out,
    panel_heights,
    position_panels,
)
from front3d.output.charts.style import (
    BLACK,
    BLUE,
    GREEN,
    VERMILION,
    closed_up,
    legend,
    legend_rows,
    mark_every,
    new_figure,
    plain_text,
)
from front3d.results import FrontResult
from front3d.units import Units

if TYPE_CHECKING:
    from matplotlib.figure import Figure

_FEW: tuple[dict[str, Any], ...] = (
    {"color": BLUE, "linestyle": "-", "marker": "o"},
    {"color": VERMILION, "linestyle": "--", "marker": "s"},
    {"color": GREEN, "linestyle": "-.", "marker": "^"},
    {"color": BLACK, "linestyle": ":", "marker": "D"},
)


def over_steps(fronts: Sequence[FrontResult], units: Units) -> "Figure":
    """The same front in each of its steps, in their order; up to four steps are told apart by line
    style, more by a colour from light (first) to dark (last).
    """
    modes = drawn_modes(fronts)
    heights = panel_heights(fronts, modes)
    named = [name for k in range(len(fronts)) if (name := _name(k, fronts)) is not None]
    figure = new_figure(
        sum(heights) + POSITION_AXIS,
        f"Stress intensity along front {fronts[0].front}, {len(fronts)} steps",
        left_out(modes),
        legend_rows(named + layer_names(fronts[0])),
    )
    panels = position_panels(figure, fronts[0], units, heights)
    largest = largest_K(fronts)
    for axes, mode in zip(panels, modes, strict=True):
        for number, front in enumerate(fronts):
            axes.plot(
                closed_up(front.s_rel, front, 1.0),
                closed_up(front.K[:, mode], front),
                label=_name(number, fronts),
                markersize=4.5,
                markerfacecolor="none",
                markevery=mark_every(front),
                linewidth=1.8,
                **_style(number, len(fronts)),
            )
        fit_K(axes, [front.K[:, mode] for front in fronts], largest)
        label_K(axes, mode, units)
    layer_entry(panels[0], fronts[0])
    legend(figure, panels[0])
    figure.align_ylabels(panels)
    return figure


def _style(number: int, steps: int) -> dict[str, Any]:
    if steps <= len(_FEW):
        return _FEW[number]
    from matplotlib import colormaps

    shade = 0.12 + 0.88 * number / (steps - 1)
    return {"color": colormaps["viridis_r"](shade), "linestyle": "-"}


def _name(number: int, fronts: Sequence[FrontResult]) -> str | None:
    """Every step by name while they are few; else the first, the middle and the last."""
    steps = len(fronts)
    if steps > len(_FEW) and number not in (0, steps // 2, steps - 1):
        return None
    name = plain_text(fronts[number].step, 24)
    return name if steps <= len(_FEW) else f"step {number + 1} of {steps}: {name}"
