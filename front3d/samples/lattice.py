"""Structured blocks on half-index lattices, and their union.

A block of I x J x K cells is an array of (2I+1, 2J+1, 2K+1) positions: corners at even indices,
the midpoints of edges, faces and bodies at odd ones.  Any kind of cell can be cut from it, and
because a mapping is evaluated at the half indices, mid-side nodes lie on the true curves.
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from scipy.sparse import coo_array
from scipy.sparse.csgraph import connected_components
from scipy.spatial import cKDTree

from front3d.arrays import BoolArray, FloatArray, IntArray
from front3d.elements import ELEMENTS

_BRICK = ELEMENTS["hexahedron27"].nodes
_PRISM = np.vstack([ELEMENTS["wedge15"].nodes, [[0.5, 0, 0], [0.5, 0.5, 0], [0, 0.5, 0]]])


@dataclass(frozen=True, slots=True, eq=False)
class Block:
    """A structured block of a part in the upper half, z >= 0.

    Attributes
    ----------
    points : (2I+1, 2J+1, 2K+1, 3) positions
    joined : (2I+1, 2J+1, 2K+1) true where the node lies on the ligament or the front, so that
        the two halves of the solid share it
    wedges : the block is a fan: K = 1 and its edge k = 0 is the front, for every j
    """

    points: FloatArray
    joined: BoolArray
    wedges: bool = False


@dataclass(frozen=True, slots=True, eq=False)
class Lattice:
    """A part of a solid, in the upper half: every node that any kind of cell may need.

    Attributes
    ----------
    points : (n, 3)
    bricks : (n_bricks, 27) nodes in VTK order
    wedges : (n_wedges, 18) the 15 nodes in VTK order, then the centres of the three
        quadrilaterals; the edge 0-3 lies on the front
    joined : (n,) nodes shared with the lower half
    """

    points: FloatArray
    bricks: IntArray
    wedges: IntArray
    joined: BoolArray


def unite(blocks: Sequence[Block], tolerance: float) -> Lattice:
    """Join blocks where their nodes coincide within `tolerance`.

    The upper half alone has no coincident nodes that must stay apart, so coordinates decide.
    """
    points = np.concatenate([b.points.reshape(-1, 3) for b in blocks])
    numbers, first = _merge(points, tolerance)
    joined = np.zeros(len(first), dtype=bool)
    bricks: list[IntArray] = []
    wedges: list[IntArray] = []
    start = 0
    for block in blocks:
        ids = numbers[start : start + block.joined.size].reshape(block.joined.shape)
        start += block.joined.size
        joined[ids[block.joined]] = True
        (wedges if block.wedges else bricks).append(_cells(block, ids))
    return Lattice(points[first], np.concatenate(bricks), np.concatenate(wedges), joined)


def _merge(points: FloatArray, tolerance: float) -> tuple[IntArray, IntArray]:
    """Number per point after merging, and the first point of each number."""
    pairs = cKDTree(points).query_pairs(tolerance, output_type="ndarray")
    n = len(points)
    graph = coo_array((np.ones(len(pairs), dtype=bool), (pairs[:, 0], pairs[:, 1])), shape=(n, n))
    _, labels = connected_components(graph, directed=False)
    _, first, inverse = np.unique(labels, return_index=True, return_inverse=True)
    order = np.argsort(first)
    rank = np.empty_like(order)
    rank[order] = np.arange(len(order))
    return rank[inverse], first[order]


def _cells(block: Block, ids: IntArray) -> IntArray:
    """Connectivity of a block, (cells, 27 or 18), with positive orientation."""
    if block.wedges:
        xi, eta, zeta = _PRISM.T
        rho = xi + eta
        sector = np.divide(2.0 * eta, rho, out=np.zeros_like(eta), where=rho > 0.0)
        places = np.stack([zeta + 1.0, sector, 2.0 * rho], axis=1)
    else:
        places = _BRICK + 1.0
    di, dj, dk = np.rint(places).astype(np.int64).T
    # Sense of the lattice, from the first cell: a left-handed one is walked backwards along i.
    corners = block.points[di[:9] % 3, dj[:9] % 3, dk[:9] % 3]
    kind = ELEMENTS["wedge15" if block.wedges else "hexahedron27"]
    n_linear = 6 if block.wedges else 8
    linear = ELEMENTS["wedge" if block.wedges else "hexahedron"]
    centre = kind.nodes[:n_linear].mean(axis=0, keepdims=True)
    jacobian = np.einsum("nd,ni->di", linear.gradients(centre)[0], corners[:n_linear])
    if np.linalg.det(jacobian) < 0.0:
        ids = ids[::-1]
    shape = [(n - 1) // 2 for n in ids.shape]
    i, j, k = (2 * g.ravel()[:, None] for g in np.indices(shape))
    nodes: IntArray = ids[i + di, j + dj, k + dk].astype(np.int64)
    return nodes
