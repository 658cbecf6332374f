"""The interaction integral: K_I, K_II, K_III and J at every station, over several rings.

K_I = E' I / (2 A), K_II likewise, K_III = mu I / A, where I is the sum of the nodal forces of
`nodal_forces` times the virtual extension q, and A the crack area that q sweeps per unit
advance.  q = N_a(s) Q(r) e1(s) at the nodes, N_a the hat of station a and Q one out to the reach of
the cells that touch the front (flat first ring), then falling to zero at the ring's radius.
"""

from collections.abc import Iterator
from typing import Any

import numpy as np

from front3d.arrays import FloatArray, IntArray
from front3d.crack.ends import end_faces
from front3d.crack.facetable import FaceTable, outer_faces, set_keys
from front3d.crack.front import FREE_SURFACE, SYMMETRY_PLANE
from front3d.crack.patches import marked
from front3d.elements import FACES
from front3d.elements.faces import FaceType
from front3d.errors import MeshError
from front3d.methods import nodal_forces
from front3d.methods.context import FrontContext
from front3d.methods.hats import build_hats, default_width
from front3d.methods.tube import (
    N_RINGS,
    Tube,
    along_front,
    build_tube,
    is_structured,
    layer_reaches,
    ring_radii,
)
from front3d.results import MethodResult, Rings

NEAR_RULE, FAR_RULE, FACE_RULE = 4, 3, 8
"""Gauss points a side: in cells that touch the front, where stresses are singular; elsewhere; and
on faces, where the pressure's part is integrated through the singular auxiliary field."""

PLATEAU = 0.5
"""Smallest flat part of q, in ring radii: with more than the touching cells flat, the error of a
ring falls with the element size at the rate of the element's order."""

CHUNK = 4096
"""Cells per call, which bounds the memory of the forces before they are summed at the nodes."""


def evaluate(context: FrontContext) -> list[MethodResult]:
    """K of one front, one result per step."""
    solid, front, options = context.solid, context.front, context.options
    same = context.model.same
    structured = is_structured(solid, front, same)
    reaches = layer_reaches(solid, front, same, 1 + N_RINGS)
    radii = ring_radii(front, reaches, structured, options.radii, solid.source)
    tube = build_tube(solid, front, context.patch, same, float(radii.max()))
    forces = _nodal_forces(context, tube)
    width = options.hat if options.hat is not None else default_width(front, structured)
    hats = build_hats(solid, front, width)
    _, frame, _ = front.curve.frames(tube.s)
    along = np.einsum("fmnk,nk->fmn", forces, frame[:, 0])
    even, odd = hats.weights(tube.s), hats.weights(tube.s, odd=True)
    flat = along_front(front, reaches[0], tube.s) * (1 + 1e-9)
    integrals = []
    for ring in radii:
        outer = along_front(front, ring, tube.s)
        inner = np.maximum(flat, PLATEAU * outer)
        weighted = along * np.clip((outer - tube.r) / (outer - inner), 0.0, 1.0)
        by_mode = [
            weighted[:, mode] @ (odd if mode == 2 else even) for mode in range(weighted.shape[1])
        ]
        integrals.append(np.stack(by_mode, axis=1))
    modulus, shear = context.material.plane_strain_modulus, context.material.shear_modulus
    scale = np.array([modulus / 2, modulus / 2, shear, 1.0])
    value = np.stack(integrals) * scale[:, None]  # (rings, steps, modes, stations)
    if front.half:  # the unmodelled half gives the same again, and only mode I is possible
        value *= 2.0
        value[:, :, 1:3] = 0.0
    return [_result(value[:, step], radii) for step in range(value.shape[1])]


def _result(value: FloatArray, radii: FloatArray) -> MethodResult:
    """Result of one step from (rings, modes, stations)."""
    K = np.moveaxis(value[:, :3], 1, 2)
    J = value[:, 3]
    trusted = slice(1, None) if len(K) > 1 else slice(None)
    mean = K[trusted].mean(axis=0)
    spread = np.ptp(K[trusted], axis=0).max(axis=1)
    columns = {"J_interaction": J[trusted].mean(axis=0), "ring_spread": spread}
    return MethodResult("interaction", mean, columns, Rings(radii, K, J))


def _nodal_forces(context: FrontContext, tube: Tube) -> FloatArray:
    """(steps, modes, tube nodes, 3) forces F, volume and surface parts."""
    solid, front, displacement = context.solid, context.front, context.displacement
    n_steps = len(displacement)
    local = np.full(len(solid.points), -1)
    local[tube.nodes] = np.arange(len(tube.nodes))
    total = np.zeros((n_steps, nodal_forces.N_MODES, len(tube.nodes), 3))
    curve = front.curve
    geometry = (curve.knots, curve.position, curve.normal, curve.closed)
    elastic = (context.material.young, context.material.poisson)
    s_of = np.zeros(len(solid.points))
    s_of[tube.nodes] = tube.s
    r_of = np.full(len(solid.points), np.inf)
    r_of[tube.nodes] = tube.r

    def seeds(cells: IntArray) -> tuple[IntArray, FloatArray]:
        nearest = np.take_along_axis(cells, np.argmin(r_of[cells], axis=1)[:, None], axis=1)
        side = tube.side[cells]
        return np.sign(side.sum(axis=1)), s_of[nearest[:, 0]]

    def add(cells: IntArray, out: FloatArray) -> None:
        rows = local[cells].ravel()
        by_node = np.moveaxis(out, 0, 2).reshape(n_steps, nodal_forces.N_MODES, -1, 3)
        for step in range(n_steps):
            for mode in range(nodal_forces.N_MODES):
                for k in range(3):
                    total[step, mode, :, k] += np.bincount(
                        rows, by_node[step, mode, :, k], minlength=len(tube.nodes)
                    )

    for block, numbers, touching in zip(solid.blocks, tube.cells, tube.touching, strict=True):
        for rule, chosen in ((NEAR_RULE, touching), (FAR_RULE, ~touching)):
            xi, weights = block.element.quadrature(rule)
            tables = (block.element.values(xi), block.element.gradients(xi), weights)
            for part in _chunks(numbers[chosen]):
                cells = np.ascontiguousarray(block.nodes[part])
                out = np.empty((len(cells), n_steps, nodal_forces.N_MODES, cells.shape[1], 3))
                status = np.zeros(len(cells), np.int64)
                nodal_forces.cell_forces(
                    solid.points, cells, *seeds(cells), displacement, *tables, *geometry,
                    *elastic, out, status,
                )  # fmt: skip
                if status.any():
                    bad = int(np.flatnonzero(status)[0])
                    raise MeshError(
                        f"{solid.source}: {block.kind} cell {part[bad]} near the front: the "
                        f"Jacobian determinant is not positive at Gauss point {status[bad] - 1}; "
                        "check its node order and mid-side nodes"
                    )
                add(cells, out)
    for faces, kind, pressure in _loaded_faces(context, tube):
        for (b, loc), rows in _by_block_and_face(faces):
            block = solid.blocks[b]
            tables = _face_tables(block.element, int(loc))
            for part in _chunks(faces.cell[rows]):
                cells = np.ascontiguousarray(block.nodes[part])
                out = np.empty((len(cells), n_steps, nodal_forces.N_MODES, cells.shape[1], 3))
                nodal_forces.face_forces(
                    solid.points, cells, *seeds(cells), displacement, *tables, kind, pressure,
                    *geometry, *elastic, out,
                )  # fmt: skip
                add(cells, out)
    return total


def _chunks(cells: IntArray) -> Iterator[IntArray]:
    for start in range(0, len(cells), CHUNK):
        yield cells[start : start + CHUNK]


def _by_block_and_face(faces: FaceTable) -> Iterator[tuple[tuple[int, int], IntArray]]:
    for b in np.unique(faces.block):
        for loc in np.unique(faces.local[faces.block == b]):
            yield (int(b), int(loc)), np.flatnonzero((faces.block == b) & (faces.local == loc))


def _face_tables(element: Any, local: int) -> tuple[FloatArray, ...]:
    """Values and gradients of the cell's shape functions at the Gauss points of one of its faces,
    tangents of the face in the cell's reference coordinates, and weights.
    """
    kind, members = element.faces[local]
    face: FaceType = FACES[kind]
    eta, weights = face.quadrature(FACE_RULE)
    at = element.nodes[list(members)]
    xi = face.values(eta) @ at
    tangents = np.einsum("qnd,nx->qxd", face.gradients(eta), at)
    return element.values(xi), element.gradients(xi), np.ascontiguousarray(tangents), weights


def _loaded_faces(context: FrontContext, tube: Tube) -> list[tuple[FaceTable, int, float]]:
    """Outer faces in the tube that give a surface term, with their kind and pressure.

    Symmetry planes give none: on them the auxiliary and actual tractions do no work for modes I
    and II, and K_III at an end there is zero.
    """
    solid, front, patch, options = context.solid, context.front, context.patch, context.options
    same = context.model.same
    near = marked(len(solid.points), tube.nodes)
    outer = outer_faces(solid, same.entity, near)
    outer = outer[near[outer.nodes].all(axis=1)]
    crack_faces = [patch.upper] if patch.lower is None else [patch.upper, patch.lower]
    result: list[tuple[FaceTable, int, float]] = []
    keys = set_keys(
        same.entity[np.concatenate([outer.nodes, *(faces.nodes for faces in crack_faces)])]
    )
    is_crack = np.isin(keys[: len(outer)], keys[len(outer) :])
    if options.face_pressure:
        result.append((outer[is_crack], nodal_forces.PRESSED, options.face_pressure))
    rest = outer[~is_crack]
    still = np.zeros(len(rest), bool)
    area = rest.area_vectors(solid.points)
    unit = area / np.linalg.norm(area, axis=1, keepdims=True)
    planes = []
    for end, node in zip(front.ends, (front.edges[0, 0], front.edges[-1, 1]), strict=False):
        if end == SYMMETRY_PLANE:
            faces = end_faces(solid, front, int(node), patch, same)
            planes.append((faces.area_vectors(solid.points).sum(axis=0), solid.points[node]))
    if options.crack_plane is not None:
        planes.append((np.asarray(options.crack_plane.normal), solid.points[front.edges[0, 0]]))
    for direction, through in planes:
        direction = direction / np.linalg.norm(direction)
        size = float(tube.r[np.isfinite(tube.r)].max())
        off = np.abs((solid.points[rest.corners] - through) @ direction).max(axis=1)
        still |= (np.abs(unit @ direction) > 0.999) & (off < 1e-3 * size)
    free = rest[~still]
    if len(free) and FREE_SURFACE in (*front.ends, FREE_SURFACE):
        result.append((free, nodal_forces.FREE, 0.0))
    return result
