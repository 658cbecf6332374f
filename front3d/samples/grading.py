"""Graded subdivisions: cells that grow geometrically away from the front."""

from math import ceil, log

import numpy as np

from front3d.arrays import FloatArray


def count(length: float, first: float, growth: float) -> int:
    """Cells needed to cover `length` when the first has size `first` and each next grows."""
    if first >= length:
        return 1
    if growth <= 1.0:
        return ceil(length / first)
    return max(1, ceil(log(1.0 + length * (growth - 1.0) / first) / log(growth) - 0.25))


def fractions(length: FloatArray | float, first: float, cells: int) -> FloatArray:
    """Positions 0 to 1 of 2 cells + 1 nodes, (n, 2 cells + 1), for each of n lengths.

    The first cell has the size `first` where the length allows it; cells never shrink.
    Mid-side nodes are in the middle.
    """
    target = np.atleast_1d(np.asarray(length, dtype=float)) / first
    low, high = np.ones_like(target), np.full_like(target, 20.0)
    powers = np.arange(cells)
    for _ in range(60):  # bisection for the growth: the sum of powers is the length
        middle = (low + high) / 2.0
        too_long = (middle[:, None] ** powers).sum(axis=1) > target
        low, high = np.where(too_long, low, middle), np.where(too_long, middle, high)
    sizes = low[:, None] ** powers
    ends = np.concatenate([np.zeros((len(target), 1)), np.cumsum(sizes, axis=1)], axis=1)
    ends /= ends[:, -1:]
    return with_middles(ends)


def with_middles(ends: FloatArray) -> FloatArray:
    """(n, m) end positions -> (n, 2 m - 1) with their midpoints between."""
    out = np.empty((len(ends), 2 * ends.shape[1] - 1))
    out[:, ::2] = ends
    out[:, 1::2] = (ends[:, 1:] + ends[:, :-1]) / 2.0
    return out
