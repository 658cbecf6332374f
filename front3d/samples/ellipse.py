"""The front: a quarter of an ellipse, its normals, and how nodes are spread along it."""

import numpy as np

from front3d.arrays import FloatArray


def spread_angles(cells: int) -> FloatArray:
    """Parametric angles of 2 cells + 1 nodes on a quarter x = c cos, y = a sin.

    Equal steps: on a long ellipse they are short at the tight ends, where K changes fast.  Steps
    equal in arc length or in turning angle, or shorter towards the surface, did worse there.
    """
    return np.linspace(0.0, np.pi / 2, 2 * cells + 1)


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
