"""Terms of the interaction integral that a check may switch off.

Nothing but a check does: it asks whether a wrong integral would be noticed.
"""

from collections.abc import Iterator
from contextlib import contextmanager

CURVATURE, FREE_SURFACE, FACE_LOAD = "curvature", "free surface", "face load"
BODY_FORCE, GRADIENT = "body force", "gradient of initial strain or constants"
BENT_FACES = "bent faces"

_left_out: set[str] = set()


def included(term: str) -> bool:
    """Whether a term counts; always, outside `without`."""
    return term not in _left_out


@contextmanager
def without(term: str) -> Iterator[None]:
    """Leave one term out while this lasts."""
    _left_out.add(term)
    try:
        yield
    finally:
        _left_out.discard(term)
