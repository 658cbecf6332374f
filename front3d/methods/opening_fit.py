"""Local fits of the opening along a front, and the effective front that suits them best.

At distance d behind a front the opening is  D = f K sqrt(d) (1 + b d + ...).  Finite elements open
as if the front stood a little behind its true place,  D = f sqrt(d - eps h) (K + B d),  h the cell
size.  For a given eps this is linear: every station has a small least-squares problem over the
pairs in its window, in which K varies along the front as a parabola and B linearly.  eps, one
number per mode for the whole front, is where the sum of all squared residuals is least.
"""

from dataclasses import dataclass

import numpy as np
from scipy.optimize import brentq

from front3d.arrays import BoolArray, FloatArray, IntArray
from front3d.crack.front import SYMMETRY_PLANE, Front

EPS_RANGE = (-0.3, 0.6)
"""Where the effective front is looked for, in cells behind the true one."""

_SHARED = 0.2
"""A mode with less than this part of the leading one has no opening to see its own effective front
by, and takes over that of the leading mode."""

_WEAK = 1e-12
"""Smallest ratio of eigenvalues of a station's equations that can be solved."""


@dataclass(frozen=True, slots=True, eq=False)
class Windows:
    """The pairs that count for each station, flat: row by row, stations in order.

    Attributes
    ----------
    station, pair : (m,) whose row it is, and the row of the pair
    gap : (m,) arc length from the station to the pair's foot, in half-widths of the window
    sign : (m,) what tearing is multiplied by: -1 for a mirror image beyond a symmetry plane
    """

    station: IntArray
    pair: IntArray
    gap: FloatArray
    sign: FloatArray

    def at(self, stations: IntArray) -> "Windows":
        """The windows of some of the stations, under their own numbers."""
        kept = np.isin(self.station, stations)
        return Windows(self.station[kept], self.pair[kept], self.gap[kept], self.sign[kept])


def build_windows(front: Front, s: FloatArray, width: float) -> Windows:
    """Windows of a half-width in edges over pairs with feet at s."""
    n = len(front.corners)
    at = front.cell_coordinate(s)
    last = float(n if front.closed else n - 1)
    images = [(at, s, 1.0)]
    if front.closed:
        images += [(at - last, s - front.length, 1.0), (at + last, s + front.length, 1.0)]
    else:
        if front.ends and front.ends[0] == SYMMETRY_PLANE:
            images.append((-at, -s, -1.0))
        if front.ends and front.ends[1] == SYMMETRY_PLANE:
            images.append((2 * last - at, 2 * front.length - s, -1.0))
    place = np.concatenate([image[0] for image in images])
    order = np.argsort(place, kind="stable")
    place = place[order]
    arc = np.concatenate([image[1] for image in images])[order]
    sign = np.repeat([image[2] for image in images], len(s))[order]
    stations = np.arange(n)
    first = np.searchsorted(place, stations - width, "right")
    count = np.searchsorted(place, stations + width, "left") - first
    station = np.repeat(stations, count)
    row = np.arange(len(station)) - np.repeat(np.cumsum(count) - count - first, count)
    gap = arc[row] - front.corner_s[station]
    largest = np.zeros(n)
    np.maximum.at(largest, station, np.abs(gap))
    # Pairs at the very end of a window get little weight, but not none: hence the excess.
    gap = gap / np.maximum(1.001 * largest, 1e-300)[station]
    return Windows(station, order[row] % len(s), gap, sign[row])


@dataclass(frozen=True, slots=True, eq=False)
class Fit:
    """Result of the fits in one step.

    Attributes
    ----------
    K : (n_stations, 3)
    eps : (3,) effective front in cells behind the true one, by mode
    leading : the mode with the largest opening
    residual : (n_stations,) root of the squares left over, in parts of that of the opening
    """

    K: FloatArray
    eps: FloatArray
    leading: int
    residual: FloatArray


class OpeningFit:
    """The equations of all stations, ready for any opening.

    Parameters
    ----------
    windows : pairs by station
    d, cell, reach : (m,) by row: distance of the pair, cell size and largest distance at
        the station
    along : degree of K along the front
    """

    def __init__(
        self, windows: Windows, d: FloatArray, cell: FloatArray, reach: FloatArray, along: int
    ) -> None:
        self._windows = windows
        t, g = d / reach, windows.gap
        terms = [g**k for k in range(along + 1)] + [t * g**k for k in range(min(along, 1) + 1)]
        # The scatter of eps is about the same at all distances, so that of D / sqrt(d) falls as
        # 1 / d and its weight, the square root of which stands here, rises as d^2.
        weight = np.sqrt(np.maximum(1.0 - g**2, 0.0)) * t
        self._terms = np.stack(terms, axis=1) * weight[:, None]
        self._cells = cell / d
        self._scale = weight / np.sqrt(d)
        self.n_unknowns = len(terms)
        stations, self._start = np.unique(windows.station, return_index=True)
        self._n = len(stations)
        # Terms go with sqrt(1 - eps h / d): the normal equations are linear in eps.
        products = self._terms[:, :, None] * self._terms[:, None, :]
        self._normal = self._sums(products)
        self._slope = self._sums(products * self._cells[:, None, None])

    def solvable(self) -> BoolArray:
        """(n_stations,) whether each station's equations have one solution."""
        values = np.linalg.eigvalsh(self._normal)
        good: BoolArray = values[:, 0] > _WEAK * values[:, -1]
        return good

    def solve(self, scaled: FloatArray) -> Fit:
        """Fit one step; `scaled`, (n_pairs, 3), are the openings over f of each mode."""
        rows = scaled[self._windows.pair] * self._scale[:, None]
        rows[:, 2] *= self._windows.sign
        size = (rows**2).sum(axis=0)
        leading = int(np.argmax(size))
        grid = np.linspace(*EPS_RANGE, 19)
        shared = np.array([self._left_over(rows[:, leading], eps) for eps in grid])
        K, eps = np.zeros((self._n, 3)), np.zeros(3)
        squares = np.zeros(self._n)
        for mode in range(3):
            prior = 0.0 if mode == leading else _SHARED**2
            if not size[leading] > 0.0:
                continue
            eps[mode] = self._best_eps(rows[:, mode], grid, prior * shared)
            solution, left = self._stations(rows[:, mode], eps[mode])
            K[:, mode] = solution[:, 0]
            squares += left
        whole = self._sums((rows**2).sum(axis=1))
        residual = np.sqrt(squares / np.where(whole > 0, whole, 1.0))
        return Fit(K, eps, leading, residual)

    def _best_eps(self, row: FloatArray, grid: FloatArray, prior: FloatArray) -> float:
        """Where the squares left over, and the prior on the grid, are least."""
        k = int(np.argmin([self._left_over(row, eps) for eps in grid] + prior))
        # A minimum is flat and can be told to half the digits only, where its slope is zero to all
        # of them: without them K of a sum of steps is not the sum.  The prior's own slope jumps at
        # the grid, so the minimum is in the interval before, or after, or at the corner itself.
        for before, after in ((k - 1, k), (k, k + 1)):
            if before < 0 or after == len(grid):
                continue
            low, high = float(grid[before]), float(grid[after])
            rise = float(prior[after] - prior[before]) / (high - low)

            def slope(eps: float, rise: float = rise) -> float:
                return self._slope_of_left_over(row, eps) + rise

            if slope(low) < 0.0 < slope(high):
                return float(brentq(slope, low, high, xtol=1e-15, rtol=1e-14))
        return float(grid[k])

    def _left_over(self, row: FloatArray, eps: float) -> float:
        return float(self._stations(row, eps)[1].sum())

    def _slope_of_left_over(self, row: FloatArray, eps: float) -> float:
        """Derivative of `_left_over`: for b A^-1 b it is 2 b' x - x A' x with A x = b."""
        solution, _ = self._stations(row, eps)
        slower = row * (-0.5 * self._cells / np.sqrt(1.0 - eps * self._cells))
        turned = self._sums(self._terms * slower[:, None])
        squares = np.einsum("nc,ncd,nd->", solution, self._slope, solution)
        return -float(2.0 * np.sum(turned * solution) + squares)

    def _stations(self, row: FloatArray, eps: float) -> tuple[FloatArray, FloatArray]:
        """Unknowns, (n_stations, n_unknowns), and squares left over, (n_stations,)."""
        seen = row * np.sqrt(1.0 - eps * self._cells)
        right = self._sums(self._terms * seen[:, None])
        normal = self._normal - eps * self._slope
        solution = np.linalg.solve(normal, right[:, :, None])[:, :, 0]
        left: FloatArray = self._sums(row**2) - np.einsum("nc,nc->n", solution, right)
        return np.asarray(solution, float), np.maximum(left, 0.0)

    def _sums(self, rows: FloatArray) -> FloatArray:
        """Sums over the rows of each station."""
        total: FloatArray = np.add.reduceat(rows, self._start, axis=0)
        return total
