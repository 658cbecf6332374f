"""Crack faces: coincident free faces, paired and gathered into patches.

A patch is one crack surface with an upper and a lower side.  In a half model, whose crack plane
is a symmetry plane, it has only the side that was modelled.
"""

from dataclasses import dataclass, field

import numpy as np
from scipy.sparse import coo_array
from scipy.sparse.csgraph import connected_components

from front3d.arrays import BoolArray, FloatArray, IntArray
from front3d.crack.coincidence import Coincidence
from front3d.crack.facetable import FaceTable, multiplicity, outer_faces, set_keys
from front3d.crack.unmatched import unmatched_faces
from front3d.errors import CrackError
from front3d.loads import Vector
from front3d.options import Options, Plane
from front3d.solid import Solid


@dataclass(frozen=True, slots=True, eq=False)
class Patch:
    """One crack surface.

    Attributes
    ----------
    upper : faces of the cells above the crack (their outward normals point down)
    lower : the coincident faces of the cells below, row by row; None in a half model
    pairs : (n, 2) upper and lower node of each double place; both the same in a half model
    opening : largest distance between paired nodes in any step (in a half model: twice the
        largest displacement normal to the plane)
    opens : whether the sides part or slide at all
    plane : the symmetry plane that holds the crack of a half model
    unlike : (n,) pairs of faces whose mid-side nodes stand apart; empty where all are alike
    """

    upper: FaceTable
    lower: FaceTable | None
    pairs: IntArray
    opening: float
    opens: bool
    plane: Plane | None = None
    unlike: BoolArray = field(default_factory=lambda: np.zeros(0, bool))

    @property
    def half(self) -> bool:
        return self.lower is None


NEGLIGIBLE_OPENING = 1e-6
"""Sides that move by less than this times the spread of displacements do not part."""


def find_patches(
    solid: Solid, same: Coincidence, options: Options
) -> tuple[tuple[Patch, ...], FaceTable]:
    """All pairs of coincident face patches of a full model; and faces on each other that are cut
    differently, and so have no partner.  Both empty if there are none.
    """
    free = outer_faces(solid, same.entity, same.double)
    if not len(free):
        return (), free
    upper, lower = _opposite_pairs(free, solid, same)
    both = np.concatenate([upper, lower])
    unmatched = unmatched_faces(solid, same, free, marked(len(free), both))
    if not len(upper):
        return (), unmatched
    side = _connected_sides(free[both], same)
    sides = np.stack([side[: len(upper)], side[len(upper) :]], axis=1)
    _refuse_branches(sides, free[upper], solid)
    patches = []
    for first, second in np.unique(np.sort(sides, axis=1), axis=0):
        rows = np.flatnonzero(np.sort(sides, axis=1)[:, 0] == first)
        a = np.where(sides[rows, 0] == first, upper[rows], lower[rows])
        b = np.where(sides[rows, 0] == first, lower[rows], upper[rows])
        if first == second:
            raise CrackError(
                f"{solid.source}: the two sides of the crack at node "
                f"{free.corners[a[0], 0]} are joined to each other; a crack surface must have "
                "an upper and a lower side (check for faces that were merged in part)"
            )
        patches.append(_patch(solid, same, free[a], free[b], options.up))
    return tuple(patches), unmatched


def chosen_up(normal: FloatArray, up: Vector | None) -> float:
    """+1 if a crack normal points up, else -1: along `up`, or its largest component positive.

    The choice must not depend on node numbers.  Among equal components z goes before y, y
    before x.
    """
    if up is not None:
        along = float(normal @ np.asarray(up, float))
        if abs(along) < 1e-6 * np.linalg.norm(normal) * np.linalg.norm(up):
            raise CrackError(
                f"up: found a direction {up} that lies in the crack plane, expected one that "
                "points away from it"
            )
        return float(np.sign(along))
    size = np.abs(normal)
    axis = max(range(3), key=lambda k: (size[k] > size.max() * (1 - 1e-6), k))
    return 1.0 if normal[axis] > 0 else -1.0


def _opposite_pairs(free: FaceTable, solid: Solid, same: Coincidence) -> tuple[IntArray, IntArray]:
    """Rows of free faces whose corners are at the same places, with opposing normals and different
    nodes.

    Mid-side nodes may stand apart: a quarter-point on one side only, or an edge that is straight
    on one side.
    """
    place_key = set_keys(same.place[free.corners])
    shared = np.flatnonzero(multiplicity(place_key) > 1)
    order = shared[np.argsort(place_key[shared], kind="stable")]
    keys = place_key[order]
    crowded = np.flatnonzero(multiplicity(keys) > 2)
    if len(crowded):
        node = free.corners[order[crowded[0]], 0]
        raise CrackError(
            f"{solid.source}: more than two free faces coincide at node {node}; two cracks or "
            "contact surfaces lie on each other there, which cannot be paired"
        )
    first, second = order[0::2], order[1::2]
    area = free.area_vectors(solid.points)
    opposed = np.einsum("nk,nk->n", area[first], area[second]) < 0
    differ = set_keys(same.entity[free.nodes])
    opposed &= differ[first] != differ[second]
    return first[opposed], second[opposed]


def _connected_sides(faces: FaceTable, same: Coincidence) -> IntArray:
    """Label of the side each face belongs to: faces connected through their double nodes."""
    nodes = faces.nodes
    rows = np.broadcast_to(np.arange(len(faces))[:, None], nodes.shape)
    member = same.double[nodes]
    entity = same.entity[nodes][member]
    n_entities = int(entity.max()) + 1
    n = len(faces) + n_entities
    graph = coo_array(
        (np.ones(len(entity), np.int8), (rows[member], len(faces) + entity)), shape=(n, n)
    )
    label = connected_components(graph, directed=False)[1]
    return label[: len(faces)].astype(np.int64)


def _refuse_branches(sides: IntArray, faces: FaceTable, solid: Solid) -> None:
    """CrackError if one side faces two others: the crack surface branches."""
    partners = np.unique(np.sort(sides, axis=1), axis=0)
    label, count = np.unique(partners, return_counts=True)
    if np.any(count > 1):
        row = int(np.flatnonzero((sides == label[np.argmax(count)]).any(axis=1))[0])
        raise CrackError(
            f"{solid.source}: the crack surface branches near node {faces.corners[row, 0]}; "
            "expected crack surfaces with two sides each"
        )


def _patch(solid: Solid, same: Coincidence, a: FaceTable, b: FaceTable, up: Vector | None) -> Patch:
    """The patch of faces a and b, upper and lower told apart by their normals."""
    outward = a.area_vectors(solid.points).sum(axis=0)
    upper, lower = (b, a) if chosen_up(outward, up) > 0 else (a, b)
    pairs = _node_pairs(upper, lower, same)
    opening = 0.0
    opens = not solid.steps  # without displacements nobody can tell
    for step in solid.steps:
        jump = step.displacement[pairs[:, 0]] - step.displacement[pairs[:, 1]]
        largest = float(np.sqrt((jump**2).sum(axis=1).max()))
        spread = float(np.ptp(step.displacement[np.unique(pairs)], axis=0).max())
        spread = max(spread, 1e-3 * float(np.ptp(step.displacement, axis=0).max()))
        opening = max(opening, largest)
        opens |= largest > NEGLIGIBLE_OPENING * spread
    apart = set_keys(same.place[np.concatenate([upper.nodes, lower.nodes])])
    unlike = apart[: len(upper)] != apart[len(upper) :]
    return Patch(upper, lower, pairs, opening, opens, unlike=unlike)


def _node_pairs(upper: FaceTable, lower: FaceTable, same: Coincidence) -> IntArray:
    """(n, 2) upper and lower node of each place that is double between the two sides."""
    above, below = np.unique(upper.nodes), np.unique(lower.nodes)
    # One node per entity is enough: nodes of one collapsed cell move together.
    above = above[np.unique(same.place[above], return_index=True)[1]]
    below = below[np.unique(same.place[below], return_index=True)[1]]
    _, i, j = np.intersect1d(same.place[above], same.place[below], return_indices=True)
    split = same.entity[above[i]] != same.entity[below[j]]
    return np.stack([above[i][split], below[j][split]], axis=1)


def marked(n_points: int, nodes: IntArray) -> BoolArray:
    """Mask of the points that are among `nodes`."""
    mask = np.zeros(n_points, bool)
    mask[nodes] = True
    return mask
