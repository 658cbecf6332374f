"""Solving the elastic problem on a solid, or on the part it is unfolded from."""

from collections.abc import Callable

import numpy as np
from scipy.sparse import bsr_array

from front3d.arrays import BoolArray, FloatArray
from front3d.errors import MethodError
from front3d.samples.constraints import hold_rigid_motion
from front3d.samples.direct import direct_solver
from front3d.samples.elasticity import stiffness
from front3d.samples.mirror import Unfolded, load_classes, unfolded_field
from front3d.samples.schwarz import schwarz_solver
from front3d.solid import Material, Solid

Progress = Callable[[str, float], None]
"""(stage, fraction done of that stage)."""

TOLERANCE = 1e-10
DIRECT_LIMIT = 40_000
"""Unknowns up to which a direct factorisation is about as fast as iterating, and more exact."""


def solve(
    solid: Solid,
    material: Material,
    loads: FloatArray,
    held: BoolArray | None = None,
    prescribed: FloatArray | None = None,
    progress: Progress | None = None,
    direct: bool | None = None,
) -> FloatArray:
    """Displacements, (n_loads, n_points, 3).

    Parameters
    ----------
    loads : (n_loads, n_points, 3) nodal forces
    held : (n_points, 3) components that are prescribed; rigid motions that are still possible
        are stopped, and the loads must be in equilibrium with respect to them
    prescribed : (n_points, 3) their values, the same for every load; zero when None
    direct : factorise, or iterate; None decides by the number of unknowns

    Raises
    ------
    MeshError for a Jacobian that is not positive; MethodError when the loads are not in
    equilibrium, or when the relative residual does not fall to TOLERANCE.
    """
    tell = progress or (lambda stage, fraction: None)
    tell("assembling", 0.0)
    matrix = stiffness(solid, material)
    held = np.zeros(solid.points.shape, dtype=bool) if held is None else held
    given = np.zeros(held.shape) if prescribed is None else np.where(held, prescribed, 0.0)
    fixed = hold_rigid_motion(solid.points, held, loads).ravel()
    if direct is None:
        direct = len(fixed) <= DIRECT_LIMIT
    rights = [np.where(fixed, 0.0, load.ravel() - matrix @ given.ravel()) for load in loads]
    tell("factorising" if direct else "preparing the solver", 0.0)
    part = _Part(tell, len(loads))
    solver = (
        direct_solver(matrix, fixed)
        if direct
        else schwarz_solver(solid, matrix, fixed, TOLERANCE, part.report)
    )
    out = []
    for part.index, right in enumerate(rights):
        tell("solving", part.index / len(loads))
        x = solver(right)
        _check_residual(matrix, x, right, ~fixed)
        out.append(given + x.reshape(-1, 3))
    tell("solving", 1.0)
    return np.stack(out)


def solve_unfolded(
    model: Unfolded,
    material: Material,
    loads: FloatArray,
    progress: Progress | None = None,
    held: BoolArray | None = None,
) -> FloatArray:
    """Displacements of the whole solid, (n_loads, n_points, 3), by solving on its part once for
    each symmetry class of the nodal forces `loads`, (n_loads, n_points, 3).

    `held`, (n_part, 3), marks components of the part kept at zero, and so those of its images.
    """
    out = np.zeros_like(loads)
    for group in load_classes(model, loads):
        acting = np.abs(group.loads).max(axis=(1, 2)) > 0.0
        fixed = group.held if held is None else group.held | held
        moved = solve(model.part, material, group.loads[acting], fixed, progress=progress)
        out[acting] += unfolded_field(model, group.parity, moved)
    return out


def _check_residual(matrix: bsr_array, x: FloatArray, right: FloatArray, free: BoolArray) -> None:
    """MethodError when more than the tolerance and the rounding of matrix @ x is left."""
    residual = float(np.linalg.norm((right - matrix @ x)[free]))
    scale = float(np.linalg.norm(right[free]))
    terms = float(np.linalg.norm(abs(matrix) @ np.abs(x)))
    if not residual <= 10.0 * TOLERANCE * scale + np.finfo(float).eps * terms:
        raise MethodError(
            f"solver: found a relative residual of {residual / scale:.2g}, expected "
            f"{TOLERANCE:g}; the mesh may be too distorted: choose less extreme ratios"
        )


class _Part:
    """Progress of one load among several, from the residual on a logarithmic scale."""

    def __init__(self, tell: Progress, total: int) -> None:
        self.tell, self.index, self.total = tell, 0, total

    def report(self, residual: float) -> None:
        done = np.log(max(residual, TOLERANCE)) / np.log(TOLERANCE)
        self.tell("solving", (self.index + float(np.clip(done, 0.0, 1.0))) / self.total)
