"""The front: a quarter of an ellipse, its normals, and how nodes are spread along it."""

import numpy as np

from front3d.arrays import FloatArray


def spread_angles(a: float, c: float, cells: int) -> FloatArray:
    """Parametric angles of 2 cells + 1 nodes from 0 to pi/2 on x = c cos, y = a sin.

    Equal steps in the mean of arc length and turning angle: long flat parts and tight ends
    both get their share.  On a circle the angles are uniform.
    """
    fine = np.linspace(0.0, np.pi / 2, 4001)
    speed = np.hypot(c * np.sin(fine), a * np.cos(fine))
    turning = a * c / speed**2
    density = [_cumulative(speed, fine), _cumulative(turning, fine)]
    measure = sum(d / d[-1] for d in density) / 2.0
    angles: FloatArray = np.interp(np.linspace(0.0, 1.0, 2 * cells + 1), measure, fine)
    return angles


def curve(a: float, c: float, angles: FloatArray, distance: FloatArray | float) -> FloatArray:
    """Points (n, 2) at a signed distance outside the ellipse, along its normals."""
    cos, sin = _exact_ends(angles)
    normal = np.stack([a * cos, c * sin], axis=1)
    normal /= np.linalg.norm(normal, axis=1, keepdims=True)
    out: FloatArray = np.stack([c * cos, a * sin], axis=1) + np.reshape(distance, (-1, 1)) * normal
    return out


def smallest_radius(a: float, c: float) -> float:
    """Smallest radius of curvature of the ellipse."""
    return min(a, c) ** 2 / max(a, c)


def _exact_ends(angles: FloatArray) -> tuple[FloatArray, FloatArray]:
    cos, sin = np.cos(angles), np.sin(angles)
    cos[np.isclose(angles, np.pi / 2)] = 0.0  # so that the end lies in the symmetry plane
    return cos, sin


def _cumulative(values: FloatArray, at: FloatArray) -> FloatArray:
    steps = np.diff(at) * (values[1:] + values[:-1]) / 2.0
    out: FloatArray = np.concatenate([[0.0], np.cumsum(steps)])
    return out
