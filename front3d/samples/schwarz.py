"""Conjugate gradients with a two-level overlapping Schwarz preconditioner, for large parts.

Clusters of nodes, each with the next layer of nodes around it, are factorised on their own; what
they cannot see is corrected by the linear element on the corner nodes, factorised as a whole.
Clusters are cut across their longest side, so that thin cells, whose nodes are tied most
strongly, stay together: point smoothers failed on those.  Source: Dryja and Widlund (1994),
"Domain decomposition algorithms with small overlap".
"""

from collections.abc import Callable

import numpy as np
from scipy.sparse import bsr_array, csr_array, diags_array, eye_array, kron
from scipy.sparse.linalg import LinearOperator, cg

from front3d.arrays import BoolArray, FloatArray, IntArray
from front3d.errors import MethodError
from front3d.samples.direct import Factorised, factorise
from front3d.samples.interpolation import linear_interpolation
from front3d.solid import Solid

MAX_ITERATIONS = 1000
CLUSTER = 1500
"""Nodes of a cluster, at most; twice as many or half as many took as long."""


def schwarz_solver(
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
    free = np.flatnonzero(~fixed)
    matrix = csr_array(full.tocsr()[free][:, free])
    precondition = _preconditioner(solid, full, matrix, free)

    def solve(right: FloatArray) -> FloatArray:
        out = np.zeros_like(right)
        out[free] = _conjugate_gradients(matrix, right[free], precondition, tolerance, report)
        return out

    return solve


def _preconditioner(
    solid: Solid, full: bsr_array, matrix: csr_array, free: IntArray
) -> Callable[[FloatArray], FloatArray]:
    n = len(solid.points)
    number = np.full(3 * n, -1)
    number[free] = np.arange(len(free))
    graph = csr_array((np.ones(len(full.indices)), full.indices, full.indptr), shape=(n, n))
    local: list[tuple[IntArray, Factorised]] = []
    for cluster in clusters(solid.points, np.arange(n)):
        inside = np.zeros(n)
        inside[cluster] = 1.0
        near = np.flatnonzero(np.asarray(graph @ inside))
        rows = number[(3 * near[:, None] + np.arange(3)).ravel()]
        rows = rows[rows >= 0]
        local.append((rows, factorise(matrix[rows][:, rows])))
    lift = csr_array(kron(linear_interpolation(solid), eye_array(3)).tocsr()[free])
    coarse = csr_array(lift.T @ (matrix @ lift))
    # A corner component that is held leaves an empty row.
    diagonal = coarse.diagonal()
    empty = np.where(diagonal <= 1e-12 * diagonal.max(), diagonal.max(), 0.0)
    middle = factorise(csr_array(coarse + diags_array(empty)))
    lower = csr_array(lift.T)

    def precondition(residual: FloatArray) -> FloatArray:
        out: FloatArray = lift @ middle.solve(lower @ residual)
        for rows, factors in local:
            out[rows] += factors.solve(residual[rows])
        return out

    return precondition


def clusters(points: FloatArray, nodes: IntArray) -> list[IntArray]:
    """`nodes` halved across their longest extent until no cluster exceeds CLUSTER."""
    if len(nodes) <= CLUSTER:
        return [nodes]
    axis = int(np.argmax(np.ptp(points[nodes], axis=0)))
    order = nodes[np.argsort(points[nodes, axis], kind="stable")]
    half = len(order) // 2
    return clusters(points, order[:half]) + clusters(points, order[half:])


def _conjugate_gradients(
    matrix: csr_array,
    right: FloatArray,
    precondition: Callable[[FloatArray], FloatArray],
    tolerance: float,
    report: Callable[[float], None],
) -> FloatArray:
    """Scipy's conjugate gradients; MethodError when they do not converge."""
    scale = float(np.linalg.norm(right))

    def relative_residual(x: FloatArray) -> float:
        return float(np.linalg.norm(right - matrix @ x)) / scale

    x, unfinished = cg(
        matrix,
        right,
        rtol=tolerance,
        maxiter=MAX_ITERATIONS,
        M=LinearOperator(matrix.shape, matvec=precondition, dtype=np.float64),
        callback=lambda x: report(relative_residual(x)),
    )
    if unfinished:
        raise MethodError(
            f"solver: found a relative residual of {relative_residual(x):.2g} after "
            f"{MAX_ITERATIONS} iterations, expected {tolerance:g}; the mesh may be too distorted: "
            "choose less extreme ratios"
        )
    solution: FloatArray = x
    return solution
