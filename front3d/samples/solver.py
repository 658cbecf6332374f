"""Solving the elastic problem: conjugate gradients with a two-level preconditioner.

The quadratic element is corrected by the linear element on the same corner nodes (p-multigrid:
Ronquist and Patera 1987), whose matrix is left to smoothed aggregation with the six rigid-body
modes (Vanek, Mandel and Brezina 1996; the library is pyamg); Gauss-Seidel smooths in between.
"""

from collections.abc import Callable

import numpy as np
from scipy.sparse import bsr_array, csr_array, diags_array, eye_array, kron

from front3d.arrays import BoolArray, FloatArray
from front3d.errors import MethodError
from front3d.samples.elasticity import linear_interpolation, rigid_modes, stiffness
from front3d.solid import Material, Solid

Progress = Callable[[str, float], None]
"""(stage, fraction done of that stage)."""

TOLERANCE = 1e-10
MAX_ITERATIONS = 500


def solve(
    solid: Solid,
    material: Material,
    loads: FloatArray,
    held: BoolArray,
    prescribed: FloatArray | None = None,
    progress: Progress | None = None,
) -> FloatArray:
    """Displacements, (n_loads, n_points, 3).

    Parameters
    ----------
    loads : (n_loads, n_points, 3) nodal forces
    held : (n_points, 3) components that are prescribed
    prescribed : (n_points, 3) their values, the same for every load; zero when None

    Raises
    ------
    MeshError for a Jacobian that is not positive; MethodError when the iteration does not
    reach the relative residual TOLERANCE.
    """
    tell = progress or (lambda stage, fraction: None)
    tell("assembling", 0.0)
    full = stiffness(solid, material)
    fixed = held.ravel()
    given = np.zeros(len(fixed)) if prescribed is None else np.where(held, prescribed, 0.0).ravel()
    matrix = _held_matrix(full, fixed)
    tell("preparing the solver", 0.0)
    precondition = _preconditioner(solid, matrix, fixed)
    out = []
    for k, load in enumerate(loads):
        right = np.where(fixed, 0.0, load.ravel() - full @ given)
        part = _Part(tell, k, len(loads))
        out.append((given + _conjugate_gradients(matrix, right, precondition, part)).reshape(-1, 3))
    tell("solving", 1.0)
    return np.stack(out)


class _Part:
    """Progress of one load among several, from the residual on a logarithmic scale."""

    def __init__(self, tell: Progress, index: int, total: int) -> None:
        self.tell, self.index, self.total = tell, index, total

    def __call__(self, residual: float) -> None:
        done = np.log(max(residual, TOLERANCE)) / np.log(TOLERANCE)
        self.tell("solving", (self.index + float(np.clip(done, 0.0, 1.0))) / self.total)


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
        if relative <= TOLERANCE:
            return x
    raise MethodError(
        f"solver: found a relative residual of {relative:.2g} after {MAX_ITERATIONS} iterations, "
        f"expected {TOLERANCE:g}; the mesh may be too distorted: choose less extreme ratios"
    )
