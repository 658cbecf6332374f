"""A plate bent into a cylinder whose bore was its face y = 0."""

from dataclasses import replace

import numpy as np

from front3d.arrays import FloatArray
from front3d.samples.lattice import Lattice

_CELLS_AROUND_HALF = 6


def heights(bore: float, thickness: float) -> tuple[float, ...]:
    """Heights of the plate that must be levels of its mesh, so that the circle is round enough.

    The last one becomes half the circumference, measured at mid-wall.
    """
    top = np.pi * (bore + thickness / 2.0)
    return tuple((top * np.arange(1, _CELLS_AROUND_HALF + 1) / _CELLS_AROUND_HALF).tolist())


def bent(plate: Lattice, bore: float, thickness: float) -> Lattice:
    """Half of a cylinder with its axis along x through y = -bore.

    The heights from 0 to the half circumference become angles from 0 to pi, where the halves are
    joined again.  Near the crack heights become arcs of their own length, so that the cells there
    keep their shape; further on, all radii come to share their angles.  bore > thickness / 2.
    """
    x, y, z = plate.points.T
    height = heights(bore, thickness)[-1]
    radius, mean = bore + y, bore + thickness / 2.0
    far = z / height
    angle = z * ((1.0 - far) / radius + far / mean)
    opposite = z > height * (1.0 - 1e-9)
    angle[opposite] = np.pi
    points: FloatArray = np.stack([x, radius * np.cos(angle) - bore, radius * np.sin(angle)], 1)
    points[opposite, 2] = 0.0
    return replace(plate, points=points, joined=plate.joined | opposite)
