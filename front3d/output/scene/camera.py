"""From where a crack is seen."""

from dataclasses import dataclass

import numpy as np

from front3d.arrays import FloatArray
from front3d.results import FrontResult

MARGIN = 1.03
"""Half the height of a picture over that of what is to be inside it."""


@dataclass(frozen=True, slots=True, eq=False)
class View:
    """An orthogonal view: focus (3,), unit vectors towards the viewer and up, half the height."""

    focus: FloatArray
    towards: FloatArray
    up: FloatArray
    half_height: float

    @property
    def right(self) -> FloatArray:
        return np.cross(self.up, self.towards)


def best_view(front: FrontResult, points: FloatArray, shape: float = 4 / 3) -> View:
    """Look at the crack obliquely from above its plane, from the side of its mouth.

    `points` (n, 3) are to be inside the picture, whose width over height is `shape`. A closed
    front, which has no mouth, is seen across its shorter axis.
    """
    up = _unit(front.frames[:, 1].mean(axis=0), fallback=front.frames[0, 1])
    ends = front.positions[[0, -1]].mean(axis=0)
    depth = front.positions.mean(axis=0) - ends
    depth -= depth @ up * up
    if front.closed or np.linalg.norm(depth) < 0.02 * front.length:
        flat = front.positions - front.positions.mean(axis=0)
        flat = flat - np.outer(flat @ up, up)
        _, widths, axes = np.linalg.svd(flat, full_matrices=False)
        if front.closed and widths[0] < 1.02 * widths[1]:  # round: along a coordinate axis
            axes = np.eye(3)[np.argsort(np.abs(up), kind="stable")]
            axes = axes - np.outer(axes @ up, up)
        long = axes[0] if front.closed else front.frames[:, 2].mean(axis=0)
        towards = np.cross(_unit(long, axes[0]), up)
        if not front.closed:
            towards = -front.frames[:, 0].mean(axis=0)
    else:
        towards = -depth
    towards = _unit(towards, fallback=front.frames[0, 0])
    side = np.cross(up, towards)
    # Turned by 25 degrees and raised by 35: two outer faces and the crack plane are all seen.
    turn, rise = np.radians(25.0), np.radians(35.0)
    around = np.cos(turn) * towards + np.sin(turn) * side
    eye = np.cos(rise) * around + np.sin(rise) * up
    upright = _unit(up - up @ eye * eye, fallback=side)
    focus = (points.min(axis=0) + points.max(axis=0)) / 2
    right = np.cross(upright, eye)
    offset = points - focus
    # Centred and fitted on what is seen.
    u, v = offset @ right, offset @ upright
    focus = focus + (u.max() + u.min()) / 2 * right + (v.max() + v.min()) / 2 * upright
    half = max(np.ptp(v) / 2, np.ptp(u) / 2 / shape)
    return View(focus, eye, upright, float(half))


def pixels(points: FloatArray, view: View, shape: tuple[int, int]) -> FloatArray:
    """Where `points` (..., 3) stand in a picture of `shape` (width, height), (..., 2) from its
    upper left corner.
    """
    width, height = shape
    pixel = MARGIN * view.half_height / (height / 2)
    offset = np.asarray(points) - view.focus
    across, upwards = offset @ view.right, offset @ view.up
    return np.stack([width / 2 + across / pixel, height / 2 - upwards / pixel], axis=-1)


def box_corners(low: FloatArray, high: FloatArray) -> FloatArray:
    """(8, 3)"""
    return np.array(np.meshgrid(*zip(low, high, strict=True), indexing="ij")).reshape(3, -1).T


def _unit(vector: FloatArray, fallback: FloatArray) -> FloatArray:
    length = float(np.linalg.norm(vector))
    return vector / length if length > 1e-9 else fallback / np.linalg.norm(fallback)
