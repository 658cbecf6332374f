"""Quadrature on crack faces that touch the front, where the auxiliary field is singular.

The pressure's part holds 1/sqrt(r); with the distance from the front taken as the square of the
Gauss variable it is smooth again, and the rule converges as on any other face.
"""

import numpy as np

from front3d.arrays import BoolArray, FloatArray, IntArray
from front3d.crack.facetable import FaceTable
from front3d.elements import FaceType

PLAIN = -1
"""A face away from the front."""


def touching_sides(faces: FaceTable, on_front: BoolArray) -> IntArray:
    """(n,) how each face touches the front: PLAIN, the number of the side that lies on it, or 4
    plus the number of the one corner that does.
    """
    corners = on_front[faces.corners]
    sides, _ = faces.sides()
    on_side = corners & np.roll(corners, -1, axis=1) & (sides[..., 0] != sides[..., 1])
    how = np.full(len(faces), PLAIN)
    vertex = corners.any(axis=1)
    how[vertex] = 4 + np.argmax(corners[vertex], axis=1)
    side = on_side.any(axis=1)
    how[side] = np.argmax(on_side[side], axis=1)
    return how


def graded_rule(face: FaceType, how: int, n: int) -> tuple[FloatArray, FloatArray]:
    """Points and weights on a reference face, n a side, graded to a side or corner of it."""
    if how == PLAIN:
        return face.quadrature(n)
    x, w = np.polynomial.legendre.leggauss(n)
    t, w = (x + 1.0) / 2.0, w / 2.0
    along, root = (v.ravel() for v in np.meshgrid(t, t, indexing="ij"))
    weights = np.outer(w, w).ravel() * 2.0 * root
    away = root**2
    corners = face.nodes[: face.n_corners]
    count, corner = len(corners), how % 4
    if count == 4 and how < 4:
        start, end, across = corners[how], corners[(how + 1) % 4], corners[(how + 3) % 4]
        points = start + np.outer(along, end - start) + np.outer(away, across - start)
        return points, 4.0 * weights
    if count == 4:  # towards a corner: both halves of the square, as triangles from it
        halves = [_from_corner(corners, corner, k, along, away) for k in (1, 2)]
        return np.concatenate(halves), np.tile(4.0 * weights * away, 2)
    if how < 4:
        start, end, apex = corners[how], corners[(how + 1) % 3], corners[(how + 2) % 3]
        line = start + np.outer(along, end - start)
        points = line + away[:, None] * (apex - line)
        return points, weights * (1.0 - away)
    return _from_corner(corners, corner, 1, along, away), weights * away


def _from_corner(
    corners: FloatArray, corner: int, first: int, along: FloatArray, away: FloatArray
) -> FloatArray:
    """Points of the triangle of a corner and the side opposite to it, away from that corner."""
    n = len(corners)
    apex, a, b = (corners[(corner + k) % n] for k in (0, first, first + 1))
    return apex + away[:, None] * (a - apex + np.outer(along, b - a))
