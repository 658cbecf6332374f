"""Which displacements to hold so that a loaded solid cannot move as a rigid body."""

import numpy as np
from scipy.linalg import qr

from front3d.arrays import BoolArray, FloatArray
from front3d.errors import MethodError


def rigid_modes(points: FloatArray) -> FloatArray:
    """(3 n, 6): three translations and three rotations about the middle, of similar size."""
    middle = (points.max(axis=0) + points.min(axis=0)) / 2.0
    x, y, z = ((points - middle) / np.ptp(points, axis=0).max()).T
    modes = np.zeros((len(points), 3, 6))
    modes[:, [0, 1, 2], [0, 1, 2]] = 1.0
    modes[:, 1, 3], modes[:, 2, 3] = -z, y
    modes[:, 0, 4], modes[:, 2, 4] = z, -x
    modes[:, 0, 5], modes[:, 1, 5] = -y, x
    return modes.reshape(-1, 6)


def hold_rigid_motion(points: FloatArray, held: BoolArray, loads: FloatArray) -> BoolArray:
    """`held`, (n, 3), with as few further components as stop every rigid motion it allows.

    Loads in equilibrium leave no reaction there, so that the choice does not change the
    strains.  MethodError when `loads`, (n_loads, n, 3), are not in equilibrium with respect to
    a motion that `held` allows.
    """
    modes = rigid_modes(points)
    fixed = held.ravel()
    _, sizes, rows = np.linalg.svd(modes[fixed].T @ modes[fixed])
    free = modes @ rows[sizes <= 1e-9 * len(points)].T  # (3 n, motions left)
    if free.shape[1] == 0:
        return held
    for load in loads:
        work = np.abs(load.ravel() @ free).max()
        if work > 1e-8 * np.abs(load).sum():
            raise MethodError(
                f"loads: found a resultant of {work:.3g} against a total of "
                f"{np.abs(load).sum():.3g}, expected equilibrium, since nothing holds the solid"
            )
    free[fixed] = 0.0
    _, _, pivots = qr(free.T, mode="economic", pivoting=True)
    out = held.copy()
    out.ravel()[pivots[: free.shape[1]]] = True
    return out
