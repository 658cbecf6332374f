"""Node order: whatever the file says, every cell leaves here in VTK order with a positive Jacobian.

A cell is sound when its Jacobian determinant has one sign at interior points and every node
beyond the corners stands near its edge, face or centre.  Cells of one sign but negative are
mirrored.  If some cells are unsound, known orders of other conventions are tried on the whole
block; what no order makes sound is refused.

Legal, and left alone: collapsed cells, whose Jacobian vanishes only on an edge, and mid-side nodes
between 0.2 and 0.8 of their edge (a quarter-point is at 0.25).
"""

from dataclasses import dataclass

import numpy as np

from front3d.arrays import BoolArray, FloatArray, IntArray
from front3d.elements import ElementType, element_type
from front3d.errors import ReadError
from front3d.reading.conventions import Sites, candidates, mirrored, sites
from front3d.reading.raw import RawBlock

# Small enough for the cache, and for BLAS not to start threads (measured: five times slower with
# them on a busy machine).
_CHUNK = 1024
_SAMPLE = 2000
# Tolerances are common practice, not laws: how far (in lengths of its edge) a node may stand from
# its site before its place in the order is doubted, and the legal stretch along the edge.
_FAR = 0.35
_ALONG = 0.3 + 1e-6
_BENT = 1.0  # half a circle has 0.5
_FLAT = 1e-12


@dataclass(frozen=True, slots=True, eq=False)
class _Verdict:
    """Per cell: smallest and largest determinant, a size cubed, and nodes near their sites."""

    low: FloatArray
    high: FloatArray
    volume: FloatArray
    placed: BoolArray

    @property
    def positive(self) -> BoolArray:
        return self.low > _FLAT * self.volume

    @property
    def negative(self) -> BoolArray:
        return self.high < -_FLAT * self.volume

    @property
    def signed(self) -> BoolArray:
        return self.positive | self.negative

    @property
    def sound(self) -> BoolArray:
        return self.signed & self.placed


def normalise_nodes(
    points: FloatArray, block: RawBlock, spacing: float
) -> tuple[IntArray, list[str]]:
    """Nodes of the cells in our order, (cells, nodes), and sentences on what was mended.

    Parameters
    ----------
    points : (n_points, 3) coordinates
    block : cells of one type; every node number lies within `points`
    spacing : distance of neighbouring coordinates in the file, 0 for double precision

    Raises
    ------
    ReadError : a cell is inside out somewhere, flat, or in an order that is not known
    """
    element = element_type(block.kind)
    nodes, notes = block.nodes, []
    verdict = _judge(points, nodes, element, spacing)
    if not verdict.sound.all():
        name, order = _best_order(points, nodes, element, spacing, verdict.sound)
        if name:
            nodes = nodes[:, order]
            verdict = _judge(points, nodes, element, spacing)
            notes.append(f"{block.kind}: node order mended in all cells ({name})")
        _refuse(points, nodes, block, spacing, verdict)
    turn = np.flatnonzero(verdict.negative)
    if len(turn):
        nodes = np.array(nodes, dtype=np.int64)
        nodes[turn] = nodes[turn][:, mirrored(element)]
        notes.append(
            f"{block.kind}: {len(turn)} of {len(nodes)} cells had a negative Jacobian and were "
            "given the mirrored node order"
        )
    return np.asarray(nodes, dtype=np.int64), notes


def _judge(points: FloatArray, nodes: IntArray, element: ElementType, spacing: float) -> _Verdict:
    """Judge all cells, chunk by chunk so that the work arrays stay in cache."""
    linear_tetra = element.name == "tetra"
    xi, _ = element.quadrature(1 if linear_tetra else 2)
    gradients = np.ascontiguousarray(element.gradients(xi).transpose(2, 0, 1))
    where = sites(element)
    low, high, volume = (np.empty(len(nodes)) for _ in range(3))
    placed = np.empty(len(nodes), dtype=bool)
    for start in range(0, len(nodes), _CHUNK):
        part = slice(start, start + _CHUNK)
        x = _coordinates(points, nodes[part])
        det = _determinants(gradients, x)
        low[part], high[part] = det.min(axis=0), det.max(axis=0)
        extent = (x.max(axis=1) - x.min(axis=1)).max(axis=0)
        volume[part] = extent**3
        placed[part] = _placed(x, where, 1e-6 * extent + 4 * spacing)
    return _Verdict(low, high, volume, placed)


def _coordinates(points: FloatArray, nodes: IntArray) -> FloatArray:
    """(3, nodes, cells) coordinates relative to the first node, for precision far away."""
    x = points[nodes.T]
    return np.ascontiguousarray(np.moveaxis(x - x[0], 2, 0))


def _determinants(gradients: FloatArray, x: FloatArray) -> FloatArray:
    """(points, cells) Jacobian determinants from (3, points, nodes) gradients."""
    (a, b, c), (d, e, f), (g, h, i) = ([grad @ x[k] for grad in gradients] for k in range(3))
    return a * (e * i - f * h) - b * (d * i - f * g) + c * (d * h - e * g)


def _placed(x: FloatArray, where: list[Sites], tolerance: FloatArray) -> BoolArray:
    out = np.ones(x.shape[2], dtype=bool)
    for group in where:
        away2, span2, along = _offsets(x, group)
        span = np.sqrt(span2)
        out &= (away2 <= (_FAR * span + tolerance) ** 2).all(axis=0)
        if group.on_edges:
            out &= (along <= _ALONG * span2 + tolerance * span).all(axis=0)
    return out


def _homes(x: FloatArray, group: Sites) -> FloatArray:
    """(3, sites, cells) where the nodes of a group belong."""
    home: FloatArray = x[:, group.spans[:, 0, 0]] + x[:, group.spans[:, 0, 1]]
    for k in range(1, group.spans.shape[1]):
        home += x[:, group.spans[:, k, 0]] + x[:, group.spans[:, k, 1]]
    return home / (2 * group.spans.shape[1])


def _offsets(x: FloatArray, group: Sites) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Per site and cell: squared distance of the node, squared span, |distance along| x span."""
    d = x[:, group.nodes] - _homes(x, group)
    spans = [
        x[:, group.spans[:, k, 1]] - x[:, group.spans[:, k, 0]] for k in range(group.spans.shape[1])
    ]
    span2 = np.max([_dot(s, s) for s in spans], axis=0)
    return _dot(d, d), span2, np.abs(_dot(d, spans[0]))


def _dot(a: FloatArray, b: FloatArray) -> FloatArray:
    return a[0] * b[0] + a[1] * b[1] + a[2] * b[2]


def _best_order(
    points: FloatArray, nodes: IntArray, element: ElementType, spacing: float, sound: BoolArray
) -> tuple[str, list[int]]:
    """The order that makes most cells of a sample sound; the file's own unless another is better.

    Half the sample are unsound cells, half come evenly from the block: an order must explain the
    one without spoiling the other.
    """
    unsound = np.flatnonzero(~sound)
    sample = np.unique(
        np.concatenate(
            [
                unsound[:: max(1, len(unsound) // _SAMPLE)],
                np.arange(0, len(nodes), max(1, len(nodes) // _SAMPLE)),
            ]
        )
    )
    best, name, chosen = int(sound[sample].sum()), "", list(range(len(element.nodes)))
    for candidate, order in candidates(element).items():
        count = int(_judge(points, nodes[sample][:, order], element, spacing).sound.sum())
        if count > best:
            best, name, chosen = count, candidate, list(order)
    return name, chosen


def _refuse(
    points: FloatArray, nodes: IntArray, block: RawBlock, spacing: float, verdict: _Verdict
) -> None:
    """Raise ReadError on the first cell that cannot be used, if there is one."""
    unsigned = np.flatnonzero(~verdict.signed)
    if len(unsigned):
        raise ReadError(_about_sign(points, nodes, block, int(unsigned[0]), len(unsigned)))
    for cell in np.flatnonzero(~verdict.placed):
        message = _about_place(points, nodes, block, spacing, int(cell))
        if message:
            raise ReadError(message)


def _about_sign(points: FloatArray, nodes: IntArray, block: RawBlock, cell: int, count: int) -> str:
    element = element_type(block.kind)
    xi, _ = element.quadrature(1 if element.name == "tetra" else 2)
    gradients = element.gradients(xi).transpose(2, 0, 1)
    det = _determinants(gradients, _coordinates(points, nodes[cell : cell + 1]))[:, 0]
    mostly_positive = 2 * np.count_nonzero(det > 0) >= len(det)
    worst, best = int(det.argmin()), int(det.argmax())
    if not mostly_positive:
        worst, best = best, worst
    return (
        f"{block.kind} cell {block.numbers[cell]}: Jacobian determinant {det[worst]:.3g} at Gauss "
        f"point {worst}, {det[best]:.3g} at point {best}, expected one sign and not zero "
        f"({count} such cells; numbers from 0); the cell is flat or folded, or its nodes are in "
        "an unknown order: check its node order"
    )


def _about_place(
    points: FloatArray, nodes: IntArray, block: RawBlock, spacing: float, cell: int
) -> str:
    """What is wrong with the mid-side nodes of a cell; "" if it is only strongly curved."""
    x = _coordinates(points, nodes[cell : cell + 1])
    groups = sites(element_type(block.kind))
    homes = np.concatenate([_homes(x, group) for group in groups], axis=1)[:, :, 0]
    corners = [spans.ravel() for group in groups for spans in group.spans]
    slack = 1e-6 * float((x.max(axis=1) - x.min(axis=1)).max()) + 4 * spacing
    for group in groups:
        offsets = (values[:, 0] for values in _offsets(x, group))
        for place, away2, span2, along in zip(group.nodes, *offsets, strict=True):
            what = f"{block.kind} cell {block.numbers[cell]}: node {nodes[cell, place]}"
            others = np.linalg.norm(homes - x[:, place], axis=0)
            nearest = corners[int(others.argmin())]
            if others.min() < 0.5 * np.sqrt(away2) and away2 > _FAR**2 * span2:
                return (
                    f"{what} stands amid the nodes {nodes[cell, nearest].tolist()}, where another "
                    "mid-side node was expected (numbers from 0): its nodes are in an unknown "
                    "order; check its node order"
                )
            if away2 > (_BENT * np.sqrt(span2) + slack) ** 2:
                return (
                    f"{what} stands {np.sqrt(away2):.3g} from the middle of its edge or face, "
                    f"which is {np.sqrt(span2):.3g} long, expected half of that at the most "
                    "(numbers from 0): check its coordinates and its node order"
                )
            if group.on_edges and along > _ALONG * span2 + slack * np.sqrt(span2):
                return (
                    f"{what} is a mid-side node at {0.5 - along / span2:.3g} of its edge, expected "
                    "between 0.2 and 0.8; check the mesh, or its node order"
                )
    return ""
