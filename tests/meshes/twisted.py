"""A crack whose plane turns about its straight front, solved in a block that is held outside."""

from dataclasses import replace

import numpy as np

from front3d.samples.solver import solve
from front3d.solid import Material, Solid, Step
from tests.meshes.structured import straight

MATERIAL = Material(1000.0, 0.3)


def twisted(degrees, n=12, along=6) -> Solid:
    """20-node bricks; the crack turns by `degrees` over the length 2 of the block, half-width 1.

    On the outer faces beside the front the displacements of a uniform strain are held, so that all
    three modes come about; the faces at its ends are free.
    """
    mesh = straight("hexahedron20", n, along=along)
    x, y, z = mesh.solid.points.T
    angle = np.radians(degrees) * (z - 1.0) / 2.0
    turned = np.cos(angle) * x - np.sin(angle) * y, np.sin(angle) * x + np.cos(angle) * y
    points = np.column_stack([*turned, z])
    solid = replace(mesh.solid, points=points)
    outer = (np.maximum(np.abs(x), np.abs(y)) > 1.0 - 1e-9) & (mesh.side == 0)
    held = np.repeat(outer[:, None], 3, axis=1)
    strain = 1e-3 * np.array([[0, 0.3, 0], [0, 1.0, 0], [0, 0.2, 0]])
    none = np.zeros((1, *points.shape))
    (moved,) = solve(solid, MATERIAL, none, held, points @ strain.T)
    return replace(solid, steps=(Step("pull", moved),))
