"""The cells around a front, and the rings that fit among them."""

from dataclasses import dataclass

import numpy as np

from front3d.arrays import BoolArray, FloatArray, IntArray
from front3d.crack.coincidence import Coincidence
from front3d.crack.front import Front, near_nodes
from front3d.crack.patches import Patch, marked
from front3d.errors import MethodError
from front3d.solid import Solid

DEFAULT_RINGS = (1.6, 2.0, 2.5, 3.0)
"""Outer radii of the default rings in units of the plateau, the reach of the cells at the front."""

MAX_TURN = 0.6
"""Largest ring radius in units of the front's radius of curvature: beyond it the planes across
the front begin to meet and distances from it lose their meaning."""


def along_front(front: Front, at_corners: FloatArray, s: FloatArray) -> FloatArray:
    """Values at arc lengths s, linear between the corner nodes of the front."""
    if front.closed:
        at_corners = np.append(at_corners, at_corners[0])
    return np.interp(front.cell_coordinate(s), np.arange(len(at_corners)), at_corners)


@dataclass(frozen=True, slots=True, eq=False)
class Tube:
    """The neighbourhood of one front.

    Attributes
    ----------
    cells : per block, the numbers of the cells with a node inside the largest ring
    touching : per block, whether each of these cells has a node on the front
    nodes : (m,) the nodes of these cells; local numbers below refer to rows of this
    s, r : (m,) arc length of the nearest front point, and distance from it
    side : (n_points,) int, +1 for nodes on the upper face only, -1 lower, 0 others
    families : families of the cells that touch the front
    """

    cells: tuple[IntArray, ...]
    touching: tuple[BoolArray, ...]
    nodes: IntArray
    s: FloatArray
    r: FloatArray
    side: IntArray
    families: frozenset[str]


def plateau_radii(solid: Solid, front: Front, same: Coincidence) -> FloatArray:
    """(n_corners,) largest distance from the front of a node of the cells that touch it there.

    Smoothed upwards over neighbouring corner nodes, so that q is flat on every touching cell.
    """
    on_front = marked(len(solid.points), front.nodes)
    on_front = on_front | np.isin(same.entity, same.entity[front.nodes])
    position = {int(same.entity[n]): i for i, n in enumerate(front.corners)}
    reach = np.zeros(len(front.corners))
    for block in solid.blocks:
        cells = block.nodes[on_front[block.nodes].any(axis=1)]
        for row in cells:
            here = {position[int(e)] for e in same.entity[row] if int(e) in position}
            if not here:
                continue
            index = np.array(sorted(here))
            x = solid.points[row]
            _, distance = front.curve.project(x, np.full(len(row), front.corner_s[index[0]]))
            reach[index] = np.maximum(reach[index], distance.max())
    around = (-1, 0, 1)
    if front.closed:
        return np.max([np.roll(reach, k) for k in around], axis=0)
    padded = np.pad(reach, 1, mode="edge")
    return np.max([padded[1 + k : len(padded) - 1 + k] for k in around], axis=0)


def build_tube(solid: Solid, front: Front, patch: Patch, same: Coincidence, reach: float) -> Tube:
    """Cells and nodes within `reach` of the front."""
    inside, s, r = near_nodes(solid, front, reach)
    chosen = [inside[block.nodes].any(axis=1) for block in solid.blocks]
    cells = tuple(np.flatnonzero(mask) for mask in chosen)
    if not any(len(c) for c in cells):
        raise MethodError(
            f"{solid.source}: no cell within {reach:g} of the front; give larger ring radii"
        )
    members = [block.nodes[c].ravel() for block, c in zip(solid.blocks, cells, strict=True)]
    nodes = np.unique(np.concatenate(members))
    # Outer nodes of these cells lie beyond the reach: they need places too, for seeds.
    far = nodes[~np.isfinite(r[nodes])]
    if len(far):
        s[far], r[far] = _project_far(solid, front, far)
    on_front = np.isin(same.entity, same.entity[front.nodes])
    touching = tuple(
        on_front[block.nodes[c]].any(axis=1) for block, c in zip(solid.blocks, cells, strict=True)
    )
    side = np.zeros(len(solid.points), np.int64)
    if patch.half:
        side[patch.pairs[:, 0]] = 1
    else:
        side[same.double & np.isin(same.entity, same.entity[patch.pairs[:, 0]])] = 1
        side[same.double & np.isin(same.entity, same.entity[patch.pairs[:, 1]])] = -1
    families = frozenset(
        block.element.family
        for block, touches in zip(solid.blocks, touching, strict=True)
        if touches.any()
    )
    return Tube(cells, touching, nodes, s[nodes], r[nodes], side, families)


def _project_far(solid: Solid, front: Front, nodes: IntArray) -> tuple[FloatArray, FloatArray]:
    from scipy.spatial import cKDTree

    knots = front.curve.knots
    places, _, _ = front.curve.frames(knots)
    _, index = cKDTree(places).query(solid.points[nodes])
    return front.curve.project(solid.points[nodes], knots[index])


def ring_radii(
    front: Front, plateau: FloatArray, given: tuple[float, ...] | None, source: str
) -> FloatArray:
    """(n_rings, n_corners) outer radii.

    By default in proportion to the plateau, so that rings follow a graded mesh; given radii are
    the same all along the front.
    """
    if given is None:
        radii = np.outer(DEFAULT_RINGS, plateau)
        _, _, turning = front.curve.frames(front.corner_s)
        curvature = np.linalg.norm(turning[:, :2], axis=1).max()
        limit = MAX_TURN / curvature if curvature > 0 else np.inf
        scale = min(1.0, float(limit / radii.max()))
        if scale * DEFAULT_RINGS[-1] < DEFAULT_RINGS[0]:
            raise MethodError(
                f"{source}: the cells at the front reach out to {plateau.max():.3g}, but the "
                f"front's radius of curvature is {1 / curvature:.3g}; refine the mesh around the "
                "front"
            )
        if scale < 1.0:
            ratios = np.linspace(DEFAULT_RINGS[0], scale * DEFAULT_RINGS[-1], len(DEFAULT_RINGS))
            radii = np.outer(ratios, plateau)
        return radii
    radii = np.sort(np.asarray(given, float))
    if radii[0] <= plateau.max():
        raise MethodError(
            f"{source}: found a ring radius of {radii[0]:g}, expected more than "
            f"{plateau.max():.4g}, the reach of the cells that touch the front"
        )
    return np.repeat(radii[:, None], len(plateau), axis=1)
