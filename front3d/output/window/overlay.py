"""The words over the scene in the window: drawn by the chart library on clear ground."""

from dataclasses import dataclass
from textwrap import fill
from typing import Any

from front3d.output.scene.arrows import MUTED, Letters, draw_axes
from front3d.output.scene.camera import View
from front3d.output.scene.labels import draw_marks, draw_scale
from front3d.output.window.layers import DPI, blank, bytes_of, keep, laid_over
from front3d.output.window.model import Drawn
from front3d.results import CAUTION
from front3d.units import Units

LETTERS = Letters(11.0, 11.0 * DPI / 72)


@dataclass(frozen=True, slots=True, eq=False)
class Overlay:
    """Words over the scene.

    Attributes
    ----------
    image : (height, width, 4) bytes
    figures : to be tested
    """

    image: Any
    figures: tuple[Any, Any]


def draw_overlay(
    drawn: Drawn,
    view: View,
    units: Units,
    size: tuple[int, int],
    kept: dict[Any, tuple[Any, Any]] | None = None,
) -> Overlay:
    """Over a scene of `size` (width, height) pixels; `kept` holds what was drawn before that does
    not depend on the view and the picked station.
    """
    width, height = size
    key = (drawn.title, drawn.notes, drawn.scale, size)
    found = (kept or {}).get(key)
    if found is None:
        frame = _frame(drawn, units, size)
        found = keep(kept, key, (frame, bytes_of(frame)))
    frame, below = found
    figure = blank(size, clear=True)
    axes = figure.add_axes((0, 0, 1, 1))
    axes.set_xlim(0, width)
    axes.set_ylim(height, 0)
    axes.set_axis_off()
    taken = draw_axes(axes, view, (width, height - 30), LETTERS)
    draw_marks(
        axes, drawn.fronts, drawn.marks, drawn.arrows, view, drawn.scale,
        shape=size, letters=LETTERS, room=(width, height - 145), taken=taken,
    )  # fmt: skip
    return Overlay(laid_over(below, bytes_of(figure)), (frame, figure))


def _frame(drawn: Drawn, units: Units, size: tuple[int, int]) -> Any:
    """Title, notes, scale and caution."""
    width, height = size
    figure = blank(size, clear=True)
    figure.text(0.5, 1 - 12 / height, drawn.title, fontsize=13, ha="center", va="top")
    notes = "\n".join(drawn.notes)
    figure.text(0.5, 1 - 38 / height, notes, fontsize=9.5, ha="center", va="top")
    place = (0.28, 112 / height, 0.6, 16 / height)
    draw_scale(figure, place, drawn.scale, units, 11, flat=True)
    words = fill(CAUTION, max(40, width // 7))
    figure.text(0.5, 6 / height, words, fontsize=8, color=MUTED, ha="center", va="bottom")
    return figure
