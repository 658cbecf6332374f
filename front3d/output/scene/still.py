"""A scene as one PNG: the crack cut free, the whole solid beside it, marks, scale and words."""

import io
from dataclasses import dataclass
from textwrap import fill
from typing import TYPE_CHECKING, Any

import numpy as np

from front3d.output.charts.style import plain_text
from front3d.output.rendering import choose_window
from front3d.output.scene.arrows import ARROW, MUTED, SHAPE, STILL, Letters, draw_axes
from front3d.output.scene.camera import View, best_view, box_corners
from front3d.output.scene.drawing import INK, Extras, Place, add_solid, bring_forward
from front3d.output.scene.geometry import (
    Box,
    arrow_tips,
    clipped,
    close_up,
    kinked,
    near_the_origin,
    opened,
    opening_factor,
    size_of,
    widest_opening,
)
from front3d.output.scene.labels import (
    Mark,
    draw_marks,
    draw_scale,
    words_of,
)
from front3d.output.scene.quantity import LABELS, Scale, colour_scale, extremes
from front3d.output.scene.surface import Skin, skin
from front3d.results import CAUTION, FrontResult
from front3d.solid import Solid
from front3d.units import Units

if TYPE_CHECKING:
    from matplotlib.figure import Figure

RIBBON_WORDS = "ribbon: growth by the maximum tangential stress (Erdogan and Sih 1963)"
FRAME_WORDS = "arrows: $e_1$ growth, $e_2$ crack normal, $e_3$ along the front"
RING_WORDS = "circles: domains of the interaction integral"


@dataclass(frozen=True, slots=True)
class Look:
    """How a step is drawn.

    Attributes
    ----------
    quantity : one of QUANTITIES; K_I by default, or the mode that counts
    opening : how many times the opening of the crack is enlarged; by default, as suits its size
    arrows : (which front, station) with frame arrows; the peak's by default
    rings : whether the integration domains are outlined where arrows are
    ribbon : whether the direction of growth is drawn; by default, where it leaves the crack plane
    """

    quantity: str | None = None
    opening: float | None = None
    arrows: tuple[Place, ...] | None = None
    rings: bool = False
    ribbon: bool | None = None


def scene_png(
    solid: Solid, fronts: tuple[FrontResult, ...], units: Units, look: Look | None = None
) -> bytes:
    """PNG, 1200 pixels wide, of all `fronts` of one step.

    Call `rendering.why_no_pictures` first: without a graphics library drawing ends the process.
    """
    out = io.BytesIO()
    scene_figure(solid, fronts, units, look or Look()).savefig(out, format="png")
    return out.getvalue()


def scene_figure(
    solid: Solid, fronts: tuple[FrontResult, ...], units: Units, look: Look
) -> "Figure":
    choose_window()
    from matplotlib.figure import Figure

    solid, fronts = near_the_origin(solid, fronts)
    parts = skin(solid, fronts)
    scale = colour_scale(fronts, look.quantity)
    positions = np.concatenate([front.positions for front in fronts])
    box = close_up(positions, solid.points)
    marked = extremes(fronts, scale)
    arrows = look.arrows
    if arrows is None:
        arrows = tuple((number, i) for _, number, i in marked[:1])
    view = view_of(fronts, box, arrows)
    ribbon = kinked(fronts) if look.ribbon is None else look.ribbon
    widest = widest_opening(parts, 0)
    factor = opening_factor(widest, size_of(fronts)) if look.opening is None else look.opening
    near_parts = opened(clipped(parts, box), 0, factor)
    extras = Extras(arrows if look.rings else (), ribbon=ribbon)

    figure = Figure(figsize=(8.0, 6.0), dpi=150, facecolor="white")
    notes = ["; ".join([opening_words(factor, widest), *([FRAME_WORDS] if arrows else [])])]
    notes += [RIBBON_WORDS] if ribbon else []
    notes += [RING_WORDS] if extras.rings else []
    side = 0.765 - 0.03 * (len(notes) - 1)  # below the notes
    near = figure.add_axes((0.3825 - side / 2, 0.1, side, side))
    letters = Letters(STILL.points, STILL.pixels * 0.765 / side)
    near.imshow(_render(near_parts, fronts, scale, view, box, extras))
    near.set_axis_off()
    taken = draw_axes(near, view, letters=letters)
    marks = [
        Mark((number, i), words_of(word, fronts[number], i, scale, units))
        for word, number, i in marked
    ]
    draw_marks(near, fronts, marks, arrows, view, scale, letters=letters, taken=taken)
    extent = np.ptp(solid.points, axis=0)
    if np.linalg.norm(extent) > 1.3 * np.linalg.norm(box[1] - box[0]):
        whole = box_corners(solid.points.min(axis=0), solid.points.max(axis=0))
        far = figure.add_axes((0.765, 0.08, 0.235, 0.235))
        far.imshow(_render(parts, fronts, scale, best_view(fronts[0], whole), box, None))
        far.set_axis_off()
        far.set_title("whole solid", fontsize=11, color=MUTED, pad=2)
    draw_scale(figure, (0.83, 0.42, 0.028, 0.385), scale, units, 14)
    _draw_words(figure, fronts, scale, notes)
    return figure


def view_of(fronts: tuple[FrontResult, ...], box: Box, arrows: tuple[Place, ...]) -> View:
    """From where the picture is taken: with room for the letters at the tips of the arrows."""
    tips = [arrow_tips(fronts[n], i, 1.5 * ARROW * size_of(fronts)) for n, i in arrows]
    return best_view(fronts[0], np.concatenate([box_corners(*box), *tips]))


def opening_words(factor: float, widest: float) -> str:
    """What the reader must know about the opening that is drawn."""
    if not np.isfinite(widest):
        return "faces closed: this result holds no opening"
    if widest == 0 or factor == 0:
        return "faces drawn closed"
    return "faces opened as they are" if factor == 1 else f"faces opened {factor:,g} times"


def title_words(fronts: tuple[FrontResult, ...], scale: Scale) -> str:
    which = f"front {fronts[0].front}" if len(fronts) == 1 else f"{len(fronts)} fronts"
    return f"{LABELS[scale.quantity]} along {which}, step {plain_text(fronts[0].step, 40)}"


def _render(
    parts: Skin,
    fronts: tuple[FrontResult, ...],
    scale: Scale,
    view: View,
    box: Box,
    extras: Extras | None,
) -> Any:
    import pyvista as pv

    plotter: Any = pv.Plotter(off_screen=True, window_size=list(SHAPE))
    try:
        plotter.enable_anti_aliasing("ssaa")
        plotter.enable_depth_peeling(8)
        tubes = add_solid(plotter, parts, fronts, scale, view, box, extras)
        bring_forward(tubes, fronts, view.towards)
        return plotter.screenshot(None, return_img=True)
    finally:
        plotter.close()


def _draw_words(
    figure: "Figure", fronts: tuple[FrontResult, ...], scale: Scale, notes: list[str]
) -> None:
    words = [
        (0.965, title_words(fronts, scale), 15.0, INK, "top"),
        (0.915, "\n".join(notes), 10.5, INK, "top"),
        (0.012, fill(CAUTION, 110), 9.0, MUTED, "bottom"),
    ]
    for y, text, size, colour, side in words:
        figure.text(0.5, y, text, fontsize=size, color=colour, ha="center", va=side)
