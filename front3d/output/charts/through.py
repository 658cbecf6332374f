"""K against the depth, beside the section of the crack: for surface, corner and through cracks."""

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from front3d.output.charts.along import reported_by
from front3d.output.charts.panels import (
    LEAST_SPAN,
    drawn_modes,
    largest_K,
    layer_entry,
    layer_names,
)
from front3d.output.charts.style import (
    BODY,
    CRACK,
    INK,
    LAYER,
    MEDIUM,
    MODE_LABELS,
    MODE_STYLES,
    MUTED,
    SMALL,
    WIDTH,
    dress,
    in_unit,
    layer_lengths,
    legend,
    legend_rows,
    mark_every,
    mathtext,
    new_figure,
    plain_text,
    second_unit,
    widen,
)
from front3d.output.shape import Section
from front3d.output.trust import rings_of
from front3d.results import FrontResult
from front3d.units import Units

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

# Inches: the panels, and the room around them.
_TALLEST, _LOWEST, _WIDEST = 3.7, 2.5, 4.0
_LEFT, _GAP, _RIGHT, _ABOVE, _BELOW = 0.95, 0.25, 0.35, 0.6, 0.65
_SMALL_MODE = 0.02  # a mode below this part of the largest K has no curve of its own


def through_thickness(front: FrontResult, section: Section, units: Units) -> "Figure":
    """The section on the left, K on the right at the same depths."""
    largest = largest_K([front])
    modes = [
        k
        for k in drawn_modes([front])
        if np.nanmax(np.abs(front.K[:, k]), initial=0.0) >= _SMALL_MODE * largest
    ] or [0]
    captions = [f"K by the {reported_by(front)}."]
    if len(modes) < 3:
        names = " and ".join(MODE_LABELS[k] for k in range(3) if k not in modes)
        captions[0] += f" {names} below {100 * _SMALL_MODE:g} % of the largest K: not drawn."
    place = _placed(section)
    what = "through the thickness" if section.kind == "through" else "over the depth"
    title = f"Stress intensity {what}, front {front.front}, step {plain_text(front.step)}"
    entries = [f"{MODE_LABELS[k]}{name}" for k in modes for _, name in _branches(section)]
    figure = new_figure(
        _ABOVE + place.height + _BELOW,
        title,
        captions,
        legend_rows(entries + layer_names(front)),
    )
    total = figure.get_figheight()
    bottom = float(figure.get_layout_engine().get()["rect"][1]) + _BELOW / total  # type: ignore[union-attr]
    figure.set_layout_engine("none")
    start = _LEFT + place.width + _GAP

    def box(left: float, width: float) -> tuple[float, float, float, float]:
        return (left / WIDTH, bottom, width / WIDTH, place.height / total)

    side = figure.add_axes(box(_LEFT, place.width))
    chart = figure.add_axes(box(start, WIDTH - start - _RIGHT), sharey=side)
    _draw_section(side, front, section, place, units)
    _draw_curves(chart, front, section, modes, largest, units)
    for axes in (side, chart):
        axes.set_ylim(*place.depths[::-1])  # depth grows downwards
        _shade_layers(axes, front, section)
    layer_entry(chart, front)
    legend(figure, chart)
    return figure


@dataclass(frozen=True, slots=True)
class _Place:
    """Size of the section's panel in inches, its limits, and how much its width is compressed."""

    width: float
    height: float
    across: tuple[float, float]
    depths: tuple[float, float]
    narrowed: float


def _placed(section: Section) -> _Place:
    """True to scale where it fits, or compressed in width."""
    low, high = float(section.depth.min()), float(section.depth.max())
    if section.kind != "through":
        low, high = low - 0.06 * (high - low), high + 0.08 * (high - low)
    drawn = np.append(section.outline[:, 0], section.across)
    left, right = float(drawn.min()), float(drawn.max())
    margin = 0.08 * max(right - left, 0.5 * (high - low))
    left, right = left - (0.0 if section.kind == "through" else margin), right + 2 * margin
    ratio = (right - left) / (high - low)
    height = min(_TALLEST, max(_LOWEST, _WIDEST / ratio))
    width = min(_WIDEST, ratio * height)
    return _Place(width, height, (left, right), (low, high), ratio * height / width)


def _draw_section(
    axes: "Axes", front: FrontResult, section: Section, place: _Place, units: Units
) -> None:
    from scipy.interpolate import CubicSpline

    dress(axes)
    axes.grid(False)
    low, high = place.depths
    axes.axhspan(max(low, 0.0), high, color=BODY, linewidth=0, zorder=0)
    stations = np.stack([section.across, section.depth], axis=1)
    fine = np.interp(
        np.linspace(0, len(front) - 1, 20 * len(front)), np.arange(len(front)), front.s
    )
    curve = CubicSpline(front.s, stations)(fine)  # through the stations, as the front runs
    corners = section.outline[len(stations) :]
    axes.fill(*np.vstack([curve, corners]).T, facecolor=CRACK, edgecolor="none", zorder=1)
    axes.plot(*curve.T, color=INK, linewidth=2.2, zorder=2)
    axes.axhline(0.0, color=INK, linewidth=1.2, zorder=2)
    middle = int(np.argmin(np.abs(section.depth - section.depth.mean())))
    x = 0.0 if _returns(section) else (section.outline[:, 0].min() + section.across[middle]) / 2
    y = 0.35 * section.depth.max() if section.kind != "through" else section.depth[middle]
    axes.text(x, float(y), "crack", fontsize=SMALL, color=INK, ha="center", va="center", zorder=3)
    axes.set_xlim(*place.across)
    axes.locator_params(axis="x", nbins=max(3, round(2 * place.width)))
    words = in_unit("section", units.length)
    if place.narrowed > 1.02:
        words += f", width drawn {place.narrowed:.2g} times narrower"
    axes.set_xlabel(words, fontsize=SMALL)
    axes.set_ylabel(in_unit(section.depth_name, units.length), fontsize=MEDIUM)


def _draw_curves(
    axes: "Axes",
    front: FrontResult,
    section: Section,
    modes: list[int],
    largest: float,
    units: Units,
) -> None:
    dress(axes)
    axes.tick_params(labelleft=False)
    halves = _branches(section)
    rings = rings_of(front)
    for mode in modes:
        for number, (branch, name) in enumerate(halves):
            if rings is not None:
                compared = rings.K[rings.compared][:, branch, mode]
                axes.fill_betweenx(
                    section.depth[branch],
                    compared.min(axis=0),
                    compared.max(axis=0),
                    color=MODE_STYLES[mode]["color"],
                    alpha=0.25,
                    linewidth=0,
                )
            axes.plot(
                front.K[branch, mode],
                section.depth[branch],
                linewidth=2.2 - 0.9 * number,
                markersize=4.5 + 4.5 * number,
                markerfacecolor="none" if number else None,
                markevery=mark_every(front),
                label=f"{MODE_LABELS[mode]}{name}",
                **MODE_STYLES[mode],
            )
    axes.axhline(0.0, color=INK, linewidth=1.2, zorder=0.5)
    if len(modes) > 1:
        axes.axvline(0.0, color=MUTED, linewidth=0.8, zorder=0.5)
    values = front.K[:, modes]
    finite = values[np.isfinite(values)]
    if finite.size:
        axes.set_xlim(*widen(float(finite.min()), float(finite.max()), LEAST_SPAN * largest))
    unit = mathtext(units.K_label) if units.named else ""
    axes.set_xlabel(in_unit("K", unit), fontsize=MEDIUM)
    second_unit(axes, units, on_top=True)


def _branches(section: Section) -> list[tuple[slice, str]]:
    """The halves of a front that comes back to its surface, one curve each; else the whole."""
    if _returns(section):
        deepest = int(np.argmax(section.depth))
        return [
            (slice(0, deepest + 1), ", from s = 0 down"),
            (slice(deepest, None), ", up to s = L"),
        ]
    return [(slice(None), "")]


def _returns(section: Section) -> bool:
    """Whether the front comes back to the surface that it started from."""
    deepest = int(np.argmax(section.depth))
    return section.kind == "surface" and 0 < deepest < len(section.depth) - 1


def _shade_layers(axes: "Axes", front: FrontResult, section: Section) -> None:
    first, last = layer_lengths(front)
    for s, station, width in ((first, 0, first), (front.length - last, -1, last)):
        if width > 0:
            edge, inner = section.depth[station], np.interp(s, front.s, section.depth)
            low, high = sorted((float(edge), float(inner)))
            axes.axhspan(low, high, color=LAYER, linewidth=0, zorder=0.2, alpha=0.8)
