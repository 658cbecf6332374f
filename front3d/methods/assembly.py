"""Nodal forces of a tube: cells and faces handed to the kernels, and summed at the nodes.

Every cell writes its own forces and the sum is taken afterwards in a fixed order, so the result
does not depend on the number of threads.
"""

from collections.abc import Iterator

import numpy as np

from front3d.arrays import FloatArray, IntArray, frozen_floats
from front3d.crack.front import on_front_mask
from front3d.elements import FACES, ElementType
from front3d.errors import MeshError
from front3d.methods.context import FrontContext
from front3d.methods.face_loads import acting, gauss_load, loaded_faces
from front3d.methods.face_rules import PLAIN, graded_rule, touching_sides
from front3d.methods.loading import free_extension, nodal_state
from front3d.methods.nodal_forces import BENT, N_MODES, PRESSED, Rule, cell_forces, face_forces
from front3d.methods.surfaces import SurfaceTerm
from front3d.methods.terms import CURVATURE, FACE_LOAD, GRADIENT, included
from front3d.methods.tube import Tube

CELL_RULE, FACE_RULE = 3, 8
"""Gauss points a side.  In cells three give K within a hundredth of a per cent of six, at the
front too, where q is flat."""

_CHUNK = 4096
"""Cells per call, which bounds the memory of the forces before they are summed at the nodes."""


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
            xi, weights = block.element.quadrature(CELL_RULE)
            rule = (block.element.values(xi), block.element.gradients(xi), weights)
            for part in _chunks(numbers):
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
                self._sum(cells, out)

    def add_faces(self, term: SurfaceTerm) -> None:
        """Surface part of the faces of one term."""
        faces = term.faces
        how = np.full(len(faces), PLAIN)
        if term.kind in (PRESSED, BENT):
            how = touching_sides(faces, self._on_front)
        groups = np.stack([faces.block, faces.local, how], axis=1)
        for group in np.unique(groups, axis=0):
            b, local, touching = (int(k) for k in group)
            block = self._solid.blocks[b]
            rule, tangents = _face_rule(block.element, local, touching)
            for part in _chunks(faces.cell[(groups == group).all(axis=1)]):
                cells = self._local(block.nodes[part])
                out = self._room(cells)
                load = self._load(term, b, local, part, rule[0])
                face_forces(
                    self._points, cells, *self._beside(cells), self._displacement, self._state,
                    rule, tangents, term.kind, load, self._curve, self._constants, out,
                )  # fmt: skip
                self._sum(cells, out)

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
        return np.empty((len(cells), len(self._displacement), N_MODES, cells.shape[1], 3))

    def _beside(self, cells: IntArray) -> tuple[IntArray, FloatArray]:
        """Side of the crack of each cell, and arc length of its node nearest to the front."""
        side = np.sign(self._tube.side[cells].sum(axis=1))
        nearest = np.argmin(self._tube.r[cells], axis=1)
        return side, self._tube.s[cells[np.arange(len(cells)), nearest]]

    def _sum(self, cells: IntArray, out: FloatArray) -> None:
        rows, size = cells.ravel(), len(self._tube.nodes)
        by_node = np.moveaxis(out, 0, 2).reshape(*self.forces.shape[:2], -1, 3)
        for index in np.ndindex(*self.forces.shape[:2], 3):
            step, mode, k = index
            self.forces[step, mode, :, k] += np.bincount(rows, by_node[step, mode, :, k], size)


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


def _chunks(cells: IntArray) -> Iterator[IntArray]:
    for start in range(0, len(cells), _CHUNK):
        yield cells[start : start + _CHUNK]


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
    return (element.values(xi), element.gradients(xi), weights), np.ascontiguousarray(tangents)
