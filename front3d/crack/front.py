"""One crack front: its ordered nodes, its curve, and how it ends."""

from dataclasses import dataclass, field

import numpy as np
from scipy.spatial import cKDTree

from front3d.arrays import BoolArray, FloatArray, IntArray, frozen_ints
from front3d.crack.coincidence import Coincidence
from front3d.crack.curve import Curve, fit_curve
from front3d.crack.edges import Chain
from front3d.crack.facetable import FaceTable
from front3d.elements import FACES
from front3d.errors import CrackError
from front3d.places import within
from front3d.solid import Solid

FREE_SURFACE = "free surface"
SYMMETRY_PLANE = "symmetry plane"


@dataclass(frozen=True, slots=True, eq=False)
class Front:
    """An ordered crack front.

    Attributes
    ----------
    edges : (n_edges, 3) start, end and mid-side node (-1 if none), in order along e3
    closed : whether the last edge ends where the first starts
    curve : smooth curve and normals through the front
    corner_s : (n_corners,) arc length of the corner nodes
    half : whether only the upper side of the crack is modelled
    ends : what each end of an open front lies on; empty for a closed front
    stations : (n,) rows of `corners` at which K is reported: by default all
    """

    edges: IntArray
    closed: bool
    curve: Curve
    corner_s: FloatArray
    half: bool
    ends: tuple[str, ...] = ()
    stations: IntArray = field(default_factory=lambda: np.zeros(0, np.int64))

    def __post_init__(self) -> None:
        object.__setattr__(self, "edges", frozen_ints(self.edges))
        rows = self.stations if len(self.stations) else np.arange(len(self.corner_s))
        object.__setattr__(self, "stations", frozen_ints(rows))

    @property
    def corners(self) -> IntArray:
        """(n_corners,) corner nodes; the first is not repeated on a closed front."""
        starts = self.edges[:, 0]
        return starts if self.closed else np.append(starts, self.edges[-1, 1])

    @property
    def nodes(self) -> IntArray:
        """All nodes of the front."""
        nodes = np.unique(self.edges)
        return nodes[nodes >= 0]

    @property
    def length(self) -> float:
        return self.curve.length

    def cell_coordinate(self, s: FloatArray) -> FloatArray:
        """Position along the front counted in edges: an integer at each corner node."""
        knots = np.append(self.corner_s, self.length) if self.closed else self.corner_s
        return np.interp(s, knots, np.arange(len(knots)))


def build_front(solid: Solid, chain: Chain, upper: FaceTable, half: bool) -> Front:
    """Front of a chain of edges; CrackError if it is too short to have a direction."""
    edges = chain.edges
    if chain.closed and len(edges) < 3:
        raise CrackError(
            f"{solid.source}: the closed crack front at node {edges[0, 0]} has {len(edges)} "
            "edges, expected 3 or more; refine the mesh along the front"
        )
    normals = _edge_normals(solid, upper[chain.faces], edges)
    points = solid.points
    origin = points[edges[0, 0]]  # far from the origin, work relative to the front
    start = points[edges[:, 0]] - origin
    end = points[edges[:, 1]] - origin
    keep_midsides = bool((edges[:, 2] >= 0).all()) and _curved_edges(
        start, points[edges[:, 2]] - origin, end, chain.closed
    )
    places = [start]
    at_nodes = [normals[:, 0]]
    if keep_midsides:
        places.append(points[edges[:, 2]] - origin)
        at_nodes.append(normals[:, 2])
    x = np.stack(places, axis=1).reshape(-1, 3)
    # A corner node belongs to two edges: its normal is the mean of both.
    at_nodes[0] = _mean_at_corners(normals, chain.closed)[: len(edges)]
    n = np.stack(at_nodes, axis=1).reshape(-1, 3)
    if not chain.closed:
        x = np.vstack([x, end[-1:]])
        n = np.vstack([n, normals[-1:, 1]])
    curve = fit_curve(x + origin, n, chain.closed)
    every = len(places)
    corner_s = curve.knots[::every]
    if chain.closed:
        corner_s = corner_s[:-1]
    return Front(edges, chain.closed, curve, corner_s, half)


def _mean_at_corners(normals: FloatArray, closed: bool) -> FloatArray:
    """(n_edges, 3) normal at the start of each edge, averaged with the edge before it."""
    before = np.roll(normals[:, 1], 1, axis=0)
    if not closed:
        before[0] = normals[0, 0]
    mean = normals[:, 0] + before
    unit: FloatArray = mean / np.linalg.norm(mean, axis=1, keepdims=True)
    return unit


def _curved_edges(start: FloatArray, middle: FloatArray, end: FloatArray, closed: bool) -> bool:
    """Whether mid-side nodes lie on the curve rather than on the chords of its corners.

    Where the front turns, a mid-side node on the curve stands off the chord by an eighth of
    length times turning angle; straight-sided meshes have it on the chord, inside the true front.
    """
    chord = end - start
    length = np.linalg.norm(chord, axis=1)
    unit = chord / length[:, None]
    offset = middle - start
    sagitta = np.linalg.norm(offset - np.einsum("nk,nk->n", offset, unit)[:, None] * unit, axis=1)
    turn = np.linalg.norm(np.diff(unit, axis=0), axis=1)
    if closed:
        turn = np.append(turn, np.linalg.norm(unit[0] - unit[-1]))
    if not len(turn):
        return True
    expected = float(np.mean(turn)) * float(np.mean(length)) / 8.0
    return float(np.mean(sagitta)) >= 0.5 * expected


def _edge_normals(solid: Solid, faces: FaceTable, edges: IntArray) -> FloatArray:
    """(n_edges, 3, 3) unit crack normals e2 at start, end and middle of each front edge.

    Taken from the face that ends there, a tenth of the way into it: at the very edge the map of a
    face with quarter-point nodes has no normal.
    """
    out = np.zeros((len(edges), 3, 3))
    for row in range(len(edges)):
        block = solid.blocks[faces.block[row]]
        kind, members = block.element.faces[faces.local[row]]
        face = FACES[kind]
        nodes = block.nodes[faces.cell[row]][list(members)]
        x = solid.points[nodes] - solid.points[nodes[0]]
        reference = face.nodes
        centre = reference[: face.n_corners].mean(axis=0)
        at = np.array([_reference_of(nodes, reference, node) for node in edges[row, :2]])
        at = np.vstack([at, at.mean(axis=0)])
        tangents = np.einsum("qnd,nk->qdk", face.gradients(0.9 * at + 0.1 * centre), x)
        outward = np.cross(tangents[:, 0], tangents[:, 1])
        size = np.linalg.norm(outward, axis=1, keepdims=True)
        if not np.all(size > 0):
            raise CrackError(
                f"{solid.source}: the crack face of {block.kind} cell {faces.cell[row]} at the "
                "front has no area; check its nodes"
            )
        out[row] = -outward / size
    return out


def _reference_of(nodes: IntArray, reference: FloatArray, node: int) -> FloatArray:
    """Reference position of a node in a face; the mean of them in a collapsed face."""
    at: FloatArray = reference[nodes == node].mean(axis=0)
    return at


def on_front_mask(
    front: Front, same: Coincidence, among: IntArray | slice = slice(None)
) -> BoolArray:
    """(n_points,) which nodes stand for a node of the front, those of collapsed cells included.

    `among` are nodes to look at, all those of the front's cells among them.
    """
    entities = np.zeros(len(same.entity), bool)
    entities[same.entity[front.nodes]] = True
    mask = np.zeros(len(same.entity), bool)
    mask[among] = entities[same.entity[among]]
    return mask


def near_nodes(
    front: Front, x: FloatArray, reach: float
) -> tuple[IntArray, FloatArray, FloatArray]:
    """Which of the places x, (n, 3), are within `reach` of the front.

    Returns
    -------
    rows : (m,) of x; s and distance : (m,) arc length and distance of these
    """
    samples, spacing = front.curve.samples()
    places, _, _ = front.curve.frames(samples)
    close = np.flatnonzero(within(x, places, reach + spacing))
    found, index = cKDTree(places).query(x[close], distance_upper_bound=reach + spacing)
    hit = np.isfinite(np.asarray(found))
    rows = close[hit]
    s, distance = front.curve.project(x[rows], samples[np.asarray(index)[hit]])
    inside = distance <= reach
    return rows[inside], s[inside], distance[inside]
