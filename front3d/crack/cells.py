"""The cells around a front: their types, how many they are, and how good their shape is."""

from dataclasses import dataclass

import numpy as np

from front3d.arrays import BoolArray, FloatArray, IntArray
from front3d.crack.coincidence import Coincidence
from front3d.crack.facetable import cells_with
from front3d.crack.front import Front, on_front_mask
from front3d.crack.near import Near
from front3d.elements.element import ElementType
from front3d.solid import Solid

QUARTER = 0.375
"""A mid-side node nearer to the front than this part of its edge is a quarter-point."""

QUARTERS, MIDDLES = (0.2, 0.3), (0.4, 0.6)
"""Where quarter-points and middle nodes may stand: curved edges shift them a little."""


@dataclass(frozen=True, slots=True)
class FrontCells:
    """What surrounds a front.

    Attributes
    ----------
    kinds : the types of the cells that touch the front, sorted
    structured : only bricks and wedges touch it
    quadratic : all of them have mid-side nodes
    quarter_points : the mid-side nodes of the edges that leave the front stand at their quarter
    fewest : the smallest number of cells around an edge of the front
    smallest_angle : smallest angle between the straight sides of a face of these cells, degrees
    worst : the type and number (in its block) of the cell that has it
    turn : largest angle between neighbouring edges of the front, degrees
    n_middles : number of mid-side nodes on edges that leave the front, counted cell by cell
    astray : how many of them stand where the others do not: the others are all at about a quarter
        or all at about the middle
    astray_range : the smallest and the largest part of their edges at which these stand
    off_chord : largest distance of a mid-side node from the straight line of its edge, in edges
    """

    kinds: tuple[str, ...]
    structured: bool
    quadratic: bool
    quarter_points: bool
    fewest: int
    smallest_angle: float
    worst: tuple[str, int]
    turn: float
    n_middles: int = 0
    astray: int = 0
    astray_range: tuple[float, float] = (0.0, 0.0)
    off_chord: float = 0.0


def cells_of_front(solid: Solid, front: Front, same: Coincidence, near: Near) -> FrontCells:
    """Look at every cell that touches the front; `near` are the cells near it."""
    on_front = on_front_mask(front, same, near.nodes)
    kinds: set[str] = set()
    smallest, worst = 180.0, ("", -1)
    middles: list[FloatArray] = []
    bows: list[FloatArray] = []
    ends = np.sort(same.entity[front.edges[:, :2]], axis=1)
    around = np.zeros(len(ends), np.int64)
    for block, touching in zip(solid.blocks, cells_with(solid, on_front, near.cells), strict=True):
        if not len(touching):
            continue
        kinds.add(block.kind)
        nodes = block.nodes[touching]
        angles = _smallest_angles(solid.points, nodes, block.element)
        k = int(np.argmin(angles))
        if angles[k] < smallest:
            smallest, worst = float(angles[k]), (block.kind, int(touching[k]))
        share, bow = _middles(solid, nodes, block.element, on_front)
        middles.append(share)
        bows.append(bow)
        around += _around(same.entity[nodes], block.element, ends)
    elements = [b.element for b in solid.blocks if b.kind in kinds]
    parts, bow = np.concatenate(middles), np.concatenate(bows)
    quarter_points = bool(len(parts)) and float(np.median(parts)) < QUARTER
    low, high = QUARTERS if quarter_points else MIDDLES
    astray = parts[(parts < low) | (parts > high)]
    return FrontCells(
        kinds=tuple(sorted(kinds)),
        structured={e.family for e in elements} <= {"hexahedron", "wedge"},
        quadratic=all(e.quadratic for e in elements),
        quarter_points=quarter_points,
        fewest=int(around.min()),
        smallest_angle=smallest,
        worst=worst,
        turn=_turn(front, solid.points),
        n_middles=len(parts),
        astray=len(astray),
        astray_range=(float(astray.min()), float(astray.max())) if len(astray) else (0.0, 0.0),
        off_chord=float(bow.max(initial=0.0)),
    )


def _smallest_angles(points: FloatArray, nodes: IntArray, element: ElementType) -> FloatArray:
    """(n_cells,) degrees; sides without length (collapsed cells) make no angle."""
    smallest = np.full(len(nodes), 180.0)
    for kind, members in element.faces:
        corners = members[: 3 if kind.startswith("triangle") else 4]
        x = points[nodes[:, corners]]
        ahead, back = np.roll(x, -1, axis=1) - x, np.roll(x, 1, axis=1) - x
        size = np.linalg.norm(ahead, axis=2) * np.linalg.norm(back, axis=2)
        sides = size > 1e-12 * size.max(axis=1, keepdims=True)
        cosine = np.einsum("nck,nck->nc", ahead, back) / np.where(sides, size, 1.0)
        angle = np.degrees(np.arccos(np.clip(cosine, -1.0, 1.0)))
        np.minimum(smallest, np.where(sides, angle, 180.0).min(axis=1), out=smallest)
    return smallest


def _middles(
    solid: Solid, nodes: IntArray, element: ElementType, on_front: BoolArray
) -> tuple[FloatArray, FloatArray]:
    """Where on the edges that leave the front their mid-side nodes stand, 0 at the front; and how
    far off the straight line of the edge, in edges.
    """
    points = solid.points
    if element.edges.shape[1] < 3:
        return np.empty(0), np.empty(0)
    first, second, middle = (nodes[:, element.edges[:, k]].ravel() for k in range(3))
    turned = on_front[second]
    first, second = np.where(turned, second, first), np.where(turned, first, second)
    leaving = on_front[first] & ~on_front[second]
    first, second, middle = first[leaving], second[leaving], middle[leaving]
    edge, part = points[second] - points[first], points[middle] - points[first]
    length = np.linalg.norm(edge, axis=1)
    share: FloatArray = np.linalg.norm(part, axis=1) / length
    off = np.linalg.norm(np.cross(edge, part), axis=1) / length
    bow: FloatArray = np.maximum(off - 4.0 * solid.point_spacing, 0.0) / length
    return share, bow


def _around(entity: IntArray, element: ElementType, ends: IntArray) -> IntArray:
    """(n_edges,) how many of the cells, by entities of their nodes, have each edge `ends`."""
    pairs = np.sort(entity[:, element.edges[:, :2]], axis=2)
    cell = np.repeat(np.arange(len(pairs)), pairs.shape[1])
    # A collapsed cell has the same edge several times.
    once = np.unique(np.column_stack([cell, pairs.reshape(-1, 2)]), axis=0)[:, 1:]
    base = int(entity.max(initial=0)) + int(ends.max()) + 1
    keys, counts = np.unique(once[:, 0] * base + once[:, 1], return_counts=True)
    wanted = ends[:, 0] * base + ends[:, 1]
    at = np.minimum(np.searchsorted(keys, wanted), len(keys) - 1)
    return np.where(keys[at] == wanted, counts[at], 0)


def _turn(front: Front, points: FloatArray) -> float:
    way = points[front.edges[:, 1]] - points[front.edges[:, 0]]
    way = way / np.linalg.norm(way, axis=1, keepdims=True)
    if front.closed:
        way = np.vstack([way, way[:1]])
    if len(way) < 2:
        return 0.0
    cosine = np.einsum("nk,nk->n", way[1:], way[:-1])
    return float(np.degrees(np.arccos(np.clip(cosine.min(), -1.0, 1.0))))
