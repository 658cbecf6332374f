"""Weights along the front for closure: plain tents, and at free ends a pair of them.

The nodal forces of 20-node bricks share out a smooth traction only against weights that are linear
along each cell, so a tilted tent will not do.  At a free end the cut tent is joined with
the next so that the two together give back a K that varies linearly along the front.
"""

from dataclasses import dataclass

import numpy as np
from scipy.sparse import csr_array

from front3d.arrays import FloatArray
from front3d.crack.front import FREE_SURFACE, Front
from front3d.elements import FACES
from front3d.methods.closure_forces import RULE, Ligament, face_nodes
from front3d.methods.context import FrontContext
from front3d.methods.hats import Hats
from front3d.methods.tube import project


@dataclass(frozen=True, slots=True, eq=False)
class Tents:
    """Tents over the faces ahead, each with integral one there.

    Attributes
    ----------
    plain : tents of height one
    mixing : (n_stations, n_stations) combination of tents, over their areas, for each station
    """

    plain: Hats
    mixing: csr_array

    def weights(self, s: FloatArray, odd: bool = False) -> csr_array:
        """(len(s), n_stations) weights at arc lengths s; `odd` for K_III at symmetry planes."""
        return csr_array(self.plain.weights(s, odd) @ self.mixing)


def build_tents(context: FrontContext, ligament: Ligament, width: FloatArray) -> Tents:
    """Tents of given half-widths in edges, one per station."""
    front = context.front
    n = len(front.corners)
    width = np.minimum(width, n / 2 if front.closed else float(n - 1))
    plain = Hats(front, width, np.ones(n), np.zeros(n))
    s, area = _area_elements(context, ligament)
    weights = plain.weights(s)
    total = area @ weights
    mixing = np.diag(1.0 / total)
    for station, inner in _cut_stations(front, width):
        centre = (area * s) @ weights[:, [station, inner]] / total[[station, inner]]
        beyond = (centre[0] - front.corner_s[station]) / (centre[1] - centre[0])
        mixing[station, station] *= 1.0 + beyond
        mixing[inner, station] = -beyond / total[inner]
    return Tents(plain, csr_array(mixing))


def _cut_stations(front: Front, width: FloatArray) -> list[tuple[int, int]]:
    """Stations whose tents reach over a free end, each with the next one inwards."""
    n = len(front.corners)
    out: list[tuple[int, int]] = []
    if front.ends and front.ends[0] == FREE_SURFACE:
        out += [(k, k + 1) for k in range(n - 1) if k < width[k]]
    if front.ends and front.ends[1] == FREE_SURFACE:
        out += [(k, k - 1) for k in range(n - 1, 0, -1) if n - 1 - k < width[k]]
    return out


def _area_elements(context: FrontContext, ligament: Ligament) -> tuple[FloatArray, FloatArray]:
    """Arc lengths and areas, flat, of the quadrature points of the faces ahead."""
    places, areas = [], []
    for kind, nodes in face_nodes(context.solid, ligament.ahead):
        face = FACES[kind]
        xi, weights = face.quadrature(RULE + 1)
        x = context.solid.points[nodes]
        tangents = np.einsum("fni,qnd->fqdi", x - x[:, :1], face.gradients(xi))
        area = np.linalg.norm(np.cross(tangents[:, :, 0], tangents[:, :, 1]), axis=2) * weights
        at = np.einsum("qn,fni->fqi", face.values(xi), x).reshape(-1, 3)
        places.append(project(context.front, at)[0])
        areas.append(area.ravel())
    return np.concatenate(places), np.concatenate(areas)
