"""The words over the scene in the window: drawn by the chart library on clear ground."""

from textwrap import fill
from typing import Any

import numpy as np

from front3d.output.scene.camera import View
from front3d.output.scene.labels import MUTED, draw_axes, draw_marks, draw_scale
from front3d.output.window.model import Drawn
from front3d.output.window.panel import DPI
from front3d.results import CAUTION
from front3d.units import Units


def draw_overlay(drawn: Drawn, view: View, units: Units, size: tuple[int, int]) -> tuple[Any, Any]:
    """(height, width, 4) bytes over a scene of `size` (width, height) pixels; and the figure."""
    from matplotlib.backends.backend_agg import FigureCanvasAgg
    from matplotlib.figure import Figure

    width, height = size
    figure = Figure(figsize=(width / DPI, height / DPI), dpi=DPI)
    figure.patch.set_alpha(0.0)
    canvas = FigureCanvasAgg(figure)
    axes = figure.add_axes((0, 0, 1, 1))
    axes.set_xlim(0, width)
    axes.set_ylim(height, 0)
    axes.set_axis_off()
    # The letters keep their 11 points; the still picture has 13 in 1040 of 1200 x 0.765 pixels.
    grain = 0.85
    draw_axes(axes, view, (width, height - 30), 0.85 * grain)
    room = (width - 120, height - 40)
    draw_marks(axes, drawn.fronts, drawn.marks, drawn.arrows, view, size, grain, room)
    figure.text(0.5, 1 - 12 / height, drawn.title, fontsize=13, ha="center", va="top")
    notes = "\n".join(drawn.notes)
    figure.text(0.5, 1 - 38 / height, notes, fontsize=9.5, ha="center", va="top")
    place = (1 - 95 / width, 1 - 350 / height, 22 / width, 250 / height)
    draw_scale(figure, place, drawn.scale, units, 11)
    words = fill(CAUTION, max(40, width // 7))
    figure.text(0.5, 6 / height, words, fontsize=8, color=MUTED, ha="center", va="bottom")
    canvas.draw()  # type: ignore[no-untyped-call]
    image = np.asarray(canvas.buffer_rgba())  # type: ignore[no-untyped-call]
    return image.copy(), figure
