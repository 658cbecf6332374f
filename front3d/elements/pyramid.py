"""Pyramids of 5 and 13 nodes: base (-1, 1)^2 at z = 0, apex (0, 0, 1).

With w = 1 - z the spanned functions are monomials in (x, y, w), some with the power -1 of w;
on each side |x| = w or |y| = w, so they reduce to polynomials there and fit the neighbouring
tetrahedra.  Source: Bedrosian (1992), shape functions for the 5- and 13-node pyramid.
"""

import numpy as np

from front3d.arrays import FloatArray
from front3d.elements import quadrature
from front3d.elements.element import (
    ElementType,
    complete_exponents,
    quadratic_edges,
    quadratic_faces,
    with_midsides,
)

_CORNERS = np.array([[-1, -1, 0], [1, -1, 0], [1, 1, 0], [-1, 1, 0], [0, 0, 1]], dtype=float)
_EDGES = [(0, 1), (1, 2), (2, 3), (3, 0), (0, 4), (1, 4), (2, 4), (3, 4)]
_FACES: tuple[tuple[str, tuple[int, ...]], ...] = (
    ("quad4", (0, 3, 2, 1)),
    ("triangle3", (0, 1, 4)),
    ("triangle3", (1, 2, 4)),
    ("triangle3", (2, 3, 4)),
    ("triangle3", (3, 0, 4)),
)


class PyramidType(ElementType):
    """Pyramid whose functions are monomials in (x, y, 1 - z)."""

    _map_sign = -1.0

    def _map(self, xi: FloatArray) -> FloatArray:
        return np.stack([xi[:, 0], xi[:, 1], 1.0 - xi[:, 2]], axis=1)


PYRAMID5 = PyramidType(
    name="pyramid",
    nodes=_CORNERS,
    exponents=np.vstack([complete_exponents(1, 3), [[1, 1, -1]]]),
    order=1,
    n_corners=5,
    quadrature=quadrature.pyramid,
    vtk_type=14,
    family="pyramid",
    edges=np.array(_EDGES),
    faces=_FACES,
)

PYRAMID13 = PyramidType(
    name="pyramid13",
    nodes=with_midsides(_CORNERS, _EDGES),
    exponents=np.vstack([complete_exponents(2, 3), [[1, 1, -1], [2, 1, -1], [1, 2, -1]]]),
    order=2,
    n_corners=5,
    quadrature=quadrature.pyramid,
    vtk_type=27,
    family="pyramid",
    edges=quadratic_edges(_EDGES, 5),
    faces=quadratic_faces(_FACES, _EDGES, 5),
)
