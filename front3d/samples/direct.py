"""Factorising a symmetric positive definite matrix."""

from collections.abc import Callable
from typing import Protocol

import numpy as np
from scipy.sparse import bsr_array, csc_array, csr_array
from scipy.sparse.linalg import splu

from front3d.arrays import BoolArray, FloatArray


class Factorised(Protocol):
    """Something that solves with a factorised matrix."""

    def solve(self, right: FloatArray) -> FloatArray:
        """Solution for a right-hand side."""


def factorise(matrix: csr_array) -> Factorised:
    """Factors of a symmetric matrix; the library is SuperLU (Li 2005), in symmetric mode."""
    factors: Factorised = splu(
        csc_array(matrix),
        permc_spec="MMD_AT_PLUS_A",
        diag_pivot_thresh=0.0,
        options={"SymmetricMode": True},
    )
    return factors


def direct_solver(matrix: bsr_array, fixed: BoolArray) -> Callable[[FloatArray], FloatArray]:
    """Factorise the free part of a matrix; returns right-hand side -> solution, zero elsewhere."""
    free = np.flatnonzero(~fixed)
    reduced = csr_array(matrix.tocsr()[free][:, free])
    factors = factorise(reduced)

    def solve(right: FloatArray) -> FloatArray:
        x = factors.solve(right[free])
        x += factors.solve(right[free] - reduced @ x)  # one step of refinement
        out = np.zeros_like(right)
        out[free] = x
        return out

    return solve
