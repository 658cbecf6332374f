"""The cells around a front: which they are, how far each layer reaches, where their nodes stand."""

from dataclasses import dataclass

import numpy as np
from scipy.spatial import cKDTree

from front3d.arrays import FloatArray, IntArray
from front3d.crack.facetable import cells_with
from front3d.crack.front import Front, near_nodes
from front3d.crack.near import nodes_of
from front3d.errors import MethodError
from front3d.methods.context import FrontContext


def along_front(front: Front, at_corners: FloatArray, s: FloatArray) -> FloatArray:
    """Values at arc lengths s, linear between the corner nodes of the front."""
    if front.closed:
        at_corners = np.append(at_corners, at_corners[0])
    return np.interp(front.cell_coordinate(s), np.arange(len(at_corners)), at_corners)


@dataclass(frozen=True, slots=True, eq=False)
class Tube:
    """The neighbourhood of one front.

    Attributes
    ----------
    cells : per block, the numbers of the cells with a node inside the largest ring
    nodes : (m,) the nodes of these cells; local numbers below refer to rows of this
    s, r : (m,) arc length of the nearest front point, and distance from it
    side : (m,) +1 for nodes on the upper face only, -1 lower, 0 others
    """

    cells: tuple[IntArray, ...]
    nodes: IntArray
    s: FloatArray
    r: FloatArray
    side: IntArray


def layer_reaches(context: FrontContext, count: int) -> FloatArray:
    """(count, n_corners) how far each layer of cells reaches from the front, at each corner node.

    Layer 0 are the cells that touch the front, layer k + 1 those that touch layer k.  The reach at
    a corner node is the largest over it and its two neighbours.
    """
    solid, front, near = context.solid, context.front, context.model.near
    entity, n = context.model.same.entity, len(front.corners)
    inside = context.on_front
    reached = np.zeros(len(inside), bool)
    reach, reaches = np.zeros(n), []
    for _ in range(count):
        cells = cells_with(solid, inside, near.cells)
        grown = np.zeros(len(inside), bool)
        for block, numbers in zip(solid.blocks, cells, strict=True):
            grown[block.nodes[numbers]] = True
        nodes = near.nodes[(grown & ~reached)[near.nodes]]
        reached = grown
        s, r = project(front, solid.points[nodes])
        corner = np.rint(front.cell_coordinate(s)).astype(np.int64) % n
        np.maximum.at(reach, corner, r)
        padded = np.pad(reach, 1, mode="wrap" if front.closed else "edge")
        reaches.append(np.max([padded[:-2], padded[1:-1], padded[2:]], axis=0))
        near = near.reaching(float(r.max(initial=0.0)))
        inside = np.zeros(len(inside), bool)
        inside[near.nodes] = grown[entity[near.nodes]] | grown[near.nodes]
    return np.stack(reaches)


def build_tube(context: FrontContext, reach: float) -> Tube:
    """Cells and nodes within `reach` of the front; MethodError where there are none.

    Built once for each reach: the integral and the balance of forces look at the same tube.
    """
    if reach not in context.tubes:
        context.tubes[reach] = _tube(context, reach)
    return context.tubes[reach]


def _tube(context: FrontContext, reach: float) -> Tube:
    solid, front = context.solid, context.front
    near = context.model.near.reaching(reach)
    x = solid.points[near.nodes]
    rows, s_near, r_near = near_nodes(front, x, reach)
    inside = np.zeros(len(solid.points), bool)
    inside[near.nodes[rows]] = True
    cells = cells_with(solid, inside, near.cells)
    if not any(len(c) for c in cells):
        raise MethodError(
            f"{solid.source}: no cell within {reach:g} of the front; give larger ring radii"
        )
    nodes = nodes_of(solid, cells)
    s, r = np.empty(len(nodes)), np.empty(len(nodes))
    within = inside[nodes]
    s[within], r[within] = s_near, r_near
    # Outer nodes of these cells lie beyond the reach: they need places too, for seeds.
    s[~within], r[~within] = project(front, solid.points[nodes[~within]])
    return Tube(cells, nodes, s, r, _sides(context, nodes))


def _sides(context: FrontContext, nodes: IntArray) -> IntArray:
    """(m,) side of the crack of each node of a tube."""
    patch, same = context.patch, context.model.same
    side = np.zeros(len(context.solid.points), np.int8)
    if patch.half:
        side[patch.pairs[:, 0]] = 1
        return side[nodes].astype(np.int64)
    side[same.entity[patch.pairs[:, 0]]] = 1
    side[same.entity[patch.pairs[:, 1]]] = -1
    return np.where(same.double[nodes], side[same.entity[nodes]], 0).astype(np.int64)


def project(front: Front, x: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Arc length of the nearest front point, and distance from it, of points x, (n, 3)."""
    knots = front.curve.knots
    places, _, _ = front.curve.frames(knots)
    _, index = cKDTree(places).query(x)
    return front.curve.project(x, knots[index])
