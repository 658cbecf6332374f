"""A penny crack in a bar that turns end over end: meshed by gmsh, solved by scikit-fem.

Poisson's ratio is zero, so that the bar's fibres do not feel one another: along the bar the stress
is rho omega^2 (L^2 - z^2) / 2 at the distance z from the axis of rotation, as in a string, and
uniform across it, whatever happens in the other directions.
"""

import numpy as np

from front3d.solid import CellBlock, Solid, Step
from tests.meshes.cracked import cracked_mesh
from tests.meshes.solving import solve_tetra10

YOUNG, DENSITY, SPIN = 1.0, 0.5, 0.1
AXIS, BELOW, END, WIDE = 20.0, -5.0, 5.0, 6.0
"""The axis is along x, 20 below a crack of radius 1 in the plane z = 0; the bar ends at z = 5.  Its
sections stay plane, so that it can be held along z at z = -5."""

STRESS = DENSITY * SPIN**2 / 2 * ((AXIS + END) ** 2 - AXIS**2)
"""Across the crack's place, without the crack."""


def spinning_bar() -> Solid:
    """A quarter of the bar: x = 0 and y = 0 are planes of symmetry."""
    mesh = cracked_mesh(
        lambda occ: occ.addBox(0, 0, BELOW, WIDE, WIDE, END - BELOW),
        lambda occ: occ.addDisk(0, 0, 0, 1, 1),
        (0.08, 0.12, 0.7, 2.5),
        front_lines=lambda middle: abs(np.hypot(*middle[:2]) - 1.0) < 1e-6,
    )
    x, y, z = mesh.points.T
    held = [(np.flatnonzero(np.abs(v) < 1e-9), k) for k, v in enumerate((x, y, z - BELOW))]

    def pulled(x):
        return DENSITY * SPIN**2 * np.stack([0 * x[0], x[1], x[2] + AXIS])

    (u,) = solve_tetra10(
        mesh.points, mesh.cells, 0.0, [lambda n, x: 0 * x], held, 1e-9, YOUNG, [pulled]
    )
    return Solid(mesh.points, (CellBlock("tetra10", mesh.cells),), (Step("spin", u),), "bar")
