"""Cutting a half into the wanted cells, and mirroring it to the whole solid."""

from typing import Literal, get_args

import numpy as np

from front3d.arrays import FloatArray, IntArray
from front3d.elements import ELEMENTS
from front3d.errors import CaseError
from front3d.samples.lattice import Half
from front3d.samples.tetrahedra import split
from front3d.solid import CellBlock, Solid

CellKind = Literal["bricks", "tetra10", "brick8"]
CELL_KINDS: tuple[str, ...] = get_args(CellKind)


def check_cells(cells: str) -> None:
    """CaseError unless `cells` is one of CELL_KINDS."""
    if cells not in CELL_KINDS:
        raise CaseError(f"cells: found {cells!r}, expected one of {', '.join(CELL_KINDS)}")


def cut(half: Half, cells: str) -> list[CellBlock]:
    """The cells of the upper half.

    bricks: 20-node bricks and 15-node wedges; brick8: 8-node bricks and 6-node wedges;
    tetra10: quadratic tetrahedra.
    """
    check_cells(cells)
    if cells == "tetra10":
        return [CellBlock("tetra10", split(half))]
    brick, wedge = ("hexahedron20", "wedge15") if cells == "bricks" else ("hexahedron", "wedge")
    return [
        CellBlock(kind, nodes[:, : len(ELEMENTS[kind].nodes)])
        for kind, nodes in ((brick, half.bricks), (wedge, half.wedges))
    ]


def whole_solid(half: Half, cells: str, source: str) -> Solid:
    """The half and its reflection in z = 0, sharing the joined nodes only.

    Nodes of the crack faces stay double; the cells of the two faces match, because the lower
    half is an image of the upper one.
    """
    upper = cut(half, cells)
    n = len(half.points)
    image = np.arange(n, 2 * n)
    image[half.joined] = np.flatnonzero(half.joined)
    blocks = [
        CellBlock(b.kind, np.concatenate([b.nodes, image[b.nodes[:, mirror_order(b.kind)]]]))
        for b in upper
    ]
    points = np.concatenate([half.points, half.points * (1, 1, -1) + 0.0])
    return _without_unused(points, blocks, source)


def mirror_order(kind: str) -> IntArray:
    """Order of the nodes of a reflected cell that keeps its orientation positive.

    The reference cell has a plane of symmetry; walking the nodes in that reflection undoes
    the reversal.
    """
    nodes = ELEMENTS[kind].nodes
    image = nodes[:, [1, 0, 2]] if ELEMENTS[kind].family == "tetra" else nodes * (1, 1, -1)
    gap = np.abs(nodes[None] - image[:, None]).max(axis=2)
    order: IntArray = np.argmin(gap, axis=1).astype(np.int64)
    return order


def _without_unused(points: FloatArray, blocks: list[CellBlock], source: str) -> Solid:
    used = np.zeros(len(points), dtype=bool)
    for block in blocks:
        used[block.nodes] = True
    number = np.cumsum(used) - 1
    renumbered = tuple(CellBlock(b.kind, number[b.nodes]) for b in blocks)
    return Solid(points[used], renumbered, source=source)
