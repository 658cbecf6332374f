"""The words of a scene: marked stations, axes, scale; drawn over it by the chart library.

Lengths are pixels of the scene's picture; `grain` is what a point of the still picture's letters
takes there, against the still picture itself, whose letters are 13 points in 1040 x 780 pixels.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from front3d.arrays import FloatArray
from front3d.output.charts.style import mathtext
from front3d.output.scene.camera import View, pixels
from front3d.output.scene.drawing import INK, Place
from front3d.output.scene.geometry import arrow_tips, size_of, smooth_curve
from front3d.output.scene.quantity import LABELS, SHORT, Scale, colours, shown_value, unit_of
from front3d.results import FrontResult
from front3d.units import Units

SHAPE = (1040, 780)
"""Pixels of the still picture's scene, 4 to 3."""

MUTED = "#555555"
ARROW = 0.15
"""Length of a frame's arrows in diameters of the front."""

_LINE, _PAD, _LETTER = 42.0, 12.0, 17.0  # of a box of words: height of a line, margin, a letter


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
    number = f"{value:.3g}" if scale.quantity == "psi" else f"{value:.4g}"
    text = f"{word} {SHORT[scale.quantity]}".strip() + f"\n{number}{space}{unit}"
    factor = units.K_factor
    is_K = scale.quantity.startswith("K")
    if is_K and factor is not None and (units.stress, units.length) != ("MPa", "m") and not short:
        text += f"\n{value * factor:.4g} {mathtext('MPa sqrt(m)')}"
    if front.flags[station] and not short:
        text += f"\n{front.flags[station]}"
    return text


def draw_marks(
    axes: Any,
    fronts: tuple[FrontResult, ...],
    marks: Sequence[Mark],
    arrows: Sequence[Place],
    view: View,
    shape: tuple[int, int] = SHAPE,
    grain: float = 1.0,
    room: tuple[int, int] | None = None,
) -> list[Any]:
    """Boxes of words beside their stations, clear of the fronts and of each other; letters at the
    tips of arrows.  The boxes, to be tested.  `room` is what they may take of `shape`.
    """
    curves = [pixels(smooth_curve(front)[0], view, shape) for front in fronts]
    obstacles = [np.concatenate(curves)]
    size = 13.0 * grain
    for number, station in arrows:
        tips = arrow_tips(fronts[number], station, ARROW * size_of(fronts))
        start = pixels(fronts[number].positions[station], view, shape)
        ends = pixels(tips, view, shape)
        for name, end in zip(("$e_1$", "$e_2$", "$e_3$"), ends, strict=True):
            way = end - start
            far = max(float(np.linalg.norm(way)), 1.0)
            if far < 14 * grain:  # along the line of sight: the letter would name nothing
                continue
            _arrow(axes, start, end, INK, 1.8 * grain, 18 * grain)
            x, y = end + way / far * 22 * grain
            letter = axes.text(x, y, name, fontsize=size, color=INK, ha="center", va="center")
            letter.set_path_effects([_halo(3.5 * grain)])
            obstacles.append(start + np.linspace(0, 1.0, 20)[:, None] * way)
            corners = np.array([[-1, -1], [-1, 1], [1, -1], [1, 1]]) * 18 * grain
            obstacles.append(
                np.tile(np.array((x, y)) + corners, (3, 1))
            )  # letters count for more than a curve
    taken: list[tuple[FloatArray, FloatArray]] = []
    boxes = []
    for mark in marks:
        number, station = mark.place
        x, y = pixels(fronts[number].positions[station], view, shape)
        half = half_box(mark.text, grain)
        middle = place_for_words(
            np.array((x, y)), np.concatenate(obstacles), half, room or shape, taken, grain
        )
        taken.append((np.array(middle), half))
        boxes.append(
            axes.annotate(
                mark.text,
                (x, y),
                xytext=middle,
                ha="center",
                va="center",
                fontsize=size,
                color=INK,
                zorder=5,
                bbox={
                    "boxstyle": "round,pad=0.3",
                    "facecolor": "white",
                    "edgecolor": INK,
                    "linewidth": (2.0 if mark.bold else 1.0) * grain,
                    "alpha": 0.92,
                },
                arrowprops={"arrowstyle": "-|>", "color": INK, "shrinkB": 5 * grain},
            )
        )
    return boxes


def _halo(width: float) -> Any:
    """A white rim, so that ink is seen on dark colours, too."""
    from matplotlib.patheffects import withStroke

    return withStroke(linewidth=width, foreground="white")


def _arrow(
    axes: Any, start: FloatArray, end: FloatArray, color: str, width: float, head: float
) -> None:
    arrow = axes.annotate(
        "",
        tuple(end),
        xytext=tuple(start),
        arrowprops={
            "arrowstyle": "-|>",
            "color": color,
            "linewidth": width,
            "mutation_scale": head,
            "shrinkA": 0,
            "shrinkB": 0,
        },
    ).arrow_patch
    arrow.set_path_effects([_halo(width + 2.5)])


def half_box(text: str, grain: float = 1.0) -> FloatArray:
    """Half the width and height that a box of words takes, generously."""
    # A dollar sign and what stands in a command of mathematics take no room.
    plain = (
        text.replace("$", "").replace("\\sqrt", "").replace("\\mathrm", "").replace("\\psi", "p")
    )
    lines = [line.replace("{", "").replace("}", "") for line in plain.split("\n")]
    width = max(map(len, lines)) * _LETTER
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
    for distance in (1.0, 1.5, 2.0, 3.0, 4.5):
        for angle in np.radians(np.arange(0, 360, 30) - 90):
            way = np.array([np.cos(angle), np.sin(angle)])
            # The nearest edge of the box is that far away, so that the pointer is seen.
            reach = (half + 35.0 * grain * distance) / np.maximum(np.abs(way), 1e-9)
            middle = peak + way * reach.min()
            outside = np.maximum(np.abs(middle - centre) + half - centre, 0).sum() / grain
            hidden = (np.abs(drawn - middle) < half + 12 * grain).all(axis=1).sum()
            over = sum((np.abs(m - middle) < half + h + 8 * grain).all() for m, h in taken)
            cost = 5000 * over + 1000 * hidden + 100 * outside + 30 * distance
            if cost < least:
                best, least = middle, cost
    return float(best[0]), float(best[1])


def draw_axes(axes: Any, view: View, shape: tuple[int, int] = SHAPE, grain: float = 1.0) -> None:
    """The directions of x, y and z, in the lower left corner."""
    origin = np.array([75.0 * grain, shape[1] - 70.0 * grain])
    for k, name in enumerate("xyz"):
        arrow = 50 * grain * np.array([view.right[k], -view.up[k]])
        if np.linalg.norm(arrow) < 8 * grain:  # along the line of sight
            continue
        _arrow(axes, origin, origin + arrow, MUTED, 1.3 * grain, 13 * grain)
        x, y = origin + arrow + 18 * grain * arrow / np.linalg.norm(arrow)
        axes.text(x, y, name, fontsize=12 * grain, color=INK, ha="center", va="center")


def draw_scale(
    figure: Any, place: tuple[float, float, float, float], scale: Scale, units: Units, size: float
) -> None:
    """The scale of the colours with its unit; `size` is that of its letters in points."""
    from matplotlib.cm import ScalarMappable
    from matplotlib.colors import Normalize
    from matplotlib.ticker import MaxNLocator

    axes = figure.add_axes(place)
    bar = figure.colorbar(
        ScalarMappable(Normalize(scale.low, scale.high), colours(scale)), cax=axes
    )
    if scale.words:
        from textwrap import fill

        bar.set_ticks(list(range(len(scale.words))), labels=[fill(w, 14) for w in scale.words])
        bar.ax.tick_params(labelsize=0.75 * size, length=0)
        bar.ax.set_title("flag", fontsize=size, color=INK, loc="left")
        return
    bar.ax.yaxis.set_major_locator(MaxNLocator(5, steps=[1, 2, 2.5, 5, 10]))
    bar.ax.tick_params(labelsize=0.9 * size)
    unit = unit_of(scale.quantity, units)
    label = LABELS[scale.quantity] + (f"  [{unit}]" if unit else "")
    bar.set_label(label, fontsize=size)
