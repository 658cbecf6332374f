"""Cells next to a front that do not join their neighbours face to face."""

import numpy as np

from front3d.arrays import BoolArray, IntArray
from front3d.crack.facetable import FaceTable, also_among, multiplicity, outer_faces, set_keys
from front3d.methods.context import FrontContext
from front3d.methods.tube import Tube

PER_EDGE = 2
"""Free faces that meet at an edge of a surface: a closed surface has two, wherever it lies."""

_TRIPLES = ([0, 1, 2], [0, 1, 3], [0, 2, 3], [1, 2, 3])


def conformity_warnings(context: FrontContext, tube: Tube) -> tuple[str, ...]:
    """A sentence on faces around a front that have no twin although other cells stand there.

    Corners of a cell in a wrong order, a brick against two tetrahedra, or a node exchanged for
    another leave free faces inside the solid, on both sides of what should be one face.  Then two
    free faces share three corners, or more than two meet at an edge.  On the surface of a solid, on
    crack faces, and on meshes that are tied and share no nodes, neither is so.
    """
    solid, same, patch = context.solid, context.model.same, context.patch
    at_front = np.zeros(len(solid.points), bool)
    at_front[tube.nodes] = np.isin(same.entity[tube.nodes], same.entity[context.front.nodes])
    near = at_front.copy()
    for block, cells in zip(solid.blocks, tube.cells, strict=True):
        nodes = block.nodes[cells]
        near[nodes[at_front[nodes].any(axis=1)]] = True
    faces = outer_faces(solid, same.entity, near, tube.cells)
    crack = also_among(faces, patch.upper, same.entity)
    if patch.lower is not None:
        crack |= also_among(faces, patch.lower, same.entity)
    wrong = _crowded(faces, same.entity, near) | (~crack & _overlapping(faces, same.entity, ~crack))
    if not wrong.any():
        return ()
    rows = np.flatnonzero(wrong)
    first = int(rows[0])
    kind = solid.blocks[int(faces.block[first])].kind
    return (
        f"cells next to the front do not join face to face: {len(rows)} of their faces are free, "
        f"though other cells stand there, as at {kind} cell {faces.cell[first]}; expected faces "
        "that two cells share: the displacements gape between them, and K is that of a body with "
        "slits; check the order of the nodes, and how bricks and tetrahedra are joined",
    )


def _crowded(faces: FaceTable, entity: IntArray, near: BoolArray) -> BoolArray:
    """Which faces have an edge at which too many meet.  Of edges with an end farther away not all
    faces are known.
    """
    sides, row = faces.sides()
    nodes, row = sides[..., :2].reshape(-1, 2), row.ravel()
    known = (entity[nodes[:, 0]] != entity[nodes[:, 1]]) & near[nodes].all(axis=1)
    out = np.zeros(len(faces), bool)
    if known.any():
        many = multiplicity(set_keys(entity[nodes[known]])) > PER_EDGE
        out[row[known][many]] = True
    return out


def _overlapping(faces: FaceTable, entity: IntArray, chosen: BoolArray) -> BoolArray:
    """Which of the chosen faces share three corners with another of them."""
    rows = np.flatnonzero(chosen)
    corners = entity[faces.corners[rows]]
    triples = np.sort(np.concatenate([corners[:, columns] for columns in _TRIPLES]), axis=1)
    owner = np.tile(rows, len(_TRIPLES))
    whole = (np.diff(triples, axis=1) > 0).all(axis=1)
    triples, owner = triples[whole], owner[whole]
    out = np.zeros(len(faces), bool)
    if not len(triples):
        return out
    # The four triples of a triangle, whose first corner stands twice, are one.
    once = np.unique(np.column_stack([triples, owner]), axis=0)
    out[once[multiplicity(set_keys(once[:, :3])) > 1, 3]] = True
    return out
