"""The node pairs behind a front: how far each is from it, and how far its sides have parted."""

from dataclasses import dataclass

import numpy as np

from front3d.arrays import BoolArray, FloatArray, IntArray
from front3d.crack.front import Front
from front3d.errors import MethodError
from front3d.methods.context import FrontContext
from front3d.methods.tube import along_front, project

_ACROSS = 0.2
"""Largest distance of a pair from the tangent plane of the crack at the front, in distances."""

_SMOOTHED = 4
"""Stations to either side over which the size of ragged cells is averaged."""


@dataclass(frozen=True, slots=True, eq=False)
class Pairs:
    """Node pairs that lie straight behind the front.

    Attributes
    ----------
    s, d : (n,) arc length of the nearest front point, and distance behind it in the crack plane
    other : (n,) distance from the nearest other front of the same crack; infinite without one
    jump : (n, n_steps, 3) upper minus lower displacement along e2, e1, e3: opening, sliding,
        tearing, in the order of the modes; a half model has an opening only
    """

    s: FloatArray
    d: FloatArray
    other: FloatArray
    jump: FloatArray


def behind_front(context: FrontContext) -> Pairs:
    """All pairs of the patch that this front is the nearest to, on its own normals."""
    solid, front, patch = context.solid, context.front, context.patch
    above, below = patch.pairs.T
    x = solid.points[above]
    s, r = project(front, x)
    other = _other_fronts(context, x)
    place, frame, _ = front.curve.frames(s)
    local = np.einsum("nij,nj->ni", frame, x - place)
    d = -local[:, 0]
    # Beyond the ends of an open front there is no normal to stand on.
    straight = np.abs(local[:, 2]) <= 1e-6 * front.length
    behind = (d > 0) & (np.abs(local[:, 1]) <= _ACROSS * d) & straight & (r < other)
    u = context.displacement
    apart = 2.0 * u[:, above] if patch.half else u[:, above] - u[:, below]
    jump = np.einsum("tnj,nij->nti", apart, frame)[:, :, [1, 0, 2]]
    if patch.half:
        jump[:, :, 1:] = 0.0
    return Pairs(s[behind], d[behind], other[behind], jump[behind])


def _other_fronts(context: FrontContext, x: FloatArray) -> FloatArray:
    """(n,) distance of points x from the nearest other front of the patch."""
    nearest = np.full(len(x), np.inf)
    for patch, fronts in zip(context.model.patches, context.model.fronts, strict=True):
        if patch is context.patch:
            for front in fronts:
                if front is not context.front:
                    nearest = np.minimum(nearest, project(front, x)[1])
    return nearest


def cell_sizes(context: FrontContext) -> FloatArray:
    """(n_stations,) how far the crack faces with an edge on the front reach behind it.

    Averaged along the front, because the faces of tetrahedra are ragged and what their
    size does to the opening is not.
    """
    solid, front, same = context.solid, context.front, context.model.same
    n, on_front = len(front.corners), context.on_front
    corners = context.patch.upper.corners
    touching = _distinct_on_front(same.entity[corners], on_front[corners]) >= 2
    corners = corners[touching]
    if not len(corners):
        raise MethodError(f"{solid.source}: no crack face has an edge on the front")
    s, r = project(front, solid.points[corners.ravel()])
    reach = np.repeat(r.reshape(corners.shape).max(axis=1), corners.shape[1])
    here = on_front[corners.ravel()]
    station = np.rint(front.cell_coordinate(s[here])).astype(np.int64) % n
    total = np.bincount(station, reach[here], minlength=n)
    count = np.bincount(station, minlength=n)
    return _smoothed(np.asarray(total, float), np.asarray(count, float), front)


def _distinct_on_front(entity: IntArray, on_front: BoolArray) -> IntArray:
    """How many different front nodes each face has: a triangle repeats its first corner."""
    named = np.sort(np.where(on_front, entity, -1), axis=1)
    new = np.ones(named.shape, bool)
    new[:, 1:] = named[:, 1:] != named[:, :-1]
    count: IntArray = (new & (named >= 0)).sum(axis=1)
    return count


def _smoothed(total: FloatArray, count: FloatArray, front: Front) -> FloatArray:
    """Ratio of two sums over stations, both weighted by a tent along the front."""
    n = len(total)
    reach = min(_SMOOTHED, (n - 1) // 2)
    above, below = np.zeros(n), np.zeros(n)
    for shift in range(-reach, reach + 1):
        weight = 1.0 - abs(shift) / (reach + 1)
        source = np.arange(n) + shift
        inside = np.full(n, True) if front.closed else (source >= 0) & (source < n)
        source = source % n
        above += weight * np.where(inside, total[source], 0.0)
        below += weight * np.where(inside, count[source], 0.0)
    return above / below


def at_pairs(front: Front, at_stations: FloatArray, pairs: Pairs) -> FloatArray:
    """Values at the feet of the pairs, linear between the stations."""
    return along_front(front, at_stations, pairs.s)
