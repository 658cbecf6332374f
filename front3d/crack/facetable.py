"""Faces of cells as one table, whatever the element types."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from front3d.arrays import BoolArray, FloatArray, IntArray
from front3d.places import rows_holding
from front3d.solid import Solid


@dataclass(frozen=True, slots=True, eq=False)
class FaceTable:
    """Faces of cells.

    Attributes
    ----------
    block, cell, local : (n,) which face of which cell of which block
    corners : (n, 4) corner nodes, anticlockwise seen from outside; a triangle repeats its first
    midsides : (n, 4) mid-side node of each side, -1 where the face has none
    """

    block: IntArray
    cell: IntArray
    local: IntArray
    corners: IntArray
    midsides: IntArray

    def __len__(self) -> int:
        return len(self.block)

    def __getitem__(self, rows: IntArray | BoolArray) -> "FaceTable":
        return FaceTable(
            self.block[rows],
            self.cell[rows],
            self.local[rows],
            self.corners[rows],
            self.midsides[rows],
        )

    @property
    def nodes(self) -> IntArray:
        """(n, 8) corner and mid-side nodes; a missing one repeats the first corner."""
        midsides = np.where(self.midsides < 0, self.corners[:, :1], self.midsides)
        return np.concatenate([self.corners, midsides], axis=1)

    def area_vectors(self, points: FloatArray) -> FloatArray:
        """(n, 3) outward area vectors of the polygons of the corners."""
        x = points[self.corners]
        return 0.5 * np.cross(x[:, 2] - x[:, 0], x[:, 3] - x[:, 1])

    def sides(self) -> tuple[IntArray, IntArray]:
        """(n, 4, 3) start, end and mid-side node of each side, and (n, 4) the face's own row."""
        ends = np.stack([self.corners, np.roll(self.corners, -1, axis=1), self.midsides], axis=2)
        rows = np.broadcast_to(np.arange(len(self))[:, None], (len(self), 4))
        return ends, rows


def faces_of_cells(solid: Solid, chosen: Sequence[IntArray]) -> FaceTable:
    """All faces of the chosen cells, their numbers per block."""
    parts: list[tuple[IntArray, ...]] = []
    for b, (block, cells) in enumerate(zip(solid.blocks, chosen, strict=True)):
        if not len(cells):
            continue
        members_of = block.nodes[cells]
        for local, (kind, members) in enumerate(block.element.faces):
            n_corners = 3 if kind.startswith("triangle") else 4
            nodes = members_of[:, list(members)]
            corners = nodes[:, [0, 1, 2, 0]] if n_corners == 3 else nodes[:, :4]
            midsides = np.full((len(cells), 4), -1)
            if nodes.shape[1] > n_corners:
                midsides[:, :n_corners] = nodes[:, n_corners : 2 * n_corners]
            parts.append(
                (np.full(len(cells), b), cells, np.full(len(cells), local), corners, midsides)
            )
    if not parts:
        empty = np.zeros(0, np.int64)
        return FaceTable(empty, empty, empty, np.zeros((0, 4), int), np.zeros((0, 4), int))
    return FaceTable(*(np.concatenate(column) for column in zip(*parts, strict=True)))


def set_keys(rows: IntArray) -> IntArray:
    """One number per row, equal for rows that hold the same set of nodes."""
    ordered = np.sort(rows, axis=1)
    repeated = np.zeros(ordered.shape, bool)
    repeated[:, 1:] = ordered[:, 1:] == ordered[:, :-1]
    ordered[repeated] = -1
    ordered.sort(axis=1)
    # Lexicographic sort and compare: faster than np.unique over rows, and exact.
    order = np.lexsort(ordered.T)
    ordered = ordered[order]
    new = np.ones(len(rows), bool)
    new[1:] = (ordered[1:] != ordered[:-1]).any(axis=1)
    keys = np.empty(len(rows), np.int64)
    keys[order] = np.cumsum(new) - 1
    return keys


def multiplicity(keys: IntArray) -> IntArray:
    """How often each row's key occurs."""
    counts: IntArray = np.bincount(keys, minlength=1)[keys]
    return counts


def also_among(faces: FaceTable, others: FaceTable, entity: IntArray) -> BoolArray:
    """(n,) which faces have the same nodes as one of the others."""
    keys = set_keys(entity[np.concatenate([faces.nodes, others.nodes])])
    return np.isin(keys[: len(faces)], keys[len(faces) :])


def cells_with(
    solid: Solid, nodes: BoolArray, among: Sequence[IntArray] | None = None
) -> tuple[IntArray, ...]:
    """Per block, the numbers of the cells that hold any of the marked nodes.

    `among` are the cells to look at, which must be all that can hold one; None looks at all.
    """
    if among is not None:
        return tuple(
            numbers[nodes.take(block.nodes[numbers]).any(axis=1)]
            for block, numbers in zip(solid.blocks, among, strict=True)
        )
    return tuple(rows_holding(block.nodes, nodes) for block in solid.blocks)


def outer_faces(
    solid: Solid,
    entity: IntArray,
    nodes: BoolArray,
    among: Sequence[IntArray] | None = None,
    *,
    whole: bool = False,
) -> FaceTable:
    """Free faces that hold any of the marked nodes (of all faces there, crack faces included), or
    with `whole` none but marked ones.

    A face is free when no other cell has it; every cell that could share it holds one of its
    nodes, so looking at the cells around the marked nodes is enough.  `among` as in `cells_with`.
    """
    table = faces_of_cells(solid, cells_with(solid, nodes, among))
    marked = nodes[table.nodes]
    table = table[np.asarray(marked.all(axis=1) if whole else marked.any(axis=1))]
    corners = entity[table.corners]
    distinct = (np.diff(np.sort(corners, axis=1), axis=1) != 0).sum(axis=1) + 1
    table = table[distinct >= 3]  # a collapsed brick has faces that are lines
    if not len(table):
        return table
    return table[multiplicity(set_keys(entity[table.nodes])) == 1]
