"""K_I, K_II and K_III along a front: by every method, with the range over the rings."""

from collections.abc import Sequence
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
    layer_names,
    left_out,
    limits_of,
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
_STYLES: dict[str, dict[str, Any]] = {
    "interaction": {"color": BLUE, "linestyle": "-", "marker": "o"},
    "closure": {"color": VERMILION, "linestyle": "--", "marker": "x"},
    "opening": {"color": GREEN, "linestyle": "-.", "marker": "^"},
}
_ANOTHER: dict[str, Any] = {"color": BLACK, "linestyle": (0, (3, 1, 1, 1, 1, 1)), "marker": "v"}
"""A method's look is its own, whichever is reported: that one is drawn strong."""

_MOST = 60  # letters of the name of a published solution
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
    captions += _taken_from_others(front)
    captions += _leaving(front, modes)
    entries = [
        f"reported ({reported_by(front)})",
        *(_from(name) for name in _sources(front) if len(_sources(front)) > 1),
        *(["range over rings"] if rings_of(front) is not None else []),
        *(METHOD_NAMES.get(name, name) for name in _other_methods(front)),
        *(plain_text(comparison.source, _MOST) for comparison in front.comparisons),
        *(["flagged"] if any(front.flags) else []),
        *layer_names(front),
    ]
    title = f"Stress intensity along front {front.front}, step {plain_text(front.step)}"
    figure = new_figure(sum(heights) + POSITION_AXIS, title, captions, legend_rows(entries))
    panels = position_panels(figure, front, units, heights)
    largest = largest_K([front])
    for axes, mode in zip(panels, modes, strict=True):
        _draw(axes, front, mode)
        fit_K(axes, [front.K[:, mode], *_also_fitted(front, mode)], largest)
        label_K(axes, mode, units)
        _circle_flagged(axes, front, mode)
    layer_entry(panels[0], front)
    legend(figure, panels[0])
    figure.align_ylabels(panels)
    return figure


def _draw(axes: "Axes", front: FrontResult, mode: int) -> None:
    x = closed_up(front.s_rel, front, 1.0)
    every = mark_every(front)
    sources = _sources(front)
    one = len(sources) == 1
    strong = method_style(max(sources, key=front.sources.count))
    axes.plot(
        x,
        closed_up(front.K[:, mode], front),
        linewidth=2.4,
        markersize=5,
        markevery=every,
        label=f"reported ({reported_by(front)})",
        **(strong if one else strong | {"linestyle": "-", "marker": ""}),
    )
    for name in () if one else sources:
        there = np.array([source == name for source in front.sources])
        axes.plot(
            front.s_rel[there],
            front.K[there, mode],
            markersize=7,
            markeredgewidth=1.8,
            label=_from(name),
            zorder=3.5,
            **(method_style(name) | {"linestyle": "none"}),
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
    for name, K in _other_methods(front).items():
        axes.plot(
            x,
            closed_up(K[:, mode], front),
            label=METHOD_NAMES.get(name, name),
            markevery=(every // 2, every),
            **thin,
            **method_style(name),
        )
    for number, comparison in enumerate(front.comparisons):
        axes.plot(
            x,
            closed_up(comparison.K[:, mode], front),
            label=plain_text(comparison.source, _MOST),
            markevery=(every // 3, every),
            **thin,
            **_PUBLISHED[number % len(_PUBLISHED)],
        )


def _other_methods(front: FrontResult) -> dict[str, FloatArray]:
    """K of the methods whose K is not the reported one everywhere."""
    return {
        name: method.K for name, method in front.methods.items() if set(front.sources) != {name}
    }


def method_style(name: str) -> dict[str, Any]:
    return _STYLES.get(name, _ANOTHER)


def _sources(front: FrontResult) -> list[str]:
    """The methods that K is taken from, each once."""
    return list(dict.fromkeys(front.sources))


def _from(name: str) -> str:
    return f"K from {METHOD_NAMES.get(name, name)}"


def _taken_from_others(front: FrontResult) -> tuple[str, ...]:
    """A caption where K is taken from one method here and from another there."""
    if len(_sources(front)) < 2:
        return ()
    others = sum(name != "interaction" for name in front.sources)
    return (
        f"At {others} of {len(front)} stations K is not the interaction integral's, as marked: the "
        "curve may jump where the method changes.",
    )


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


def _leaving(front: FrontResult, modes: Sequence[int]) -> tuple[str, ...]:
    """A caption on curves that leave their panel at an end."""
    largest = largest_K([front])
    curves = [(METHOD_NAMES.get(name, name), K) for name, K in _other_methods(front).items()]
    curves += [(plain_text(one.source, _MOST), one.K) for one in front.comparisons]
    names = []
    for name, K in () if front.closed else curves:
        for mode in modes:
            low, high = limits_of([front.K[:, mode], *_also_fitted(front, mode)], largest)
            ends = K[[0, -1], mode]
            if ((ends < low) | (ends > high)).any():
                names.append(name)
    if not names:
        return ()
    return (f"Beyond the panel at an end of the front: {', '.join(dict.fromkeys(names))}.",)


def _circle_flagged(axes: "Axes", front: FrontResult, mode: int) -> None:
    flagged = np.array([bool(flag) for flag in front.flags])
    if flagged.any():
        axes.plot(
            front.s_rel[flagged],
            front.K[flagged, mode],
            linestyle="none",
            marker="o",
            markersize=11,
            markerfacecolor="none",
            markeredgecolor=INK,
            label="flagged",
        )
