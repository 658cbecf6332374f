"""A plate bent into a cylinder whose bore was its face y = 0."""

from dataclasses import replace

import numpy as np

from front3d.arrays import FloatArray
from front3d.samples.lattice import Lattice

_CELLS_AROUND_HALF = 8


def half_circumference(bore: float, thickness: float) -> float:
    """The height of the plate that becomes half a cylinder: measured at mid-wall."""
    return float(np.pi) * (bore + thickness / 2.0)


def largest_cell(bore: float, thickness: float) -> float:
    """The height of cells that make the circle round enough."""
    return half_circumference(bore, thickness) / _CELLS_AROUND_HALF


def bent(plate: Lattice, bore: float, thickness: float) -> Lattice:
    """Half of a cylinder with its axis along x through y = -bore.

    The heights from 0 to the half circumference become angles from 0 to pi, where the halves are
    joined again.  Near the crack heights become arcs of their own length, so that the cells there
    keep their shape; further on, all radii come to share their angles.  bore > thickness / 2.
    """
    x, y, z = plate.points.T
    height = half_circumference(bore, thickness)
    radius, mean = bore + y, bore + thickness / 2.0
    far = z / height
    angle = z * ((1.0 - far) / radius + far / mean)
    opposite = z > height * (1.0 - 1e-9)
    angle[opposite] = np.pi
    points: FloatArray = np.stack([x, radius * np.cos(angle) - bore, radius * np.sin(angle)], 1)
    points[opposite, 2] = 0.0
    return replace(plate, points=points, joined=plate.joined | opposite)
