"""Openings for closure where bricks and wedges stand in columns across the front.

Every station then has one edge ahead and one behind in the crack plane, and the rows of nodes run
along the front.  Sources: see `closure_formulas`.
"""

from dataclasses import dataclass

import numpy as np

from front3d.arrays import FloatArray, IntArray
from front3d.crack.facetable import FaceTable
from front3d.crack.front import Front
from front3d.methods.closure_forces import Ligament, face_nodes, mode_axes
from front3d.methods.closure_formulas import mirrored_openings
from front3d.methods.context import FrontContext

NOT_COUNTED = 2
"""Row of the nodes whose opening is zero once the crack is closed by one face."""


@dataclass(frozen=True, slots=True, eq=False)
class Columns:
    """The edges ahead of and behind each station.

    Attributes
    ----------
    ahead, behind : (n_stations, 2) mid-side node (-1 if none) and far corner
    """

    ahead: IntArray
    behind: IntArray


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
    return Columns(*sides)


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
    entity = context.model.same.entity
    place, axes = mode_axes(front, front.corner_s)
    n = len(front.corners)
    openings = np.empty((len(jump), n, 2, 3))
    fars = np.empty((len(jump), n, 3))
    for station in range(n):
        (length_a, middle_a), (length_b, middle_b) = (
            length_and_middle(context, place[station], nodes[station])
            for nodes in (columns.ahead, columns.behind)
        )
        at_far = jump[:, entity[columns.behind[station, 1]]] @ axes[station].T
        at_middle = (
            None
            if middle_b is None
            else jump[:, entity[columns.behind[station, 0]]] @ axes[station].T
        )
        first, second = mirrored_openings(at_middle, at_far, length_a, length_b, middle_a, middle_b)
        openings[:, station, 0], openings[:, station, 1] = first, second
        fars[:, station] = at_far
    return openings, fars


def length_and_middle(
    context: FrontContext, station: FloatArray, nodes: IntArray
) -> tuple[float, float | None]:
    """Length of an edge across the front, and where on it the mid-side node lies."""
    x = context.solid.points
    length = float(np.linalg.norm(x[nodes[1]] - station))
    if nodes[0] < 0:
        return length, None
    return length, float(np.linalg.norm(x[nodes[0]] - station)) / length
