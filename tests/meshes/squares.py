"""A square crack, solved: a quarter of it above its plane, in 8-node bricks.  Half side 1."""

import numpy as np

from front3d.samples.elasticity import boundary_faces, traction_load
from front3d.samples.solver import solve
from front3d.solid import CellBlock, Material, Solid, Step

MATERIAL, SIZE, BODY = Material(1000.0, 0.3), 0.1, 6.0


def bricks(x, y, z) -> Solid:
    """Bricks between the planes at coordinates x, y and z."""
    shape = len(x), len(y), len(z)
    points = np.stack(np.meshgrid(x, y, z, indexing="ij"), axis=-1).reshape(-1, 3)
    first = np.stack(np.meshgrid(*(np.arange(n - 1) for n in shape), indexing="ij"), -1)
    square = [(0, 0, 0), (1, 0, 0), (1, 1, 0), (0, 1, 0)]
    corners = np.array([*square, *((a, b, 1) for a, b, _ in square)])
    places = first.reshape(-1, 1, 3) + corners
    cells = np.ravel_multi_index(tuple(np.moveaxis(places, -1, 0)), shape)
    return Solid(points, (CellBlock("hexahedron", cells),), (), "square crack")


def quarter_of_square_crack() -> Solid:
    """x, y, z >= 0, unit tension along z; symmetry planes x = 0, y = 0, and the ligament."""
    x, z = _graded(1.4), _graded(0.4)
    solid = bricks(x, x, z)
    points = solid.points
    crack = (points[:, :2] < 1.0 - 1e-9).all(axis=1)
    held = np.abs(points) < 1e-12
    held[:, 2] &= ~crack
    top = [
        (kind, nodes[(points[nodes][:, :, 2] > BODY - 1e-9).all(axis=1)])
        for kind, nodes in boundary_faces(solid)
    ]
    load = traction_load(points, top, lambda x, n: n * [0.0, 0.0, 1.0])
    (moved,) = solve(solid, MATERIAL, load[None], held)
    return Solid(points, solid.blocks, (Step("tension", moved),), "square crack")


def _graded(fine):
    """Cells of SIZE up to `fine`, then growing, up to BODY."""
    out = np.linspace(0.0, fine, round(fine / SIZE) + 1).tolist()
    while out[-1] < BODY:
        out.append(out[-1] + 1.6 * (out[-1] - out[-2]))
    out[-1] = BODY
    return np.array(out)
