"""Splitting bricks and wedges into quadratic tetrahedra by the smallest node number.

Every quadrilateral is cut by the diagonal from its smallest corner, so that neighbours agree
whatever their kind; every cell is the cone from its smallest corner over the triangles of the
faces that do not touch it.  Source: Dompierre, Labbe, Vallet and Camarero (1999), "How to
subdivide pyramids, prisms and hexahedra into tetrahedra"; the cone is the pulling triangulation
of combinatorial geometry, which always gives six tetrahedra for a brick.
"""

from functools import cache

import numpy as np

from front3d.arrays import BoolArray, FloatArray, IntArray
from front3d.elements import ELEMENTS
from front3d.samples.lattice import Lattice

_TETRA_EDGES = [(0, 1), (1, 2), (2, 0), (0, 3), (1, 3), (2, 3)]


def split(lattice: Lattice) -> IntArray:
    """Tetrahedra, (n, 10), of a part, from both kinds of its cells."""
    parts = [_split_cells(lattice.bricks, "hexahedron20"), _split_cells(lattice.wedges, "wedge15")]
    return np.concatenate(parts)


def diagonals_straightened(lattice: Lattice, which: BoolArray) -> FloatArray:
    """Points of a lattice, with those face and body centres among the nodes `which` moved to suit
    the diagonals that `split` cuts along.

    The mid-side node of a diagonal is the centre of its face or brick, which in a trapezoid is not
    the middle of the diagonal.  Tetrahedra with edges bent by that do not hold quadratic
    displacements, and where they are large are far too stiff in bending.  What the centre is off
    the mean of all corners, by a curved surface, is kept.  Around the front centres should stay:
    there displacements go with the mesh lines.
    """
    points = lattice.points.copy()
    for cells, kind in ((lattice.bricks, "hexahedron20"), (lattice.wedges, "wedge15")):
        element = ELEMENTS[kind]
        every = tuple(range(element.n_corners))
        groups = [tuple(n for n in face if n < element.n_corners) for _, face in element.faces]
        groups = [corners for corners in groups if len(corners) == 4]
        for corners in [*groups, every] if kind == "hexahedron20" else groups:
            nodes = cells[:, corners]
            opposite = _opposite(kind, corners)
            start = np.argmin(nodes, axis=1)
            row = np.arange(len(nodes))
            middle = lattice.points[np.stack([nodes[row, start], nodes[row, opposite[start]]])]
            centre = cells[:, _middle(kind)[frozenset((corners[0], corners[opposite[0]]))]]
            rise = lattice.points[centre] - lattice.points[nodes].mean(axis=1)
            chosen = which[centre]
            points[centre[chosen]] = (middle.mean(axis=0) + rise)[chosen]
    return points


def _opposite(kind: str, corners: tuple[int, ...]) -> IntArray:
    """For each corner of a quadrilateral or a brick, which of `corners` is the farthest."""
    places = ELEMENTS[kind].nodes[list(corners)]
    gap = np.linalg.norm(places[:, None] - places, axis=2)
    out: IntArray = np.argmax(gap, axis=1).astype(np.int64)
    return out


def _split_cells(cells: IntArray, kind: str) -> IntArray:
    element = ELEMENTS[kind]
    n_corners = element.n_corners
    smallest = np.argmin(cells[:, :n_corners], axis=1)
    out = []
    for apex in range(n_corners):
        mine = cells[smallest == apex]
        for _, face in element.faces:
            corners = [n for n in face if n < n_corners]
            if apex in corners:
                continue
            if len(corners) == 3:
                out.append(mine[:, _ten(kind, (apex, *corners))])
                continue
            pivot = np.argmin(mine[:, corners], axis=1)
            for p in range(4):
                turned = corners[p:] + corners[:p]
                some = mine[pivot == p]
                out.append(some[:, _ten(kind, (apex, turned[0], turned[1], turned[2]))])
                out.append(some[:, _ten(kind, (apex, turned[0], turned[2], turned[3]))])
    return np.concatenate(out)


def _ten(kind: str, corners: tuple[int, ...]) -> list[int]:
    """Local numbers of the ten nodes of a tetrahedron with these corners of the cell.

    The faces of a cell run anticlockwise seen from outside, so the apex comes last.
    """
    apex, *face = corners
    four = [face[0], face[2], face[1], apex]
    return four + [_middle(kind)[frozenset((four[i], four[j]))] for i, j in _TETRA_EDGES]


@cache
def _middle(kind: str) -> dict[frozenset[int], int]:
    """The node half-way between two corners: of an edge, a face or the body."""
    element = ELEMENTS[kind]
    corners = element.nodes[: element.n_corners]
    if kind == "wedge15":
        nodes = np.vstack([element.nodes, [[0.5, 0, 0], [0.5, 0.5, 0], [0, 0.5, 0]]])
    else:
        nodes = ELEMENTS["hexahedron27"].nodes
    table = {}
    for i in range(len(corners)):
        for j in range(i):
            middle = (corners[i] + corners[j]) / 2.0
            table[frozenset((i, j))] = int(np.argmin(np.abs(nodes - middle).max(axis=1)))
    return table
