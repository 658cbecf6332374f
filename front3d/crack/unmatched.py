"""Free faces of a crack whose nodes have partners, but which have none themselves."""

import numpy as np
from scipy.spatial import cKDTree

from front3d.arrays import BoolArray
from front3d.crack.coincidence import Coincidence
from front3d.crack.facetable import FaceTable
from front3d.solid import Solid

_OPPOSED = -0.9
"""Cosine between the normals of faces that look at each other."""


def unmatched_faces(
    solid: Solid, same: Coincidence, free: FaceTable, paired: BoolArray
) -> FaceTable:
    """Faces that lie on others of the other side but are cut differently, such as a square on two
    triangles, or triangles along the other diagonal.

    `free` are the free faces around double nodes, `paired`, (n,), those that found a partner.
    """
    chosen = np.flatnonzero(~paired & same.double[free.corners].all(axis=1))
    faces = free[chosen]
    if len(faces) < 2:
        return faces[np.zeros(len(faces), bool)]
    area = faces.area_vectors(solid.points)
    size = np.sqrt(np.linalg.norm(area, axis=1))
    normal = area / np.maximum(size**2, 1e-300)[:, None]
    centre = solid.points[faces.corners].mean(axis=1)
    count = min(5, len(faces))
    away, other = cKDTree(centre).query(centre, k=count)
    opposed = np.einsum("nk,nmk->nm", normal, normal[other]) < _OPPOSED
    level = np.abs(np.einsum("nmk,nk->nm", centre[other] - centre[:, None], normal))
    on_it = opposed & (away < 0.7 * size[:, None]) & (level < 0.05 * size[:, None])
    return faces[np.asarray(on_it.any(axis=1))]
