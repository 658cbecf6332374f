"""Distinct nodes at the same place, found in one pass over the nodes.

Crack faces of a finite-element model carry double nodes.  "The same place" is judged against the
shortest edge at each node, so graded meshes are safe, and never more finely than the coordinates
of the file resolve.
"""

from dataclasses import dataclass

import numpy as np
from scipy.sparse import coo_array
from scipy.sparse.csgraph import connected_components

from front3d.arrays import BoolArray, FloatArray, IntArray
from front3d.errors import MeshError
from front3d.jit import kernel
from front3d.solid import Solid

RELATIVE_TOLERANCE = 1e-4
"""Two nodes coincide when closer than this times the shortest edge at either of them."""

_MAX_SPACING = 0.05
"""Largest coordinate resolution, in edges, at which coincidence can still be judged."""


@dataclass(frozen=True, slots=True, eq=False)
class Coincidence:
    """Who stands where.

    Attributes
    ----------
    place : (n_points,) one number per place; nodes at the same place share it
    entity : (n_points,) like `place`, but nodes of one collapsed cell count as one node, and the
        two sides of a crack as two
    double : (n_points,) whether another entity stands at the node's place
    """

    place: IntArray
    entity: IntArray
    double: BoolArray


def find_coincidence(solid: Solid) -> Coincidence:
    """Group the nodes of a solid by place; MeshError if the coordinates are too coarse."""
    n = len(solid.points)
    shortest = np.full(n, np.inf)
    for block in solid.blocks:
        _shortest_edges(solid.points, block.nodes, block.element.edges, shortest)
    used = np.isfinite(shortest)
    spacing = solid.point_spacing
    if shortest.min(initial=np.inf) * _MAX_SPACING < spacing:
        node = int(np.argmin(shortest))
        raise MeshError(
            f"{solid.source}: the coordinates are stored to {spacing:.3g} only, but the edges at "
            f"node {node} are {shortest[node]:.3g} long; store them in double precision, or move "
            "the model nearer to the origin"
        )
    if not used.any():
        return Coincidence(np.arange(n), np.arange(n), np.zeros(n, bool))
    # In place: at ten million nodes every array counts.
    tolerance = np.multiply(shortest, RELATIVE_TOLERANCE, out=shortest)
    np.maximum(tolerance, 2.0 * spacing, out=tolerance)
    tolerance[~used] = -1.0
    first, second = _coincident_pairs(solid.points, tolerance, float(tolerance.max()))
    del shortest, tolerance
    place = _components(n, first, second)
    first, second = _pairs_inside_cells(solid, place, first, second)
    entity = _components(n, first, second)
    return Coincidence(place, entity, _several_entities(place, entity))


def _components(n: int, first: IntArray, second: IntArray) -> IntArray:
    """Smallest node number of the group each node belongs to."""
    out = np.arange(n)
    if not len(first):
        return out
    nodes, row = np.unique(np.concatenate([first, second]), return_inverse=True)
    ends = row.reshape(2, -1)
    graph = coo_array((np.ones(len(first), np.int8), (ends[0], ends[1])), shape=(len(nodes),) * 2)
    count, label = connected_components(graph, directed=False)
    smallest = np.full(count, n)
    np.minimum.at(smallest, label, nodes)
    out[nodes] = smallest[label]
    return out


def _several_entities(place: IntArray, entity: IntArray) -> BoolArray:
    """(n_points,) whether the place of a node holds more than one entity.

    A place is named by one of its entities, so it has several when another one is of it.
    """
    shared = np.zeros(len(place), bool)
    shared[place[entity != place]] = True
    return shared[place]


def _pairs_inside_cells(
    solid: Solid, place: IntArray, first: IntArray, second: IntArray
) -> tuple[IntArray, IntArray]:
    """Pairs of coincident nodes that belong to one cell: a collapsed edge or face, not a crack."""
    crowded = np.zeros(len(place), bool)
    crowded[first] = crowded[second] = True
    pairs: list[IntArray] = []
    for block in solid.blocks:
        cells = block.nodes[crowded[block.nodes].sum(axis=1) > 1]
        where = place[cells]
        order = np.argsort(where, axis=1, kind="stable")
        where = np.take_along_axis(where, order, axis=1)
        nodes = np.take_along_axis(cells, order, axis=1)
        same = (where[:, 1:] == where[:, :-1]) & (nodes[:, 1:] != nodes[:, :-1])
        pairs.append(np.stack([nodes[:, :-1][same], nodes[:, 1:][same]], axis=1))
    found = np.concatenate(pairs) if pairs else np.zeros((0, 2), np.int64)
    return found[:, 0], found[:, 1]


@kernel
def _shortest_edges(
    points: FloatArray, cells: IntArray, edges: IntArray, shortest: FloatArray
) -> None:
    """Lower `shortest`, (n_points,), to the shortest corner edge of the cells at each node.

    Edges shorter than 1e-6 of the cell's longest are collapsed ones and do not count.
    """
    lengths = np.empty(len(edges))
    for c in range(len(cells)):
        longest = 0.0
        for e in range(len(edges)):
            a, b = cells[c, edges[e, 0]], cells[c, edges[e, 1]]
            d2 = 0.0
            for k in range(3):
                d2 += (points[a, k] - points[b, k]) ** 2
            lengths[e] = np.sqrt(d2)
            longest = max(longest, lengths[e])
        smallest = np.inf
        for e in range(len(edges)):
            if lengths[e] > 1e-6 * longest:
                smallest = min(smallest, lengths[e])
        for k in range(cells.shape[1]):
            node = cells[c, k]
            shortest[node] = min(shortest[node], smallest)


@kernel
def _hash(i: int, j: int, k: int, mask: int) -> int:
    h = (i * 73856093) ^ (j * 19349663) ^ (k * 83492791)
    h ^= h >> 17
    return h & mask


@kernel
def _coincident_pairs(
    points: FloatArray, tolerance: FloatArray, largest: float
) -> tuple[IntArray, IntArray]:
    """Pairs of nodes closer than both their tolerances (negative: node not used).

    Nodes are hashed by grid cells of eight times the largest tolerance; a neighbouring grid cell
    is looked at only from nodes within reach of it, so nearly every node is compared within one
    grid cell.
    """
    n = len(points)
    size = 8.0 * largest
    slots = 1
    while slots < 2 * n:
        slots *= 2
    # Half the width is half the memory, and fewer misses of the cache.
    head = np.full(slots, -1, np.int32)
    after = np.empty(n, np.int32)
    low = np.full(3, np.inf)
    for a in range(n):
        for k in range(3):
            low[k] = min(low[k], points[a, k])
    first = np.empty(16, np.int64)
    second = np.empty(16, np.int64)
    found = 0
    cell = np.empty(3, np.int64)
    start = np.empty(3, np.int64)
    stop = np.empty(3, np.int64)
    for a in range(n):
        reach = tolerance[a]
        if reach < 0.0:
            continue
        for k in range(3):
            x = (points[a, k] - low[k]) / size
            cell[k] = np.int64(np.floor(x))
            start[k] = np.int64(np.floor(x - reach / size))
            stop[k] = np.int64(np.floor(x + reach / size)) + 1
        for i in range(start[0], stop[0]):
            for j in range(start[1], stop[1]):
                for k in range(start[2], stop[2]):
                    b = head[_hash(i, j, k, slots - 1)]
                    while b >= 0:
                        d2 = (
                            (points[a, 0] - points[b, 0]) ** 2
                            + (points[a, 1] - points[b, 1]) ** 2
                            + (points[a, 2] - points[b, 2]) ** 2
                        )
                        limit = min(reach, tolerance[b])
                        if d2 <= limit * limit:
                            if found == len(first):
                                first = np.concatenate((first, np.empty_like(first)))
                                second = np.concatenate((second, np.empty_like(second)))
                            first[found] = b
                            second[found] = a
                            found += 1
                        b = after[b]
        slot = _hash(cell[0], cell[1], cell[2], slots - 1)
        after[a] = head[slot]
        head[slot] = a
    return first[:found], second[:found]
