"""A slice of a plate with a row of collinear through cracks, on graded 20-node bricks.

One crack |x| < a of a row of period 2 b: the planes x = -b, x = b, y = 0 and y = w are symmetry
planes (plane strain), and the ends z = -h, z = h are pulled.  No quarter-points.
"""

import numpy as np

from front3d.elements import ELEMENTS
from front3d.samples.elasticity import boundary_faces, traction_load
from front3d.samples.solver import solve
from front3d.solid import CellBlock, Material, Solid, Step


def graded(end, first, ratio):
    """Coordinates from 0 to `end`, the first interval about `first`, growing by `ratio`."""
    count = int(np.ceil(np.log(1 + end / first * (ratio - 1)) / np.log(ratio)))
    steps = ratio ** np.arange(count)
    return np.concatenate([[0.0], np.cumsum(steps)]) * (end / steps.sum())


def row_of_cracks(material: Material, a=1.0, b=2.0, w=0.2, h=6.0, first=0.03, layers=2) -> Solid:
    """The slice with its solved step, unit stress."""
    inner, outer = graded(a, first, 1.5), graded(b - a, first, 1.5)
    x = np.concatenate([a - inner[::-1], (a + outer)[1:]])  # 0 to b
    x = np.concatenate([-x[::-1], x[1:]])
    z = graded(h, first, 1.5)
    z = np.concatenate([-z[::-1], z[1:]])
    y = np.linspace(0, w, layers + 1)
    axes = [_with_middles(v) for v in (x, y, z)]
    shape = [len(x) - 1, layers, len(z) - 1]
    element = ELEMENTS["hexahedron20"]
    offsets = np.rint(element.nodes).astype(int) + 1
    first_corner = 2 * np.stack(np.meshgrid(*(np.arange(n) for n in shape), indexing="ij"), -1)
    keys = first_corner.reshape(-1, 1, 3) + offsets
    middle = len(axes[2]) // 2
    on_crack = (keys[..., 2] == middle) & (np.abs(axes[0][keys[..., 0]]) < a * (1 - 1e-9))
    upper = keys[..., 2].mean(axis=1) > middle
    names = np.concatenate([keys, (on_crack & upper[:, None])[..., None]], axis=-1)
    unique, nodes = np.unique(names.reshape(-1, 4), axis=0, return_inverse=True)
    points = np.stack([axes[k][unique[:, k]] for k in range(3)], axis=1)
    block = CellBlock("hexahedron20", nodes.reshape(len(keys), -1))
    solid = Solid(points, (block,), source="row")
    held = np.zeros(points.shape, bool)
    held[np.abs(points[:, 0]) > b - 1e-9, 0] = True
    held[(points[:, 1] < 1e-9) | (points[:, 1] > w - 1e-9), 1] = True
    pulled = traction_load(
        points,
        boundary_faces(solid),
        lambda x, n: np.where(np.abs(x[:, 2:]) > h - 1e-9, n * [0, 0, 1], 0.0),
    )
    u = solve(solid, material, pulled[None], held)[0]
    return Solid(points, solid.blocks, (Step("tension", u),), source="row")


def _with_middles(v):
    out = np.empty(2 * len(v) - 1)
    out[::2], out[1::2] = v, (v[1:] + v[:-1]) / 2
    return out
