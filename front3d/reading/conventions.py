"""Node orders of other conventions, as permutations into VTK order.

`order[k]` is the place, in the other convention, of the node that VTK numbers k.  Sources: the
manuals of the MSH and Exodus formats; the perimeter order of universal files and the
lexicographic order are from memory.  A wrong entry does no harm: an order is taken only where the
geometry of every cell confirms it.
"""

from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from front3d.arrays import FloatArray, IntArray
from front3d.elements import ElementType

Order = tuple[int, ...]

_MIRRORED_CORNERS: dict[str, Order] = {
    "tetra": (0, 2, 1, 3),
    "hexahedron": (0, 3, 2, 1, 4, 7, 6, 5),
    "wedge": (0, 2, 1, 3, 5, 4),
    "pyramid": (0, 3, 2, 1, 4),
}

_GMSH20 = (0, 1, 2, 3, 4, 5, 6, 7, 8, 11, 13, 9, 16, 18, 19, 17, 10, 12, 14, 15)
_EXODUS20 = (*range(12), 16, 17, 18, 19, 12, 13, 14, 15)

_KNOWN: dict[str, dict[str, Order]] = {
    "tetra10": {
        "last two mid-side nodes exchanged": (0, 1, 2, 3, 4, 5, 6, 7, 9, 8),
        "perimeter order": (0, 2, 4, 9, 1, 3, 5, 6, 7, 8),
    },
    "hexahedron": {"lexicographic order": (0, 1, 3, 2, 4, 5, 7, 6)},
    "hexahedron20": {
        "vertical edges before the top ones": _EXODUS20,
        "edge order of the MSH format": _GMSH20,
        "perimeter order": (0, 2, 4, 6, 12, 14, 16, 18, 1, 3, 5, 7, 13, 15, 17, 19, 8, 9, 10, 11),
    },
    "hexahedron27": {
        "vertical edges before the top ones": (*_EXODUS20, *range(20, 27)),
        "node order of the Exodus format": (*_EXODUS20, 23, 24, 25, 26, 21, 22, 20),
        "edge and face order of the MSH format": (*_GMSH20, 22, 23, 21, 24, 20, 25, 26),
    },
    "wedge15": {
        "vertical edges before the top ones": (*range(9), 12, 13, 14, 9, 10, 11),
        "edge order of the MSH format": (0, 1, 2, 3, 4, 5, 6, 9, 7, 12, 14, 13, 8, 10, 11),
        "perimeter order": (0, 2, 4, 9, 11, 13, 1, 3, 5, 10, 12, 14, 6, 7, 8),
    },
    "pyramid13": {
        "edge order of the MSH format": (0, 1, 2, 3, 4, 5, 8, 10, 6, 7, 9, 11, 12),
    },
}


@dataclass(frozen=True, slots=True, eq=False)
class Sites:
    """Where nodes beyond the corners belong: amid corners that lie across from each other.

    Attributes
    ----------
    nodes : (m,) the nodes
    spans : (m, k, 2) pairs of corners; k is 1 on edges, 2 on faces, 4 in the middle of a brick
    """

    nodes: IntArray
    spans: IntArray

    @property
    def on_edges(self) -> bool:
        return self.spans.shape[1] == 1


@lru_cache
def sites(element: ElementType) -> list[Sites]:
    """The sites of the mid-side, face-centre and centre nodes of an element type."""
    if not element.quadratic:
        return []
    found = [Sites(element.edges[:, 2], element.edges[:, None, :2])]
    faces = [f for kind, f in element.faces if kind == "quad9"]
    if faces:
        f = np.array(faces)
        found.append(Sites(f[:, 8], f[:, [[0, 2], [1, 3]]]))
        found.append(Sites(np.array([26]), np.array([[[0, 6], [1, 7], [2, 4], [3, 5]]])))
    return found


@lru_cache
def mirrored(element: ElementType) -> Order:
    """The order of the same cell seen in a mirror: it turns the sign of the Jacobian."""
    corners = _MIRRORED_CORNERS[element.family]
    order = list(corners) + [0] * (len(element.nodes) - len(corners))
    members = {
        int(node): frozenset(spans.ravel().tolist())
        for group in sites(element)
        for node, spans in zip(group.nodes, group.spans, strict=True)
    }
    place = {corners_of: node for node, corners_of in members.items()}
    for node, corners_of in members.items():
        order[node] = place[frozenset(corners[c] for c in corners_of)]
    return tuple(order)


@lru_cache
def candidates(element: ElementType) -> dict[str, Order]:
    """Orders of other conventions to try, by a description of each."""
    known = dict(_KNOWN.get(element.name, {}))
    if element.quadratic:
        corners = _MIRRORED_CORNERS[element.family]
        rest = range(len(corners), len(element.nodes))
        known["corners mirrored without the mid-side nodes"] = (*corners, *rest)
    if len(element.nodes) == 27:
        known["lexicographic order"] = _lexicographic(element.nodes)
    return known


def _lexicographic(nodes: FloatArray) -> Order:
    return tuple(int(k) for k in np.rint((nodes + 1) @ [1, 3, 9]).astype(int))
