"""Where nodes stand: which of them at one place, and which near others, in one pass over them."""

import numpy as np

from front3d.arrays import BoolArray, FloatArray, IntArray
from front3d.jit import kernel

RELATIVE_TOLERANCE = 1e-4
"""Two nodes coincide when closer than this times the shortest edge at either of them."""

_FINENESS, _MOST_VOXELS = 3.0, 128
_CHUNK = 1 << 16


def within(points: FloatArray, places: FloatArray, reach: float) -> BoolArray:
    """(n,) which points lie within `reach` of any of some places, (m, 3), and some more.

    Points are looked up in a grid of voxels over the places, of which those within reach are
    marked, so the cost does not grow with the number of both.
    """
    low = places.min(axis=0) - reach
    span = places.max(axis=0) + reach - low
    size = max(reach / _FINENESS, float(span.max()) / _MOST_VOXELS)
    shape = np.ceil(span / size).astype(np.int64) + 1
    marked = _marked_voxels(places - low, shape, size, reach)
    inside = np.zeros(len(points), bool)
    for start in range(0, len(inside), _CHUNK):
        part = points[start : start + _CHUNK]
        rows = np.flatnonzero(((part >= low) & (part <= low + span)).all(axis=1))
        i, j, k = ((part[rows] - low) / size).astype(np.int64).T
        inside[start + rows] = marked[i, j, k]
    return inside


def _marked_voxels(samples: FloatArray, shape: IntArray, size: float, reach: float) -> BoolArray:
    """Which voxels hold a point within `reach` of a sample, and some more."""
    at = np.unique((samples / size).astype(np.int64), axis=0)
    n = int(np.ceil(reach / size)) + 1
    offsets = np.stack(np.meshgrid(*(np.arange(-n, n + 1),) * 3, indexing="ij"), axis=-1)
    offsets = offsets.reshape(-1, 3)
    # The nearest points of two voxels are a voxel closer along each axis than their corners.
    apart = np.maximum(np.abs(offsets) - 1, 0) * size
    offsets = offsets[(apart**2).sum(axis=1) <= reach**2]
    marked = np.zeros(shape, bool)
    for offset in offsets:
        voxel = at + offset
        i, j, k = voxel[((voxel >= 0) & (voxel < shape)).all(axis=1)].T
        marked[i, j, k] = True
    return marked


@kernel
def shortest_edges(
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
def coincident_pairs(
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
