"""A crack on a spherical cap, solved: the penny's mesh bent onto a sphere, in a large cylinder.

The cap's arc from its pole to the front is 1 long; the sphere's centre lies below it, on the axis,
along which the body is pulled.  Near the crack a point of the penny's mesh at (rho, z) goes to the
polar angle rho / R and the distance z from the sphere; far from it the points stay.
"""

from dataclasses import replace

import numpy as np

from front3d.samples.cells import cracked_solid
from front3d.samples.elasticity import boundary_faces, traction_load
from front3d.samples.mirror import Plane, unfold
from front3d.samples.octant import octant
from front3d.samples.sheet import Density, Quarter
from front3d.samples.solver import solve_unfolded
from front3d.samples.tube import Tube
from front3d.solid import Material, Solid, Step

BODY, TUBE_RADIUS, ROUND = 10.0, 0.25, 1.3
MATERIAL = Material(1.0, 0.3)


def cap(cells, tube: Tube, angle, along=6) -> Solid:
    """Unit tension along the axis; `angle`, degrees, from the pole to the front."""
    shape = Quarter(1.0, 1.0, radius=TUBE_RADIUS, width=BODY, depth=BODY, round=True)
    quarter = cracked_solid(octant(shape, Density(along, 2, 2.2, tube), BODY), (), cells, "cap")
    flat = quarter.solid
    radius = 1.0 / np.radians(angle)
    planes = tuple(Plane(axis, flat.points[:, axis] == 0.0) for axis in (0, 1))
    bent = replace(flat, points=_straight_quarters(flat, on_sphere(flat.points, radius)))
    model = unfold(bent, planes, "cap")
    solid = model.solid
    outer = [
        (kind, nodes[np.linalg.norm(solid.points[nodes].mean(axis=1), axis=1) > BODY / 2])
        for kind, nodes in boundary_faces(solid)
    ]
    load = traction_load(solid.points, outer, lambda x, n: n * [0.0, 0.0, 1.0])
    (moved,) = solve_unfolded(model, MATERIAL, load[None], None)
    return replace(solid, steps=(Step("tension", moved),))


def _straight_quarters(flat, bent):
    """Bent points, moved so that the cells at the front are straight across it.

    Quarter-points stand on the chords of their edges: off the chord, an edge leaves the front with
    a vertical tangent.  The far edges of the wedges bulge as the front does and not as their own
    arcs, because the difference would grow with the root of the distance from the front.
    """
    bent = bent.copy()
    for block in flat.blocks:
        edges = block.nodes[:, block.element.edges].reshape(-1, block.element.edges.shape[1])
        if edges.shape[1] < 3:
            continue
        for start, end in ((0, 1), (1, 0)):
            at = 0.75 * flat.points[edges[:, start]] + 0.25 * flat.points[edges[:, end]]
            quarter = np.linalg.norm(flat.points[edges[:, 2]] - at, axis=1) < 1e-9
            first, second, middle = (edges[quarter, k] for k in (start, end, 2))
            bent[middle] = 0.75 * bent[first] + 0.25 * bent[second]
    for block in flat.blocks:
        if block.kind == "wedge15":  # VTK: 12, 13, 14 are the mid-side nodes along the front
            ends = np.stack([block.nodes[:, :3], block.nodes[:, 3:6]])
            middle = block.nodes[:, 12:]
            bulge = bent[middle] - bent[ends].mean(axis=0)
            x, y, z = np.moveaxis(flat.points[middle], 2, 0)
            front = np.argmin(np.abs(np.hypot(x, y) - 1.0) + np.abs(z), axis=1)
            bent[middle] += bulge[np.arange(len(front)), front][:, None] - bulge
    return bent


def on_sphere(points, radius):
    """Points of the flat mesh, bent near the origin onto a sphere whose pole is the origin.

    The crack's surface goes on ahead of the front on the sphere, and then straight.  How far a
    point is moved with that surface fades slowly, how far it is turned with it fast.
    """
    x, y, z = points.T
    rho = np.hypot(x, y)
    polar, beyond = np.minimum(rho, ROUND) / radius, np.maximum(rho - ROUND, 0.0)
    sine, cosine = np.sin(polar), np.cos(polar)
    moved = _fades(np.abs(z), 0.26, 6.0)
    turned = z * _fades(np.abs(z), 0.26, 3.0)
    wide = _fades(rho, ROUND, 7.0)
    outward = wide * (moved * (radius * sine + beyond * cosine - rho) + turned * sine)
    upward = moved * (radius * (cosine - 1.0) - beyond * sine) + turned * (cosine - 1.0)
    scale = 1.0 + np.divide(outward, rho, out=np.zeros_like(rho), where=rho > 0)
    return np.column_stack([x * scale, y * scale, z + wide * upward])


def _fades(value, start, end):
    """One up to `start`, zero from `end` on, smooth between."""
    t = np.clip((value - start) / (end - start), 0.0, 1.0)
    return 1.0 - t**3 * (10.0 - 15.0 * t + 6.0 * t**2)
