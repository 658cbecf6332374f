"""How one brick (-1, 1)^3 is cut into cells of each element type."""

from functools import cache
from itertools import permutations

import numpy as np

from front3d.elements import ELEMENTS

KINDS = tuple(ELEMENTS)
LINEAR = {"tetra10": "tetra", "hexahedron20": "hexahedron", "hexahedron27": "hexahedron"}
LINEAR |= {"wedge15": "wedge", "pyramid13": "pyramid"}
FACES = ("-x", "+x", "-y", "+y", "-z", "+z")
CUBE = ELEMENTS["hexahedron"].nodes


def linear_type(kind):
    """The linear element type with the same corners."""
    return ELEMENTS[LINEAR.get(kind, kind)]


def fill(kind, corners):
    """All nodes of a cell in the brick from its corners: mid-sides halfway."""
    return linear_type(kind).values(ELEMENTS[kind].nodes) @ np.asarray(corners, float)


@cache
def cut_brick(kind, cut_faces=()):
    """[(element type, (n_nodes, 3) places in the brick)] that fill the brick.

    `cut_faces`: faces on which the pyramids are halved to tetrahedra, as the neighbour's are.
    """
    family = ELEMENTS[kind].family
    cells = {
        "hexahedron": lambda: [(kind, CUBE)],
        "wedge": lambda: [(kind, w) for w in _wedges()],
        "tetra": lambda: [(kind, t) for t in _tetrahedra()],
        "pyramid": lambda: _around_centre(kind, cut_faces),
    }[family]()
    return [(k, fill(k, corners)) for k, corners in cells]


def _wedges():
    """Two halves along the front; the diagonal is that of the tetrahedra."""
    triangles = ([0, 1, 2], [0, 2, 3])
    return [np.vstack([CUBE[t], CUBE[[v + 4 for v in t]]]) for t in triangles]


def _tetrahedra():
    """Six around the diagonal from (-1,-1,-1) to (1,1,1) (Kuhn 1960); neighbours always fit."""
    out = []
    for order in permutations(range(3)):
        path = [-np.ones(3)]
        for axis in order:
            path.append(path[-1] + 2 * np.eye(3)[axis])
        t = np.array(path)
        if np.linalg.det(t[1:] - t[0]) < 0:
            t = t[[0, 2, 1, 3]]
        out.append(t)
    return out


def _around_centre(kind, cut_faces):
    out = []
    for name, (_, nodes) in zip(FACES, ELEMENTS["hexahedron"].faces, strict=True):
        base = CUBE[list(nodes)][::-1]  # seen from the apex inside: anticlockwise
        if name not in cut_faces:
            out.append((kind, np.vstack([base, [[0, 0, 0]]])))
            continue
        sums = base.sum(axis=1)
        base = np.roll(base, -int(np.argmin(sums)), axis=0)  # the diagonal starts at the lowest
        tetra = "tetra10" if ELEMENTS[kind].quadratic else "tetra"
        for t in ([0, 1, 2], [0, 2, 3]):
            out.append((tetra, np.vstack([base[t], [[0, 0, 0]]])))
    return out


def fan_cell(kind):
    """A cell of the polar fan, places in (radius, angle, along)."""
    if kind == "quarter_wedge":
        # Anticlockwise seen from the end of the front.  The front corner has no angle of its
        # own; its mid-sides lie at the angle of the other end.
        triangle = [[-1, 0], [1, -1], [1, 1]]
        nodes = fill("wedge15", [[*p, z] for z in (-1, 1) for p in triangle])
        nodes[[6, 9], 1], nodes[[8, 11], 1] = -1, 1
        return "wedge15", nodes
    # The collapsed brick repeats nodes: every place of radius -1 is the front.
    return "hexahedron20", fill("hexahedron20", CUBE)
