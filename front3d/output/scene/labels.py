"""The words of a scene: marked stations and the scale; drawn over it by the chart library."""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from front3d.arrays import FloatArray
from front3d.output.charts.style import mathtext, text_width
from front3d.output.scene.arrows import ARROW, EM, SHAPE, SIZE, STILL, Letters, draw_frame
from front3d.output.scene.camera import View, pixels
from front3d.output.scene.drawing import INK, Place
from front3d.output.scene.geometry import arrow_tips, size_of, smooth_curve
from front3d.output.scene.quantity import (
    LABELS,
    SHORT,
    Scale,
    colour_of,
    colours,
    shown_value,
    unit_of,
)
from front3d.results import FrontResult
from front3d.units import Units

_LINE, _PAD = 42.0, 12.0  # of a box of words: height of a line, margin


@dataclass(frozen=True, slots=True)
class Mark:
    """Words that point to a station."""

    place: Place
    text: str
    bold: bool = False


def words_of(
    word: str, front: FrontResult, station: int, scale: Scale, units: Units, *, short: bool = False
) -> str:
    """The value of the quantity drawn at a station, on one line or more."""
    if scale.words:
        return f"{word}\n{front.flags[station] or scale.words[0]}".strip()
    value = shown_value((front,), front, station, scale.quantity)
    unit = unit_of(scale.quantity, units)
    space = "" if scale.quantity == "psi" or not unit else " "
    number = f"{value:.3g}" if scale.quantity == "psi" else _four(value)
    if not np.isfinite(value):
        number, space, unit = "no value", "", ""
    text = f"{word} {SHORT[scale.quantity]}".strip() + f"\n{number}{space}{unit}"
    factor = units.K_factor
    is_K = scale.quantity.startswith("K")
    other = factor is not None and (units.stress, units.length) != ("MPa", "m")
    if factor is not None and other and is_K and np.isfinite(value) and not short:
        text += f"\n{_four(value * factor)} {mathtext('MPa sqrt(m)')}"
    if front.flags[station] and not short:
        text += f"\n{front.flags[station]}"
    return text


def _four(value: float) -> str:
    """Four digits, noughts among them."""
    text = f"{value:#.4g}".rstrip(".")
    return "0" if value == 0 else text


def draw_marks(
    axes: Any,
    fronts: tuple[FrontResult, ...],
    marks: Sequence[Mark],
    arrows: Sequence[Place],
    view: View,
    scale: Scale,
    *,
    shape: tuple[int, int] = SHAPE,
    letters: Letters = STILL,
    room: tuple[int, int] | None = None,
    taken: FloatArray | None = None,
) -> list[Any]:
    """Dots in the colour of their value, boxes of words beside them, clear of the fronts and of
    each other; arrows of frames with letters at their tips.  The boxes, to be tested.

    `room` is what the boxes may take of `shape`; `taken` are points (n, 2) that they keep off.
    """
    curves = np.concatenate([pixels(smooth_curve(front)[0], view, shape) for front in fronts])
    obstacles = [curves] if taken is None else [curves, taken]
    for number, station in arrows:
        tips = arrow_tips(fronts[number], station, ARROW * size_of(fronts))
        start = pixels(fronts[number].positions[station], view, shape)
        obstacles += draw_frame(axes, start, pixels(tips, view, shape), curves, shape, letters)
    boxes: list[tuple[FloatArray, FloatArray]] = []
    drawn = []
    grain = letters.grain
    for mark in marks:
        number, station = mark.place
        x, y = pixels(fronts[number].positions[station], view, shape)
        axes.plot(
            [x], [y], marker="o", markersize=9.5 * letters.stroke, zorder=4.5, color=INK,
            markerfacecolor=colour_of(fronts[number], station, scale), markeredgecolor=INK,
            markeredgewidth=(2.4 if mark.bold else 1.4) * letters.stroke,
        )  # fmt: skip
        half = half_box(mark.text, grain)
        middle = place_for_words(
            np.array((x, y)), np.concatenate(obstacles), half, room or shape, boxes, grain
        )
        boxes.append((np.array(middle), half))
        drawn.append(
            axes.annotate(
                mark.text,
                (x, y),
                xytext=middle,
                ha="center",
                va="center",
                fontsize=letters.points,
                color=INK,
                zorder=5,
                bbox={
                    "boxstyle": "round,pad=0.3",
                    "facecolor": "white",
                    "edgecolor": INK,
                    "linewidth": (2.0 if mark.bold else 1.0) * letters.stroke,
                    "alpha": 0.92,
                },
                arrowprops={"arrowstyle": "-|>", "color": INK, "shrinkB": 6 * letters.stroke},
            )
        )
    return drawn


def half_box(text: str, grain: float = 1.0) -> FloatArray:
    """Half the width and height that a box of words takes."""
    lines = text.split("\n")
    width = max(text_width(line, SIZE) for line in lines) * EM / SIZE
    return grain * (np.array([width, _LINE * len(lines)]) / 2 + _PAD)


def place_for_words(
    peak: FloatArray,
    drawn: FloatArray,
    half: FloatArray,
    shape: tuple[int, int] = SHAPE,
    taken: Sequence[tuple[FloatArray, FloatArray]] = (),
    grain: float = 1.0,
) -> tuple[float, float]:
    """Middle of a box of words of half sizes `half` (2,) near `peak` that lies inside the picture,
    clear of the front and of other boxes.

    `drawn` (n, 2) are points of the fronts; `taken` are middles and half sizes of other boxes.
    """
    best, least = peak, np.inf
    centre = np.array(shape) / 2
    far = np.linalg.norm(drawn - peak, axis=1) > 30 * grain
    offset = (drawn - peak)[far]
    for distance in (1.0, 1.5, 2.0, 3.0, 4.5, 6.5):
        for angle in np.radians(np.arange(0, 360, 30) - 90):
            way = np.array([np.cos(angle), np.sin(angle)])
            # The nearest edge of the box is that far away, so that the pointer is seen.
            reach = (half + 35.0 * grain * distance) / np.maximum(np.abs(way), 1e-9)
            middle = peak + way * reach.min()
            outside = np.maximum(np.abs(middle - centre) + half - centre, 0).sum() / grain
            hidden = (np.abs(drawn - middle) < half + 12 * grain).all(axis=1).sum()
            over = sum((np.abs(m - middle) < half + h + 8 * grain).all() for m, h in taken)
            # A pointer over an arrow or its letter is worse than one that is longer.
            along = offset @ way
            beside = np.abs(offset @ (-way[1], way[0])) < 10 * grain
            crossed = (beside & (along > 0) & (along < reach.min())).sum()
            cost = 5000 * over + 1000 * hidden + 100 * outside + 30 * distance + 10 * crossed
            if cost < least:
                best, least = middle, cost
    return float(best[0]), float(best[1])


def draw_scale(
    figure: Any,
    place: tuple[float, float, float, float],
    scale: Scale,
    units: Units,
    size: float,
    *,
    flat: bool = False,
) -> None:
    """The scale of the colours with its unit, upright or `flat`; `size` is that of its letters in
    points.
    """
    from matplotlib.cm import ScalarMappable
    from matplotlib.colors import Normalize
    from matplotlib.ticker import MaxNLocator

    axes = figure.add_axes(place)
    bar = figure.colorbar(
        ScalarMappable(Normalize(scale.low, scale.high), colours(scale)),
        cax=axes,
        orientation="horizontal" if flat else "vertical",
    )
    axis = bar.ax.xaxis if flat else bar.ax.yaxis
    if scale.words:
        from textwrap import fill

        room = max(14, 60 // len(scale.words)) if flat else 14
        bar.set_ticks(list(range(len(scale.words))), labels=[fill(w, room) for w in scale.words])
        bar.ax.tick_params(labelsize=0.75 * size, length=0)
        bar.ax.set_title("flag", fontsize=size, color=INK, loc="left")
        return
    axis.set_major_locator(MaxNLocator(5, steps=[1, 2, 2.5, 5, 10]))
    bar.ax.tick_params(labelsize=0.9 * size)
    unit = unit_of(scale.quantity, units)
    label = LABELS[scale.quantity] + (f"  [{unit}]" if unit else "")
    bar.set_label(label, fontsize=size)
