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


def extent(values: FloatArray) -> FloatArray:
    """(k,) largest less smallest value of each column of (n, k) values, n > 0.

    Row by row numpy does it six times as slow, for want of a long axis to run along.
    """
    count, width = values.shape
    rows = count // _ROWS * _ROWS
    long = values[:rows].reshape(-1, _ROWS * width)
    low, high = (
        np.concatenate([f(long, axis=0, initial=start).reshape(-1, width), values[rows:]])
        for f, start in ((np.min, np.inf), (np.max, -np.inf))
    )
    spread: FloatArray = high.max(axis=0) - low.min(axis=0)
    return spread


_ROWS = 256
