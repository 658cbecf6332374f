"""The crack of a half model: part of a symmetry plane that is not held."""

import numpy as np

from front3d.arrays import BoolArray, FloatArray
from front3d.crack.coincidence import Coincidence
from front3d.crack.facetable import FaceTable, outer_faces
from front3d.crack.patches import Patch
from front3d.errors import CrackError
from front3d.options import Plane
from front3d.solid import Solid

STILL = 1e-3
"""Nodes of a half model's plane that move by less than this times the largest are held: supports
by penalty give a little, and even the first node behind a front opens by several per cent."""


def find_half_patch(solid: Solid, same: Coincidence, plane: Plane) -> tuple[Patch, FaceTable]:
    """The crack faces of a half model on its symmetry plane, and the ligament's faces.

    The ligament is where the displacement normal to the plane is zero in every step; a face with
    any node that moves belongs to the crack.  Faces decide, not nodes: mid-side nodes of straight
    edges lie inside a curved front.
    """
    normal = np.asarray(plane.normal)
    free = faces_on_plane(solid, same, plane)
    where = f"{solid.source}: the plane {plane}"
    if not len(free):
        along = solid.points @ normal
        raise CrackError(
            f"{where} holds no outer face; along its normal the model reaches from "
            f"{along.min():g} to {along.max():g}"
        )
    if not solid.steps:
        raise CrackError(f"{where}: a half model's crack is found by its displacements; found none")
    moves, opening = _moving(solid, free, normal)
    moving_face = np.asarray(moves[free.nodes].any(axis=1))
    if not moving_face.any() or moving_face.all():
        state = "moves" if moving_face.all() else "stays in place"
        raise CrackError(
            f"{where} is no symmetry plane with a crack: all of it {state}; expected zero normal "
            "displacement on the ligament only"
        )
    crack = free[moving_face]
    pairs = np.unique(crack.nodes)
    pairs = pairs[moves[pairs]]
    return (
        Patch(crack, None, np.stack([pairs, pairs], axis=1), opening, True, plane),
        free[~moving_face],
    )


def faces_on_plane(solid: Solid, same: Coincidence, plane: Plane) -> FaceTable:
    """Outer faces of the solid with all their nodes in the plane."""
    distance = solid.points @ np.asarray(plane.normal) - plane.offset
    reach = float(np.ptp(solid.points, axis=0).max()) * 1e-6 + 2.0 * solid.point_spacing
    on_plane = np.abs(distance) <= reach
    free = outer_faces(solid, same.entity, on_plane)
    return free[np.asarray(on_plane[free.nodes].all(axis=1))]


def _moving(solid: Solid, faces: FaceTable, normal: FloatArray) -> tuple[BoolArray, float]:
    """(n_points,) nodes of the faces that move along the normal in any step; largest opening."""
    moves = np.zeros(len(solid.points), bool)
    opening = 0.0
    members = np.unique(faces.nodes)
    for step in solid.steps:
        across = step.displacement[members] @ normal
        largest = float(np.abs(across).max())
        opening = max(opening, 2.0 * largest)
        moves[members] |= np.abs(across) > STILL * largest
    return moves, opening
