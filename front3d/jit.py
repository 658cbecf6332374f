"""The one place where numba's flags are set, and where its compilations are watched.

`cache=True` saves the compilation for later processes; where no cache folder can be written numba
refuses at decoration time, so the decorators fall back to compiling in each process.
`fastmath` stays off: it breaks tests for NaN and gains nothing here.  Kernels are serial and let
go of the interpreter's lock: `front3d.threads` shares the work, which costs half the compilation
of numba's own parallel loops.
"""

from collections.abc import Callable, Iterator
from contextlib import contextmanager
from typing import Any

import numba
from numba.core import event


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


@contextmanager
def compilations(say: Callable[[str | None], None]) -> Iterator[None]:
    """Call say(name) whenever the compilation of a kernel begins, and say(None) when it is done.

    What is loaded from the cache is not compiled, and what a kernel calls is part of it.
    """
    with event.install_listener("numba:compile", _Listener(say)):
        yield


class _Listener(event.Listener):
    def __init__(self, say: Callable[[str | None], None]) -> None:
        self._say, self._depth = say, 0

    def on_start(self, event: Any) -> None:
        if self._depth == 0:
            self._say(event.data["dispatcher"].py_func.__name__)
        self._depth += 1

    def on_end(self, event: Any) -> None:
        self._depth -= 1
        if self._depth == 0:
            self._say(None)
