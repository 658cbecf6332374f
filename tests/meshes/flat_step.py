"""A crack that starts at a re-entrant corner: a bar with a step, in plane strain.

Solved in two dimensions by general libraries, and drawn out to wedges for front3d.
"""

from functools import cache

import numpy as np

from front3d.solid import CellBlock, Solid, Step
from tests.meshes.flat import Flat, flat_mesh, release_rate, solve_flat

POISSON, LENGTH = 0.3, 0.6
TIP = np.array([LENGTH, 0.0])
PULL = np.array([0.3, 0.0])
"""Traction on the upper end, aslant so that both modes are there."""


@cache
def step_mesh(h=0.02) -> tuple[Flat, int]:
    """The bar 3 wide above y = 0 and 4 below it, its corner in the origin, and where on the path
    along x the crack ends.
    """
    corners = [(-1, -4), (3, -4), (3, 4), (0, 4), (0, 0), (-1, 0)]

    def draw(occ):
        at = [occ.addPoint(x, y, 0) for x, y in corners]
        sides = [occ.addLine(a, b) for a, b in zip(at, [*at[1:], at[0]], strict=True)]
        body = occ.addPlaneSurface([occ.addCurveLoop(sides)])
        return body, occ.addLine(at[4], occ.addPoint(1.2, 0, 0))

    flat = flat_mesh(draw, lambda p: p[:, 1], lambda p: p[:, 0], (TIP, h, 0.15, 0.25, 0.8))
    ends = flat.points[flat.path[::2], 0]
    return flat, 2 * int(np.argmin(np.abs(ends - LENGTH)))


def about_step(flat: Flat):
    x, y = flat.points.T
    foot = np.flatnonzero(y < -4 + 1e-9)
    return {
        "poisson": POISSON,
        "traction": lambda n, x: np.multiply.outer(PULL, x[1] > 4 - 1e-9),
        "held": [(foot, 1), (foot[np.argmin(x[foot])][None], 0)],
    }


def step_G(h=0.02) -> float:
    flat, tip = step_mesh(h)
    return release_rate(flat, tip, lambda point: point[0], **about_step(flat))


def step_solid(h=0.02, layers=4) -> Solid:
    """The bar, as thick as its cells at the tip allow: 15-node wedges, front along z."""
    flat, tip = step_mesh(h)
    u, _ = solve_flat(flat, tip=tip, **about_step(flat))
    to = np.arange(len(flat.points))
    to[flat.copies[tip:]] = flat.path[tip:]
    used, triangles = np.unique(to[flat.triangles], return_inverse=True)
    triangles = triangles.reshape(-1, 6)
    return drawn_out(flat.points[used], triangles, u[used], 2.0 * h * np.arange(2 * layers + 1))


def drawn_out(points, triangles, u, levels) -> Solid:
    """Wedges between every other of the levels, their own in the middle."""
    n = len(points)
    x = np.concatenate([np.column_stack([points, np.full(n, z)]) for z in levels])
    moved = np.tile(np.column_stack([u, np.zeros(n)]), (len(levels), 1))
    cells = np.concatenate(
        [
            np.concatenate(
                [
                    triangles[:, :3] + k * n,
                    triangles[:, :3] + (k + 2) * n,
                    triangles[:, 3:] + k * n,
                    triangles[:, 3:] + (k + 2) * n,
                    triangles[:, :3] + (k + 1) * n,
                ],
                axis=1,
            )
            for k in range(0, len(levels) - 1, 2)
        ]
    )
    used, cells = np.unique(cells, return_inverse=True)
    block = CellBlock("wedge15", cells.reshape(-1, 15))
    return Solid(x[used], (block,), (Step("pull", moved[used]),), "step")
