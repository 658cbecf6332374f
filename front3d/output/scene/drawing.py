"""The solid, its crack and its fronts put into a plotter."""

from dataclasses import dataclass
from typing import Any

import numpy as np

from front3d.output.scene.camera import MARGIN, View
from front3d.output.scene.geometry import (
    Box,
    kink_ribbon,
    ring_circles,
    size_of,
    tube,
)
from front3d.output.scene.quantity import NO_VALUE, Scale, colours
from front3d.output.scene.surface import Skin
from front3d.results import FrontResult

BODY, EDGE, CRACK, INK = "#9fb0bf", "#3c4650", "#e9dcc3", "#222222"
RIBBON, RING = "#D55E00", "#5b2a86"
Place = tuple[int, int]
"""Which of the fronts drawn, and which of its stations."""


@dataclass(frozen=True, slots=True)
class Extras:
    """What is drawn beside solid, crack and fronts, by place.

    rings : stations with the outlines of the integration domains
    balls : stations marked
    ribbon : whether the direction of growth is drawn along the fronts
    """

    rings: tuple[Place, ...] = ()
    balls: tuple[Place, ...] = ()
    ribbon: bool = False


def add_solid(
    plotter: Any,
    parts: Skin | None,
    fronts: tuple[FrontResult, ...],
    scale: Scale,
    view: View,
    box: Box,
    extras: Extras | None = None,
) -> None:
    """Body, crack faces and coloured fronts, seen from `view`; without `parts`, the fronts alone.

    `box` says by its edges what was cut out of a larger solid.
    """
    import pyvista as pv

    plotter.set_background("white")
    if parts is not None:
        _add_body(plotter, parts)
        bounds = np.stack(box, axis=1).ravel()
        edges = pv.Box(bounds).extract_all_edges()
        plotter.add_mesh(edges, color=EDGE, line_width=1, opacity=0.5)
    for front in fronts:
        plotter.add_mesh(
            tube(front, scale, 0.016 * view.half_height),
            scalars="value",
            cmap=colours(scale),
            clim=(scale.low, scale.high),
            nan_color=NO_VALUE,
            show_scalar_bar=False,
            smooth_shading=True,
            ambient=0.35,
        )
    if extras is not None:
        add_extras(plotter, fronts, view, extras)
    look_from(plotter, view)


def look_from(plotter: Any, view: View) -> None:
    plotter.enable_parallel_projection()
    camera = plotter.camera
    camera.focal_point = view.focus
    camera.position = view.focus + 20 * view.half_height * view.towards
    camera.up = view.up
    camera.parallel_scale = MARGIN * view.half_height
    plotter.reset_camera_clipping_range()


def _add_body(plotter: Any, parts: Skin) -> None:
    if parts.outside.n_cells:
        plotter.add_mesh(parts.outside, color=BODY, opacity=0.22, lighting=True)
        edges = parts.outside.extract_feature_edges(30, non_manifold_edges=False)
        if edges.n_cells:
            plotter.add_mesh(edges, color=EDGE, line_width=2)
    if parts.crack.n_cells:
        plotter.add_mesh(parts.crack, color=CRACK, opacity=0.9, lighting=True)
        lips = parts.crack.extract_feature_edges(
            180, feature_edges=False, non_manifold_edges=False, manifold_edges=False
        )
        if lips.n_cells:
            plotter.add_mesh(lips, color=EDGE, line_width=2)


def add_extras(
    plotter: Any, fronts: tuple[FrontResult, ...], view: View, extras: Extras
) -> list[Any]:
    """Ribbon, rings and balls; the actors, to be taken away again."""
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
    for number, station in extras.balls:
        ball = pv.Sphere(radius=0.032 * view.half_height, center=fronts[number].positions[station])
        actors.append(plotter.add_mesh(ball, color=INK, smooth_shading=True, ambient=0.3))
    return actors
