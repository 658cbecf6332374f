"""Shapes of a scene: the box around a crack, tubes, ribbons and rings along its fronts."""

from collections.abc import Sequence
from dataclasses import replace
from math import floor, log10
from typing import Any

import numpy as np

from front3d.arrays import FloatArray
from front3d.mixing import tangential
from front3d.output.scene.cutting import cut_to_box
from front3d.output.scene.quantity import Scale, values_of
from front3d.output.scene.surface import Skin, array_of
from front3d.output.trust import rings_of
from front3d.results import FrontResult
from front3d.solid import Solid

# How far beyond the front the close-up reaches, in diameters of the front, and its least half-size.
_AROUND, _LEAST = 0.16, 0.30
OPEN = 0.12
"""The widest opening drawn, in diameters of the front."""
_RIBBON = 0.09  # width in diameters of the front
RIBBON_FROM = 5.0
"""Degrees of kink from which a ribbon says more than the tube."""

Box = tuple[FloatArray, FloatArray]


def size_of(fronts: Sequence[FrontResult]) -> float:
    """The diagonal of all fronts."""
    positions = np.concatenate([front.positions for front in fronts])
    return float(np.linalg.norm(np.ptp(positions, axis=0)))


def near_the_origin(
    solid: Solid, fronts: tuple[FrontResult, ...]
) -> tuple[Solid, tuple[FrontResult, ...]]:
    """Both moved so that the fronts lie around the origin: graphics work in single precision, and
    far from it would draw a smooth crack ragged.
    """
    centre = np.concatenate([front.positions for front in fronts]).mean(axis=0)
    return replace(solid, points=solid.points - centre), moved(fronts, -centre)


def moved(fronts: Sequence[FrontResult], by: FloatArray) -> tuple[FrontResult, ...]:
    return tuple(replace(front, positions=front.positions + by) for front in fronts)


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


def clipped(parts: Skin, box: Box) -> Skin:
    """Both cut to `box`: of the crack, that is what lies far from its front."""
    margin = 1e-6 * np.linalg.norm(box[1] - box[0])
    low, high = box[0] - margin, box[1] + margin
    return Skin(cut_to_box(parts.outside, low, high), cut_to_box(parts.crack, low, high))


def widest_opening(parts: Skin, step: int) -> float:
    """The largest distance between the faces in a step; nan where it is not known."""
    if array_of(step) not in parts.crack.point_data:
        return float("nan")
    half = np.asarray(parts.crack.point_data[array_of(step)])
    return 2 * float(np.linalg.norm(half, axis=1).max(initial=0.0))


def opening_factor(widest: float, size: float) -> float:
    """1, 2 or 5 times a power of ten that draws the `widest` opening well against `size`; 0 where
    there is none.
    """
    if not widest > 1e-12 * size:
        return 0.0
    wanted = OPEN * size / widest
    power = 10.0 ** floor(log10(wanted))
    return float(power * max(n for n in (1, 2, 5) if n * power <= wanted))


def opened(parts: Skin, step: int, factor: float) -> Skin:
    """The faces moved apart, `factor` times as far as they are."""
    pieces = []
    for surface in (parts.outside, parts.crack):
        piece = surface.copy()
        if array_of(step) in piece.point_data:
            half = np.asarray(piece.point_data[array_of(step)])
            piece.points = np.asarray(piece.points) + factor * half
        pieces.append(piece)
    return Skin(*pieces)


def smooth_curve(front: FrontResult, between: int = 20) -> tuple[FloatArray, FloatArray]:
    """Points (m, 3) on a cubic spline through the stations, and their arc lengths (m,)."""
    from scipy.interpolate import CubicSpline

    s, positions = front.s, front.positions
    if front.closed:
        s, positions = np.append(s, front.length), np.vstack([positions, positions[:1]])
    fine = np.interp(np.arange(between * (len(s) - 1) + 1) / between, np.arange(len(s)), s)
    return CubicSpline(s, positions, bc_type="periodic" if front.closed else "natural")(fine), fine


def tube(front: FrontResult, scale: Scale, radius: float) -> Any:
    """The front with the quantity as point data "value"."""
    import pyvista as pv

    points, s = smooth_curve(front)
    stations, values = front.s, values_of(front, scale.quantity, scale.words)
    if front.closed:
        stations, values = np.append(stations, front.length), np.append(values, values[0])
    line = pv.PolyData(points, lines=np.r_[len(points), np.arange(len(points))])
    if scale.quantity in ("flag", "psi"):  # between two flags, or -180 and 180 degrees, is nothing
        edges = (stations[1:] + stations[:-1]) / 2
        line.point_data["value"] = values[np.searchsorted(edges, s)]
    else:
        line.point_data["value"] = np.interp(s, stations, values)  # as in the table
    return line.tube(radius=radius, n_sides=24)


def kink_ribbon(front: FrontResult, size: float) -> Any | None:
    """A strip from the front into the direction of growth by the maximum tangential stress; None
    where no station has one.  It is broken where stations have none, and where it would turn by
    more than a right angle from one to the next, as where K_II changes its sign without K_I.
    """
    import pyvista as pv

    angle = np.radians(tangential(front.K)[0])
    e1, e2 = front.frames[:, 0], front.frames[:, 1]
    way = np.cos(angle)[:, None] * e1 + np.sin(angle)[:, None] * e2
    n = len(front)
    after = (np.arange(n) + 1) % n if front.closed else np.arange(1, n)
    before = np.arange(len(after))
    known = np.abs(angle[after] - angle[before]) < np.pi / 2  # NaN is not
    if not known.any():
        return None
    outer = np.nan_to_num(front.positions + _RIBBON * size * way)
    quads: Any = np.stack([before, after, after + n, before + n], axis=1)[known]
    return pv.PolyData.from_regular_faces(np.vstack([front.positions, outer]), quads)


def kinked(fronts: Sequence[FrontResult]) -> bool:
    """Whether a ribbon would leave the crack plane visibly."""
    angles = np.concatenate([tangential(front.K)[0] for front in fronts])
    return bool(np.nanmax(np.abs(angles), initial=0.0) > RIBBON_FROM)


def ring_circles(front: FrontResult, station: int) -> list[FloatArray]:
    """Outline (m, 3) across the front of each domain of the interaction integral at a station."""
    rings = rings_of(front)
    if rings is None:
        return []
    angle = np.linspace(0, 2 * np.pi, 73)
    e1, e2 = front.frames[station, :2]
    around = np.cos(angle)[:, None] * e1 + np.sin(angle)[:, None] * e2
    return [front.positions[station] + r * around for r in rings.radii[:, station]]


def arrow_tips(front: FrontResult, station: int, length: float) -> FloatArray:
    """(3, 3) ends of the arrows e1, e2, e3 at a station."""
    return front.positions[station] + length * front.frames[station]
