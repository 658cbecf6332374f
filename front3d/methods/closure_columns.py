"""Openings for closure where bricks and wedges stand in columns across the front.

Every station then has one edge ahead and one behind in the crack plane, and the rows of nodes run
along the front.  Sources: see `closure_formulas`.
"""

from dataclasses import dataclass

import numpy as np

from front3d.arrays import FloatArray, IntArray
from front3d.crack.cells import QUARTER
from front3d.crack.facetable import FaceTable
from front3d.crack.front import Front
from front3d.methods.closure_forces import Ligament, face_nodes, mode_axes
from front3d.methods.closure_formulas import (
    USUAL_RISE,
    length_powers,
    mirrored_openings,
    rise,
)
from front3d.methods.context import FrontContext

STRAIGHT = 0.9
"""Smallest cosine of the turn between two edges behind the front that count as one line."""

NOT_COUNTED = 2
"""Row of the nodes whose opening is zero once the crack is closed by one face."""


@dataclass(frozen=True, slots=True, eq=False)
class Columns:
    """The edges ahead of and behind each station.

    Attributes
    ----------
    ahead, behind : (n_stations, 2) mid-side node (-1 if none) and far corner
    beyond : (n_stations,) far corner of the next edge behind, -1 where there is none
    """

    ahead: IntArray
    behind: IntArray
    beyond: IntArray


def find_columns(context: FrontContext, ligament: Ligament) -> Columns | None:
    """Columns of nodes across the front; None where the faces at it do not stand in columns."""
    sides = []
    for faces in (ligament.ahead, ligament.behind):
        corners = context.model.same.entity[faces.corners]
        square = (np.diff(np.sort(corners, axis=1), axis=1) != 0).all(axis=1)
        two = ligament.on_front[faces.corners].sum(axis=1) == 2
        if not (square & two).all():
            return None
        columns = _edges_across(context, ligament, faces)
        if columns is None:
            return None
        sides.append(columns)
    ahead, behind = sides
    return Columns(ahead, behind, _next_behind(context, ligament, behind))


def _edges_across(context: FrontContext, ligament: Ligament, faces: FaceTable) -> IntArray | None:
    """(n_stations, 2) middle and far node of the face edge that leaves the front at each station;
    None where a station has no such edge or several.
    """
    entity = context.model.same.entity
    ends = faces.sides()[0].reshape(-1, 3)
    both = np.concatenate([ends, ends[:, [1, 0, 2]]])
    leaving = both[ligament.on_front[both[:, 0]] & ~ligament.on_front[both[:, 1]]]
    start, far = entity[leaving[:, 0]], entity[leaving[:, 1]]
    _, first = np.unique(np.stack([start, far], axis=1), axis=0, return_index=True)
    start, leaving = start[first], leaving[first]
    stations = entity[context.front.corners]
    if len(start) != len(stations) or not np.array_equal(np.sort(start), np.sort(stations)):
        return None
    row = np.argsort(start)[np.argsort(np.argsort(stations))]
    return leaving[row][:, [2, 1]]


def _next_behind(context: FrontContext, ligament: Ligament, behind: IntArray) -> IntArray:
    """(n_stations,) node at the end of the crack-face edge that goes straight on from the far
    corner behind each station; -1 where none does.
    """
    entity, x = context.model.same.entity, context.solid.points
    stations, far = context.front.corners, behind[:, 1]
    ends = context.patch.upper.sides()[0].reshape(-1, 3)[:, :2]
    both = np.concatenate([ends, ends[:, ::-1]])
    passed = np.unique(entity[ligament.behind.corners])
    both = both[np.isin(entity[both[:, 0]], entity[far]) & ~np.isin(entity[both[:, 1]], passed)]
    start = entity[both[:, 0]]
    order = np.argsort(start, kind="stable")
    first = np.searchsorted(start[order], entity[far], "left")
    last = np.searchsorted(start[order], entity[far], "right")
    out = np.full(len(stations), -1)
    for k in range(len(stations)):
        candidates = both[order[first[k] : last[k]], 1]
        if not len(candidates):
            continue
        on, off = x[candidates] - x[far[k]], x[far[k]] - x[stations[k]]
        straight = on @ off / (np.linalg.norm(on, axis=1) * np.linalg.norm(off))
        if straight.max() > STRAIGHT:
            out[k] = candidates[np.argmax(straight)]
    return out


def rows_of_nodes(context: FrontContext, ligament: Ligament, columns: Columns) -> IntArray:
    """(n_points,) row of every node of the faces ahead: 0 on the front, 1 of mid-side nodes, and
    NOT_COUNTED elsewhere.
    """
    entity = context.model.same.entity
    row = np.full(len(entity), NOT_COUNTED)
    for kind, nodes in face_nodes(context.solid, ligament.ahead):
        if kind == "quad9":
            row[nodes[:, 8]] = 1
    middles = columns.ahead[:, 0]
    row[middles[middles >= 0]] = 1
    row[ligament.on_front] = 0
    return row


def column_openings(
    context: FrontContext, front: Front, columns: Columns, jump: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Openings that the forces of each row do work on.

    Returns
    -------
    openings : (steps, n_stations, 2, 3) for rows 0 and 1, along the axes of the modes
    far : (steps, n_stations, 3) the opening itself at the far corner behind
    """
    place, axes = mode_axes(front, front.corner_s)
    n = len(front.corners)
    at_far = _along_modes(context, columns.behind[:, 1], axes, jump)
    at_middle = _along_modes(context, columns.behind[:, 0], axes, jump)
    ahead, behind = (
        [length_and_middle(context, place[k], nodes[k]) for k in range(n)]
        for nodes in (columns.ahead, columns.behind)
    )
    within, over = _rises(context, columns, axes, jump, behind)
    openings = np.empty((len(jump), n, 2, 3))
    for k, ((length_a, middle_a), (length_b, middle_b)) in enumerate(
        zip(ahead, behind, strict=True)
    ):
        powers: FloatArray | float = 0.5
        if middle_a is None or middle_a >= QUARTER:
            order = 1 if middle_a is None else 2
            powers = length_powers(order, length_a / length_b, within, over)
        openings[:, k, 0], openings[:, k, 1] = mirrored_openings(
            None if middle_b is None else at_middle[:, k],
            at_far[:, k], length_a, length_b, middle_a, middle_b, powers,
        )  # fmt: skip
    return openings, at_far


def _along_modes(
    context: FrontContext, nodes: IntArray, axes: FloatArray, jump: FloatArray
) -> FloatArray:
    """(steps, n_stations, 3) openings at one node per station, along the axes of the modes."""
    at = jump[:, context.model.same.entity[nodes]]
    local: FloatArray = np.einsum("tnk,nik->tni", at, axes)
    return local


def _rises(
    context: FrontContext,
    columns: Columns,
    axes: FloatArray,
    jump: FloatArray,
    behind: list[tuple[float, float | None]],
) -> tuple[FloatArray, FloatArray]:
    """(steps, 3) `rise` of the opening within the first cells behind, and over the first two."""
    x, (middle, far), beyond = context.solid.points, columns.behind.T, columns.beyond
    length = np.array([edge for edge, _ in behind])
    at = {
        name: _along_modes(context, nodes, axes, jump)
        for name, nodes in (("middle", middle), ("far", far), ("beyond", beyond))
    }
    found = []
    inner = np.array([1.0 if part is None else part for _, part in behind])
    outer = 1.0 + np.linalg.norm(x[beyond] - x[far], axis=1) / length
    for near, further, ratio, chosen, usual in (
        ("middle", "far", 1.0 / inner, middle >= 0, USUAL_RISE[0]),
        ("far", "beyond", outer, beyond >= 0, USUAL_RISE[1]),
    ):
        if not chosen.any():
            found.append(np.broadcast_to(usual, (len(jump), 3)))
            continue
        pairs = at[near][:, chosen], at[further][:, chosen]
        found.append(rise(*pairs, ratio[chosen], np.array(usual)))
    return found[0], found[1]


def length_and_middle(
    context: FrontContext, station: FloatArray, nodes: IntArray
) -> tuple[float, float | None]:
    """Length of an edge across the front, and where on it the mid-side node lies."""
    x = context.solid.points
    length = float(np.linalg.norm(x[nodes[1]] - station))
    if nodes[0] < 0:
        return length, None
    return length, float(np.linalg.norm(x[nodes[0]] - station)) / length
