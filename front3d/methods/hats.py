"""The weight of each station along the front.

A hat is a tent over the front's edges, so it follows the local cell size.  At a symmetry plane the
mirrored half completes it: K_I and K_II go on evenly beyond the plane, K_III oddly.  At a free
surface nothing lies beyond: there the cut tent is tilted so that it still gives back a K that
varies linearly along the front exactly, and not its value further inside.
"""

from dataclasses import dataclass

import numpy as np
from scipy.sparse import coo_array, csr_array

from front3d.arrays import FloatArray, IntArray
from front3d.crack.front import FREE_SURFACE, SYMMETRY_PLANE, Front
from front3d.solid import Solid

WIDEST_ANGLE = 0.19
"""Angle in radians through which the front may turn within the half-width of a default hat."""

WIDEST_CELLS = 3.0
"""Half-width of a default hat in cells across the front, where the front turns."""

STRAIGHT = 0.01
"""Angle in radians from edge to edge below which a front counts as straight."""


@dataclass(frozen=True, slots=True, eq=False)
class Hats:
    """Normalised hats of all stations of a front.

    Attributes
    ----------
    front : the front
    width : (n_stations,) half-widths in edges
    level, tilt : (n_stations,) a station's weight at s is (level + tilt (s - s_a)) tent(s): one
        over the area it sweeps per unit advance, and the tilt at a free end
    """

    front: Front
    width: FloatArray
    level: FloatArray
    tilt: FloatArray

    @property
    def half_lengths(self) -> FloatArray:
        """(n_stations,) half-widths as lengths, by the edges at each station."""
        front = self.front
        knots = np.append(front.corner_s, front.length) if front.closed else front.corner_s
        edges = np.diff(knots)
        before, after = (
            (np.roll(edges, 1), edges)
            if front.closed
            else (np.append(edges[0], edges), np.append(edges, edges[-1]))
        )
        return self.width * (before + after) / 2.0

    def weights(self, s: FloatArray, odd: bool = False) -> csr_array:
        """(len(s), n_stations) weights at arc lengths s; `odd` for K_III."""
        tents = _tents(self.front, s, self.width, -1.0 if odd else 1.0)
        inside = np.clip(s, 0.0, self.front.length)
        gap = inside[tents.row] - self.front.corner_s[tents.col]
        scaled = tents.data * (self.level[tents.col] + self.tilt[tents.col] * gap)
        return csr_array((scaled, (tents.row, tents.col)), shape=tents.shape)


def build_hats(solid: Solid, front: Front, width: FloatArray) -> Hats:
    """Hats of given half-widths in edges, one per corner node."""
    n = len(front.corners)
    width = np.minimum(width, n / 2 if front.closed else float(n - 1))
    s, area = swept_areas(solid, front)
    tents = _tents(front, s, width, 1.0)
    gap = s[tents.row] - front.corner_s[tents.col]
    weight = tents.data * area[tents.row]
    zeroth, first, second = (
        np.bincount(tents.col, weight * gap**power, minlength=n) for power in range(3)
    )
    level, tilt = 1.0 / zeroth, np.zeros(n)
    cut = _cut_stations(front, width)
    determinant = zeroth * second - first**2
    # A tent one edge wide on linear edges holds its own station only: nothing to tilt by.
    cut = cut[determinant[cut] > 1e-9 * zeroth[cut] ** 2 * front.length**2 / n**2]
    level[cut] = second[cut] / determinant[cut]
    tilt[cut] = -first[cut] / determinant[cut]
    return Hats(front, width, level, tilt)


def default_widths(front: Front, structured: bool, reach: FloatArray) -> FloatArray:
    """One edge where bricks and wedges surround the front, up to three where tetrahedra do.

    On a structured ring the integral does not scatter, and a wider hat would only blunt K.  On
    tetrahedra scatter falls with the width, but the hat averages over it, by a twelfth of the
    square of the angle that the front turns through for a K that varies as the cosine of it:
    WIDEST_ANGLE keeps that below 0.3 %.  Measured on a penny with 105 edges: the standard
    deviation of K_I was 0.64 % with one edge, 0.26 % with two, 0.16 % with three and 0.10 %
    with four.  Cells that are long along the front and short across it get a hat of no more than
    three of the latter where the front turns: there K changes within a cell.  Along straight
    fronts such cells scatter as others do, by 1.6 % with one edge and 0.3 % with three.

    Parameters
    ----------
    structured : only bricks and wedges touch the front
    reach : (n_stations,) how far the cells that touch the front reach from it
    """
    n = len(front.corners)
    if structured:
        return np.ones(n)
    _, _, turning = front.curve.frames(front.corner_s)
    turn = np.linalg.norm(turning[:, :2], axis=1) * front.length / len(front.edges)
    by_turn = WIDEST_ANGLE / np.maximum(turn, 1e-12)
    by_size = WIDEST_CELLS * reach * len(front.edges) / front.length
    by_size[turn < STRAIGHT] = np.inf
    return np.clip(np.minimum(by_turn, by_size), 1.0, 3.0)


def _cut_stations(front: Front, width: FloatArray) -> IntArray:
    """Stations whose tents reach over a free end."""
    stations = np.arange(len(front.corners))
    cut = np.zeros(len(stations), bool)
    if front.ends and front.ends[0] == FREE_SURFACE:
        cut |= stations < width
    if front.ends and front.ends[1] == FREE_SURFACE:
        cut |= stations > len(stations) - 1 - width
    return np.flatnonzero(cut)


def _tents(front: Front, s: FloatArray, width: FloatArray, parity: float) -> coo_array:
    """(len(s), n_stations) tents at arc lengths s, mirrored at symmetry planes."""
    n = len(front.corners)
    at = front.cell_coordinate(s)
    rows, columns, values = [], [], []
    images = [(at, 1.0)]
    if front.ends and front.ends[0] == SYMMETRY_PLANE:
        images.append((-at, parity))
    if front.ends and front.ends[1] == SYMMETRY_PLANE:
        images.append((2.0 * (n - 1) - at, parity))
    reach = int(np.ceil(width.max())) + 1
    for image, sign in images:
        base = np.floor(image).astype(np.int64)
        for shift in range(-reach, reach + 1):
            station = base + shift
            gap = np.abs(image - station)
            station = station % n if front.closed else station
            exists = (station >= 0) & (station < n)
            value = np.where(exists, 1.0 - gap / width[np.clip(station, 0, n - 1)], 0.0)
            hit = np.flatnonzero(value > 0)
            rows.append(hit)
            columns.append(station[hit])
            values.append(sign * value[hit])
    triplets = (np.concatenate(rows), np.concatenate(columns))
    return coo_array((np.concatenate(values), triplets), shape=(len(s), n))


def swept_areas(solid: Solid, front: Front) -> tuple[FloatArray, FloatArray]:
    """Arc length and area of every node of every front edge, flat: edge by edge.

    The area is what the node sweeps when it alone advances by one along its e1 and the cells
    follow: - int phi_n (e1_n x dX) . e2.  Taken over the edges as the mesh has them, straight or
    curved, because that is the area the integral's q sweeps.
    """
    x, w = np.polynomial.legendre.leggauss(4)
    curve, edges = front.curve, front.edges
    quadratic = edges[:, 2] >= 0
    places, areas = [], []
    for chosen, columns in ((~quadratic, [0, 1]), (quadratic, [0, 1, 2])):
        group = edges[chosen][:, columns]
        if not len(group):
            continue
        if len(columns) == 2:
            shape = np.stack([(1 - x) / 2, (1 + x) / 2], axis=1)
            slope = np.stack([np.full_like(x, -0.5), np.full_like(x, 0.5)], axis=1)
        else:
            shape = np.stack([x * (x - 1) / 2, x * (x + 1) / 2, 1 - x * x], axis=1)
            slope = np.stack([x - 0.5, x + 0.5, -2 * x], axis=1)
        points = solid.points[group]
        seed = np.repeat(front.corner_s[: len(edges)][chosen], len(columns))
        s, _ = curve.project(points.reshape(-1, 3), seed)
        _, frame, _ = curve.frames(s)
        frame = frame.reshape(*group.shape, 3, 3)
        tangent = np.einsum("gn,enk->egk", slope, points - points[:, :1])
        e2 = np.einsum("gn,enk->egk", shape, frame[:, :, 1])
        sweep = np.cross(frame[:, None, :, 0], tangent[:, :, None])
        places.append(s)
        areas.append(-np.einsum("egnk,egk,gn,g->en", sweep, e2, shape, w).ravel())
    return np.concatenate(places), np.concatenate(areas)
