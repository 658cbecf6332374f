"""Triangles cut to a box, without gluing what touches: the lips of a crack stay two."""

from typing import Any

import numpy as np

from front3d.arrays import FloatArray, IntArray


def cut_to_box(surface: Any, low: FloatArray, high: FloatArray) -> Any:
    """The part of a triangulated surface inside the box, with its point data."""
    import pyvista as pv

    points = np.asarray(surface.points, np.float64)
    triangles = np.asarray(surface.faces).reshape(-1, 4)[:, 1:]
    names = [name for name in surface.point_data if surface.point_data[name].ndim == 2]
    columns = [np.asarray(surface.point_data[name], np.float64) for name in names]
    widths = [3, *(column.shape[1] for column in columns)]
    table = np.hstack([points, *columns])  # coordinates and data are cut alike
    for axis in range(3):
        for sign, limit in ((1.0, high[axis]), (-1.0, low[axis])):
            table, triangles = _cut(table, triangles, sign * (table[:, axis] - limit))
    if not len(triangles):
        return pv.PolyData()
    used, renamed = np.unique(triangles, return_inverse=True)
    corners: Any = renamed.reshape(-1, 3)
    parts = np.split(table[used], np.cumsum(widths)[:-1], axis=1)
    out = pv.PolyData.from_regular_faces(parts[0], corners)
    for name, part in zip(names, parts[1:], strict=True):
        out.point_data[name] = part.astype(np.float32)
    return out


def _cut(
    table: FloatArray, triangles: IntArray, distance: FloatArray
) -> tuple[FloatArray, IntArray]:
    """Keep where `distance` (n,) of the points is not positive."""
    inside = distance[triangles] <= 0
    count = inside.sum(axis=1)
    pieces, edges = [triangles[count == 3]], []
    for wanted in (1, 2):
        rows, inner = triangles[count == wanted], inside[count == wanted]
        # The one corner that is alone on its side comes first; the turn stays.
        alone = np.argmax(inner == (wanted == 1), axis=1)
        rows = np.take_along_axis(rows, (alone[:, None] + np.arange(3)) % 3, axis=1)
        edges.append(rows)
    whole = np.vstack(edges)
    pairs = np.sort(np.stack([whole[:, [0, 1]], whole[:, [0, 2]]], axis=1), axis=2).reshape(-1, 2)
    if len(pairs):
        pairs, where = np.unique(pairs, axis=0, return_inverse=True)
        first, second = distance[pairs].T
        weight = (first / (first - second))[:, None]
        new = (1 - weight) * table[pairs[:, 0]] + weight * table[pairs[:, 1]]
        b, c = (len(table) + where.reshape(-1, 2)).T
        table = np.vstack([table, new])
        n = len(edges[0])
        pieces.append(np.stack([whole[:n, 0], b[:n], c[:n]], axis=1))
        _, p, q = whole[n:].T
        pieces += [np.stack([b[n:], p, q], axis=1), np.stack([b[n:], q, c[n:]], axis=1)]
    return table, np.vstack(pieces)
