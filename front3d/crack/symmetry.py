"""The symmetry plane that holds the crack of a half model, found by the displacements.

An outer plane that is held along its normal in one part and free in another looks like the crack
plane of a half model.  So does a foot that stands on rollers; therefore what was found is always
said, and where two planes would do the user decides.
"""

import numpy as np

from front3d.arrays import FloatArray
from front3d.crack.coincidence import Coincidence
from front3d.crack.edges import half_model_edges
from front3d.crack.facetable import FaceTable, outer_faces
from front3d.crack.half import find_half_patch
from front3d.crack.patches import Patch
from front3d.errors import CrackError
from front3d.options import Plane
from front3d.solid import Solid

_HELD = 1e-6
"""Normal displacement, in parts of the largest displacement of a step, of a plane that is held.
Stricter than in a plane that the user names: nothing else speaks for this one."""

_OPENS = 0.01
"""Smallest displacement of the free faces next to the held ones, in parts of the largest in the
plane: a crack opens with the square root of the distance, a slack surface does not."""

_MOST_PLANES = 64
"""Planes that are looked at, by falling area: a round support gives any number of small ones."""


def find_crack_plane(solid: Solid, same: Coincidence) -> Plane | None:
    """The plane that is held in part and opens in part; None if there is none.

    CrackError where several planes are like that.
    """
    found = [plane for plane in _held_planes(solid, same) if _holds_a_crack(solid, same, plane)]
    if len(found) > 1:
        raise CrackError(
            f"{solid.source}: found no coincident faces, and {len(found)} planes that are held "
            f"along their normal in one part and free in another ({'; '.join(map(str, found))}): "
            "name the one that holds the crack of a half model (--crack-plane)"
        )
    return found[0] if found else None


def found_plane_note(patch: Patch, ligament: FaceTable) -> str:
    """What a reader must know of a plane that nobody named."""
    return (
        f"the crack plane {patch.plane} was found, not named: {len(ligament)} of its outer faces "
        f"are held along its normal in every step (the ligament), {len(patch.upper)} are free (the "
        "crack); if it is a support and no symmetry plane, there is no crack in it"
    )


def _held_planes(solid: Solid, same: Coincidence) -> list[Plane]:
    """Planes of the outer faces that never move along their normal, largest first."""
    faces = outer_faces(solid, same.entity, np.ones(len(solid.points), bool))
    if not len(faces) or not solid.steps:
        return []
    area = faces.area_vectors(solid.points)
    size = np.linalg.norm(area, axis=1)
    faces, area, size = faces[size > 0], area[size > 0], size[size > 0]
    unit = area / size[:, None]
    held = np.ones(len(faces), bool)
    for step in solid.steps:
        across = np.einsum("nmk,nk->nm", step.displacement[faces.nodes], unit)
        held &= np.abs(across).max(axis=1) <= _HELD * float(np.abs(step.displacement).max())
    unit, size, centre = unit[held], size[held], solid.points[faces.corners[held]].mean(axis=1)
    extent = float(np.ptp(solid.points, axis=0).max())
    planes: list[tuple[float, Plane]] = []
    while len(size) and len(planes) < _MOST_PLANES:
        first = int(np.argmax(size))
        off = np.abs((centre - centre[first]) @ unit[first])
        same_plane = (unit @ unit[first] > 0.999999) & (off <= 1e-6 * extent)
        normal = (unit * size[:, None])[same_plane].sum(axis=0)
        planes.append((float(size[same_plane].sum()), _plane(normal, centre[first])))
        unit, size, centre = unit[~same_plane], size[~same_plane], centre[~same_plane]
    return [plane for _, plane in sorted(planes, key=lambda item: -item[0])]


def _plane(normal: FloatArray, through: FloatArray) -> Plane:
    """A plane whose normal is exactly an axis where it nearly is one."""
    unit = normal / np.linalg.norm(normal)
    snapped = np.round(unit)
    if np.abs(unit - snapped).max() < 1e-9:
        unit = np.abs(snapped)
    x, y, z = unit.tolist()
    return Plane((x, y, z), float(through @ unit))


def _holds_a_crack(solid: Solid, same: Coincidence, plane: Plane) -> bool:
    """Whether part of the plane is held, slides within it, and borders on a part that opens."""
    try:
        patch, ligament = find_half_patch(solid, same, plane)
    except CrackError:
        return False
    border = np.unique(half_model_edges(patch, ligament, same).face)
    if not len(border):
        return False
    normal = np.asarray(plane.normal)
    held, free = np.unique(ligament.nodes), np.unique(patch.upper.nodes)
    slides = opens = False
    for step in solid.steps:
        u = step.displacement
        within = u[held] - np.outer(u[held] @ normal, normal)
        slides |= float(np.abs(within).max()) > _HELD * float(np.abs(u).max())
        across = np.abs(u @ normal)
        next_to_it = np.median(across[patch.upper.nodes[border]].max(axis=1))
        opens |= bool(next_to_it > _OPENS * across[free].max() > 0.0)
    return slides and opens
