"""The words of a scene: marked stations, axes, scale; drawn over it by the chart library.

Lengths are pixels of the scene's picture, as they suit the still picture: 13 points, its letters,
take 30.7 of its 1040 x 780 pixels.  `Letters` says what they are elsewhere.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from front3d.arrays import FloatArray
from front3d.output.charts.style import mathtext, text_width
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

SHAPE = (1040, 780)
"""Pixels of the still picture's scene, 4 to 3."""

MUTED = "#555555"
ARROW = 0.15
"""Length of a frame's arrows in diameters of the front."""

_LINE, _PAD = 42.0, 12.0  # of a box of words: height of a line, margin
_SIZE, _EM = 13.0, 30.7  # of the still picture's letters: points, and pixels


@dataclass(frozen=True, slots=True)
class Letters:
    """The size of a picture's letters: in points, and in pixels."""

    points: float = _SIZE
    pixels: float = _EM

    @property
    def grain(self) -> float:
        """A length in pixels against the still picture's."""
        return self.pixels / _EM

    @property
    def stroke(self) -> float:
        """A width in points against the still picture's."""
        return self.points / _SIZE


STILL = Letters()


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
    if is_K and factor is not None and (units.stress, units.length) != ("MPa", "m") and not short:
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
        obstacles += _frame(axes, start, pixels(tips, view, shape), curves, shape, letters)
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


def _frame(
    axes: Any,
    start: FloatArray,
    ends: FloatArray,
    curves: FloatArray,
    shape: tuple[int, int],
    letters: Letters,
) -> list[FloatArray]:
    """The arrows of a frame, each with its letter where it hides least; what they take.

    The last one runs along the front: thin, so that the front's colour is seen beside it.
    """
    grain, stroke = letters.grain, letters.stroke
    taken = [start + np.linspace(0, 1, 20)[:, None] * (end - start) for end in ends]
    for k, end in enumerate(ends):
        way = end - start
        far = max(float(np.linalg.norm(way)), 1.0)
        if far < 14 * grain:  # along the line of sight: the letter would name nothing
            continue
        along = k == 2
        _arrow(axes, start, end, (1.0 if along else 1.8) * stroke, 18 * stroke, halo=not along)
        others = np.concatenate([curves, *(taken[j] for j in range(len(taken)) if j != k)])
        middle = _beside_tip(end, way / far, others, shape, 24 * grain)
        letter = axes.text(
            *middle, f"$e_{k + 1}$", fontsize=letters.points, color=INK, ha="center", va="center"
        )
        letter.set_path_effects([_halo(3.5 * stroke)])
        corners = np.array([[-1, -1], [-1, 1], [1, -1], [1, 1]]) * 18 * grain
        taken.append(np.tile(middle + corners, (3, 1)))  # letters count for more than a curve
    return taken


def _beside_tip(
    tip: FloatArray, way: FloatArray, others: FloatArray, shape: tuple[int, int], away: float
) -> FloatArray:
    """Where a letter `away` from the tip of an arrow hides least; straight on, if it hides none."""
    best, least = tip + away * way, np.inf
    for k, degrees in enumerate((0, 45, -45, 90, -90, 125, -125)):
        turn = np.radians(degrees)
        turned = np.array([[np.cos(turn), -np.sin(turn)], [np.sin(turn), np.cos(turn)]]) @ way
        middle = tip + away * turned
        gap = float(np.linalg.norm(others - middle, axis=1).min())
        outside = np.maximum(np.abs(middle - np.array(shape) / 2) + away - np.array(shape) / 2, 0)
        cost = 10 * max(0.0, away - gap) + 20 * float(outside.sum()) + 0.2 * away * k
        if cost < least:
            best, least = middle, cost
    return np.asarray(best)


def _halo(width: float) -> Any:
    """A white rim, so that ink is seen on dark colours, too."""
    from matplotlib.patheffects import withStroke

    return withStroke(linewidth=width, foreground="white")


def _arrow(
    axes: Any,
    start: FloatArray,
    end: FloatArray,
    width: float,
    head: float,
    *,
    color: str = INK,
    halo: bool = True,
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
    if halo:
        arrow.set_path_effects([_halo(width + 2.5)])


def half_box(text: str, grain: float = 1.0) -> FloatArray:
    """Half the width and height that a box of words takes."""
    lines = text.split("\n")
    width = max(text_width(line, _SIZE) for line in lines) * _EM / _SIZE
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
    for distance in (1.0, 1.5, 2.0, 3.0, 4.5, 6.5):
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


def draw_axes(
    axes: Any, view: View, shape: tuple[int, int] = SHAPE, letters: Letters = STILL
) -> FloatArray:
    """The directions of x, y and z, in the lower left corner; the points (n, 2) that they take."""
    grain, stroke = letters.grain, letters.stroke
    origin = np.array([90.0 * grain, shape[1] - 75.0 * grain])
    taken = [origin]
    for k, name in enumerate("xyz"):
        arrow = 50 * grain * np.array([view.right[k], -view.up[k]])
        if np.linalg.norm(arrow) < 8 * grain:  # along the line of sight
            continue
        _arrow(axes, origin, origin + arrow, 1.3 * stroke, 13 * stroke, color=MUTED)
        x, y = origin + arrow + 18 * grain * arrow / np.linalg.norm(arrow)
        axes.text(x, y, name, fontsize=12 * stroke, color=INK, ha="center", va="center")
        taken += [origin + arrow, np.array((x, y))]
    return np.array(taken)


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
