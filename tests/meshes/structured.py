"""Small structured meshes around a crack front, of every element type, to carry exact fields.

A block of n x n bricks across the front, swept along it: straight, or around the circle of a
penny.  The crack is the plane x2 = 0, x1 < 0 of the local axes (x1 growth, x2 normal, x3 along the
front); its nodes are doubled, those on the front are shared.  Each brick is then one hexahedron
or is cut into wedges, tetrahedra or pyramids; or the section is a polar fan with collapsed
bricks or wedges at the front.  A mesh is only a carrier for imposed displacements: its
outer faces are cuts, not free surfaces.
"""

from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np

from front3d.elements import ELEMENTS
from front3d.solid import CellBlock, Solid, Step
from tests.meshes.pieces import KINDS, cut_brick, fan_cell, linear_type

FANS = ("collapsed", "quarter_collapsed", "quarter_wedge")
ALL_KINDS = (*KINDS, *FANS, "mixed")


@dataclass(frozen=True)
class Cracked:
    """A solid without steps, the side of its nodes (+1 upper face, -1 lower, 0 elsewhere), and
    the nodes on the front.
    """

    solid: Solid
    side: np.ndarray
    front: np.ndarray


def impose(solid, side, field, name="imposed") -> Solid:
    """The solid with one more step, whose displacements are those of an exact field."""
    step = Step(name, field(solid.points, side), time=float(len(solid.steps)))
    return replace(solid, steps=(*solid.steps, step))


def straight(kind, n, along=4, half=1.0, length=2.0, frame=None, origin=(0, 0, 0)) -> Cracked:
    """Straight front through `origin` along e3: x1, x2 in (-half, half), x3 in (0, length).

    Parameters
    ----------
    kind : an element type, "collapsed", "quarter_collapsed", "quarter_wedge", or "mixed"
    n : cells across, even; for the fans twice the number of rings
    along : cells along the front
    frame : rows e1, e2, e3
    """
    frame = np.eye(3) if frame is None else np.asarray(frame, dtype=float)

    def place(local):
        return (local * [1, 1, length]) @ frame + origin

    return _build(kind, n, along, half, False, place, edges_straight=False)


def curved(
    kind, n, around=None, a=1.0, half=0.4, straight_edges=False, frame=None, origin=(0, 0, 0)
) -> Cracked:
    """Tube around the front of a penny of radius a: |r - a|, |z| < half, a whole circle.

    Mid-side nodes lie on their true circles, or with `straight_edges` halfway between the ends of
    their edge.  `around` defaults to cells about as long as wide.
    """
    frame = np.eye(3) if frame is None else np.asarray(frame, dtype=float)
    around = around or int(np.ceil(np.pi * a * n / half))

    def place(local):
        # e3 = e1 x e2 runs against the polar angle.
        angle = -2 * np.pi * local[:, 2]
        r = a + local[:, 0]
        return np.stack([r * np.cos(angle), r * np.sin(angle), local[:, 1]], 1) @ frame + origin

    return _build(kind, n, around, half, True, place, edges_straight=straight_edges)


def _build(kind, n, along, half, closed, place: Callable, edges_straight) -> Cracked:
    """Cut the block, place its nodes and join equal ones.

    A node is known by its integer place on the lattice, which has four steps per brick, and by
    its side of the crack; x3 of `place` runs from 0 to 1.
    """
    if kind not in ALL_KINDS or n % 2 or n < (6 if kind == "mixed" else 2):
        raise ValueError(f"no mesh of kind {kind} with {n} cells across")
    fan = kind in FANS
    section = _polar(n, half, kind) if fan else _square(n, half)

    def position(keys):
        return place(np.column_stack([section(keys[:, 0], keys[:, 1]), keys[:, 2] / (4 * along)]))

    if edges_straight and fan:
        position = _chords(position)
    kinds, names, positions = [], [], []
    layers = 4 * np.arange(along)[:, None] * np.array([0, 0, 1])
    for cell_kind, cell, side in _fan(kind, n) if fan else _grid(kind, n):
        keys = (cell + layers[:, None, :]).reshape(-1, 3)
        x = position(keys)
        if edges_straight and not fan:
            linear = linear_type(cell_kind)
            corners = x.reshape(along, -1, 3)[:, : linear.n_corners]
            x = np.einsum("nc,kcx->knx", linear.values(ELEMENTS[cell_kind].nodes), corners)
            x = x.reshape(-1, 3)
        kinds.append((cell_kind, len(keys)))
        names.append(_names(kind, n, keys, side, 4 * along if closed else 0))
        positions.append(x)
    unique, first, row = np.unique(
        np.concatenate(names), axis=0, return_index=True, return_inverse=True
    )
    blocks: dict[str, list] = {}
    start = 0
    for cell_kind, count in kinds:
        nodes = row.ravel()[start : start + count].reshape(along, -1)
        blocks.setdefault(cell_kind, []).append(nodes)
        start += count
    solid = Solid(
        np.concatenate(positions)[first],
        tuple(CellBlock(k, np.concatenate(v)) for k, v in blocks.items()),
        source=f"structured {kind}",
    )
    centre = (0, 0) if fan else (2 * n, 2 * n)
    front = np.flatnonzero((unique[:, :2] == centre).all(axis=1))
    return Cracked(solid, unique[:, 3], front)


def _names(kind, n, keys, side, period):
    """(lattice place, side) of each node, equal where nodes are one: on the front, where the
    section closes outside the crack, and where the tube closes.
    """
    i, j, k = keys.T.copy()
    if period:
        k %= period
    if kind in FANS:
        j[i == 0] = 0
        on_face = (i > 0) & ((j == 0) | (j == 4 * _sectors(n)))
        j[j == 4 * _sectors(n)] = 0
    else:
        on_face = (j == 2 * n) & (i < 2 * n)
    return np.column_stack([i, j, k, np.where(on_face, side, 0)])


def _chords(position):
    """Straight between the ends of each brick along the front."""

    def chord(keys):
        part = (keys[:, 2] % 4 / 4)[:, None]
        low = keys - (keys[:, 2] % 4)[:, None] * [0, 0, 1]
        return (1 - part) * position(low) + part * position(low + 4 * np.eye(3, dtype=int)[2])

    return chord


def _square(n, half):
    def section(i, j):
        return np.column_stack([i, j]) * (half / (2 * n)) - half

    return section


def _grid(kind, n):
    """(element type, lattice places, side) of every cell in the first layer of the block."""
    for j in range(n):
        for i in range(n):
            side = 1 if j >= n // 2 else -1
            for cell_kind, nodes in _pieces(kind, n, i, j):
                yield cell_kind, _lattice(i, j, nodes), side


def _lattice(i, j, nodes):
    return np.rint(4 * np.array([i, j, 0]) + 2 + 2 * nodes).astype(int)


def _pieces(kind, n, i, j):
    if kind != "mixed":
        return cut_brick(kind)
    ring = max(i - n // 2, n // 2 - 1 - i, j - n // 2, n // 2 - 1 - j)
    if i == n - 1:
        return cut_brick("tetra10")
    if i == n - 2:  # pyramids, with tetrahedra towards those of the last column
        return cut_brick("pyramid13", cut_faces=("+x",))
    if ring == 0:
        return cut_brick("wedge15")
    return cut_brick("pyramid13" if ring == 1 else "hexahedron20")


def _sectors(n):
    return 2 * n + 4


def _fan(kind, n):
    for j in range(_sectors(n)):
        side = 1 if j >= _sectors(n) // 2 else -1
        for i in range(n // 2):
            cell_kind, nodes = fan_cell(kind if i == 0 else "hexahedron20")
            yield cell_kind, _lattice(i, j, nodes), side


def _polar(n, half, kind):
    """Corners on circles, edges straight in the section; quarter-points in the first ring."""
    sectors, rings = _sectors(n), n // 2

    def corner(i, j):
        angle = np.pi * (2.0 * j / sectors - 1)
        return (half * i / rings)[:, None] * np.column_stack([np.cos(angle), np.sin(angle)])

    def section(i, j):
        (i0, fi), (j0, fj) = np.divmod(i, 4), np.divmod(j, 4)
        fi, fj = fi / 4, fj / 4
        if kind.startswith("quarter"):
            fi = np.where((i0 == 0) & (fi == 0.5), 0.25, fi)
        fi, fj = fi[:, None], fj[:, None]
        inner = (1 - fj) * corner(i0, j0) + fj * corner(i0, j0 + 1)
        outer = (1 - fj) * corner(i0 + 1, j0) + fj * corner(i0 + 1, j0 + 1)
        return (1 - fi) * inner + fi * outer

    return section
