"""A round hole in a grid of lines: a window of the grid gives way to rings around the hole."""

import numpy as np

from front3d.arrays import FloatArray
from front3d.samples.section import Piece, even_lines, rectangle


def with_hole(
    x: FloatArray,
    z: FloatArray,
    window: tuple[slice, slice],
    centre: tuple[float, float],
    radius: float,
    rings: int,
) -> list[Piece]:
    """The grid of the lines x and z with a hole.

    Parameters
    ----------
    window : the lines of x and of z, both ends included, of the rectangle around the hole
    centre, radius : of the hole, within the window
    rings : cells between the hole and the window
    """
    i, k = window
    before, after = slice(0, i.start + 1), slice(i.stop - 1, None)
    below, over = slice(0, k.start + 1), slice(k.stop - 1, None)
    pieces = [(x[before], z), (x[after], z), (x[i], z[below]), (x[i], z[over])]
    around = _ring(x[i], z[k], np.array(centre), radius, rings)
    return [*(rectangle(a, b) for a, b in pieces if len(a) > 1 and len(b) > 1), around]


def _ring(x: FloatArray, z: FloatArray, centre: FloatArray, radius: float, rings: int) -> Piece:
    """Cells from the hole to the rectangle of the lines x and z, all around."""
    sides = [
        np.stack([x, np.full_like(x, z[0])], axis=1),
        np.stack([np.full_like(z, x[-1]), z], axis=1),
        np.stack([x[::-1], np.full_like(x, z[-1])], axis=1),
        np.stack([np.full_like(z, x[0]), z[::-1]], axis=1),
    ]
    rim = np.concatenate([side[:-1] for side in sides] + [sides[0][:1]])
    angle = np.unwrap(np.arctan2(*(rim - centre).T[::-1]))
    angle[1::2] = (angle[:-1:2] + angle[2::2]) / 2.0
    circle = centre + radius * np.stack([np.cos(angle), np.sin(angle)], axis=1)
    part = even_lines(1.0, rings)[:, None]
    points = circle[:, None] + part * (rim - circle)[:, None]
    return Piece(points, np.zeros(points.shape[:2], dtype=bool))
