"""A quarter of the crack plane, meshed around a quarter-elliptical front, as patches.

x runs along the semi-axis c, y along a.  Near the front the mesh lines are normals and offset
curves of the ellipse; the core inside is a rectangle of cells with wings towards the front; the
outer part blends to the boundary, a rectangle or a circle.
"""

from dataclasses import dataclass

import numpy as np

from front3d.arrays import FloatArray
from front3d.samples import grading
from front3d.samples.ellipse import curve, spread_angles
from front3d.samples.tube import Tube


@dataclass(frozen=True, slots=True)
class Density:
    """How fine a mesh is.

    Attributes
    ----------
    along : cells along a quarter of the front
    layers : layers of cells between the core and the tube, at least
    growth : ratio of neighbouring cell sizes away from the front
    tube : the cross-section around the front
    """

    along: int
    layers: int
    growth: float
    tube: Tube


@dataclass(frozen=True, slots=True)
class Quarter:
    """The quarter of a crack plane.

    Attributes
    ----------
    a, c : semi-axes of the front along y and x
    radius : half-width of the tube around the front
    width, depth : extent along x and y; of a cylinder, both are its radius
    round : the outer boundary is a circle
    outside : the crack lies outside the ellipse, and the ligament inside
    """

    a: float
    c: float
    radius: float
    width: float
    depth: float
    round: bool = False
    outside: bool = False


@dataclass(frozen=True, slots=True, eq=False)
class Patch:
    """(2I+1, 2J+1, 2) positions; `inside` the front or not; `in_tube` next to it."""

    points: FloatArray
    inside: bool
    in_tube: bool = False


def quarter_sheet(shape: Quarter, density: Density) -> list[Patch]:
    """The patches of a quarter of the crack plane."""
    angles = spread_angles(density.along)
    side = density.tube.side
    band = shape.radius * np.concatenate([-side[:0:-1], side])
    lines = np.stack([curve(shape.a, shape.c, angles, d) for d in band], axis=1)
    half = len(side) - 1
    return [
        *_core(lines[:, 0], shape, density),
        Patch(lines[:, : half + 1], inside=True, in_tube=True),
        Patch(lines[:, half:], inside=False, in_tube=True),
        *_outer(lines[:, -1], lines[:, -1] - lines[:, half], shape, density),
    ]


def _core(arc: FloatArray, shape: Quarter, density: Density) -> list[Patch]:
    """The rectangle in the middle and its two wings, inside the curve `arc`."""
    split = 2 * (density.along // 2)
    corner = 0.64 * arc[split]
    right = np.stack([[0.55 * arc[0, 0], 0.0], corner])
    top = np.stack([[0.0, 0.55 * arc[-1, 1]], corner])
    up = _chord_fractions(arc[: split + 1])  # along the right side, from y = 0 to the corner
    across = _chord_fractions(arc[: split - 1 : -1])  # along the top side, from x = 0
    s, t = across[:, None, None], up[None, :, None]
    core = s * (1 - t) * right[0] + (1 - s) * t * top[0] + s * t * corner
    rim = np.concatenate([core[-1, :], core[-2::-1, -1]])
    gap = np.linalg.norm(arc - rim, axis=1)
    # With a narrow tube a few layers would be coarse ones: 1.5 % in K for a/c 0.4, a/t 0.8.
    first = _tube_cell(shape, density)
    layers = max(density.layers, grading.count(float(gap.min()), first, density.growth))
    part = grading.fractions(gap, first, layers)[:, :, None]
    wings = arc[:, None] + part * (rim - arc)[:, None]
    return [
        Patch(core, inside=True),
        Patch(wings[: split + 1], inside=True),
        Patch(wings[split:], inside=True),
    ]


def _outer(arc: FloatArray, outward: FloatArray, shape: Quarter, density: Density) -> list[Patch]:
    """From the curve `arc`, with normals `outward`, to the outer boundary."""
    first = _tube_cell(shape, density)
    if shape.round:
        angle = np.linspace(0.0, np.pi / 2, len(arc))
        rim = shape.width * np.stack([np.cos(angle), np.sin(angle)], axis=1)
        rim[-1, 0] = 0.0
        return [_blend(arc, rim, first, density.growth)]
    # Far along x, columns of cells continue a block of about the crack's own size.
    near = max(1.3 * arc[0, 0], arc[0, 0] + shape.depth - arc[-1, 1])
    width = shape.width if near > 0.7 * shape.width else near
    split = _corner_index(arc, outward, width, shape.depth)
    rim = np.empty_like(arc)
    rim[: split + 1, 0] = width
    rim[: split + 1, 1] = shape.depth * arc[: split + 1, 1] / arc[split, 1]
    rim[split:, 0] = width * arc[split:, 0] / arc[split, 0]
    rim[split:, 1] = shape.depth
    rim[1::2] = (rim[:-1:2] + rim[2::2]) / 2.0  # straight sides: mid-side nodes in the middle
    patch = _blend(arc, rim, first, density.growth)
    if width == shape.width:
        return [patch]
    columns = patch.points[: split + 1, -1]
    last = float(patch.points[0, -1, 0] - patch.points[0, -3, 0])
    n = grading.count(shape.width - width, last, density.growth)
    part = grading.fractions(shape.width - width, last, n)[0]
    far = np.repeat(columns[:, None], len(part), axis=1)
    far[:, :, 0] = width + part * (shape.width - width)
    return [patch, Patch(far, inside=False)]


def _corner_index(arc: FloatArray, outward: FloatArray, width: float, depth: float) -> int:
    """The even index, not an end, of the node of `arc` that goes to the corner of the rectangle.

    It is the one whose normal, followed as far as the rectangle is away, points there best.
    """
    unit = outward / np.linalg.norm(outward, axis=1, keepdims=True)
    target = arc + (depth - arc[-1, 1]) * unit
    rays = np.arctan2(target[:, 1] / depth, target[:, 0] / width)
    best = 2 * round(int(np.argmin(np.abs(rays - np.pi / 4))) / 2)
    return min(max(best, 2), len(arc) - 3)


def _blend(start: FloatArray, end: FloatArray, first: float, growth: float) -> Patch:
    gap = np.linalg.norm(end - start, axis=1)
    cells = grading.count(float(gap.max()), first, growth)
    part = grading.fractions(gap, first, cells)[:, :, None]
    return Patch(start[:, None] + part * (end - start)[:, None], inside=False)


def _tube_cell(shape: Quarter, density: Density) -> float:
    """Size of the cells of the tube at its border."""
    side = density.tube.side
    return shape.radius * float(side[-1] - side[-3])


def _chord_fractions(arc: FloatArray) -> FloatArray:
    """Positions 0 to 1 along a polyline; midpoints in the middle."""
    ends = np.concatenate([[0.0], np.cumsum(np.linalg.norm(np.diff(arc[::2], axis=0), axis=1))])
    return grading.with_middles(ends[None] / ends[-1])[0]
