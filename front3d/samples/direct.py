"""Direct solution of the elastic problem, for parts of moderate size."""

from collections.abc import Callable

import numpy as np
from scipy.sparse import bsr_array, csc_array
from scipy.sparse.linalg import splu

from front3d.arrays import BoolArray, FloatArray


def direct_solver(matrix: bsr_array, fixed: BoolArray) -> Callable[[FloatArray], FloatArray]:
    """Factorise the free part of a symmetric matrix; returns right-hand side -> solution.

    The library is SuperLU (Li 2005) through scipy, in its symmetric mode.
    """
    free = np.flatnonzero(~fixed)
    reduced = csc_array(matrix.tocsr()[free][:, free])
    factors = splu(
        reduced,
        permc_spec="MMD_AT_PLUS_A",
        diag_pivot_thresh=0.0,
        options={"SymmetricMode": True},
    )

    def solve(right: FloatArray) -> FloatArray:
        x = factors.solve(right[free])
        x += factors.solve(right[free] - reduced @ x)  # one step of refinement
        out = np.zeros_like(right)
        out[free] = x
        return out

    return solve
