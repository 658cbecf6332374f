"""The cells near the fronts: what evaluation looks at, so that its cost does not grow with the rest
of the solid.
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from front3d.arrays import IntArray
from front3d.crack.facetable import FaceTable, cells_with
from front3d.crack.front import Front
from front3d.places import within
from front3d.solid import Solid

SPAN = 5.5
"""Reach by default, in the largest widths of the crack faces at the front: enough for the default
rings on most meshes, and where it is not, more cells are fetched."""


@dataclass(frozen=True, slots=True, eq=False)
class Near:
    """All cells with a node within a distance of any of some fronts, and some more.

    Attributes
    ----------
    solid, fronts : the solid, and the fronts in it
    reach : the distance
    cells : per block, numbers of these cells
    nodes : (m,) all their nodes, sorted
    """

    solid: Solid
    fronts: tuple[Front, ...]
    reach: float
    cells: tuple[IntArray, ...]
    nodes: IntArray

    def reaching(self, distance: float) -> "Near":
        """The same, or with a larger reach where `distance` needs it."""
        if distance <= self.reach:
            return self
        return cells_near(self.solid, self.fronts, 1.5 * distance)


def first_reach(solid: Solid, fronts: Sequence[Front], faces: Sequence[FaceTable]) -> float:
    """A distance that holds the rings by default, from the crack faces with a node on a front."""
    on_front = np.zeros(len(solid.points), bool)
    for front in fronts:
        on_front[front.nodes] = True
    largest = 0.0
    for table in faces:
        corners = solid.points[table.corners[on_front[table.corners].any(axis=1)]]
        for shift in (1, 2):  # sides, and diagonals of quadrilaterals
            width = np.linalg.norm(corners - np.roll(corners, shift, axis=1), axis=2)
            largest = max(largest, float(width.max(initial=0.0)))
    return SPAN * largest


def cells_near(solid: Solid, fronts: Sequence[Front], reach: float) -> Near:
    """Cells with a node within `reach` of a front."""
    samples = [front.curve.samples() for front in fronts]
    places = [f.curve.frames(s)[0] for f, (s, _) in zip(fronts, samples, strict=True)]
    spacing = max(spacing for _, spacing in samples)
    inside = within(solid.points, np.concatenate(places), reach + spacing)
    cells = cells_with(solid, inside)
    return Near(solid, tuple(fronts), reach, cells, nodes_of(solid, cells))


def nodes_of(solid: Solid, cells: Sequence[IntArray]) -> IntArray:
    """All nodes of the chosen cells, per block, sorted."""
    seen = np.zeros(len(solid.points), bool)
    for block, numbers in zip(solid.blocks, cells, strict=True):
        seen[block.nodes[numbers]] = True
    return np.flatnonzero(seen)
