"""Face types: triangles of 3 and 6 nodes, quadrilaterals of 4, 8 and 9."""

import numpy as np

from front3d.elements import quadrature
from front3d.elements.element import (
    FaceType,
    complete_exponents,
    tensor_exponents,
    with_midsides,
)

_TRI = np.array([[0, 0], [1, 0], [0, 1]], dtype=float)
_TRI_SIDES = [(0, 1), (1, 2), (2, 0)]
_QUAD = np.array([[-1, -1], [1, -1], [1, 1], [-1, 1]], dtype=float)
_QUAD_SIDES = [(0, 1), (1, 2), (2, 3), (3, 0)]
_QUAD8 = with_midsides(_QUAD, _QUAD_SIDES)
_Q2 = tensor_exponents(2, 2)

TRIANGLE3 = FaceType("triangle3", _TRI, complete_exponents(1, 2), 1, 3, quadrature.triangle)
TRIANGLE6 = FaceType(
    "triangle6",
    with_midsides(_TRI, _TRI_SIDES),
    complete_exponents(2, 2),
    2,
    3,
    quadrature.triangle,
)
QUAD4 = FaceType("quad4", _QUAD, tensor_exponents(1, 1), 1, 4, quadrature.quadrilateral)
QUAD8 = FaceType("quad8", _QUAD8, _Q2[_Q2.sum(axis=1) < 4], 2, 4, quadrature.quadrilateral)
QUAD9 = FaceType("quad9", np.vstack([_QUAD8, [[0.0, 0.0]]]), _Q2, 2, 4, quadrature.quadrilateral)

FACES: dict[str, FaceType] = {
    face.name: face for face in (TRIANGLE3, TRIANGLE6, QUAD4, QUAD8, QUAD9)
}
