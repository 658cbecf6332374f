"""Conjugate gradients with a two-level preconditioner, for large parts.

The quadratic element is corrected by the linear element on the same corner nodes (p-multigrid:
Ronquist and Patera 1987), whose matrix is left to smoothed aggregation with the six rigid-body
modes (Vanek, Mandel and Brezina 1996; the library is pyamg); Gauss-Seidel smooths in between.
"""

from collections.abc import Callable

import numpy as np
from scipy.sparse import bsr_array, csr_array, diags_array, eye_array, kron

from front3d.arrays import BoolArray, FloatArray, IntArray
from front3d.elements import ELEMENTS, ElementType
from front3d.errors import MethodError
from front3d.samples.constraints import rigid_modes
from front3d.solid import Solid

MAX_ITERATIONS = 1000


def multigrid_solver(
    solid: Solid,
    full: bsr_array,
    fixed: BoolArray,
    tolerance: float,
    report: Callable[[float], None],
) -> Callable[[FloatArray], FloatArray]:
    """Prepare the preconditioner; returns right-hand side -> solution, zero where `fixed`.

    `report` is called with the relative residual after each iteration.  The solver raises
    MethodError when the residual does not fall to `tolerance`.
    """
    matrix = _held_matrix(full, fixed)
    precondition = _preconditioner(solid, matrix, fixed)

    def solve(right: FloatArray) -> FloatArray:
        start = np.where(fixed, 0.0, right)
        return _conjugate_gradients(matrix, start, precondition, tolerance, report)

    return solve


def _held_matrix(full: bsr_array, fixed: BoolArray) -> bsr_array:
    """The matrix with held rows and columns replaced by a scaled identity."""
    keep = diags_array((~fixed).astype(float)).tobsr((3, 3))
    scale = float(full.diagonal().mean())
    pinned = diags_array(np.where(fixed, scale, 0.0)).tobsr((3, 3))
    matrix = bsr_array(keep @ full @ keep + pinned)
    matrix.sort_indices()
    return matrix


def _preconditioner(
    solid: Solid, matrix: bsr_array, fixed: BoolArray
) -> Callable[[FloatArray], FloatArray]:
    import pyamg
    from pyamg.relaxation.relaxation import gauss_seidel

    to_all, corners = linear_interpolation(solid)
    keep = diags_array((~fixed).astype(float))
    coarse_modes = rigid_modes(solid.points[corners])
    lift = bsr_array((keep @ kron(to_all, eye_array(3))).tobsr((3, 3)))
    lower = lift.T.tocsr()
    coarse = bsr_array((lower @ (matrix @ lift)).tobsr((3, 3)))
    # A corner whose components are all held leaves an empty row.
    diagonal = coarse.diagonal()
    empty = np.where(diagonal <= 1e-12 * diagonal.max(), diagonal.max(), 0.0)
    coarse = bsr_array((coarse + diags_array(empty).tobsr((3, 3))).tobsr((3, 3)))
    levels = pyamg.smoothed_aggregation_solver(
        coarse, B=coarse_modes, strength=("symmetric", {"theta": 0.0}), max_coarse=500
    )
    cycle = levels.aspreconditioner(cycle="V")
    rows = csr_array(matrix)

    def precondition(residual: FloatArray) -> FloatArray:
        x = np.zeros_like(residual)
        gauss_seidel(rows, x, residual, sweep="forward")
        x += lift @ (cycle @ (lower @ (residual - matrix @ x)))
        gauss_seidel(rows, x, residual, sweep="backward")
        return x

    return precondition


def _conjugate_gradients(
    matrix: bsr_array,
    right: FloatArray,
    precondition: Callable[[FloatArray], FloatArray],
    tolerance: float,
    report: Callable[[float], None],
) -> FloatArray:
    x = np.zeros_like(right)
    scale = float(np.linalg.norm(right))
    if scale == 0.0:
        return x
    residual = right.copy()
    direction = np.zeros_like(right)
    previous = 1.0
    for _ in range(MAX_ITERATIONS):
        z = precondition(residual)
        product = float(residual @ z)
        direction = z + (product / previous) * direction
        previous = product
        image = matrix @ direction
        step = product / float(direction @ image)
        x += step * direction
        residual -= step * image
        relative = float(np.linalg.norm(residual)) / scale
        report(relative)
        if relative <= tolerance:
            return x
    raise MethodError(
        f"solver: found a relative residual of {relative:.2g} after {MAX_ITERATIONS} iterations, "
        f"expected {tolerance:g}; the mesh may be too distorted: choose less extreme ratios"
    )


def linear_interpolation(solid: Solid) -> tuple[csr_array, IntArray]:
    """Matrix from values at corner nodes to values at all nodes, and the corner nodes.

    A mid-side node takes the mean of its edge, other nodes the mean of their face or body, as
    the linear element on the same corners does.
    """
    n = len(solid.points)
    is_corner = np.zeros(n, dtype=bool)
    for block in solid.blocks:
        is_corner[block.nodes[:, : block.element.n_corners]] = True
    corners = np.flatnonzero(is_corner)
    number = np.cumsum(is_corner) - 1
    rows, columns, values = [corners], [number[corners]], [np.ones(len(corners))]
    seen = is_corner.copy()
    for block in solid.blocks:
        for local, weights in _interior_weights(block.element):
            node = block.nodes[:, local]
            fresh, first = np.unique(node, return_index=True)
            first = first[~seen[fresh]]
            seen[node[first]] = True
            for corner, weight in weights:
                rows.append(node[first])
                columns.append(number[block.nodes[first, corner]])
                values.append(np.full(len(first), weight))
    matrix = csr_array(
        (np.concatenate(values), (np.concatenate(rows), np.concatenate(columns))),
        shape=(n, len(corners)),
    )
    return matrix, corners


def _interior_weights(element: ElementType) -> list[tuple[int, list[tuple[int, float]]]]:
    linear = {"tetra": "tetra", "hexahedron": "hexahedron", "wedge": "wedge", "pyramid": "pyramid"}
    base = ELEMENTS[linear[element.family]]
    out = []
    for local in range(element.n_corners, len(element.nodes)):
        shape = base.values(element.nodes[local : local + 1])[0]
        used = np.flatnonzero(np.abs(shape) > 1e-12)
        out.append((local, [(int(k), float(shape[k])) for k in used]))
    return out
