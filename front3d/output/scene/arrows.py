"""Arrows over a scene, with their letters: the frame of a station, and the axes x, y and z.

Lengths are pixels of the scene's picture, as they suit the still picture: 13 points, its letters,
take 30.7 of its 1040 x 780 pixels.  `Letters` says what they are elsewhere.
"""

from dataclasses import dataclass
from typing import Any

import numpy as np

from front3d.arrays import FloatArray
from front3d.output.scene.camera import View
from front3d.output.scene.drawing import INK

SHAPE = (1040, 780)
"""Pixels of the still picture's scene, 4 to 3."""

MUTED = "#555555"
ARROW = 0.15
"""Length of a frame's arrows in diameters of the front."""

SIZE, EM = 13.0, 30.7  # of the still picture's letters: points, and pixels


@dataclass(frozen=True, slots=True)
class Letters:
    """The size of a picture's letters: in points, and in pixels."""

    points: float = SIZE
    pixels: float = EM

    @property
    def grain(self) -> float:
        """A length in pixels against the still picture's."""
        return self.pixels / EM

    @property
    def stroke(self) -> float:
        """A width in points against the still picture's."""
        return self.points / SIZE


STILL = Letters()


def draw_frame(
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
