"""Bricks of 8, 20 and 27 nodes on the cube (-1, 1)^3.

A brick whose corners share nodes (a collapsed brick) is the same element with repeated nodes in
its connectivity: its map stays valid at every interior point.
"""

import numpy as np

from front3d.elements import quadrature
from front3d.elements.element import (
    ElementType,
    quadratic_edges,
    quadratic_faces,
    tensor_exponents,
    with_midsides,
)

_CORNERS = np.array(
    [
        [-1, -1, -1], [1, -1, -1], [1, 1, -1], [-1, 1, -1],
        [-1, -1, 1], [1, -1, 1], [1, 1, 1], [-1, 1, 1],
    ],
    dtype=float,
)  # fmt: skip
_EDGES = [
    (0, 1), (1, 2), (2, 3), (3, 0),
    (4, 5), (5, 6), (6, 7), (7, 4),
    (0, 4), (1, 5), (2, 6), (3, 7),
]  # fmt: skip
# In the order of the face-centre nodes 20 to 25 of the 27-node brick: -x, +x, -y, +y, -z, +z.
_FACES = tuple(
    ("quad4", f)
    for f in (
        (0, 4, 7, 3),
        (1, 2, 6, 5),
        (0, 1, 5, 4),
        (3, 7, 6, 2),
        (0, 3, 2, 1),
        (4, 5, 6, 7),
    )
)
_NODES20 = with_midsides(_CORNERS, _EDGES)
_FACES20 = quadratic_faces(_FACES, _EDGES, 8)
_CENTRES = np.array(
    [[-1, 0, 0], [1, 0, 0], [0, -1, 0], [0, 1, 0], [0, 0, -1], [0, 0, 1], [0, 0, 0]], dtype=float
)
_Q2 = tensor_exponents(2, 2, 2)
# Serendipity: at most one exponent is 2 (superlinear degree at most 2).
_SERENDIPITY = _Q2[(_Q2 == 2).sum(axis=1) <= 1]

HEXAHEDRON8 = ElementType(
    name="hexahedron",
    nodes=_CORNERS,
    exponents=tensor_exponents(1, 1, 1),
    order=1,
    n_corners=8,
    quadrature=quadrature.hexahedron,
    vtk_type=12,
    family="hexahedron",
    edges=np.array(_EDGES),
    faces=_FACES,
)

HEXAHEDRON20 = ElementType(
    name="hexahedron20",
    nodes=_NODES20,
    exponents=_SERENDIPITY,
    order=2,
    n_corners=8,
    quadrature=quadrature.hexahedron,
    vtk_type=25,
    family="hexahedron",
    edges=quadratic_edges(_EDGES, 8),
    faces=_FACES20,
)

HEXAHEDRON27 = ElementType(
    name="hexahedron27",
    nodes=np.vstack([_NODES20, _CENTRES]),
    exponents=_Q2,
    order=2,
    n_corners=8,
    quadrature=quadrature.hexahedron,
    vtk_type=29,
    family="hexahedron",
    edges=quadratic_edges(_EDGES, 8),
    faces=tuple(("quad9", (*nodes, 20 + k)) for k, (_, nodes) in enumerate(_FACES20)),
)
