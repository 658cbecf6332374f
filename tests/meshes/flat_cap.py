"""The spherical cap of tests/meshes/caps.py, solved around its axis by general libraries."""

from functools import cache

import numpy as np

from tests.meshes.caps import BODY
from tests.meshes.flat import flat_mesh, release_rate, solve_flat

POISSON = 0.3


@cache
def flat_cap(angle, h=0.01):
    """G, K_II over K_I in size, and the angle in degrees at which the crack ends in the mesh.

    G is set free by one edge more; the ratio is that of sliding to opening next to the tip, which
    is that of the modes in plane strain.
    """
    radius = 1.0 / np.radians(angle)

    def polar(points):
        return np.arctan2(points[:, 0], points[:, 1] + radius)

    def on_sphere(at):
        return radius * np.array([np.sin(at), np.cos(at) - 1.0])

    def draw(occ):
        body = occ.addRectangle(0, -BODY, 0, BODY, 2 * BODY)
        pole, centre = occ.addPoint(0, 0, 0), occ.addPoint(0, -radius, 0)
        last = occ.addPoint(*on_sphere(1.3 / radius), 0)
        return body, occ.addCircleArc(pole, centre, last)

    flat = flat_mesh(
        draw,
        lambda points: np.hypot(points[:, 0], points[:, 1] + radius) - radius,
        polar,
        (on_sphere(1.0 / radius), h, 0.1, 0.3, 1.0),
    )
    at = polar(flat.points[flat.path])
    tip = 2 * int(np.argmin(np.abs(at[::2] - 1.0 / radius)))
    x, y = flat.points.T
    about = {
        "poisson": POISSON,
        "traction": lambda n, x: np.stack([0 * x[0], n[1] * (np.abs(x[1]) > BODY * (1 - 1e-9))]),
        "held": [(np.flatnonzero(x < 1e-9), 0), ([np.argmin(np.hypot(x - BODY, y + BODY))], 1)],
        "axis": True,
    }
    G = release_rate(
        flat,
        tip,
        lambda point: 2 * np.pi * radius**2 * (1 - np.cos(polar(point[None])[0])),
        **about,
    )
    u, _ = solve_flat(flat, tip=tip, **about)
    opened = u[flat.copies] - u[flat.path]
    behind = (at[tip] - at) * radius
    near = (behind > 2 * h) & (behind < 20 * h)
    across = opened[near, 0] * np.sin(at[near]) + opened[near, 1] * np.cos(at[near])
    along = opened[near, 0] * np.cos(at[near]) - opened[near, 1] * np.sin(at[near])
    ratio = np.polyfit(behind[near], along / across, 1)[1]
    return G, abs(float(ratio)), float(np.degrees(at[tip]))
