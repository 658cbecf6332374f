"""Small models for the reading tests: cells of every type, smoothly distorted, in general position.

The displacement is a polynomial of the position, so it can be compared wherever it is interpolated.
"""

import meshio
import numpy as np

from front3d.elements import ELEMENTS, element_type

# meshio 5.3.5 knows these two types everywhere but here.
meshio._mesh.topological_dimension.update(wedge15=3, pyramid13=3)

KINDS = list(ELEMENTS)


def bend(x):
    """A smooth, invertible map that straightens nothing and keeps orientation."""
    u, v, w = x.T
    return np.stack(
        [
            u + 0.10 * v + 0.03 * v * w + 0.02 * u * u,
            1.1 * v - 0.05 * w + 0.03 * u * w,
            0.9 * w + 0.08 * u + 0.02 * v * v,
        ],
        axis=1,
    )


def displacement(x, case=1.0):
    u, v, w = x.T
    return 1e-3 * case * np.stack([u + v * w, v - 2 * w + u * u, 3 * w + u * v - 1], axis=1)


def cells(kind, count=3):
    """(points, nodes): separate distorted cells along a row, their nodes numbered at random."""
    element = element_type(kind)
    rng = np.random.default_rng(7)
    points = np.concatenate(
        [bend(0.4 * element.nodes + [1.1 * k, 0.3 * k, -0.2 * k]) for k in range(count)]
    )
    order = rng.permutation(len(points))
    shuffled = np.empty_like(points)
    shuffled[order] = points
    return shuffled, order.reshape(count, -1)


def mixed(*kinds):
    """(points, {kind: nodes}) of several kinds side by side, sharing no nodes."""
    points, blocks, start = [], {}, 0
    for row, kind in enumerate(kinds):
        x, nodes = cells(kind)
        points.append(x + np.array([0, 2.0 * row, 0]))
        blocks[kind] = nodes + start
        start += len(x)
    return np.concatenate(points), blocks


def mesh(points, blocks, **point_data):
    """A meshio mesh; its linear wedges are those of VTK mirrored, as meshio itself holds."""
    return meshio.Mesh(points, list(blocks.items()), point_data=point_data)


def volumes(points, kind, nodes):
    """Signed volume of each cell (sum of the Jacobian determinants of our reference map)."""
    element = element_type(kind)
    xi, weights = element.quadrature(3)
    jacobian = np.einsum("pnd,cnk->cpkd", element.gradients(xi), points[nodes])
    return np.linalg.det(jacobian) @ weights


def assert_same_cells(points, kind, expected, nodes, values, read_values):
    """`nodes` describe the cells `expected`, and interpolate the same positions and values.

    Two node orders describe the same cell if an affine map of the reference cell takes one to the
    other; interpolation is then compared at corresponding points.
    """
    element = element_type(kind)
    assert nodes.shape == expected.shape
    xi, _ = element.quadrature(2)
    homogeneous = np.column_stack([element.nodes, np.ones(len(element.nodes))])
    for ours, theirs in zip(nodes, expected, strict=True):
        place = {int(node): k for k, node in enumerate(theirs)}
        target = element.nodes[[place[int(node)] for node in ours]]
        affine, _, _, _ = np.linalg.lstsq(homogeneous, target, rcond=None)
        np.testing.assert_allclose(homogeneous @ affine, target, atol=1e-12)
        here = element.values(xi)
        there = element.values(np.column_stack([xi, np.ones(len(xi))]) @ affine)
        np.testing.assert_allclose(here @ points[ours], there @ points[theirs], atol=1e-12)
        np.testing.assert_allclose(here @ read_values[ours], there @ values[theirs], atol=1e-9)
