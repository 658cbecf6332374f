"""Nodal forces of a tube: cells and faces handed to the kernels, and summed at the nodes.

Threads work on some cells at a time, each cell with forces of its own, and the sum is taken in the
order of the cells: the result does not depend on the number of threads.
"""

from collections.abc import Callable
from functools import partial

import numpy as np

from front3d.arrays import FloatArray, IntArray, frozen_floats
from front3d.crack.front import on_front_mask
from front3d.elements import FACES, ElementType
from front3d.errors import MeshError
from front3d.methods.context import FrontContext
from front3d.methods.face_loads import acting, gauss_load, loaded_faces
from front3d.methods.face_rules import PLAIN, graded_rule, touching_sides
from front3d.methods.loading import free_extension, nodal_state
from front3d.methods.nodal_forces import (
    BENT,
    N_MODES,
    PRESSED,
    Rule,
    cell_forces,
    face_forces,
    sum_at_nodes,
)
from front3d.methods.surfaces import SurfaceTerm
from front3d.methods.terms import CURVATURE, FACE_LOAD, GRADIENT, included
from front3d.methods.tube import Tube
from front3d.solid import CellBlock
from front3d.threads import in_order

CELL_RULE, FACE_RULE = 3, 8
"""Gauss points a side.  In cells three give K within a hundredth of a per cent of six, at the
front too, where q is flat."""

_PART = 512
"""Cells per call: enough to share among threads, few enough to hold their forces before the sum."""


class Assembly:
    """Sums forces, (steps, N_MODES, tube nodes, 3), of a front's tube.

    Nodes are numbered within the tube, and the best rigid motion that the symmetry planes allow is
    taken off the displacements, and so is the mean thermal extension, so that K does not depend on
    it even through rounding and quadrature.
    """

    def __init__(self, context: FrontContext, tube: Tube, symmetry_normals: FloatArray) -> None:
        self._context, self._solid, self._tube = context, context.solid, tube
        self._points = frozen_floats(context.solid.points[tube.nodes])
        moved = context.displacement[:, tube.nodes]
        free = free_extension(context, tube.nodes)
        self._displacement = frozen_floats(
            [
                _without_rigid_motion(self._points, u - even * self._points, symmetry_normals)
                for u, even in zip(moved, free, strict=True)
            ]
        )
        self._on_front = on_front_mask(context.front, context.model.same)
        self._curve = context.front.curve.arrays
        material = context.material
        turn = 1.0 if included(CURVATURE) else 0.0
        gradient = 1.0 if included(GRADIENT) else 0.0
        self._constants = (material.shear_modulus, material.poisson, turn, gradient)
        self._state = nodal_state(context, tube.nodes, tube.s, free)
        self.forces = np.zeros((len(moved), N_MODES, len(tube.nodes), 3))

    def add_cells(self) -> None:
        """Volume part of every cell in the tube; MeshError where a Jacobian is not positive."""
        for block, numbers in zip(self._solid.blocks, self._tube.cells, strict=True):
            rule = _rule(block.element, *block.element.quadrature(CELL_RULE))
            self._sum(partial(self._of_cells, block, rule), numbers)

    def add_faces(self, term: SurfaceTerm) -> None:
        """Surface part of the faces of one term."""
        faces = term.faces
        how = np.full(len(faces), PLAIN)
        if term.kind in (PRESSED, BENT):
            how = touching_sides(faces, self._on_front)
        groups = np.stack([faces.block, faces.local, how], axis=1)
        for group in np.unique(groups, axis=0):
            b, local, touching = (int(k) for k in group)
            rule, tangents = _face_rule(self._solid.blocks[b].element, local, touching)
            work = partial(self._of_faces, term, b, local, rule, tangents)
            self._sum(work, faces.cell[(groups == group).all(axis=1)])

    def _of_cells(
        self, block: CellBlock, rule: Rule, part: IntArray
    ) -> tuple[IntArray, FloatArray]:
        """Local nodes of some cells, and what `cell_forces` gives for them."""
        cells = self._local(block.nodes[part])
        out = self._room(cells)
        status = np.zeros(len(cells), np.int64)
        cell_forces(
            self._points, cells, *self._beside(cells), self._displacement, self._state,
            rule, self._curve, self._constants, out, status,
        )  # fmt: skip
        if status.any():
            bad = int(np.flatnonzero(status)[0])
            raise MeshError(
                f"{self._solid.source}: {block.kind} cell {part[bad]} near the front: the "
                f"Jacobian determinant is not positive at Gauss point {status[bad] - 1}; "
                "check its node order and mid-side nodes"
            )
        return cells, out

    def _of_faces(
        self,
        term: SurfaceTerm,
        block: int,
        local: int,
        rule: Rule,
        tangents: FloatArray,
        part: IntArray,
    ) -> tuple[IntArray, FloatArray]:
        """Local nodes of some cells, and what `face_forces` gives for the face `local` of each."""
        cells = self._local(self._solid.blocks[block].nodes[part])
        out = self._room(cells)
        face_forces(
            self._points, cells, *self._beside(cells), self._displacement, self._state,
            rule, tangents, term.kind, self._load(term, block, local, part, rule[0][:, 0]),
            self._curve, self._constants, out,
        )  # fmt: skip
        return cells, out

    def _load(
        self, term: SurfaceTerm, block: int, local: int, cells: IntArray, values: FloatArray
    ) -> FloatArray:
        """(cells, steps, q, 4) pressure and traction on faces, or an empty array."""
        if term.kind in (PRESSED, BENT):
            if not (included(FACE_LOAD) and loaded_faces(self._context)):
                return frozen_floats(np.zeros((0, 0, 0, 4)))
            return gauss_load(self._context, block, local, cells, values)
        if not term.pressure:
            return frozen_floats(np.zeros((0, 0, 0, 4)))
        pressure = term.pressure * acting(self._context, "surface_pressure")
        load = np.zeros((len(cells), len(pressure), len(values), 4))
        load[..., 0] = pressure[:, None]
        return frozen_floats(load)

    def _local(self, cells: IntArray) -> IntArray:
        return np.searchsorted(self._tube.nodes, cells)

    def _room(self, cells: IntArray) -> FloatArray:
        return np.empty((len(cells), len(self._displacement), cells.shape[1], 3 * N_MODES))

    def _beside(self, cells: IntArray) -> tuple[IntArray, FloatArray]:
        """Side of the crack of each cell, and arc length of its node nearest to the front."""
        side = np.sign(self._tube.side[cells].sum(axis=1))
        nearest = np.argmin(self._tube.r[cells], axis=1)
        return side, self._tube.s[cells[np.arange(len(cells)), nearest]]

    def _sum(
        self, work: Callable[[IntArray], tuple[IntArray, FloatArray]], numbers: IntArray
    ) -> None:
        """Add what `work` gives for some cells to the forces at their nodes, in a fixed order."""
        parts = [numbers[start : start + _PART] for start in range(0, len(numbers), _PART)]
        for cells, out in in_order(work, parts):
            sum_at_nodes(cells, out, self.forces)


def _without_rigid_motion(
    points: FloatArray, displacement: FloatArray, symmetry_normals: FloatArray
) -> FloatArray:
    """Displacements less their least-squares translation and infinitesimal rotation.

    A symmetry plane must not tilt, so only rotation about its normal is taken off.
    """
    x = points - points.mean(axis=0)
    u = displacement - displacement.mean(axis=0)
    # Least squares for w in u = w x x: (sum |x|^2 I - x x^T) w = sum x x u.
    inertia = np.sum(x * x) * np.eye(3) - x.T @ x
    rotation = np.linalg.solve(inertia, np.cross(x, u).sum(axis=0))
    for normal in symmetry_normals:
        rotation = (rotation @ normal) * normal
    return u - np.cross(rotation, x)


def _rule(element: ElementType, xi: FloatArray, weights: FloatArray) -> Rule:
    """The shape functions of an element at points xi, (q, 3), as the kernels take them."""
    values, gradients = element.values(xi)[:, None], element.gradients(xi).transpose(0, 2, 1)
    return frozen_floats(np.concatenate([values, gradients], axis=1)), frozen_floats(weights)


def _face_rule(element: ElementType, local: int, touching: int) -> tuple[Rule, FloatArray]:
    """The cell's own shape functions at the Gauss points of one of its faces, with weights; and
    the face's tangents in the cell's reference coordinates.
    """
    kind, members = element.faces[local]
    face = FACES[kind]
    eta, weights = graded_rule(face, touching, FACE_RULE)
    corners = element.nodes[list(members)]
    xi = face.values(eta) @ corners
    tangents = np.einsum("qnd,nx->qxd", face.gradients(eta), corners)
    return _rule(element, xi, weights), frozen_floats(tangents)
