"""The cells around a front: which they are, how far each layer reaches, where their nodes stand."""

from dataclasses import dataclass

import numpy as np
from scipy.spatial import cKDTree

from front3d.arrays import FloatArray, IntArray
from front3d.crack.coincidence import Coincidence
from front3d.crack.front import Front, near_nodes, on_front_mask
from front3d.crack.patches import Patch
from front3d.errors import MethodError
from front3d.solid import Solid


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


def layer_reaches(solid: Solid, front: Front, same: Coincidence, count: int) -> FloatArray:
    """(count, n_corners) how far each layer of cells reaches from the front, at each corner node.

    Layer 0 are the cells that touch the front, layer k + 1 those that touch layer k.  The reach at
    a corner node is the largest over it and its two neighbours.
    """
    n = len(front.corners)
    inside = on_front_mask(front, same)
    reaches = []
    for _ in range(count):
        grown = np.zeros(len(inside), bool)
        for block in solid.blocks:
            grown[block.nodes[inside[block.nodes].any(axis=1)]] = True
        inside = grown[same.entity] | grown
        nodes = np.flatnonzero(grown)
        s, r = project(front, solid.points[nodes])
        corner = np.rint(front.cell_coordinate(s)).astype(np.int64) % n
        reach = np.zeros(n)
        np.maximum.at(reach, corner, r)
        padded = np.pad(reach, 1, mode="wrap" if front.closed else "edge")
        reaches.append(np.max([padded[:-2], padded[1:-1], padded[2:]], axis=0))
    return np.stack(reaches)


def build_tube(solid: Solid, front: Front, patch: Patch, same: Coincidence, reach: float) -> Tube:
    """Cells and nodes within `reach` of the front."""
    inside, s, r = near_nodes(solid, front, reach)
    chosen = [inside[block.nodes].any(axis=1) for block in solid.blocks]
    cells = tuple(np.flatnonzero(mask) for mask in chosen)
    if not any(len(c) for c in cells):
        raise MethodError(
            f"{solid.source}: no cell within {reach:g} of the front; give larger ring radii"
        )
    members = [block.nodes[c].ravel() for block, c in zip(solid.blocks, cells, strict=True)]
    nodes = np.unique(np.concatenate(members))
    # Outer nodes of these cells lie beyond the reach: they need places too, for seeds.
    far = nodes[~np.isfinite(r[nodes])]
    if len(far):
        s[far], r[far] = project(front, solid.points[far])
    side = np.zeros(len(solid.points), np.int64)
    if patch.half:
        side[patch.pairs[:, 0]] = 1
    else:
        side[same.double & np.isin(same.entity, same.entity[patch.pairs[:, 0]])] = 1
        side[same.double & np.isin(same.entity, same.entity[patch.pairs[:, 1]])] = -1
    return Tube(cells, nodes, s[nodes], r[nodes], side[nodes])


def project(front: Front, x: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Arc length of the nearest front point, and distance from it, of points x, (n, 3)."""
    knots = front.curve.knots
    places, _, _ = front.curve.frames(knots)
    _, index = cKDTree(places).query(x)
    return front.curve.project(x, knots[index])
