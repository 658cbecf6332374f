"""Cutting the lattice of a part into the wanted kind of cells."""

from typing import Literal, get_args

import numpy as np

from front3d.arrays import BoolArray
from front3d.elements import ELEMENTS
from front3d.errors import CaseError
from front3d.samples.lattice import Lattice
from front3d.samples.mirror import Plane, Unfolded, unfold
from front3d.samples.tetrahedra import split
from front3d.solid import CellBlock, Solid

CellKind = Literal["bricks", "tetra10", "brick8", "brick20", "tetra4"]
CELL_KINDS: tuple[str, ...] = get_args(CellKind)


def check_cells(cells: str) -> None:
    """CaseError unless `cells` is one of CELL_KINDS."""
    if cells not in CELL_KINDS:
        raise CaseError(f"cells: found {cells!r}, expected one of {', '.join(CELL_KINDS)}")


def cut(lattice: Lattice, cells: str) -> list[CellBlock]:
    """Cells on the nodes of the lattice.

    bricks and brick20: 20-node bricks and 15-node wedges (the quarter-points of the former are in
    the lattice); brick8: 8-node bricks and 6-node wedges; tetra10 and tetra4: tetrahedra.
    """
    check_cells(cells)
    if is_tetra(cells):
        kind = "tetra10" if cells == "tetra10" else "tetra"
        return [CellBlock(kind, split(lattice)[:, : len(ELEMENTS[kind].nodes)])]
    brick, wedge = ("hexahedron", "wedge") if cells == "brick8" else ("hexahedron20", "wedge15")
    return [
        CellBlock(kind, nodes[:, : len(ELEMENTS[kind].nodes)])
        for kind, nodes in ((brick, lattice.bricks), (wedge, lattice.wedges))
    ]


def is_tetra(cells: str) -> bool:
    """Whether a kind of cells is cut into tetrahedra."""
    return cells.startswith("tetra")


def has_quarter_points(cells: str) -> bool:
    """Whether mid-side nodes at the front stand at a quarter of their edges."""
    return cells == "bricks"


def cracked_solid(lattice: Lattice, axes: tuple[int, ...], cells: str, name: str) -> Unfolded:
    """The solid whose part is the lattice: unfolded in the coordinate `axes`, then in z = 0.

    In z = 0 the two halves share the joined nodes only.  The nodes of the crack faces stay
    double, and their cells match, because one half is an image of the other.
    """
    part, joined = _part(lattice, cells, name)
    sides = [Plane(axis, part.points[:, axis] == 0.0) for axis in axes]
    return unfold(part, (*sides, Plane(2, joined)), name)


def half_cracked_solid(lattice: Lattice, cells: str, name: str) -> Unfolded:
    """As `cracked_solid` with the axis 0, but the side x < 0 has no crack.

    It is symmetric about z = 0 only: its part has both sides.
    """
    quarter, joined = _part(lattice, cells, name)
    model = unfold(quarter, (Plane(0, quarter.points[:, 0] == 0.0),), name)
    x, _, z = model.solid.points.T
    return unfold(model.solid, (Plane(2, (z == 0.0) & (joined[model.source] | (x < 0.0))),), name)


def _part(lattice: Lattice, cells: str, name: str) -> tuple[Solid, BoolArray]:
    """Cells on the nodes they use, and which of these are joined."""
    blocks = cut(lattice, cells)
    used = np.zeros(len(lattice.points), dtype=bool)
    for block in blocks:
        used[block.nodes] = True
    number = np.cumsum(used) - 1
    part = Solid(
        lattice.points[used],
        tuple(CellBlock(b.kind, number[b.nodes]) for b in blocks),
        source=name,
    )
    return part, lattice.joined[used]
