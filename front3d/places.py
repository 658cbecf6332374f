"""Where nodes stand: which of them at one place, and which near others, in one pass over them."""

import numpy as np

from front3d.arrays import BoolArray, FloatArray, IntArray, frozen_floats
from front3d.jit import kernel

RELATIVE_TOLERANCE = 1e-4
"""Two nodes coincide when closer than this times the shortest edge at either of them."""

_FINENESS, _MOST_VOXELS = 3.0, 128
_CHUNK, _NUMBERS = 1 << 16, 1 << 18


def within(points: FloatArray, places: FloatArray, reach: float) -> BoolArray:
    """(n,) which points lie within `reach` of any of some places, (m, 3), and some more.

    Points are looked up in a grid of voxels over the places, of which those within reach are
    marked, so that not every point is compared with every place.
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


def rows_holding(cells: IntArray, nodes: BoolArray) -> IntArray:
    """Rows of cells, (n, nodes), with a marked node.

    Marked nodes are few: looking for them in the flat list takes a third of the time of asking
    every row.
    """
    width, found = cells.shape[1], []
    step = max(1, _NUMBERS // width)
    for start in range(0, len(cells), step):
        places = np.flatnonzero(nodes.take(cells[start : start + step]))
        if len(places):
            rows = places // width
            new = np.ones(len(rows), bool)
            new[1:] = rows[1:] != rows[:-1]
            found.append(start + rows[new])
    return np.concatenate(found) if found else np.zeros(0, np.int64)


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
def _voxels(
    points: FloatArray,
    a: int,
    reach: float,
    grid: tuple[float, float, float, float],
    home: IntArray,
    start: IntArray,
    stop: IntArray,
) -> None:
    """The voxel that holds a point, and the range of those within `reach` of it: one, nearly
    always.
    """
    for k in range(3):
        x = (points[a, k] - grid[k]) / grid[3]
        home[k] = np.int64(np.floor(x))
        start[k] = np.int64(np.floor(x - reach / grid[3]))
        stop[k] = np.int64(np.floor(x + reach / grid[3])) + 1


@kernel
def _crowded(
    points: FloatArray, tolerance: FloatArray, grid: tuple[float, float, float, float]
) -> BoolArray:
    """(n,) which points share a voxel with another, and a few more.

    A bit by voxel, hashed, says that a point was seen there, and another that a second one was.
    The bits stay in the processor's cache, where a table of points does not.
    """
    n = len(points)
    slots = 64
    while slots < 16 * n:
        slots *= 2
    seen, twice = np.zeros(slots // 64, np.uint64), np.zeros(slots // 64, np.uint64)
    crowded = np.zeros(n, np.bool_)
    home, start, stop = np.empty(3, np.int64), np.empty(3, np.int64), np.empty(3, np.int64)
    for look in range(2):
        for a in range(n):
            if tolerance[a] < 0.0:
                continue
            _voxels(points, a, tolerance[a], grid, home, start, stop)
            for i in range(start[0], stop[0]):
                for j in range(start[1], stop[1]):
                    for k in range(start[2], stop[2]):
                        slot = _hash(i, j, k, slots - 1)
                        word, bit = slot >> 6, np.uint64(1) << np.uint64(slot & 63)
                        if look == 1:
                            crowded[a] |= (twice[word] & bit) != 0
                        elif seen[word] & bit:
                            twice[word] |= bit
                        else:
                            seen[word] |= bit
    return crowded


@kernel
def _pairs(
    points: FloatArray, tolerance: FloatArray, grid: tuple[float, float, float, float]
) -> tuple[IntArray, IntArray]:
    """Pairs of points closer than both their tolerances."""
    n = len(points)
    slots = 1
    while slots < 2 * n:
        slots *= 2
    head = np.full(slots, -1, np.int32)
    after = np.empty(n, np.int32)
    first, second = np.empty(16, np.int64), np.empty(16, np.int64)
    found = 0
    home, start, stop = np.empty(3, np.int64), np.empty(3, np.int64), np.empty(3, np.int64)
    for a in range(n):
        _voxels(points, a, tolerance[a], grid, home, start, stop)
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
                        limit = min(tolerance[a], tolerance[b])
                        if d2 <= limit * limit:
                            if found == len(first):
                                first = np.concatenate((first, np.empty_like(first)))
                                second = np.concatenate((second, np.empty_like(second)))
                            first[found] = b
                            second[found] = a
                            found += 1
                        b = after[b]
        slot = _hash(home[0], home[1], home[2], slots - 1)
        after[a] = head[slot]
        head[slot] = a
    return first[:found], second[:found]


def tolerances(shortest: FloatArray, spacing: float) -> FloatArray:
    """(n,) distance below which a node coincides with another, from the shortest edge at it and the
    spacing of the coordinates; negative where no edge is, at nodes of no cell.

    In place of `shortest`: at ten million nodes every array counts.
    """
    unused = ~np.isfinite(shortest)
    np.multiply(shortest, RELATIVE_TOLERANCE, out=shortest)
    np.maximum(shortest, 2.0 * spacing, out=shortest)
    shortest[unused] = -1.0
    return frozen_floats(shortest)


def coincident_pairs(points: FloatArray, tolerance: FloatArray) -> tuple[IntArray, IntArray]:
    """Pairs of nodes closer than both their tolerances (negative: node not used).

    Nodes are sorted by voxels of eight times the largest tolerance; a neighbouring voxel is looked
    at only from nodes within reach of it.  Nearly every node is alone in its voxel, and is left
    out before the nodes are compared.
    """
    size = 8.0 * float(tolerance.max())
    # Off the lowest node by a part of a voxel, or regular meshes would stand on its borders.
    x, y, z = (_lowest(points[:, k], tolerance) - 0.38 * size for k in range(3))
    grid = (x, y, z, size)
    (rows,) = np.nonzero(_crowded(points, tolerance, grid))
    first, second = _pairs(frozen_floats(points[rows]), frozen_floats(tolerance[rows]), grid)
    return rows[first], rows[second]


def _lowest(x: FloatArray, tolerance: FloatArray) -> float:
    """The smallest coordinate of nodes that are used; others may hold anything."""
    lowest = float(np.fmin.reduce(x))
    return lowest if np.isfinite(lowest) else float(x[tolerance >= 0.0].min())
