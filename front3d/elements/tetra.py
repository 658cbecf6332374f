"""Tetrahedra of 4 and 10 nodes; reference corners 0, e1, e2, e3."""

import numpy as np

from front3d.elements import quadrature
from front3d.elements.element import (
    ElementType,
    complete_exponents,
    quadratic_edges,
    quadratic_faces,
    with_midsides,
)

_CORNERS = np.array([[0, 0, 0], [1, 0, 0], [0, 1, 0], [0, 0, 1]], dtype=float)
_EDGES = [(0, 1), (1, 2), (2, 0), (0, 3), (1, 3), (2, 3)]
_FACES = tuple(("triangle3", f) for f in ((0, 2, 1), (0, 1, 3), (1, 2, 3), (0, 3, 2)))

TETRA4 = ElementType(
    name="tetra",
    nodes=_CORNERS,
    exponents=complete_exponents(1, 3),
    order=1,
    n_corners=4,
    quadrature=quadrature.tetrahedron,
    vtk_type=10,
    family="tetra",
    edges=np.array(_EDGES),
    faces=_FACES,
)

TETRA10 = ElementType(
    name="tetra10",
    nodes=with_midsides(_CORNERS, _EDGES),
    exponents=complete_exponents(2, 3),
    order=2,
    n_corners=4,
    quadrature=quadrature.tetrahedron,
    vtk_type=24,
    family="tetra",
    edges=quadratic_edges(_EDGES, 4),
    faces=quadratic_faces(_FACES, _EDGES, 4),
)
