"""Openings for closure where faces of any shape meet the front.

The faces ahead that touch the front end on a ragged line at a distance D(s) from it.  A node of
theirs at distance x does work on the opening at D(s) - x behind the front, averaged along the
front with the weight of the station, and taken from the crack faces as the cells interpolate it.
The closure integral over all faces next to the front is that of Okada, Kawai and Araki (2008);
mirroring by distance, not by element, is what lets the faces ahead and behind differ.
"""

from dataclasses import dataclass

import numpy as np
from scipy.spatial import cKDTree

from front3d.arrays import BoolArray, FloatArray, IntArray
from front3d.elements import FACES, FaceType
from front3d.methods.closure_forces import Ligament, face_nodes, mode_axes
from front3d.methods.closure_weights import Tents
from front3d.methods.context import FrontContext
from front3d.methods.tube import project

PER_EDGE, LEVELS = 4, 16
"""Lines per front edge on which the opening is read, and places on each."""

_CANDIDATES = 12
_OUTSIDE = -0.3
"""Reference coordinates by which a place may lie outside the nearest crack face."""


@dataclass(frozen=True, slots=True, eq=False)
class Profile:
    """Opening behind every station as a function of the distance from the front.

    Attributes
    ----------
    distance : (LEVELS,) from near 0 to the largest needed
    scaled : (steps, n_stations, LEVELS, 3) opening, per mode, over the root of the distance
    """

    distance: FloatArray
    scaled: FloatArray

    def at(self, station: IntArray, distance: FloatArray) -> FloatArray:
        """(steps, n, 3) openings of stations at distances, (n,) each; 0 where not positive."""
        d = np.clip(distance, 0.0, self.distance[-1])
        high = np.clip(np.searchsorted(self.distance, d), 1, len(self.distance) - 1)
        low = high - 1
        t = (d - self.distance[low]) / (self.distance[high] - self.distance[low])
        t = np.maximum(t, 0.0)[:, None]
        value = (1 - t) * self.scaled[:, station, low] + t * self.scaled[:, station, high]
        return np.sqrt(d)[:, None] * value


def front_offset(context: FrontContext, s: FloatArray) -> FloatArray:
    """How far the mesh's front edges lie ahead of the curve at arc lengths s: straight edges cut
    the corners of a curved front.
    """
    front, x = context.front, context.solid.points
    edges = front.edges
    chord = (x[edges[:, 0]] + x[edges[:, 1]]) / 2.0
    middle = np.where((edges[:, 2] >= 0)[:, None], x[edges[:, 2]], chord)
    ends = np.append(front.corner_s, front.length) if front.closed else front.corner_s
    at, _ = front.curve.project(middle, (ends[:-1] + ends[1:]) / 2.0)
    place, frame, _ = front.curve.frames(at)
    rise = np.einsum("nk,nk->n", middle - place, frame[:, 0])
    coordinate = front.cell_coordinate(s)
    edge = np.clip(np.floor(coordinate).astype(np.int64), 0, len(edges) - 1)
    t = coordinate - edge
    offset: FloatArray = 4.0 * t * (1.0 - t) * rise[edge]
    return offset


def places_ahead(context: FrontContext, nodes: IntArray) -> tuple[FloatArray, FloatArray]:
    """Arc length and distance ahead of the front, (n,) each, of nodes."""
    x = context.solid.points[nodes]
    s, _ = project(context.front, x)
    place, frame, _ = context.front.curve.frames(s)
    distance = np.einsum("nk,nk->n", x - place, frame[:, 0])
    return s, distance - front_offset(context, s)


def outer_line(
    context: FrontContext, ligament: Ligament
) -> tuple[BoolArray, FloatArray, FloatArray]:
    """Where the faces ahead end.

    Returns
    -------
    outer : (n_points,) mask of the nodes there
    s, distance : (m,) of these nodes, in order of s
    """
    same, faces = context.model.same, ligament.ahead
    ends = faces.sides()[0].reshape(-1, 3)
    ends = ends[same.entity[ends[:, 0]] != same.entity[ends[:, 1]]]
    pairs = np.sort(same.entity[ends[:, :2]], axis=1)
    _, row, count = np.unique(pairs, axis=0, return_inverse=True, return_counts=True)
    on_front = ligament.on_front[ends[:, :2]].any(axis=1)
    border = ends[(count[row.ravel()] == 1) & ~on_front]
    nodes = np.unique(border[border >= 0])
    outer = np.zeros(len(context.solid.points), bool)
    outer[nodes] = True
    s, distance = places_ahead(context, nodes)
    order = np.argsort(s)
    return outer, s[order], distance[order]


def build_profile(
    context: FrontContext, ligament: Ligament, tents: Tents, jump: FloatArray, reach: float
) -> Profile:
    """Profiles of all stations out to `reach`."""
    front = context.front
    knots = np.append(front.corner_s, front.length) if front.closed else front.corner_s
    step = np.diff(knots)
    part = (np.arange(PER_EDGE) + 0.5) / PER_EDGE
    s = (knots[:-1, None] + part * step[:, None]).ravel()
    width = np.repeat(step / PER_EDGE, PER_EDGE)
    distance = reach * (np.arange(1, LEVELS + 1) / LEVELS) ** 2
    place, axes = mode_axes(front, s)
    growth = axes[:, 1]
    start = place + front_offset(context, s)[:, None] * growth
    points = start[:, None] - distance[:, None] * growth[:, None]
    found, inside = _read(context, ligament, points.reshape(-1, 3), jump)
    found = found.reshape(len(jump), len(s), LEVELS, 3)
    local = np.einsum("tldk,lik->tldi", found, axes) / np.sqrt(distance)[:, None]
    usable = inside.reshape(len(s), LEVELS).all(axis=1) * width
    even = tents.weights(s).toarray() * usable[:, None]
    odd = tents.weights(s, odd=True).toarray() * usable[:, None]
    total = even.sum(axis=0)
    scaled = np.stack(
        [
            np.einsum("la,tld->tad", weight, local[..., mode]) / total[:, None]
            for mode, weight in enumerate((even, even, odd))
        ],
        axis=-1,
    )
    return Profile(distance, scaled)


def _read(
    context: FrontContext, ligament: Ligament, x: FloatArray, jump: FloatArray
) -> tuple[FloatArray, BoolArray]:
    """(steps, n, 3) opening at places x on the crack, and whether each lies on a crack face."""
    upper, entity = context.patch.upper, context.model.same.entity
    best = np.full(len(x), -np.inf)
    found = np.zeros((len(jump), len(x), 3))
    for kind, nodes in face_nodes(context.solid, upper):
        face = FACES[kind]
        corners = context.solid.points[nodes]
        count = min(_CANDIDATES, len(nodes))
        centres = corners[:, : face.n_corners].mean(axis=1)
        near = np.asarray(cKDTree(centres).query(x, k=np.arange(1, count + 1))[1], np.int64)
        for k in range(count):
            (left,) = np.nonzero(best < 0.0)  # a place inside one face is in no other
            xi, margin = _locate(face, corners[near[left, k]], x[left])
            closer = margin > best[left]
            better = left[closer]
            best[better] = margin[closer]
            shape = face.values(xi[closer])
            at = jump[:, entity[nodes[near[better, k]]]]
            found[:, better] = np.einsum("pn,tpni->tpi", shape, at)
    return found, best > _OUTSIDE


def _locate(face: FaceType, corners: FloatArray, x: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Reference coordinates of the foot of x, (n, 3), on faces, (n, nodes, 3), by Newton's method;
    and how far inside the face it is (negative outside).
    """
    triangle = face.n_corners == 3
    xi = np.tile(face.nodes[: face.n_corners].mean(axis=0), (len(x), 1))
    for _ in range(6):
        gap = x - np.einsum("pn,pni->pi", face.values(xi), corners)
        tangents = np.einsum("pnd,pni->pdi", face.gradients(xi), corners)
        metric = np.einsum("pdi,pei->pde", tangents, tangents)
        right = np.einsum("pdi,pi->pd", tangents, gap)
        det = metric[:, 0, 0] * metric[:, 1, 1] - metric[:, 0, 1] ** 2
        det = np.where(det > 0.0, det, 1.0)
        step = np.stack(
            [
                metric[:, 1, 1] * right[:, 0] - metric[:, 0, 1] * right[:, 1],
                metric[:, 0, 0] * right[:, 1] - metric[:, 0, 1] * right[:, 0],
            ],
            axis=1,
        )
        xi = np.clip(xi + step / det[:, None], -3.0, 3.0)
    if triangle:
        margin = np.minimum(xi.min(axis=1), 1.0 - xi.sum(axis=1))
    else:
        margin = (1.0 - np.abs(xi).max(axis=1)) / 2.0
    return xi, margin
