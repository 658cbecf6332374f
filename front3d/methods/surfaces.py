"""Outer surfaces near a front: which of them give a term of their own, and how near they come."""

from dataclasses import dataclass

import numpy as np
from scipy.sparse import coo_array, csr_array
from scipy.sparse.csgraph import connected_components

from front3d.arrays import BoolArray, FloatArray
from front3d.crack.ends import end_faces
from front3d.crack.facetable import FaceTable, also_among, outer_faces
from front3d.crack.front import SYMMETRY_PLANE
from front3d.crack.patches import marked
from front3d.methods.context import FrontContext
from front3d.methods.face_loads import loaded_faces
from front3d.methods.loading import varying_ratio
from front3d.methods.nodal_forces import BENT, CUT, OUTER, PRESSED
from front3d.methods.terms import BENT_FACES, FACE_LOAD, FREE_SURFACE, included
from front3d.methods.tube import Tube

_SAME_DIRECTION = 0.999
"""Cosine between normals above which a face lies in a symmetry plane."""


_PLANE = 1e-4
"""Distance from the plane of the frame, in ring radii, of faces that are bent."""

_SMOOTH = 0.87
"""Cosine between normals of neighbouring faces of one smooth surface: 30 degrees."""

_ENDS = 0.5
"""Cosine between a face's normal and the front above which the front ends on the face."""


@dataclass(frozen=True, slots=True, eq=False)
class SurfaceTerm:
    """Faces that give a surface term, what is known of them, and a uniform pressure on them; that
    on crack faces comes with the other loads.
    """

    faces: FaceTable
    kind: int
    pressure: float = 0.0


@dataclass(frozen=True, slots=True, eq=False)
class Surroundings:
    """What the outer surfaces near a front mean for it.

    Attributes
    ----------
    terms : faces that give a surface term
    clearance : distance of the nearest surface on which the front does not end
    same_material : distance of the nearest cell of another material
    symmetry_normals : (n, 3) unit normals of the symmetry planes at its ends or of a half model
    """

    terms: tuple[SurfaceTerm, ...]
    clearance: float
    same_material: float
    symmetry_normals: FloatArray


def surroundings(context: FrontContext, tube: Tube) -> Surroundings:
    """Look at the outer faces inside the tube.

    Surfaces on which the front ends bear the pressure of the options, which is none where nothing
    is said; of others, beside the front, nothing is known, and their traction comes from the
    stresses.

    Faces on a symmetry plane at an end give no term: for modes I and II the tractions on it do no
    work in the interaction, and for mode III the hats vanish there.
    """
    solid, patch = context.solid, context.patch
    same = context.model.same
    inside = marked(len(solid.points), tube.nodes)
    near = context.model.near.reaching(float(tube.r.max()))
    outer = outer_faces(solid, same.entity, inside, near.cells, whole=True)
    is_crack = also_among(outer, patch.upper, same.entity)
    if patch.lower is not None:
        is_crack |= also_among(outer, patch.lower, same.entity)
    rest = outer[~is_crack]
    planes = _symmetry_planes(context)
    rest = rest[~_on_planes(context, tube, rest, planes)]
    across, led_away = _across_the_front(context, tube, rest), _from_the_ends(context, rest)
    ends_here = across | led_away
    # A surface that leads away from an end may come beside the front further on: it is free there,
    # too, but rings do better to keep clear of it.
    beside = rest[~across & ~(led_away & _beyond_the_ends(context, tube, rest))]
    options = context.options
    terms = [
        SurfaceTerm(rest[ends_here], OUTER, options.surface_pressure),
        SurfaceTerm(rest[~ends_here], CUT),
    ]
    crack, pressed = outer[is_crack], loaded_faces(context) and included(FACE_LOAD)
    if _bent(context, tube, crack) and included(BENT_FACES):
        terms.append(SurfaceTerm(crack, BENT))
    elif pressed or varying_ratio(context.loads):
        terms.append(SurfaceTerm(crack, PRESSED))
    if not included(FREE_SURFACE):
        terms = [term for term in terms if term.kind != OUTER]
    terms = [term for term in terms if len(term.faces)]
    distance = tube.r[np.searchsorted(tube.nodes, beside.nodes)]
    normals = np.array([normal for normal, _ in planes]).reshape(-1, 3)
    clearance = float(distance.min(initial=np.inf))
    return Surroundings(tuple(terms), clearance, _same_material(context, tube), normals)


def _same_material(context: FrontContext, tube: Tube) -> float:
    """Distance from the front of the nearest node of a cell of another material."""
    foreign = [
        block.nodes[cells[np.asarray(other[cells])]].ravel()
        for block, cells, other in zip(
            context.solid.blocks, tube.cells, context.foreign, strict=False
        )
    ]
    if not foreign:
        return float("inf")
    nodes = np.unique(np.concatenate(foreign))
    return float(tube.r[np.searchsorted(tube.nodes, nodes)].min(initial=np.inf))


def _bent(context: FrontContext, tube: Tube, crack: FaceTable) -> bool:
    """Whether the crack faces leave the planes of the front's frames, as those of a cap do.

    The auxiliary field is that of a plane crack: on bent faces its traction is not zero, and q is
    not along them.  Both grow with the distance from the front as fast as the field falls, so they
    add a part of K that is the ring's radius over the radius of the faces.
    """
    nodes = np.unique(crack.nodes)
    rows = np.searchsorted(tube.nodes, nodes)
    place, frame, _ = context.front.curve.frames(tube.s[rows])
    off = np.einsum("nk,nk->n", context.solid.points[nodes] - place, frame[:, 1])
    return bool((np.abs(off) > _PLANE * tube.r.max()).any())


def _across_the_front(context: FrontContext, tube: Tube, faces: FaceTable) -> BoolArray:
    """Which faces lie across the front, as the surface on which it ends does, and not beside it."""
    if context.front.closed:
        return np.zeros(len(faces), bool)
    s = tube.s[np.searchsorted(tube.nodes, faces.corners)].mean(axis=1)
    _, frame, _ = context.front.curve.frames(s)
    area = faces.area_vectors(context.solid.points)
    along = np.abs(np.einsum("nk,nk->n", area, frame[:, 2]))
    return along > _ENDS * np.linalg.norm(area, axis=1)


def _from_the_ends(context: FrontContext, faces: FaceTable) -> BoolArray:
    """Which faces belong to the smooth surfaces that meet at a free end of the front.

    At a re-entrant corner, where a crack starts from the foot of a step, one of these goes on in
    the crack's plane and does not lie across the front.
    """
    front, entity = context.front, context.model.same.entity
    ends = [
        entity[node]
        for node, end in zip(front.corners[[0, -1]], front.ends, strict=False)
        if end == FREE_SURFACE
    ]
    corners = entity[faces.corners]
    seeds = np.asarray(np.isin(corners, ends).any(axis=1))
    if not seeds.any():
        return seeds
    n = len(faces)
    rows = np.repeat(np.arange(n), corners.shape[1])
    nodes, column = np.unique(corners, return_inverse=True)
    holds = csr_array((np.ones(len(rows)), (rows, column.ravel())), shape=(n, len(nodes)))
    beside = coo_array(holds @ holds.T)
    area = faces.area_vectors(context.solid.points)
    unit = area / np.linalg.norm(area, axis=1, keepdims=True)
    smooth = np.sum(unit[beside.row] * unit[beside.col], axis=1) > _SMOOTH
    pairs = (np.ones(smooth.sum()), (beside.row[smooth], beside.col[smooth]))
    label = connected_components(coo_array(pairs, shape=(n, n)), directed=False)[1]
    return np.asarray(np.isin(label, label[seeds]), dtype=bool)


def _beyond_the_ends(context: FrontContext, tube: Tube, faces: FaceTable) -> BoolArray:
    """Which faces are nearest to an end of the front, or to the half of an edge next to it."""
    at = context.front.cell_coordinate(tube.s[np.searchsorted(tube.nodes, faces.corners)])
    last = len(context.front.edges)
    return np.asarray((at < 0.5).all(axis=1) | (at > last - 0.5).all(axis=1))


def _symmetry_planes(context: FrontContext) -> list[tuple[FloatArray, FloatArray]]:
    """Unit normal and a point of each symmetry plane at an end of the front or of a half model."""
    solid, front = context.solid, context.front
    planes = []
    for end, node in zip(front.ends, front.corners[[0, -1]], strict=False):
        if end == SYMMETRY_PLANE:
            same, near = context.model.same, context.model.near
            there = end_faces(solid, front, int(node), context.patch, same, near)
            normal = there.area_vectors(solid.points).sum(axis=0)
            planes.append((normal / np.linalg.norm(normal), solid.points[node]))
    if context.patch.plane is not None:
        normal = np.asarray(context.patch.plane.normal)
        planes.append((normal, solid.points[front.corners[0]]))
    return planes


def _on_planes(
    context: FrontContext,
    tube: Tube,
    faces: FaceTable,
    planes: list[tuple[FloatArray, FloatArray]],
) -> BoolArray:
    """Which faces lie in one of the planes."""
    points = context.solid.points
    area = faces.area_vectors(points)
    unit = area / np.maximum(np.linalg.norm(area, axis=1, keepdims=True), 1e-300)
    on_any = np.zeros(len(faces), bool)
    for normal, through in planes:
        off = np.abs((points[faces.corners] - through) @ normal).max(axis=1)
        on_any |= (np.abs(unit @ normal) > _SAME_DIRECTION) & (off < 1e-3 * tube.r.max())
    return on_any
