"""A cross-section through a straight front, meshed as patches, and drawn straight through a body.

x runs along the crack plane, with the crack on the smaller side of the tip; the heights z are
those of the upper half.  Around the tip stands the tube, around it a grid of lines.
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from front3d.arrays import BoolArray, FloatArray
from front3d.samples import grading
from front3d.samples.lattice import Block, Lattice, unite
from front3d.samples.tube import Tube


@dataclass(frozen=True, slots=True, eq=False)
class Piece:
    """A structured patch of the section.

    Attributes
    ----------
    points : (2J+1, 2K+1, 2) positions (x, z)
    joined : (2J+1, 2K+1) true on the ligament and at the tip
    wedges : K = 1 and its edge k = 0 is the tip
    """

    points: FloatArray
    joined: BoolArray
    wedges: bool = False


@dataclass(frozen=True, slots=True, eq=False)
class Grid:
    """The lines of the grid around the tube; all are node positions, midpoints included.

    Attributes
    ----------
    tip, radius : place of the tip, and half-width of the tube
    left, right : distances from the sides of the tube, from 0 outwards
    above : the same from its top
    """

    tip: float
    radius: float
    left: FloatArray
    right: FloatArray
    above: FloatArray

    def columns(self, tube: Tube) -> FloatArray:
        """All x."""
        side = self.radius * np.concatenate([-tube.side[:0:-1], tube.side])
        low, high = -self.radius - self.left[:0:-1], self.radius + self.right[1:]
        return self.tip + np.concatenate([low, side, high])

    def rows(self) -> FloatArray:
        """All z from the top of the tube."""
        return self.radius + self.above


def graded_lines(length: float, tube: Tube, radius: float, growth: float) -> FloatArray:
    """Distances from 0 to `length`; the first cell has the size of the tube's cells."""
    first = radius * float(tube.side[-1] - tube.side[-3])
    cells = grading.count(length, first, growth)
    return length * grading.fractions(length, first, cells)[0]


def even_lines(length: float, cells: int) -> FloatArray:
    """Distances from 0 to `length` in equal cells."""
    return np.linspace(0.0, length, 2 * cells + 1)


def join_lines(*parts: FloatArray) -> FloatArray:
    """Stretches one after another, each from 0."""
    out = parts[0]
    for part in parts[1:]:
        out = np.concatenate([out, out[-1] + part[1:]])
    return out


def tip_pieces(grid: Grid, tube: Tube) -> list[Piece]:
    """The tube, and the grid to its left and right."""
    section = grid.radius * tube.section() + (grid.tip, 0.0)
    joined = np.zeros(section.shape[:2], dtype=bool)
    joined[0] = True  # the ray ahead of the tip
    joined[:, 0] = True  # the tip itself
    beside = grid.radius * tube.side
    columns = grid.columns(tube)
    n_left, n_right = len(grid.left), len(grid.right)
    return [
        Piece(section[:, :3], joined[:, :3], wedges=True),
        Piece(section[:, 2:], joined[:, 2:]),
        rectangle(columns[:n_left], beside),
        rectangle(columns[-n_right:], beside, joined=True),
    ]


def rectangle(x: FloatArray, z: FloatArray, joined: bool = False) -> Piece:
    """The grid of the lines x and z; `joined` where z = 0."""
    points = np.stack(np.meshgrid(x, z, indexing="ij"), axis=-1)
    return Piece(points, (points[:, :, 1] == 0.0) & joined)


def plate_pieces(grid: Grid, tube: Tube) -> list[Piece]:
    """The section of a plate: the tube and the grid around it."""
    return [*tip_pieces(grid, tube), rectangle(grid.columns(tube), grid.rows())]


def drawn(pieces: Sequence[Piece], y: FloatArray) -> Lattice:
    """The section drawn along y, whose node positions are given, midpoints included."""
    blocks = []
    for piece in pieces:
        points = np.empty((len(y), *piece.points.shape[:2], 3))
        points[..., 0], points[..., 2] = piece.points[..., 0], piece.points[..., 1]
        points[..., 1] = y[:, None, None]
        joined = np.broadcast_to(piece.joined, points.shape[:3]).copy()
        blocks.append(Block(points, joined, piece.wedges))
    everything = np.concatenate([p.points.reshape(-1, 2) for p in pieces])
    size = max(float(np.ptp(everything, axis=0).max()), float(np.ptp(y)))
    return unite(blocks, 1e-9 * size)


def through_thickness(half: float, layers: int, growth: float) -> FloatArray:
    """Node positions from mid-thickness, y = 0, to the side face; cells shrink towards it."""
    first = half / float((growth ** np.arange(layers)).sum())
    out: FloatArray = half * (1.0 - grading.fractions(half, first, layers)[0][::-1])
    out[0], out[-1] = 0.0, half
    return out
