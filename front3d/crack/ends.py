"""What the ends of an open front lie on: a free surface, or a symmetry plane of the model."""

import dataclasses

import numpy as np

from front3d.arrays import FloatArray, IntArray
from front3d.crack.coincidence import Coincidence
from front3d.crack.facetable import FaceTable, also_among, outer_faces
from front3d.crack.front import FREE_SURFACE, SYMMETRY_PLANE, Front
from front3d.crack.near import Near
from front3d.crack.patches import Patch, marked
from front3d.options import Plane
from front3d.solid import Solid

_PLANE_TOLERANCE = 1e-3
"""Largest distance from a common plane, in sizes of the neighbourhood, of a symmetry plane."""

_STILL = 1e-5
"""Largest normal displacement, in local spreads of displacement, of a symmetry plane."""


def classify_ends(
    solid: Solid,
    front: Front,
    patch: Patch,
    same: Coincidence,
    named: tuple[Plane, ...] = (),
) -> Front:
    """The front with its ends named; `named` are symmetry planes that the user gave."""
    if front.closed:
        return front
    ends = tuple(
        SYMMETRY_PLANE
        if _on_symmetry_plane(solid, front, node, patch, same, named)
        else FREE_SURFACE
        for node in (front.edges[0, 0], front.edges[-1, 1])
    )
    return dataclasses.replace(front, ends=ends)


def unused_planes(
    solid: Solid, fronts_of: tuple[tuple[Front, ...], ...], named: tuple[Plane, ...]
) -> tuple[str, ...]:
    """A warning for each symmetry plane that the user named and on which no front ends."""
    fronts = [front for fronts in fronts_of for front in fronts if not front.closed]
    size = float(np.ptp(solid.points, axis=0).max())
    nodes = [
        node
        for front in fronts
        for node, end in zip((front.edges[0, 0], front.edges[-1, 1]), front.ends, strict=True)
        if end == SYMMETRY_PLANE
    ]
    ends = solid.points[nodes]
    return tuple(
        f"symmetry plane {plane}: no front ends on a flat face in it, so that it has no effect; "
        "expected the place of an end of a front"
        for plane in named
        if not (
            np.abs(ends @ np.asarray(plane.normal) - plane.offset) <= _PLANE_TOLERANCE * size
        ).any()
    )


def end_faces(
    solid: Solid,
    front: Front,
    node: int,
    patch: Patch,
    same: Coincidence,
    near: Near | None = None,
) -> FaceTable:
    """Outer faces at an end node, without crack faces and the plane of a half model; `near` saves
    looking at the whole solid.
    """
    among = None if near is None else near.cells
    nodes = np.arange(len(solid.points)) if near is None else near.nodes
    here = marked(len(solid.points), nodes[same.entity[nodes] == same.entity[node]])
    faces = outer_faces(solid, same.entity, here, among)
    keep = ~also_among(faces, patch.upper, same.entity)
    if patch.lower is not None:
        keep &= ~also_among(faces, patch.lower, same.entity)
    else:  # the ligament's faces lie in the crack plane
        s = front.corner_s[0] if node == front.edges[0, 0] else front.corner_s[-1]
        _, frame, _ = front.curve.frames(np.array([s]))
        area = faces.area_vectors(solid.points)
        across = np.abs(area @ frame[0, 1]) / np.linalg.norm(area, axis=1)
        keep &= across < 0.99
    return faces[keep]


def _on_symmetry_plane(
    solid: Solid,
    front: Front,
    node: int,
    patch: Patch,
    same: Coincidence,
    named: tuple[Plane, ...],
) -> bool:
    """Whether the faces around an end node are flat and never move along their normal.

    A rigid translation along the normal is allowed for: what counts is that all the nodes there
    move by the same amount while the neighbourhood deforms.
    """
    faces = end_faces(solid, front, node, patch, same)
    if not len(faces):
        return False
    area = faces.area_vectors(solid.points)
    normal = area.sum(axis=0)
    normal /= np.linalg.norm(normal)
    nodes = np.unique(faces.nodes)
    x = solid.points[nodes]
    size = float(np.ptp(x, axis=0).max())
    if float(np.abs((x - x[0]) @ normal).max()) > _PLANE_TOLERANCE * size:
        return False
    for plane in named:
        off = np.abs(x @ np.asarray(plane.normal) - plane.offset).max()
        if off <= _PLANE_TOLERANCE * size:
            return True
    if not solid.steps:
        return False
    around = np.unique(
        np.concatenate(
            [solid.blocks[b].nodes[c] for b, c in zip(faces.block, faces.cell, strict=True)]
        )
    )
    return all(_still(step.displacement, nodes, around, normal) for step in solid.steps)


def _still(displacement: FloatArray, nodes: IntArray, around: IntArray, normal: FloatArray) -> bool:
    """Whether nodes move alike along a normal, measured by how much their surroundings deform."""
    across = displacement[nodes] @ normal
    spread = float(np.ptp(displacement[around], axis=0).max())
    return bool(np.ptp(across) <= _STILL * spread)
