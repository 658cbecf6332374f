"""Wedges of 6 and 15 nodes: the unit triangle times (-1, 1)."""

import numpy as np

from front3d.arrays import IntArray
from front3d.elements import quadrature
from front3d.elements.element import (
    ElementType,
    complete_exponents,
    quadratic_edges,
    quadratic_faces,
    with_midsides,
)

_CORNERS = np.array(
    [[0, 0, -1], [1, 0, -1], [0, 1, -1], [0, 0, 1], [1, 0, 1], [0, 1, 1]], dtype=float
)
_EDGES = [(0, 1), (1, 2), (2, 0), (3, 4), (4, 5), (5, 3), (0, 3), (1, 4), (2, 5)]
_FACES: tuple[tuple[str, tuple[int, ...]], ...] = (
    ("triangle3", (0, 2, 1)),
    ("triangle3", (3, 4, 5)),
    ("quad4", (0, 1, 4, 3)),
    ("quad4", (1, 2, 5, 4)),
    ("quad4", (2, 0, 3, 5)),
)


def _prism(*degrees: tuple[int, int]) -> IntArray:
    """Exponents of (complete polynomials of a degree in the triangle) times z**k."""
    return np.vstack(
        [np.insert(complete_exponents(degree, 2), 2, power, axis=1) for degree, power in degrees]
    )


WEDGE6 = ElementType(
    name="wedge",
    nodes=_CORNERS,
    exponents=_prism((1, 0), (1, 1)),
    order=1,
    n_corners=6,
    quadrature=quadrature.wedge,
    vtk_type=13,
    family="wedge",
    edges=np.array(_EDGES),
    faces=_FACES,
)

WEDGE15 = ElementType(
    name="wedge15",
    nodes=with_midsides(_CORNERS, _EDGES),
    exponents=_prism((2, 0), (2, 1), (1, 2)),
    order=2,
    n_corners=6,
    quadrature=quadrature.wedge,
    vtk_type=26,
    family="wedge",
    edges=quadratic_edges(_EDGES, 6),
    faces=quadratic_faces(_FACES, _EDGES, 6),
)
