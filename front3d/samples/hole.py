"""Bending a block with a crack at its face x = 0 around a circular hole.

The block, 0 <= x <= width above z = 0, becomes a quarter of the solid around the hole's axis, y:
its face x = 0 the hole, its far face the outer boundary, and its top the plane x = 0 through the
axis.  Surfaces x = const become circles, which in a plate go over into its rectangle: linearly, so
that mid-side nodes stay in the middle.  Up to `straight` heights stay what they are, so that
nothing is stretched around the front, however small the hole; above, they turn into angles.
"""

from dataclasses import dataclass, replace

import numpy as np

from front3d.arrays import FloatArray
from front3d.samples.lattice import Lattice
from front3d.samples.tetrahedra import diagonals_straightened


@dataclass(frozen=True, slots=True)
class Hole:
    """The hole and the outer boundary.

    Attributes
    ----------
    radius : of the hole
    half_width : half the width of the plate along x, or the radius of the outer cylinder
    half_height : half the height of the plate; None for a cylinder
    """

    radius: float
    half_width: float
    half_height: float | None = None

    @property
    def straight(self) -> float:
        """Height up to which heights are kept: there the hole's tangent leans by 30 degrees."""
        return 0.5 * self.radius

    @property
    def heights(self) -> tuple[float, ...]:
        """Heights in the block that must be levels of its mesh; the last one is its top.

        Above `straight`, heights measure the arc of the hole, and no cell spans much more than 20
        degrees.
        """
        top = self.straight + self.radius * float(np.arccos(self.straight / self.radius))
        if self.half_height is None:
            return tuple(np.linspace(self.straight, top, 4).tolist())
        first = np.arcsin(self.straight / self.half_width)
        share = (np.arctan2(self.half_height, self.half_width) - first) / (np.pi / 2 - first)
        shares = (0.0, share / 2, share, (1.0 + share) / 2, 1.0)
        return tuple(self.straight + float(s) * (top - self.straight) for s in shares)

    def bend(self, block: Lattice) -> Lattice:
        """The block around the hole, whose axis is x = z = 0."""
        x, y, z = block.points.T
        out = np.empty_like(block.points)
        out[:, 1] = y
        out[:, ::2] = self._circles(self.radius + x, z)
        if self.half_height is not None:
            gap = self._rectangle(z) - self._circles(np.full_like(z, self.half_width), z)
            out[:, ::2] += (x / (self.half_width - self.radius))[:, None] * gap
        out[z == self.heights[-1], 0] = 0.0  # exactly in the plane of symmetry
        out = diagonals_straightened(replace(block, points=out), z > self.straight)
        return replace(block, points=out + 0.0)

    def _share(self, z: FloatArray) -> FloatArray:
        """0 up to `straight`, 1 at the top."""
        low, high = self.straight, self.heights[-1]
        return np.clip((z - low) / (high - low), 0.0, 1.0)

    def _circles(self, radius: FloatArray, z: FloatArray) -> FloatArray:
        """(n, 2) x and z on a circle about the axis."""
        low = np.minimum(z, self.straight)
        first = np.arcsin(low / radius)
        angle = first + self._share(z) * (np.pi / 2 - first)
        above = z > self.straight
        return np.stack(
            [radius * np.cos(angle), np.where(above, radius * np.sin(angle), low)], axis=1
        )

    def _rectangle(self, z: FloatArray) -> FloatArray:
        """(n, 2) x and z on the outer boundary of the plate."""
        assert self.half_height is not None
        low, _, corner, _, high = self.heights
        side = np.interp(z, [low, corner], [low, self.half_height])
        across = np.interp(z, [corner, high], [self.half_width, 0.0])
        return np.stack([across, np.where(z < low, z, side)], axis=1)
