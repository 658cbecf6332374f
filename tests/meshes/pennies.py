"""Penny cracks of chosen fineness, solved: radius 1 in a cylinder of ten radii, E = 1, nu = 0.3.

The mesh is that of the embedded model, with what its parameters do not reach: the size of the
cells at the front and their lengths along it.
"""

from dataclasses import replace

import numpy as np

from front3d.samples.cells import cracked_solid
from front3d.samples.elasticity import boundary_faces, traction_load
from front3d.samples.octant import octant
from front3d.samples.sheet import Density, Quarter
from front3d.samples.solver import solve_unfolded
from front3d.samples.tube import Tube
from front3d.solid import Material, Solid, Step

BODY, TUBE_RADIUS = 10.0, 0.25


def penny(cells, tube: Tube, along=6, ratio=1.0) -> Solid:
    """Tension.  `ratio`: of neighbouring cell lengths along the front, `along` cells a quarter."""
    shape = Quarter(1.0, 1.0, radius=TUBE_RADIUS, width=BODY, depth=BODY, round=True)
    lattice = octant(shape, Density(along, 2, 2.2, tube), BODY)
    lattice = replace(lattice, points=_turned(lattice.points, along, ratio))
    model = cracked_solid(lattice, (0, 1), cells, "penny")
    solid = model.solid
    outer = [
        (kind, nodes[np.linalg.norm(solid.points[nodes].mean(axis=1), axis=1) > BODY / 2])
        for kind, nodes in boundary_faces(solid)
    ]
    load = traction_load(solid.points, outer, lambda x, n: n * [0.0, 0.0, 1.0])
    (moved,) = solve_unfolded(model, Material(1.0, 0.3), load[None], None)
    return replace(solid, steps=(Step("tension", moved),))


def _turned(points, along, ratio):
    """Points turned about the axis so that cells along the front are long and short in turn."""
    angle, radius = np.arctan2(points[:, 1], points[:, 0]), np.hypot(points[:, 0], points[:, 1])
    lengths = np.where(np.arange(along) % 2, ratio, 1.0)
    ends = np.concatenate([[0.0], np.cumsum(lengths) / lengths.sum()])
    turned = np.interp(angle, np.linspace(0, np.pi / 2, along + 1), np.pi / 2 * ends)
    plane = radius[:, None] * np.stack([np.cos(turned), np.sin(turned)], axis=1)
    plane[points[:, :2] == 0.0] = 0.0
    return np.column_stack([plane, points[:, 2]])
