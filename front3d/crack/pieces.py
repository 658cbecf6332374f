"""Pieces of fronts: between corners, and as far as the user gave their nodes.

At a corner of the front there is no K: a front with corners is as many fronts, each of which ends
near them.  Within some cells of such an end, and of one where the nodes that were given stop, a
station's domain would reach past the piece: these stations are left out.
"""

from dataclasses import dataclass
from itertools import pairwise

import numpy as np

from front3d.arrays import BoolArray, FloatArray, IntArray
from front3d.crack.coincidence import Coincidence
from front3d.crack.edges import Chain, FrontEdges
from front3d.crack.front import Front
from front3d.errors import CrackError
from front3d.options import Options
from front3d.solid import Solid

CORNER, GIVEN_END = "corner", "end of the nodes given"

SHARP, SHARPER = 25.0, 3.0
"""Degrees by which the front turns at a corner, and how many times as much as it usually does and
as it does at the nodes next to it: a slender ellipse turns sharply at its vertex, too, but it turns
much at the nodes beside it as well."""

_EDGES, _REACHES = 3, 4.0
"""Edges, and reaches of the cells at the front, within which of a corner stations are left out: a
hat's half-width, and the largest ring by default with room to spare."""


@dataclass(frozen=True, slots=True, eq=False)
class Piece:
    """A chain of front edges, and why it starts and stops where it does ("" at its natural end)."""

    chain: Chain
    starts: str = ""
    stops: str = ""


def given_edges(
    solid: Solid, edges: FrontEdges, same: Coincidence, options: Options
) -> tuple[FrontEdges, IntArray]:
    """The edges whose nodes were given, or all; and the entities at which the front goes on."""
    nodes, line = options.front_nodes, options.front_line
    if options.front_array:
        nodes = _marked_nodes(solid, options.front_array)
    if not nodes and not line:
        return edges, np.zeros(0, np.int64)
    ends = same.entity[edges.ends[:, :2]]
    if nodes:
        given = np.asarray(nodes)
        if given.min() < 0 or given.max() >= len(solid.points):
            raise CrackError(
                f"{solid.source}: front nodes: found node {given.max()}, expected 0 to "
                f"{len(solid.points) - 1}"
            )
        chosen = np.isin(ends, same.entity[given]).all(axis=1)
    else:
        x = solid.points[edges.ends[:, :2]]
        size = np.linalg.norm(x[:, 1] - x[:, 0], axis=1)
        away = _distance_to_line(x.reshape(-1, 3), np.asarray(line, float)).reshape(-1, 2)
        chosen = (away <= 0.5 * size[:, None]).all(axis=1)
    if not chosen.any() and not nodes and len(away):
        raise CrackError(
            f"{solid.source}: front line: no edge of a front lies within half its length of the "
            f"line given; the nearest node of a front, {edges.ends[:, :2].ravel()[away.argmin()]}, "
            f"is {away.min():.4g} from it"
        )
    if not chosen.any():
        raise CrackError(
            f"{solid.source}: the front nodes that were given are not on the edge of a crack "
            f"surface; expected two or more neighbours where its faces join, such as nodes "
            f"{', '.join(str(n) for n in edges.ends[:3, 0])}; a front needs crack faces behind it "
            "to tell the upper side from the lower"
            if len(edges.ends)
            else f"{solid.source}: no crack surface has an edge where its faces join"
        )
    goes_on = np.intersect1d(ends[chosen], ends[~chosen])
    return FrontEdges(edges.ends[chosen], edges.face[chosen]), goes_on


def _marked_nodes(solid: Solid, name: str) -> tuple[int, ...]:
    """Nodes at which a point array is not zero."""
    arrays = solid.steps[0].point_arrays if solid.steps else {}
    if name not in arrays:
        raise CrackError(
            f"{solid.source}: front array: found no point array {name!r}, expected one that is not "
            "zero at the nodes of the front (front3d.load(..., arrays=[...]) keeps it)"
        )
    marked = np.flatnonzero(np.any(arrays[name] != 0, axis=1))
    if not len(marked):
        raise CrackError(f"{solid.source}: front array: {name!r} is zero at every node")
    return tuple(marked.tolist())


def _distance_to_line(x: FloatArray, line: FloatArray) -> FloatArray:
    """(n,) distance of points x, (n, 3), from a polyline, (m, 3)."""
    nearest = np.full(len(x), np.inf)
    for a, b in pairwise(line):
        way = b - a
        square = float(way @ way)
        t = np.clip((x - a) @ way / square, 0.0, 1.0) if square > 0 else np.zeros(len(x))
        nearest = np.minimum(nearest, np.linalg.norm(x - a - np.outer(t, way), axis=1))
    return nearest


def pieces_of(
    chain: Chain, points: FloatArray, entity: IntArray, goes_on: IntArray
) -> tuple[Piece, ...]:
    """The chain, cut where the front turns sharply."""
    corners = np.flatnonzero(_sharp(chain, points))  # at the start of these edges
    if chain.closed:
        if not len(corners):
            return (Piece(chain),)
        order = np.roll(np.arange(len(chain.edges)), -corners[0])
        chain = Chain(chain.edges[order], chain.faces[order], False)
        corners = (corners - corners[0]) % len(order)
        outer = (CORNER, CORNER)
    else:
        first, last = entity[chain.edges[0, 0]], entity[chain.edges[-1, 1]]
        outer = (GIVEN_END if first in goes_on else "", GIVEN_END if last in goes_on else "")
    cuts = [0, *corners[corners > 0].tolist(), len(chain.edges)]
    return tuple(
        Piece(
            Chain(chain.edges[a:b], chain.faces[a:b], False),
            outer[0] if a == 0 else CORNER,
            outer[1] if b == cuts[-1] else CORNER,
        )
        for a, b in pairwise(cuts)
    )


def _sharp(chain: Chain, points: FloatArray) -> BoolArray:
    """(n_edges,) whether the front turns sharply where each edge starts."""
    start, end, middle = (points[chain.edges[:, k]] for k in range(3))
    middle = np.where(chain.edges[:, 2:] < 0, 0.5 * (start + end), middle)
    leaving, arriving = 4 * middle - 3 * start - end, start + 3 * end - 4 * middle
    before = np.roll(arriving, 1, axis=0)
    cosine = np.sum(leaving * before, axis=1)
    size = np.linalg.norm(leaving, axis=1) * np.linalg.norm(before, axis=1)
    turn = np.degrees(np.arccos(np.clip(cosine / np.where(size > 0, size, 1.0), -1.0, 1.0)))
    inner = turn if chain.closed else turn[1:]
    if len(inner) < 3:
        return np.zeros(len(turn), bool)
    if not chain.closed:
        turn[0] = 0.0
    beside = np.maximum(np.roll(turn, 1), np.roll(turn, -1))
    usual = np.maximum(np.median(inner), beside)
    return np.asarray((turn > SHARP) & (turn > SHARPER * usual))


def stations_of(
    solid: Solid, front: Front, piece: Piece, same: Coincidence, options: Options
) -> IntArray:
    """Rows of `front.corners` far enough from ends inside the solid; all where there are none."""
    number = np.arange(len(front.corners))
    keep = np.ones(len(number), bool)
    edges = max(_EDGES, int(np.ceil(options.hat or 0.0)))
    for why, node, s, count in (
        (piece.starts, front.corners[0], front.corner_s, number),
        (piece.stops, front.corners[-1], front.length - front.corner_s, number[::-1]),
    ):
        if why:
            keep &= count > edges
        if why == CORNER:
            keep &= s >= _REACHES * _reach(solid, front, int(node), same)
    return np.flatnonzero(keep)


def _reach(solid: Solid, front: Front, node: int, same: Coincidence) -> float:
    """How far the cells at an end of a front reach across it."""
    s = 0.0 if node == front.corners[0] else front.length
    place, frame, _ = front.curve.frames(np.array([s]))
    here = same.entity == same.entity[node]
    members = [b.nodes[here[b.nodes].any(axis=1)].ravel() for b in solid.blocks]
    d = solid.points[np.concatenate(members)] - place[0]
    return float(np.linalg.norm(d - np.outer(d @ frame[0, 2], frame[0, 2]), axis=1).max())
