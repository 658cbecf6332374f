"""The one place where numba's flags are set.

`cache=True` saves the compilation for later processes; where no cache folder can be written numba
refuses at decoration time, so the decorators fall back to compiling in each process.
`fastmath` stays off: it breaks tests for NaN and gains nothing here.
"""

from collections.abc import Callable
from typing import Any

import numba


def _decorator(**flags: Any) -> Callable[[Callable[..., Any]], Any]:
    def decorate(function: Callable[..., Any]) -> Any:
        try:
            return numba.njit(function, cache=True, nogil=True, error_model="numpy", **flags)
        except RuntimeError:  # no writable place for the cache
            return numba.njit(function, nogil=True, error_model="numpy", **flags)

    return decorate


kernel = _decorator()

inlined = _decorator(forceinline=True)
"""For what is called at every Gauss point: a call hands over each array as some ten numbers."""
