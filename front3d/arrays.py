"""Array types, and the one place where arrays are frozen.

Data classes hold C-contiguous, read-only float64 and int64 arrays: nobody can change a solid
behind another's back, and every numba kernel is compiled for one array type only.
"""

from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]
BoolArray = NDArray[np.bool_]


def frozen_floats(values: ArrayLike) -> FloatArray:
    """Read-only, contiguous float64 copy or view of `values`."""
    return _freeze(np.ascontiguousarray(values, dtype=np.float64), values)


def frozen_ints(values: ArrayLike) -> IntArray:
    """Read-only, contiguous int64 copy or view of `values`."""
    return _freeze(np.ascontiguousarray(values, dtype=np.int64), values)


def _freeze(array: NDArray[Any], source: ArrayLike) -> NDArray[Any]:
    # A view of the caller's own array would be frozen for the caller too, so view it once more.
    if array is source:
        array = array.view()
    array.flags.writeable = False
    return array
