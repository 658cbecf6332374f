"""From crack patches to ordered chains of front edges."""

from dataclasses import dataclass

import numpy as np

from front3d.arrays import FloatArray, IntArray
from front3d.crack.coincidence import Coincidence
from front3d.crack.facetable import FaceTable, multiplicity, set_keys
from front3d.crack.patches import Patch
from front3d.errors import CrackError


@dataclass(frozen=True, slots=True, eq=False)
class FrontEdges:
    """Edges of a crack's front(s), unordered.

    Attributes
    ----------
    ends : (n, 3) the two corner nodes and the mid-side node (-1 if none)
    face : (n,) row in `Patch.upper` of the crack face that ends there
    """

    ends: IntArray
    face: IntArray


@dataclass(frozen=True, slots=True, eq=False)
class Chain:
    """Front edges in order along e3.

    Attributes
    ----------
    edges : (n, 3) start, end and mid-side node (-1 if none) of each edge
    faces : (n,) row in `Patch.upper` of the crack face that ends there
    closed : whether the last edge ends where the first starts
    """

    edges: IntArray
    faces: IntArray
    closed: bool


def full_model_edges(patch: Patch, same: Coincidence) -> FrontEdges:
    """Boundary edges of the patch whose nodes both sides share.

    Where the patch meets the outer surface its nodes are double: that is the mouth.
    """
    ends, rows = _boundary_sides(patch.upper, same)
    shared = ~same.double[ends[:, :2]].any(axis=1)
    middle = ends[:, 2]
    shared &= (middle < 0) | ~same.double[np.maximum(middle, 0)]
    return FrontEdges(ends[shared], rows[shared])


def half_model_edges(patch: Patch, ligament: FaceTable, same: Coincidence) -> FrontEdges:
    """Edges that crack faces share with faces of the ligament."""
    ends, rows = _boundary_sides(patch.upper, same)
    other, _ = _boundary_sides(ligament, same)
    keys = set_keys(same.entity[np.concatenate([ends[:, :2], other[:, :2]])])
    border = np.isin(keys[: len(ends)], keys[len(ends) :])
    return FrontEdges(ends[border], rows[border])


def _boundary_sides(faces: FaceTable, same: Coincidence) -> tuple[IntArray, IntArray]:
    """Sides of faces that no second face of the table has, and the row of their face."""
    sides, rows = faces.sides()
    sides, rows = sides.reshape(-1, 3), rows.ravel()
    real = same.entity[sides[:, 0]] != same.entity[sides[:, 1]]
    sides, rows = sides[real], rows[real]
    once = multiplicity(set_keys(same.place[sides[:, :2]])) == 1
    return sides[once], rows[once]


def order_edges(
    edges: FrontEdges, same: Coincidence, points: FloatArray, source: str
) -> tuple[Chain, ...]:
    """Chains of connected edges; CrackError where the front branches or touches itself.

    The sides of a face run anticlockwise seen from outside, and the upper faces are seen from
    below, so each edge already runs along e3 = e1 x e2: chains only have to be followed.
    """
    if not len(edges.ends):
        return ()
    start, end = same.entity[edges.ends[:, 0]], same.entity[edges.ends[:, 1]]
    nodes, degree = np.unique(np.concatenate([start, end]), return_counts=True)
    following = dict(zip(start.tolist(), range(len(start)), strict=True))
    first_nodes = np.setdiff1d(start, end)
    if np.any(degree > 2) or len(following) < len(start):
        bad = nodes[degree > 2] if np.any(degree > 2) else start
        names = ", ".join(str(n) for n in bad[:5])
        raise CrackError(
            f"{source}: the crack front branches or touches itself at node {names}; expected at "
            "most two front edges at each node (are two cracks joined there?)"
        )
    # A closed front starts at its node with the largest x, then y, then z, whatever its number.
    starts = np.unique(start)
    x = points[starts]
    places = np.round((x - x.min(axis=0)) / max(float(np.ptp(x, axis=0).max()), 1e-300), 9)
    ranked = starts[np.lexsort(places.T[::-1])[::-1]]
    chains = []
    for first in [*first_nodes.tolist(), *ranked.tolist()]:
        path: list[int] = []
        node = first
        while node in following:
            edge = following.pop(node)
            path.append(edge)
            node = int(end[edge])
        if path:
            chains.append(Chain(edges.ends[path], edges.face[path], node == first))
    return tuple(chains)
