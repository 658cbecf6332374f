"""The radii of the rings: what the mesh offers, and what the front leaves room for."""

from collections.abc import Sequence

import numpy as np
from scipy.spatial import cKDTree

from front3d.arrays import FloatArray
from front3d.crack.front import Front
from front3d.errors import MethodError

N_RINGS = 4
"""Rings taken by default around a structured front, one per layer of cells after the first."""

RATIOS = (1.6, 2.0, 2.5, 3.0)
"""Outer radii of the default rings elsewhere, in reaches of the cells that touch the front."""

OF_OWN_ROOM, OF_GAP = 0.6, 0.75
"""Largest ring radius in parts of the distance at which points have two nearest places on the
front (its radius of curvature, or half the width of a slender crack), and of the distance to
another front."""

OF_GIVEN = 0.8
"""The same for radii that the user gives."""

COARSE = 0.3
"""Reach of the cells at the front, in parts of the same distance, above which K is called rough."""


def own_room(front: Front) -> FloatArray:
    """(n_corners,) radius of the largest ball that touches the front at a corner node, lies
    across it, and holds no other node of it.

    A ball through x_j, touching at x_i with tangent t, has the radius |d|^2 / (2 |d - (d.t) t|),
    d = x_j - x_i.  The smallest over j is the radius of curvature where the front bends alone, and
    half the distance to the far side of a slender crack.
    """
    places, frame, _ = front.curve.frames(front.corner_s)
    others, _, _ = front.curve.frames(front.curve.knots)
    room = np.empty(len(places))
    for i, (x, tangent) in enumerate(zip(places, frame[:, 2], strict=True)):
        d = others - x
        square = np.sum(d * d, axis=1)
        across = np.linalg.norm(d - np.outer(d @ tangent, tangent), axis=1)
        with np.errstate(divide="ignore", invalid="ignore"):
            radius = square / (2.0 * across)
        apart = square > 1e-12 * front.length**2
        room[i] = radius[apart].min(initial=np.inf)
    return room


def gap_to_others(front: Front, others: Sequence[Front]) -> FloatArray:
    """(n_corners,) distance to the nearest node of another front; infinite if there is none."""
    places, _, _ = front.curve.frames(front.corner_s)
    if not others:
        return np.full(len(places), np.inf)
    nodes = np.concatenate([other.curve.frames(other.curve.knots)[0] for other in others])
    return np.asarray(cKDTree(nodes).query(places)[0], dtype=float)


def ring_radii(
    front: Front,
    reaches: FloatArray,
    others: Sequence[Front],
    structured: bool,
    given: tuple[float, ...] | None,
    source: str,
) -> tuple[FloatArray, tuple[str, ...]]:
    """(n_rings, n_corners) outer radii, and what to say about them.

    By default they follow the mesh: where bricks and wedges surround the front a ring ends with
    each layer of cells after the first; elsewhere layers are ragged, and radii grow in proportion
    to the reach of the first.  Given radii are the same all along the front.

    MethodError where a ring would not fit: given radii inside the first layer of cells or beyond
    the room there is, or a mesh whose cells at the front leave no room for any ring.
    """
    plateau, own, gap = reaches[0], own_room(front), gap_to_others(front, others)
    room = np.minimum(OF_OWN_ROOM * own, OF_GAP * gap)
    rows = front.stations
    tightest = int(rows[np.argmax(plateau[rows] / room[rows])])
    if given is not None:
        radii = np.sort(np.asarray(given, float))
        if radii[0] <= plateau[rows].max():
            raise MethodError(
                f"{source}: found a ring radius of {radii[0]:g}, expected more than "
                f"{plateau[rows].max():.4g}, the reach of the cells that touch the front"
            )
        largest = float(OF_GIVEN * np.minimum(own, gap)[rows].min())
        if radii[-1] >= largest:
            raise MethodError(
                f"{source}: found a ring radius of {radii[-1]:g}, expected less than "
                f"{largest:.4g}, where rings come near another part of a front or "
                "its centre of curvature"
            )
        radii = np.repeat(radii[:, None], len(plateau), axis=1)
    elif RATIOS[0] * plateau[tightest] > room[tightest]:
        raise MethodError(
            f"{source}: the cells that touch the front at node {front.corners[tightest]} reach "
            f"{plateau[tightest]:.4g} from it, but curvature and other fronts leave room for "
            f"{room[tightest] / RATIOS[0]:.4g} only: refine the mesh around the front (a sharp "
            "corner in the front leaves no room at any size, and has no K)"
        )
    else:
        grows = (np.diff(reaches, axis=0) > 1e-6 * plateau).all(axis=1)  # not past the last layer
        fitting = reaches[1:][grows & (reaches[1:] <= room)[:, rows].all(axis=1)]
        if structured and len(fitting) > 1:
            radii = fitting
        else:
            last = min(RATIOS[-1], float(room[tightest] / plateau[tightest]))
            ratios = RATIOS if last == RATIOS[-1] else np.linspace(RATIOS[0], last, len(RATIOS))
            radii = np.outer(ratios, plateau)
    return radii, _roughness(plateau[rows], own[rows])


def _roughness(plateau: FloatArray, own: FloatArray) -> tuple[str, ...]:
    share = float((plateau / own).max())
    if share <= COARSE:
        return ()
    return (
        f"the mesh is coarse for this front: the cells that touch it reach {100 * share:.0f} % of "
        "its radius of curvature (or half-width), so K may be off by some per cent",
    )
