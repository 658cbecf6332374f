"""Linear elasticity on any mix of elements: stiffness, boundary tractions, rigid modes."""

from collections.abc import Callable, Sequence

import numpy as np
from scipy.sparse import bsr_array, csr_array

from front3d.arrays import FloatArray, IntArray
from front3d.elements import FACES
from front3d.errors import MeshError
from front3d.solid import CellBlock, Material, Solid

Traction = Callable[[FloatArray, FloatArray], FloatArray]
"""(points (n, 3), outward unit normals (n, 3)) -> tractions (n, 3)."""

_POINTS_PER_SIDE = 3  # exact for the Jacobian of every quadratic element, ample for the rest
_CHUNK = 2000


def stiffness(solid: Solid, material: Material) -> bsr_array:
    """Stiffness matrix in 3 x 3 blocks, one block row per point.

    MeshError when a Jacobian is not positive.
    """
    n = len(solid.points)
    keys, values = [], []
    for block in solid.blocks:
        nodes = block.nodes
        keys.append((nodes[:, :, None] * n + nodes[:, None, :]).ravel())
        for start in range(0, len(nodes), _CHUNK):
            part = cell_stiffness(solid.points, block, start, start + _CHUNK, material)
            values.append(part.reshape(-1, 9))
    return _sum_blocks(np.concatenate(keys), np.concatenate(values), n)


def cell_stiffness(
    points: FloatArray, block: CellBlock, start: int, stop: int, material: Material
) -> FloatArray:
    """(cells, nodes, nodes, 3, 3): sum over the quadrature of
    lame dN_a/dx_i dN_b/dx_j + mu (dN_a/dx_j dN_b/dx_i + delta_ij grad N_a . grad N_b).
    """
    xi, weights = block.element.quadrature(_POINTS_PER_SIDE)
    reference = block.element.gradients(xi)
    x = points[block.nodes[start:stop]]
    jacobian = np.einsum("cni,qnd->cqid", x, reference, optimize=True)
    det = np.linalg.det(jacobian)
    _check(det, block, start)
    gradient = np.matmul(reference[None], np.linalg.inv(jacobian))  # (cells, q, nodes, 3)
    root = np.sqrt(det * weights)
    n_cells, n_q, n_nodes, _ = gradient.shape
    flat = (gradient * root[..., None, None]).reshape(n_cells, n_q, 3 * n_nodes)
    product = np.matmul(flat.transpose(0, 2, 1), flat)
    product = product.reshape(n_cells, n_nodes, 3, n_nodes, 3).transpose(0, 1, 3, 2, 4)
    trace = material.shear_modulus * np.trace(product, axis1=3, axis2=4)
    out = material.lame * product + material.shear_modulus * product.swapaxes(3, 4)
    for i in range(3):
        out[..., i, i] += trace
    return out


def _check(det: FloatArray, block: CellBlock, start: int) -> None:
    bad = np.argwhere(det <= 0.0)
    if len(bad):
        cell, q = bad[0]
        raise MeshError(
            f"{block.kind} cell {start + cell}: found Jacobian determinant {det[cell, q]:.3g} at "
            f"quadrature point {q}, expected a positive one; check the shape and node order"
        )


def _sum_blocks(keys: IntArray, values: FloatArray, n: int) -> bsr_array:
    """Add the 3 x 3 blocks of equal row n + column."""
    order = np.argsort(keys, kind="stable")
    ordered = keys[order]
    starts = np.flatnonzero(np.concatenate([[True], ordered[1:] != ordered[:-1]]))
    bounds = np.append(starts, len(keys))
    gather = csr_array((np.ones(len(keys)), order, bounds), shape=(len(starts), len(keys)))
    data = (gather @ values).reshape(-1, 3, 3)
    rows, columns = np.divmod(ordered[starts], n)
    indptr = np.searchsorted(rows, np.arange(n + 1))
    return bsr_array(
        (data, columns.astype(np.int32), indptr.astype(np.int32)), shape=(3 * n, 3 * n)
    )


def boundary_faces(solid: Solid) -> list[tuple[str, IntArray]]:
    """Faces that belong to one cell only: (face type, nodes (n, m)) per type, outward."""
    groups: dict[str, list[IntArray]] = {}
    for block in solid.blocks:
        for kind, local in block.element.faces:
            groups.setdefault(kind, []).append(block.nodes[:, list(local)])
    out = []
    for kind, parts in groups.items():
        faces = np.concatenate(parts)
        corners = np.sort(faces[:, : FACES[kind].n_corners], axis=1)
        _, inverse, counts = np.unique(corners, axis=0, return_inverse=True, return_counts=True)
        out.append((kind, faces[counts[inverse.ravel()] == 1]))
    return out


def traction_load(
    points: FloatArray, faces: Sequence[tuple[str, IntArray]], traction: Traction
) -> FloatArray:
    """Nodal forces, (n_points, 3), of tractions on boundary faces."""
    load = np.zeros_like(points)
    for kind, nodes in faces:
        face = FACES[kind]
        xi, weights = face.quadrature(_POINTS_PER_SIDE + 1)
        shape, gradient = face.values(xi), face.gradients(xi)
        x = points[nodes]
        tangents = np.einsum("fni,qnd->fqdi", x, gradient)
        normal = np.cross(tangents[:, :, 0], tangents[:, :, 1])
        area = np.linalg.norm(normal, axis=2)
        at = np.einsum("qn,fni->fqi", shape, x)
        unit = normal / area[..., None]
        t = traction(at.reshape(-1, 3), unit.reshape(-1, 3)).reshape(at.shape)
        forces = np.einsum("qn,fqi,fq,q->fni", shape, t, area, weights, optimize=True)
        np.add.at(load, nodes, forces)
    return load
