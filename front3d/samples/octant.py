"""From a quarter of the crack plane to an eighth of a solid."""

import numpy as np

from front3d.arrays import FloatArray
from front3d.samples import grading
from front3d.samples.ellipse import curve, spread_angles
from front3d.samples.lattice import Block, Lattice, unite
from front3d.samples.sheet import Density, Patch, Quarter, quarter_sheet


def octant(shape: Quarter, density: Density, *heights: float) -> Lattice:
    """Lattice of 0 <= z <= the last of `heights` above a quarter crack plane; each is a level.

    The patches are drawn up along z; those next to the front start above the tube, whose
    cross-section takes their place below.
    """
    levels, low = _levels(shape, density, heights)
    blocks = [
        _drawn(p, levels[low if p.in_tube else 0 :], p.inside == shape.outside)
        for p in quarter_sheet(shape, density)
    ]
    blocks += _tube_blocks(shape, density)
    return unite(blocks, 1e-9 * max(shape.width, shape.depth, *heights))


def _levels(shape: Quarter, density: Density, heights: tuple[float, ...]) -> tuple[FloatArray, int]:
    """Node heights, and the index of the top of the tube."""
    inside = shape.radius * density.tube.side
    levels = inside
    for height in heights:
        rest = height - levels[-1]
        first = float(levels[-1] - levels[-3])
        cells = grading.count(rest, first, density.growth)
        above = levels[-1] + rest * grading.fractions(rest, first, cells)[0]
        above[-1] = height
        levels = np.concatenate([levels, above[1:]])
    return levels, len(inside) - 1


def _drawn(patch: Patch, levels: FloatArray, ligament: bool) -> Block:
    ni, nj, _ = patch.points.shape
    points = np.empty((ni, nj, len(levels), 3))
    points[..., :2] = patch.points[:, :, None]
    points[..., 2] = levels
    joined = np.zeros(points.shape[:3], dtype=bool)
    if ligament and levels[0] == 0.0:
        joined[:, :, 0] = True
    return Block(points, joined)


def _tube_blocks(shape: Quarter, density: Density) -> list[Block]:
    """The wedges at the front and the rings of bricks around them."""
    angles = spread_angles(density.along)
    section = shape.radius * density.tube.section()
    points = np.empty((len(angles), *section.shape[:2], 3))
    for j, k in np.ndindex(*section.shape[:2]):
        points[:, j, k, :2] = curve(shape.a, shape.c, angles, section[j, k, 0])
        points[:, j, k, 2] = section[j, k, 1]
    joined = np.zeros(points.shape[:3], dtype=bool)
    joined[:, -1 if shape.outside else 0] = True  # the ray ahead of the front
    joined[:, :, 0] = True  # the front itself
    return [
        Block(points[:, :, :3], joined[:, :, :3], wedges=True),
        Block(points[:, :, 2:], joined[:, :, 2:]),
    ]
