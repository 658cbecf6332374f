"""What holds the crack shut ahead of its front: the faces there, and the nodal forces across them.

The cells that touch the front are parted into those above and below by the faces in which the crack
plane goes on.  The forces that the upper ones pass down through these faces follow from their own
internal forces; what acts on them besides is taken off: pressure on the crack face, and body force.
"""

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
from scipy.sparse import coo_array
from scipy.sparse.csgraph import connected_components

from front3d.arrays import BoolArray, FloatArray, IntArray
from front3d.crack.coincidence import Coincidence
from front3d.crack.facetable import (
    FaceTable,
    cells_with,
    faces_of_cells,
    multiplicity,
    outer_faces,
    set_keys,
)
from front3d.crack.front import Front
from front3d.crack.near import nodes_of
from front3d.elements import FACES
from front3d.errors import MeshError, MethodError
from front3d.methods.context import FrontContext
from front3d.methods.face_loads import array_load, face_pressure, loaded_faces
from front3d.methods.internal_forces import add_cells, empty_sums
from front3d.methods.loading import nodal_state
from front3d.methods.tube import project
from front3d.solid import Solid

FLAT = 0.05
"""Largest rise of a face out of the crack plane, in parts of its reach from the front: a curved
crack goes on nearly, not exactly, in its tangent plane."""

RULE = 3
"""Gauss points a side of cells and faces."""


@dataclass(frozen=True, slots=True, eq=False)
class Ligament:
    """The cells around a front, parted by the crack plane.

    Attributes
    ----------
    ahead : faces ahead of the front that touch it, each as a face of the cell above
    behind : upper crack faces that touch the front
    above, below : per block, the numbers of the cells with a node on the front (no `below` in a
        half model)
    on_front : (n_points,) whether a node is one of the front's
    """

    ahead: FaceTable
    behind: FaceTable
    above: tuple[IntArray, ...]
    below: tuple[IntArray, ...]
    on_front: BoolArray


def find_ligament(context: FrontContext) -> Ligament:
    """Faces ahead and cells on both sides; MethodError where no faces go on ahead."""
    solid, front, same, patch = context.solid, context.front, context.model.same, context.patch
    on_front, near = context.on_front, context.model.near
    touching = cells_with(solid, on_front, near.cells)
    behind = patch.upper[np.asarray(on_front[patch.upper.nodes].any(axis=1))]
    if patch.lower is None:
        free = outer_faces(solid, same.entity, on_front, near.cells)
        ahead = free[_in_plane(context, free)]
        crack = set_keys(same.entity[np.concatenate([ahead.nodes, behind.nodes])])
        ahead = ahead[~np.isin(crack[: len(ahead)], crack[len(ahead) :])]
        if not len(ahead):
            raise _refusal(context, 0)
        none = tuple(np.zeros(0, np.int64) for _ in solid.blocks)
        return Ligament(ahead, behind, touching, none, on_front)
    faces, twin = _shared_faces(solid, same, touching)
    flat = _in_plane(context, faces) & on_front[faces.nodes].any(axis=1)
    ring = _Counted(solid, touching)
    label = _parts(ring, faces, twin, flat)
    beneath = patch.lower[np.asarray(on_front[patch.lower.nodes].any(axis=1))]
    upper = np.isin(label, label[ring.rows(behind)])
    lower = np.isin(label, label[ring.rows(beneath)])
    reached = np.unique(same.entity[faces.corners[flat]])
    if (upper & lower).any():
        raise _refusal(context, int(np.isin(same.entity[front.corners], reached).sum()))
    of_upper = upper[ring.rows(faces)]
    return Ligament(
        faces[flat & of_upper], behind, ring.chosen(upper), ring.chosen(lower), on_front
    )


def _refusal(context: FrontContext, with_faces: int) -> MethodError:
    where = (
        f"at {with_faces} of its {len(context.front.corners)} corner nodes only"
        if with_faces
        else "at none of its nodes"
    )
    return MethodError(
        f"{context.solid.source}: closure: no faces ahead: cell faces go on in the crack plane "
        f"ahead of the front {where}, so no upper side can be told from a lower one there; mesh "
        "the continuation of the crack surface along with the crack"
    )


class _Counted:
    """Chosen cells, their numbers per block, counted through."""

    def __init__(self, solid: Solid, cells: tuple[IntArray, ...]) -> None:
        self._cells = cells
        self._first = np.cumsum([0, *(len(block) for block in solid.blocks)])
        starts = self._first[:-1]
        self._all = np.concatenate([s + c for s, c in zip(starts, cells, strict=True)])

    def __len__(self) -> int:
        return len(self._all)

    def rows(self, faces: FaceTable) -> IntArray:
        """(n,) which of the chosen cells each face is of; all must be among them."""
        return np.searchsorted(self._all, self._first[faces.block] + faces.cell)

    def chosen(self, mask: BoolArray) -> tuple[IntArray, ...]:
        """The numbers per block of those that a mask picks."""
        ends = np.cumsum([len(cells) for cells in self._cells])[:-1]
        parts = np.split(mask, ends)
        return tuple(cells[part] for cells, part in zip(self._cells, parts, strict=True))


def _shared_faces(
    solid: Solid, same: Coincidence, cells: tuple[IntArray, ...]
) -> tuple[FaceTable, IntArray]:
    """Faces that two of the cells share, each seen from both; and the row of the other view."""
    table = faces_of_cells(solid, cells)
    corners = same.entity[table.corners]
    distinct = (np.diff(np.sort(corners, axis=1), axis=1) != 0).sum(axis=1) + 1
    table = table[distinct >= 3]
    keys = set_keys(same.entity[table.nodes])
    double = multiplicity(keys) == 2
    table, keys = table[double], keys[double]
    order = np.argsort(keys, kind="stable")
    twin = np.empty(len(keys), np.int64)
    twin[order[0::2]], twin[order[1::2]] = order[1::2], order[0::2]
    return table, twin


def _in_plane(context: FrontContext, faces: FaceTable) -> BoolArray:
    """Which faces lie in the crack plane ahead of the front."""
    if not len(faces):
        return np.zeros(0, bool)
    nodes, row = np.unique(faces.corners, return_inverse=True)
    x = context.solid.points[nodes]
    s, _ = project(context.front, x)
    place, frame, _ = context.front.curve.frames(s)
    local = np.einsum("nij,nj->ni", frame, x - place)[row.reshape(faces.corners.shape)]
    reach = np.linalg.norm(local, axis=2).max(axis=1)
    flat = np.abs(local[..., 1]).max(axis=1) <= FLAT * reach
    ahead = local[..., 0].min(axis=1) >= -FLAT * reach
    return np.asarray(flat & ahead)


def _parts(ring: _Counted, faces: FaceTable, twin: IntArray, cut: BoolArray) -> IntArray:
    """(n_cells,) label of the part each cell belongs to, joined through faces that are not cut."""
    cell, n = ring.rows(faces), len(ring)
    kept = np.flatnonzero(~(cut | cut[twin]))
    graph = coo_array((np.ones(len(kept), np.int8), (cell[kept], cell[twin[kept]])), shape=(n, n))
    return np.asarray(connected_components(graph, directed=False)[1], np.int64)


def mode_axes(front: Front, s: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Positions (n, 3) at arc lengths s, and (n, 3, 3) the axes of modes I, II and III in rows:
    e2, e1 and e3 of the local frame.
    """
    place, frame, _ = front.curve.frames(s)
    return place, frame[:, [1, 0, 2]]


def closing_forces(context: FrontContext, ligament: Ligament) -> tuple[FloatArray, FloatArray]:
    """Forces with which the upper side holds on to the lower one, at the front and ahead.

    Returns
    -------
    forces : (steps, n_points, 3), each at the representative of its entity; positive along the
        crack normal in tension.  Right at nodes that no cell beyond the touching ones holds.  On
        loaded crack faces they include what the faces ahead would carry once open (Nairn 2011).
    imbalance : (steps, n_points, 3) what is left of the forces of both sides: a body force that
        was not given
    """
    solid, patch, same = context.solid, context.patch, context.model.same
    # No other nodes have any: what follows must not look at the whole solid.
    sides = (ligament.above, ligament.below)
    rows = np.unique(same.entity[np.concatenate([nodes_of(solid, cells) for cells in sides])])
    forces = face_forces(context, ligament.behind)[:, rows]
    forces -= cell_forces(context, ligament.above)[:, rows]
    imbalance = np.zeros_like(forces)
    if patch.lower is not None:
        touching = np.asarray(ligament.on_front[patch.lower.nodes].any(axis=1))
        lower = face_forces(context, patch.lower[touching])[:, rows]
        lower -= cell_forces(context, ligament.below)[:, rows]
        # Inside each side and between them everything else is in equilibrium.
        imbalance = -(forces + lower)
        up, down = (volumes(solid, cells, same)[rows] for cells in sides)
        forces += (up / np.maximum(up + down, 1e-300))[:, None] * imbalance
    forces += face_forces(context, ligament.ahead, ahead=True)[:, rows]
    every = np.zeros((2, *context.displacement.shape))
    every[0][:, rows], every[1][:, rows] = forces, imbalance
    return every[0], every[1]


def cell_forces(context: FrontContext, cells: tuple[IntArray, ...]) -> FloatArray:
    """(steps, n_points, 3) internal forces of chosen cells, less the body force in them:
    int (sigma_ij dN/dx_j - b_i N) dV.
    """
    solid, same, u = context.solid, context.model.same, context.displacement
    out = np.zeros(u.shape)  # unlike zeros_like, it does not touch them all
    for block, numbers in zip(solid.blocks, cells, strict=True):
        if not len(numbers):
            continue
        nodes, local = np.unique(block.nodes[numbers], return_inverse=True)
        points = solid.points[nodes]
        state = nodal_state(context, nodes, project(context.front, points)[0])
        entity, rows = np.unique(same.entity[nodes], return_inverse=True)
        sums = empty_sums(len(u), len(entity))
        local = local.reshape(len(numbers), -1)
        inside_out = add_cells(
            sums, block.element, local, rows, points, u[:, nodes], state, context.material
        )
        if len(inside_out):
            raise MeshError(
                f"{solid.source}: {block.kind} cell {numbers[inside_out[0]]} at the front: the "
                "Jacobian determinant is not positive; check its node order and mid-side nodes"
            )
        out[:, entity] += sums.force
    return out


def volumes(solid: Solid, cells: tuple[IntArray, ...], same: Coincidence) -> FloatArray:
    """(n_points,) volume of the chosen cells around each node."""
    out = np.zeros(len(solid.points))
    for block, numbers in zip(solid.blocks, cells, strict=True):
        if len(numbers):
            xi, weights = block.element.quadrature(RULE)
            x = solid.points[block.nodes[numbers]]
            jacobian = np.einsum(
                "cni,qnd->cqid", x - x[:, :1], block.element.gradients(xi), optimize=True
            )
            volume = np.linalg.det(jacobian) @ weights
            nodes = same.entity[block.nodes[numbers]]
            np.add.at(out, nodes, np.broadcast_to(volume[:, None], nodes.shape))
    return out


def face_nodes(solid: Solid, faces: FaceTable) -> list[tuple[str, IntArray]]:
    """All nodes of faces, (face type, (n, m) nodes) per type."""
    groups: dict[str, list[IntArray]] = {}
    for kind, _, nodes in _face_groups(solid, faces):
        groups.setdefault(kind, []).append(nodes)
    return [(kind, np.concatenate(parts)) for kind, parts in groups.items()]


def _face_groups(solid: Solid, faces: FaceTable) -> Iterator[tuple[str, FaceTable, IntArray]]:
    """Faces of one block by one local number: their type, themselves, and all their nodes."""
    for b, local in np.unique(np.stack([faces.block, faces.local], axis=1), axis=0):
        block = solid.blocks[b]
        kind, members = block.element.faces[local]
        mine = faces[np.asarray((faces.block == b) & (faces.local == local))]
        yield kind, mine, block.nodes[mine.cell][:, list(members)]


def face_forces(context: FrontContext, faces: FaceTable, ahead: bool = False) -> FloatArray:
    """(steps, n_points, 3) what acts on crack faces, shared out among their nodes.

    On faces `ahead` of the front: what would act on the upper side there once they are open.
    """
    solid, entity = context.solid, context.model.same.entity
    out = np.zeros(context.displacement.shape)
    if not loaded_faces(context):
        return out
    for kind, mine, nodes in _face_groups(solid, faces):
        face = FACES[kind]
        xi, weights = face.quadrature(RULE + 1)
        shape = face.values(xi)
        x = solid.points[nodes]
        tangents = np.einsum("fni,qnd->fqdi", x - x[:, :1], face.gradients(xi))
        normal = np.cross(tangents[:, :, 0], tangents[:, :, 1])
        size = np.linalg.norm(normal, axis=2, keepdims=True)
        pressure = face_pressure(context, np.einsum("qn,fni->fqi", shape, x))
        for step, uniform, total in zip(context.steps, pressure, out, strict=True):
            array = array_load(context, step, mine, nodes, shape, ahead)
            acting = size * array[..., 1:] - (uniform + array[..., 0])[..., None] * normal
            share = np.einsum("qn,fqi,q->fni", shape, acting, weights)
            np.add.at(total, entity[nodes], share)
    return out
