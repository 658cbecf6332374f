"""The right half of the window: the picked station's numbers, its chart, and the buttons.

Drawn by the chart library alone, and asked by it what a click means: no window is needed for
either.  Pixels count from the upper left corner.
"""

import io
from dataclasses import dataclass, replace
from pathlib import Path
from textwrap import fill
from typing import Any

import numpy as np

from front3d.arrays import FloatArray
from front3d.output.charts.along import METHOD_NAMES, method_style
from front3d.output.charts.panels import LEAST_SPAN
from front3d.output.charts.style import (
    BLUE,
    GRID,
    INK,
    LAYER,
    MUTED,
    closed_up,
    dress,
    in_unit,
    layer_lengths,
    plain_text,
    widen,
)
from front3d.output.files import write_whole
from front3d.output.saved import Saved
from front3d.output.scene.quantity import LABELS, QUANTITIES, SHORT, colour_scale, unit_of
from front3d.output.scene.quantity import values_of as all_values
from front3d.output.scene.surface import steps_of
from front3d.output.shape import section_of
from front3d.output.trust import rings_of
from front3d.output.window.layers import blank, bytes_of, keep, laid_over
from front3d.output.window.state import (
    CHANGES,
    DEPTH,
    MOST,
    Change,
    Shown,
    at,
    first_shown,
    front_of,
    fronts_of,
    numbers,
    with_opening,
)
from front3d.results import MODES, Evaluation, FrontResult

_SMALL, _PLAIN = 9.5, 11.0


@dataclass(frozen=True, slots=True, eq=False)
class Panel:
    """A drawn panel.

    Attributes
    ----------
    image : (height, width, 3) bytes
    below : (height, width, 4) bytes of it that do not depend on the picked station
    figures : to be tested
    spots : left, top, right, bottom of each button, and what it asks for
    slider : the same box of the slider
    stations : (n, 2) pixels of the curve's stations
    chart : box of the chart
    """

    image: Any
    below: Any
    figures: tuple[Any, Any]
    spots: dict[str, tuple[float, float, float, float]]
    slider: tuple[float, float, float, float]
    stations: FloatArray
    chart: tuple[float, float, float, float]


def draw_panel(
    evaluation: Evaluation,
    shown: Shown,
    size: tuple[int, int],
    kept: dict[Any, Panel] | None = None,
) -> Panel:
    """The panel of `size` (width, height) pixels; at least about 500 x 600 to be legible.

    `kept` holds panels drawn before: where only another station is picked, their chart is used.
    """
    key = (replace(shown, station=0), size)
    before: Panel | None = (kept or {}).get(key)
    if before is None:
        before = keep(kept, key, _without_pick(evaluation, shown, size))
    over = blank(size, clear=True)
    _draw_pick(over, evaluation, shown, before, size)
    image = laid_over(before.below, bytes_of(over))[:, :, :3].copy()
    return replace(before, image=image, figures=(before.figures[0], over))


def _without_pick(evaluation: Evaluation, shown: Shown, size: tuple[int, int]) -> Panel:
    """Title, chart and buttons."""
    width, height = size
    figure = blank(size, clear=False)
    front = front_of(evaluation, shown)
    name = steps_of(evaluation.fronts)[shown.step]
    title = f"{LABELS[shown.quantity]}, front {front.front}, step {plain_text(name, 30)}"
    figure.text(0.5, 1 - 12 / height, title, fontsize=13, color=INK, ha="center", va="top")
    top, bottom = 134.0, height - 252.0
    box = (0.145, 1 - bottom / height, 0.82, (bottom - top) / height)
    axes = figure.add_axes(box)
    across = _draw_chart(axes, evaluation, front, shown)
    spots, slider = _draw_buttons(figure, evaluation, shown, size)
    below = bytes_of(figure)
    pixels = axes.transData.transform(np.nan_to_num(across))
    pixels[:, 1] = height - pixels[:, 1]
    chart = (box[0] * width, top, (box[0] + box[2]) * width, bottom)
    return Panel(below[:, :, :3], below, (figure, figure), spots, slider, pixels, chart)


def _draw_pick(
    figure: Any, evaluation: Evaluation, shown: Shown, panel: Panel, size: tuple[int, int]
) -> None:
    """The numbers of the picked station, and its place in the chart."""
    width, height = size
    for k, line in enumerate(numbers(evaluation, shown)):
        figure.text(0.03, 1 - (46 + 19 * k) / height, line, fontsize=_SMALL, color=INK, va="top")
    left, top, right, bottom = panel.chart
    axes = figure.add_axes((0, 0, 1, 1))
    axes.set_xlim(0, width)
    axes.set_ylim(height, 0)
    axes.set_axis_off()
    x, y = panel.stations[shown.station]
    upright = shown.against == DEPTH and section_of(front_of(evaluation, shown)) is not None
    ends = ([left, right], [y, y]) if upright else ([x, x], [top, bottom])
    axes.plot(*ends, color=INK, linewidth=1.0)
    if top <= y <= bottom and left <= x <= right:
        axes.plot(
            [x], [y], marker="o", markersize=11, markerfacecolor="none", markeredgewidth=2.2,
            color=INK,
        )  # fmt: skip


def asked(panel: Panel, x: float, y: float, shown: Shown) -> Change | str | None:
    """What a click at a pixel asks for: a change of what is shown, a doing of the window, or
    nothing.
    """
    for name, box in panel.spots.items():
        if _within(box, x, y):
            return CHANGES.get(name, name)
    if _within(panel.slider, x, y, 8):
        left, _, right, _ = panel.slider
        return _always(with_opening(shown, (x - left) / (right - left)))
    if _within(panel.chart, x, y, 6):
        near = int(np.argmin(np.hypot(*(panel.stations - (x, y)).T)))
        return _always(at(shown, (shown.front, near)))
    return None


def _always(shown: Shown) -> Change:
    return lambda _, __: shown


def _within(box: tuple[float, float, float, float], x: float, y: float, more: float = 0.0) -> bool:
    left, top, right, bottom = box
    return left - more <= x <= right + more and top - more <= y <= bottom + more


def _draw_chart(axes: Any, evaluation: Evaluation, front: FrontResult, shown: Shown) -> FloatArray:
    """Curve, band of the rings, other methods; the stations (n, 2) as drawn."""
    units, quantity = evaluation.units, shown.quantity
    scale = colour_scale(fronts_of(evaluation, shown.step), quantity)
    values = all_values(front, quantity, scale.words)
    section = section_of(front) if shown.against == DEPTH else None
    upright = section is not None
    x = section.depth if section is not None else front.s_rel
    dress(axes)
    axes.tick_params(labelsize=_SMALL)

    def line(K: FloatArray, **style: Any) -> None:
        if upright:
            axes.plot(K, x, **style)
        else:
            axes.plot(closed_up(x, front, 1.0), closed_up(K, front), **style)

    curves = [values]
    if quantity in MODES:
        mode = MODES.index(quantity)
        rings = rings_of(front)
        if rings is not None:
            band = rings.K[rings.compared, :, mode]
            shade = axes.fill_betweenx if upright else axes.fill_between
            low, high = (closed_up(end, front) for end in (band.min(axis=0), band.max(axis=0)))
            ends = closed_up(x, front, 1.0) if not upright else x
            shade(ends, low, high, color=BLUE, alpha=0.25, linewidth=0, label="range over rings")
        for name, method in front.methods.items():
            if set(front.sources) != {name}:
                look = method_style(name) | {"marker": "", "linewidth": 1.2}
                line(method.K[:, mode], label=METHOD_NAMES.get(name, name), **look)
                inner = slice(None) if front.closed else slice(1, -1)
                curves.append(method.K[inner, mode])
    source = max(dict.fromkeys(front.sources), key=front.sources.count)
    own: dict[str, Any] = {"color": BLUE, "linewidth": 2.0, "marker": "o", "markersize": 4}
    if quantity in MODES:
        own |= {"color": method_style(source)["color"]}
    if scale.words:
        own |= {"linestyle": "none"}
    line(values, label="reported" if quantity in MODES else None, **own)
    stations = np.stack([values, x] if upright else [x, values], axis=1)
    _shade(axes, front, upright, x)
    _dress_value(axes, curves, scale, upright, in_unit(SHORT[quantity], unit_of(quantity, units)))
    if section is not None:
        label = in_unit(section.depth_name, units.length)
        axes.set_ylabel(label, fontsize=_PLAIN)
        axes.invert_yaxis()
    else:
        label = "position along the front, s / L"
        if shown.against == DEPTH:
            label += "   (no depth: closed, or not plane)"
        axes.set_xlabel(label, fontsize=_PLAIN)
        axes.set_xlim(-0.015, 1.015)
    handles, names = axes.get_legend_handles_labels()
    if handles:
        axes.legend(
            handles[::-1], names[::-1], loc="lower left", bbox_to_anchor=(0, 1.0, 1, 0.1),
            mode="expand", ncols=4, fontsize=8.5, frameon=False, borderaxespad=0.1,
        )  # fmt: skip
    return stations


def _dress_value(
    axes: Any, curves: list[FloatArray], scale: Any, upright: bool, label: str
) -> None:
    """Limits, ticks and name of the axis of the quantity."""
    limits = axes.set_xlim if upright else axes.set_ylim
    axis = axes.xaxis if upright else axes.yaxis
    axis.set_label_text(label, fontsize=_PLAIN)
    if scale.words:
        limits(scale.low, scale.high)
        axis.set_ticks(
            range(len(scale.words)), [_wrapped(w) for w in scale.words], fontsize=8,
            rotation=0 if upright else 90, **({} if upright else {"va": "center"}),
        )  # fmt: skip
        return
    drawn = np.concatenate([np.ravel(c) for c in curves])
    finite = drawn[np.isfinite(drawn)]
    if finite.size:
        # As long as the scale of the scene's colours at least, so that scatter stays small.
        least = max(LEAST_SPAN * float(np.abs(finite).max()), 0.999 * (scale.high - scale.low))
        limits(*widen(float(finite.min()), float(finite.max()), least))


def _shade(axes: Any, front: FrontResult, upright: bool, x: FloatArray) -> None:
    """The layer in which a free surface is felt."""
    first, last = layer_lengths(front)
    for width, ends in ((first, (0.0, first)), (last, (front.length - last, front.length))):
        if width > 0:
            low, high = np.interp(ends, front.s, x)
            span = axes.axhspan if upright else axes.axvspan
            span(low, high, color=LAYER, linewidth=0, zorder=0.1)


def _draw_buttons(
    figure: Any, evaluation: Evaluation, shown: Shown, size: tuple[int, int]
) -> tuple[dict[str, tuple[float, float, float, float]], tuple[float, float, float, float]]:
    """Rows of buttons with plain words, each with its key; and the slider of the opening."""
    width, height = size
    axes = figure.add_axes((0, 0, 1, 190 / height))
    axes.set_xlim(0, width)
    axes.set_ylim(height, height - 190)
    axes.set_axis_off()
    spots: dict[str, tuple[float, float, float, float]] = {}
    steps, fronts = steps_of(evaluation.fronts), fronts_of(evaluation, shown.step)

    def row(top: float, words: dict[str, tuple[str, bool]]) -> None:
        gap, left = 8.0, 14.0
        each = (width - 2 * left - gap * (len(words) - 1)) / len(words)
        for k, (name, (text, on)) in enumerate(words.items()):
            start = left + k * (each + gap)
            box = (start, top, start + each, top + 30.0)
            spots[name] = box
            _box(axes, box, text, on)

    y = height - 182.0
    quantities = {
        q: (f"{SHORT[q]} ({k + 1})", q == shown.quantity) for k, q in enumerate(QUANTITIES)
    }
    row(y, quantities)
    choices: dict[str, tuple[str, bool]] = {}
    if len(steps) > 1:
        choices["next step"] = (f"next step (n): {shown.step + 1} of {len(steps)}", False)
    if len(fronts) > 1:
        choices["next front"] = (f"next front (f): {shown.front + 1} of {len(fronts)}", False)
    against = "depth" if shown.against != DEPTH else "position"
    choices["other axis"] = (f"chart over {against} (a)", False)
    row(y + 38, choices)
    row(
        y + 76,
        {
            "rings": ("rings (i)", shown.rings),
            "ribbon": ("growth (g)", shown.ribbon),
            "look again": ("look again (h)", False),
            "save picture": ("save picture (s)", False),
        },
    )
    middle = y + 133
    left, right = 175.0, width - 30.0
    axes.text(14, middle, "opening (+ / -)", fontsize=_PLAIN, color=INK, va="center")
    axes.plot([left, right], [middle, middle], color=MUTED, linewidth=3, solid_capstyle="round")
    knob = left + (right - left) * shown.opening / MOST
    axes.plot([knob], [middle], marker="o", markersize=13, color=BLUE, markeredgecolor=INK)
    help_ = "click a station here or in the scene, or use the arrow keys; drag the scene to turn it"
    axes.text(width / 2, height - 12, help_, fontsize=8.5, color=MUTED, ha="center", va="center")
    return spots, (left, middle - 12, right, middle + 12)


def _box(axes: Any, box: tuple[float, float, float, float], text: str, on: bool) -> None:
    from matplotlib.patches import FancyBboxPatch

    left, top, right, bottom = box
    axes.add_patch(
        FancyBboxPatch(
            (left + 4, top + 4),
            right - left - 8,
            bottom - top - 8,
            boxstyle="round,pad=4",
            facecolor=INK if on else "#f4f4f4",
            edgecolor=INK if on else GRID,
            linewidth=1.2,
        )
    )
    middle = ((left + right) / 2, (top + bottom) / 2)
    axes.text(*middle, text, fontsize=10, color="white" if on else INK, ha="center", va="center")


def _wrapped(words: str) -> str:
    return fill(words, 18)


def save_panel(saved: Saved) -> Path:
    """The panel alone as a PNG in the folder of the results, where no scene can be drawn."""
    shown = first_shown(saved.evaluation)
    image = draw_panel(saved.evaluation, shown, (700, 820)).image
    return write_whole(saved.folder / f"view_{shown.quantity}.png", png_of(image))


def png_of(image: Any) -> bytes:
    from matplotlib.image import imsave

    out = io.BytesIO()
    imsave(out, image, format="png")
    return out.getvalue()
