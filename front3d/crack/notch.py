"""Free faces that look at each other across a gap: notches and slots, which are no cracks."""

import numpy as np
from scipy.spatial import cKDTree

from front3d.crack.coincidence import Coincidence
from front3d.crack.facetable import outer_faces
from front3d.solid import Solid

_GAPS = 0.25 * 1.5 ** np.arange(9)
"""Widths that are looked for, in sizes of the faces: a quarter to six."""

_OPPOSED = -0.9
"""Cosine between the normals of faces that look at each other."""


def open_notch(solid: Solid, same: Coincidence) -> str:
    """A sentence on faces that look at each other across a gap; empty if there are none.

    A point is sent out from each outer face; where it comes down on a face that looks back, there
    is a gap as wide as it went.
    """
    faces = outer_faces(solid, same.entity, np.ones(len(solid.points), bool))
    if not len(faces):
        return ""
    area = faces.area_vectors(solid.points)
    size = np.sqrt(np.linalg.norm(area, axis=1))
    faces, area, size = faces[size > 0], area[size > 0], size[size > 0]
    normal = area / (size**2)[:, None]
    centre = solid.points[faces.corners].mean(axis=1)
    tree = cKDTree(centre)
    width = np.full(len(faces), np.inf)
    for gap in _GAPS:
        away, other = tree.query(centre + (gap * size)[:, None] * normal)
        across = np.einsum("nk,nk->n", centre[other] - centre, normal)
        looks_back = np.einsum("nk,nk->n", normal[other], normal) < _OPPOSED
        found = looks_back & (away < 0.7 * size) & (across > 0) & ~np.isfinite(width)
        width[found] = across[found]
    facing = np.isfinite(width)
    if facing.sum() < 2:
        return ""
    low = int(np.argmin(width))
    x, y, z = centre[low]
    return (
        f"free faces look at each other across a gap of {width[low]:.3g} to "
        f"{width[facing].max():.3g} at {int(facing.sum())} faces, the narrowest near "
        f"({x:.4g}, {y:.4g}, {z:.4g}): a notch with an open root has no stress intensity factor, "
        "but a stress concentration; if it stands for a crack, model the crack with coincident "
        "faces"
    )
