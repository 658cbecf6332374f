"""The picture of the solid with K along the front, and its scale."""

import io
from dataclasses import dataclass, replace
from textwrap import fill
from typing import TYPE_CHECKING, Any

import numpy as np

from front3d.arrays import FloatArray
from front3d.output.charts.style import mathtext
from front3d.output.rendering import choose_window
from front3d.output.view import (
    Skin,
    View,
    as_surface,
    best_view,
    drawn_mode,
    peak_station,
    skin,
    smooth_curve,
)
from front3d.results import CAUTION, MODES, FrontResult
from front3d.solid import Solid
from front3d.units import Units

if TYPE_CHECKING:
    from matplotlib.figure import Figure

_BODY, _EDGE, _CRACK = "#9fb0bf", "#3c4650", "#e9dcc3"
_INK, _MUTED = "#222222", "#555555"
_NAMES = {"K_I": "$K_I$", "K_II": "$K_{II}$", "K_III": "$K_{III}$"}
_SHAPE = (1040, 780)  # pixels of a rendered panel, 4 to 3
# How far beyond the front the close-up reaches, in diameters of the front, and its least half-size.
_AROUND, _LEAST = 0.16, 0.30

Box = tuple[FloatArray, FloatArray]


@dataclass(frozen=True, slots=True)
class Scale:
    """Colours of K: the mode drawn, and the range of its values."""

    mode: int
    low: float
    high: float


def scene_png(solid: Solid, fronts: tuple[FrontResult, ...], units: Units) -> bytes:
    """PNG, 1200 pixels wide, of all `fronts` of one step.

    Call `rendering.why_no_pictures` first: without a graphics library drawing ends the process.
    """
    choose_window()
    from matplotlib.figure import Figure

    solid, fronts = near_the_origin(solid, fronts)
    parts = skin(solid, fronts)
    scale = colour_scale(fronts)
    positions = np.concatenate([front.positions for front in fronts])
    low, high = close_up(positions, solid.points)
    view = best_view(fronts[0], _box_corners(low, high))
    box = (low, high)
    figure = Figure(figsize=(8.0, 6.0), dpi=150, facecolor="white")
    near = figure.add_axes((0.0, 0.1, 0.765, 0.765))
    near.imshow(_render(clipped(parts, box), fronts, scale, view, box))
    near.set_axis_off()
    _draw_axes(near, view)
    _mark_peak(near, fronts, scale, view, units)
    extent = np.ptp(solid.points, axis=0)
    if np.linalg.norm(extent) > 1.3 * np.linalg.norm(high - low):
        whole = _box_corners(solid.points.min(axis=0), solid.points.max(axis=0))
        far = figure.add_axes((0.765, 0.08, 0.235, 0.235))
        far.imshow(_render(parts, fronts, scale, best_view(fronts[0], whole), box))
        far.set_axis_off()
        far.set_title("whole solid", fontsize=11, color=_MUTED, pad=2)
    _draw_scale(figure, scale, units)
    _draw_words(figure, fronts, scale)
    out = io.BytesIO()
    figure.savefig(out, format="png")
    return out.getvalue()


def near_the_origin(
    solid: Solid, fronts: tuple[FrontResult, ...]
) -> tuple[Solid, tuple[FrontResult, ...]]:
    """Both moved so that the fronts lie around the origin: graphics work in single precision, and
    far from it would draw a smooth crack ragged.
    """
    centre = np.concatenate([front.positions for front in fronts]).mean(axis=0)
    moved = replace(solid, points=solid.points - centre, steps=())
    return moved, tuple(replace(front, positions=front.positions - centre) for front in fronts)


def colour_scale(fronts: tuple[FrontResult, ...]) -> Scale:
    """Round limits around the smallest and largest K, but never so close together that scatter
    looks like a variation: at least a tenth of the largest magnitude apart.
    """
    from matplotlib.ticker import MaxNLocator

    mode = drawn_mode(fronts)
    values = np.concatenate([front.K[:, mode] for front in fronts])
    low, high = float(np.nanmin(values)), float(np.nanmax(values))
    short = max(0.0, 0.1 * max(abs(low), abs(high)) - (high - low))
    ticks = MaxNLocator(5, steps=[1, 2, 2.5, 5, 10]).tick_values(low - short / 2, high + short / 2)
    return Scale(mode, float(ticks[0]), float(ticks[-1]))


def close_up(positions: FloatArray, points: FloatArray) -> Box:
    """Corners of the box around the crack that the picture shows, inside the solid."""
    size = float(np.linalg.norm(np.ptp(positions, axis=0)))
    low, high = positions.min(axis=0), positions.max(axis=0)
    middle = (low + high) / 2
    half = np.maximum((high - low) / 2 + _AROUND * size, _LEAST * size)
    return (
        np.maximum(points.min(axis=0), middle - half),
        np.minimum(points.max(axis=0), middle + half),
    )


def _render(
    parts: Skin, fronts: tuple[FrontResult, ...], scale: Scale, view: View, box: Box
) -> Any:
    import pyvista as pv

    plotter: Any = pv.Plotter(off_screen=True, window_size=list(_SHAPE))
    try:
        plotter.enable_anti_aliasing("ssaa")
        plotter.enable_depth_peeling(8)
        add_solid(plotter, parts, fronts, scale, view, box)
        return plotter.screenshot(None, return_img=True)
    finally:
        plotter.close()


def add_solid(
    plotter: Any, parts: Skin, fronts: tuple[FrontResult, ...], scale: Scale, view: View, box: Box
) -> None:
    """Body, crack faces and coloured fronts, seen from `view`."""
    import pyvista as pv

    plotter.set_background("white")
    if parts.outside.n_cells:
        plotter.add_mesh(parts.outside, color=_BODY, opacity=0.22, lighting=True)
        edges = parts.outside.extract_feature_edges(30, non_manifold_edges=False)
        if edges.n_cells:
            plotter.add_mesh(edges, color=_EDGE, line_width=2)
    bounds = np.stack(box, axis=1).ravel()
    plotter.add_mesh(pv.Box(bounds).extract_all_edges(), color=_EDGE, line_width=1, opacity=0.5)
    if parts.crack.n_cells:
        plotter.add_mesh(parts.crack, color=_CRACK, opacity=0.9, lighting=True)
    for front in fronts:
        plotter.add_mesh(
            _tube(front, scale, 0.016 * view.half_height),
            scalars="K",
            cmap=colours(),
            clim=(scale.low, scale.high),
            show_scalar_bar=False,
            smooth_shading=True,
            ambient=0.35,
        )
    plotter.enable_parallel_projection()
    camera = plotter.camera
    camera.focal_point = view.focus
    camera.position = view.focus + 20 * view.half_height * view.towards
    camera.up = view.up
    camera.parallel_scale = 1.03 * view.half_height
    plotter.reset_camera_clipping_range()


def _tube(front: FrontResult, scale: Scale, radius: float) -> Any:
    import pyvista as pv

    points, s = smooth_curve(front)
    stations, K = front.s, front.K[:, scale.mode]
    if front.closed:
        stations, K = np.append(stations, front.length), np.append(K, K[0])
    line = pv.PolyData(points, lines=np.r_[len(points), np.arange(len(points))])
    line.point_data["K"] = np.interp(s, stations, K)  # straight between stations, as in the table
    return line.tube(radius=radius, n_sides=24)


def clipped(parts: Skin, box: Box) -> Skin:
    """The outside cut to `box`, the crack whole."""
    if not parts.outside.n_cells:
        return parts
    margin = 1e-6 * np.linalg.norm(box[1] - box[0])
    bounds = np.stack([box[0] - margin, box[1] + margin], axis=1).ravel()
    return Skin(as_surface(parts.outside.clip_box(bounds, invert=False)), parts.crack)


def _mark_peak(
    axes: Any, fronts: tuple[FrontResult, ...], scale: Scale, view: View, units: Units
) -> None:
    front = max(fronts, key=lambda f: float(np.nanmax(np.abs(f.K[:, scale.mode]))))
    i = peak_station(front, scale.mode)
    x, y = _pixel(front.positions[i], view)
    value = front.K[i, scale.mode]
    text = f"peak {_NAMES[MODES[scale.mode]]}\n{value:.4g}"
    if units.named:
        text += f" {mathtext(units.K_label)}"
    if units.K_factor is not None and (units.stress, units.length) != ("MPa", "m"):
        text += f"\n{value * units.K_factor:.4g} {mathtext('MPa sqrt(m)')}"
    if front.flags[i]:
        text += f"\n{front.flags[i]}"
    drawn = np.concatenate([[_pixel(x, view) for x in smooth_curve(f)[0]] for f in fronts])
    words = place_for_words(np.array((x, y)), drawn, text.count("\n") + 1)
    axes.annotate(
        text,
        (x, y),
        xytext=words,
        ha="center",
        va="center",
        fontsize=13,
        color=_INK,
        bbox={"boxstyle": "round,pad=0.3", "facecolor": "white", "edgecolor": _INK, "alpha": 0.92},
        arrowprops={"arrowstyle": "-|>", "color": _INK, "shrinkB": 5},
    )


def place_for_words(
    peak: FloatArray, drawn: FloatArray, lines: int, half_width: float = 150.0
) -> tuple[float, float]:
    """Middle of a box of words near `peak` that lies inside the panel and clear of the front.

    `drawn` (n, 2) are points of the fronts in the panel; all lengths are pixels.
    """
    half = np.array([half_width, 22.0 * lines + 10.0])
    best, least = peak, np.inf
    for distance in (1.0, 1.5, 2.0):
        for angle in np.radians(np.arange(0, 360, 30) - 90):
            way = np.array([np.cos(angle), np.sin(angle)])
            middle = peak + way * (half + 60.0 * distance)
            outside = np.maximum(np.abs(middle - np.array(_SHAPE) / 2) + half, 0)
            outside = np.maximum(outside - np.array(_SHAPE) / 2, 0).sum()
            hidden = (np.abs(drawn - middle) < half + 12).all(axis=1).sum()
            cost = 1000 * hidden + 10 * outside + 30 * distance
            if cost < least:
                best, least = middle, cost
    return float(best[0]), float(best[1])


def _draw_axes(axes: Any, view: View) -> None:
    """The directions of x, y and z, in the lower left corner."""
    right = np.cross(view.up, view.towards)
    origin = np.array([75.0, _SHAPE[1] - 60.0])
    for k, name in enumerate("xyz"):
        arrow = 50 * np.array([right[k], -view.up[k]])
        if np.linalg.norm(arrow) < 8:  # along the line of sight
            continue
        axes.annotate(
            "",
            origin + arrow,
            xytext=tuple(origin),
            arrowprops={"arrowstyle": "-|>", "color": _MUTED, "shrinkA": 0, "shrinkB": 0},
        )
        x, y = origin + 1.35 * arrow
        axes.text(x, y, name, fontsize=12, color=_INK, ha="center", va="center")


def _pixel(point: FloatArray, view: View) -> tuple[float, float]:
    """Where `point` (3,) stands in a rendered panel, from its upper left corner."""
    right = np.cross(view.up, view.towards)
    pixel = 1.03 * view.half_height / (_SHAPE[1] / 2)
    offset = point - view.focus
    return (
        float(_SHAPE[0] / 2 + offset @ right / pixel),
        float(_SHAPE[1] / 2 - offset @ view.up / pixel),
    )


def _draw_scale(figure: "Figure", scale: Scale, units: Units) -> None:
    from matplotlib.cm import ScalarMappable
    from matplotlib.colors import Normalize

    bar = figure.colorbar(
        ScalarMappable(Normalize(scale.low, scale.high), colours()),
        cax=figure.add_axes((0.83, 0.42, 0.028, 0.44)),
    )
    bar.ax.tick_params(labelsize=12.5)
    bar.set_label(f"{_NAMES[MODES[scale.mode]]}  [{mathtext(units.K_label)}]", fontsize=14)


def _draw_words(figure: "Figure", fronts: tuple[FrontResult, ...], scale: Scale) -> None:
    which = f"front {fronts[0].front}" if len(fronts) == 1 else f"{len(fronts)} fronts"
    figure.text(
        0.5,
        0.965,
        f"{_NAMES[MODES[scale.mode]]} along {which}, step {fronts[0].step}",
        fontsize=15,
        color=_INK,
        ha="center",
        va="top",
    )
    figure.text(0.5, 0.012, fill(CAUTION, 110), fontsize=9, color=_MUTED, ha="center", va="bottom")


def colours() -> Any:
    """Dark is high: the peak stands out on a light body, in grey too."""
    from matplotlib import colormaps
    from matplotlib.colors import ListedColormap

    return ListedColormap(colormaps["viridis_r"](np.linspace(0.08, 1.0, 256)))


def _box_corners(low: FloatArray, high: FloatArray) -> FloatArray:
    return np.array(
        [
            [(low, high)[i][0], (low, high)[j][1], (low, high)[k][2]]
            for i in (0, 1)
            for j in (0, 1)
            for k in (0, 1)
        ]
    )
