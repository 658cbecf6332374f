"""The solid, its crack and its fronts put into a plotter."""

from dataclasses import dataclass
from typing import Any

import numpy as np

from front3d.arrays import FloatArray
from front3d.output.scene.camera import MARGIN, View
from front3d.output.scene.geometry import (
    OPEN,
    Box,
    kink_ribbon,
    ring_circles,
    size_of,
    tube,
)
from front3d.output.scene.quantity import NO_VALUE, Scale, colours
from front3d.output.scene.surface import Skin
from front3d.output.trust import rings_of
from front3d.results import FrontResult

BODY, EDGE, CRACK, INK = "#9fb0bf", "#3c4650", "#e9dcc3", "#222222"
RIBBON, RING = "#D55E00", "#5b2a86"
Place = tuple[int, int]
"""Which of the fronts drawn, and which of its stations."""


@dataclass(frozen=True, slots=True)
class Extras:
    """What is drawn beside solid, crack and fronts.

    rings : stations with the outlines of the integration domains, by place
    ribbon : whether the direction of growth is drawn along the fronts
    """

    rings: tuple[Place, ...] = ()
    ribbon: bool = False


def add_solid(
    plotter: Any,
    parts: Skin | None,
    fronts: tuple[FrontResult, ...],
    scale: Scale,
    view: View,
    box: Box,
    extras: Extras | None = None,
) -> list[Any]:
    """Body, crack faces and coloured fronts, seen from `view`; without `parts`, the fronts alone.
    The actors of the fronts.

    `box` says by its edges what was cut out of a larger solid.
    """
    plotter.set_background("white")
    if parts is not None:
        add_body(plotter, parts, box)
    tubes = add_fronts(plotter, fronts, scale, view, extras)
    if extras is not None:
        add_extras(plotter, fronts, view, extras)
    look_from(plotter, view)
    return tubes


def add_fronts(
    plotter: Any,
    fronts: tuple[FrontResult, ...],
    scale: Scale,
    view: View,
    extras: Extras | None = None,
) -> list[Any]:
    """The fronts in the colours of `scale`; their actors."""
    radius = 0.016 * view.half_height  # of a whole solid, where a small crack must be seen
    if extras is not None:
        radius = tube_radius(fronts, view, extras)
    return [
        plotter.add_mesh(
            tube(front, scale, radius),
            scalars="value",
            cmap=colours(scale),
            clim=(scale.low, scale.high),
            nan_color=NO_VALUE,
            show_scalar_bar=False,
            smooth_shading=True,
            ambient=0.35,
        )
        for front in fronts
    ]


def bring_forward(tubes: list[Any], fronts: tuple[FrontResult, ...], towards: FloatArray) -> None:
    """Move the drawn fronts towards the viewer, past the opened faces, which would hide them: in a
    parallel projection they stay where they are seen.
    """
    for actor in tubes:
        actor.SetPosition(*(OPEN * size_of(fronts) * towards))


def tube_radius(fronts: tuple[FrontResult, ...], view: View, extras: Extras) -> float:
    """As suits the picture; thinner inside of rings that are drawn, so that they are seen."""
    radius = min(0.016 * view.half_height, 0.012 * size_of(fronts))
    found = [rings_of(fronts[n]) for n, _ in extras.rings]
    inner = [r.radii[:, i].min() for r, (_, i) in zip(found, extras.rings, strict=True) if r]
    return float(min([radius, *(max(0.5 * r, 0.3 * radius) for r in inner)]))


def look_from(plotter: Any, view: View) -> None:
    plotter.enable_parallel_projection()
    camera = plotter.camera
    camera.focal_point = view.focus
    camera.position = view.focus + 20 * view.half_height * view.towards
    camera.up = view.up
    camera.parallel_scale = MARGIN * view.half_height
    plotter.reset_camera_clipping_range()


def add_body(plotter: Any, parts: Skin, box: Box) -> list[Any]:
    """The outside, translucent, the crack faces, and the edges of the box; the actors."""
    import pyvista as pv

    actors = []
    if parts.outside.n_cells:
        actors.append(plotter.add_mesh(parts.outside, color=BODY, opacity=0.22, lighting=True))
        edges = parts.outside.extract_feature_edges(30, non_manifold_edges=False)
        if edges.n_cells:
            actors.append(plotter.add_mesh(edges, color=EDGE, line_width=2))
    if parts.crack.n_cells:
        actors.append(plotter.add_mesh(parts.crack, color=CRACK, lighting=True))
        lips = parts.crack.extract_feature_edges(
            180, feature_edges=False, non_manifold_edges=False, manifold_edges=False
        )
        if lips.n_cells:
            actors.append(plotter.add_mesh(lips, color=EDGE, line_width=2))
    frame = pv.Box(np.stack(box, axis=1).ravel()).extract_all_edges()
    actors.append(plotter.add_mesh(frame, color=EDGE, line_width=1, opacity=0.5))
    return actors


def add_extras(
    plotter: Any, fronts: tuple[FrontResult, ...], view: View, extras: Extras
) -> list[Any]:
    """Ribbon and rings; the actors, to be taken away again."""
    import pyvista as pv

    actors, size = [], size_of(fronts)
    thin = 0.006 * view.half_height
    if extras.ribbon:
        for front in fronts:
            strip = kink_ribbon(front, size)
            if strip is not None:
                actors.append(plotter.add_mesh(strip, color=RIBBON, opacity=0.75, ambient=0.3))
                rim = strip.extract_feature_edges(180, feature_edges=False, manifold_edges=False)
                actors.append(plotter.add_mesh(rim, color=RIBBON, line_width=2))
    for number, station in extras.rings:
        for circle in ring_circles(fronts[number], station):
            line = pv.PolyData(circle, lines=np.r_[len(circle), np.arange(len(circle))])
            actors.append(plotter.add_mesh(line.tube(radius=0.6 * thin), color=RING, ambient=0.4))
    return actors
