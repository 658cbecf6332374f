"""Refusing arguments outside the range of a solution, with a message that says which."""

import numpy as np
from numpy.typing import ArrayLike

from front3d.arrays import FloatArray
from front3d.errors import CaseError


def floats(*values: ArrayLike) -> tuple[FloatArray, ...]:
    """The arguments as float64 arrays of one common shape."""
    return tuple(np.broadcast_arrays(*(np.asarray(v, dtype=np.float64) for v in values)))


def require(holds: ArrayLike, what: str, values: FloatArray, expected: str) -> None:
    """CaseError naming the first of `values` for which `holds` is false."""
    wrong = ~np.broadcast_to(np.asarray(holds, dtype=bool), values.shape)
    if wrong.any():
        raise CaseError(
            f"{what}: found {values[wrong].flat[0]:g}, expected {expected}; outside this range "
            "the published solution says nothing"
        )


def require_sizes(**sizes: FloatArray) -> None:
    """CaseError unless every size is a positive number."""
    for name, values in sizes.items():
        require(values > 0, name, values, "a positive length")


def require_poisson(nu: FloatArray) -> None:
    require((nu > -1) & (nu <= 0.5), "Poisson's ratio", nu, "a number above -1, at most 0.5")
