"""The cross-section around the front: a fan of wedges, rings of bricks, a square outside.

All positions are for a tube of half-width 1, with d ahead of the front and z up.
"""

from dataclasses import dataclass

import numpy as np

from front3d.arrays import FloatArray
from front3d.samples.grading import with_middles


@dataclass(frozen=True, slots=True)
class Tube:
    """Choices for the cross-section.

    Attributes
    ----------
    sectors : cells around the half circle, 4 or 8
    rings : rings of bricks around the wedges
    power : the ring radii are (k / (rings + 1))**power
    quarter_points : mid-side nodes of the wedges at a quarter of their edges
    """

    sectors: int = 8
    rings: int = 5
    power: float = 1.5
    quarter_points: bool = True

    @property
    def radii(self) -> FloatArray:
        """(rings + 2,) from 0 to 1."""
        k = np.arange(self.rings + 2)
        return (k / (self.rings + 1)) ** self.power

    @property
    def side(self) -> FloatArray:
        """Where the rays cut a side of the square, from 0 to its corner: (sectors / 2 + 1,)
        node positions, midpoints included.
        """
        rays = np.tan(np.pi / self.sectors * np.arange(self.sectors // 4 + 1))
        rays[-1] = 1.0
        return with_middles(rays[None])[0]

    def section(self) -> FloatArray:
        """(2 sectors + 1, 2 rings + 3, 2): positions (d, z), sector by radius."""
        angle = np.pi * np.arange(2 * self.sectors + 1) / (2 * self.sectors)
        circle = np.stack([np.cos(angle), np.sin(angle)], axis=1)
        circle[0], circle[self.sectors], circle[-1] = (1, 0), (0, 1), (-1, 0)
        right = np.stack([np.ones_like(self.side), self.side], axis=1)  # from z = 0 to the corner
        top = np.stack([self.side, np.ones_like(self.side)], axis=1)  # from d = 0 to the corner
        quarter = np.concatenate([right, top[-2::-1]])
        square = np.concatenate([quarter, (quarter * (-1, 1))[-2::-1]])
        rays = []
        for radius in self.radii:
            # Circles inside the first half of the rings, then gradually the square.
            blend = max(0.0, (radius - 0.3) / 0.7)
            rays.append(radius * ((1.0 - blend) * circle + blend * square))
        ends = np.stack(rays, axis=1)
        nodes = np.empty((len(circle), 2 * ends.shape[1] - 1, 2))
        nodes[:, ::2] = ends
        nodes[:, 1::2] = (ends[:, 1:] + ends[:, :-1]) / 2.0
        if self.quarter_points:
            nodes[:, 1] = ends[:, 1] / 4.0
        return nodes + 0.0
