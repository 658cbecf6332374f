"""Nodal displacements from a table of their own, for a mesh that holds none.

The first line names the columns, which commas, semicolons, tabs or blanks separate; lines that
begin with # are passed over.  Columns: `node` (the mesh's node number) or `x`, `y`, `z` (its
undeformed coordinates); `ux`, `uy`, `uz` or three others of the usual names; and, where there
are several steps, `step` or `time`, a number.  Other columns are not read.
"""

from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from front3d.arrays import FloatArray, IntArray
from front3d.errors import ReadError
from front3d.reading.fields import DisplacementFinder, plain_name
from front3d.reading.raw import RawModel
from front3d.solid import Step

_NODE = ("node", "node_number", "node_id", "node_label", "nodeid", "nid", "number", "label", "id")
_PLACES = (("x", "y", "z"), ("x0", "y0", "z0"), ("x1", "x2", "x3"), ("coordx", "coordy", "coordz"))
_STEP = ("step", "time")
_HOW = "expected a first line such as node,ux,uy,uz or x,y,z,ux,uy,uz"
# Six digits are what programs print where nobody asks for more.
_DIGITS = 2e-6


def read_nodal_csv(path: Path, raw: RawModel, wanted: str | None) -> list[Step]:
    """Steps with the displacement of every node of `raw`, NaN where the table has none.

    Raises
    ------
    ReadError : the table cannot be read, or it cannot be told which node a row belongs to
    """
    try:
        columns = _table(path)
        rows = _nodes(columns, raw)
        return _steps(columns, rows, len(raw.points), wanted)
    except ReadError as error:
        raise ReadError(f"{path}: {error}") from None


def _all_numbers(words: list[str]) -> bool:
    try:
        np.array(words, float)
    except ValueError:
        return False
    return True


def _table(path: Path) -> dict[str, FloatArray]:
    try:
        text = path.read_text(encoding="utf-8-sig")
    except FileNotFoundError:
        raise ReadError("no such file; check the name and the directory") from None
    except UnicodeDecodeError:
        raise ReadError(f"found binary data, {_HOW}") from None
    except (OSError, ValueError) as error:
        raise ReadError(f"cannot be opened: {getattr(error, 'strerror', error)}") from None
    lines = [line for line in text.splitlines() if line.strip() and line.lstrip()[0] != "#"]
    if not lines:
        raise ReadError(f"the file is empty, {_HOW}")
    mark = next((m for m in ",;\t" if m in lines[0]), None)
    names = [plain_name(word) for word in lines[0].split(mark)]
    if _all_numbers(lines[0].split(mark)):
        raise ReadError(f"found numbers in its first line, {_HOW}")
    if len(set(names)) < len(names):
        raise ReadError(f"found the columns {', '.join(names)}, expected each name once")
    if len(lines) == 1:
        raise ReadError("found no line below the names of the columns, expected one per node")
    try:
        values = np.loadtxt(lines[1:], delimiter=mark, ndmin=2, comments=None)
    except ValueError as error:
        said = " ".join(str(error).split())[:200]
        raise ReadError(f"found something else than numbers below its first line: {said}") from None
    if values.shape[1] != len(names):
        raise ReadError(f"found {values.shape[1]} numbers in a row, expected {len(names)}; {_HOW}")
    return {name: values[:, k] for k, name in enumerate(names)}


def _nodes(columns: dict[str, FloatArray], raw: RawModel) -> IntArray:
    """(rows,) the point of each row."""
    named = [name for name in _NODE if name in columns]
    if named:
        return _by_number(columns[named[0]], raw)
    for names in _PLACES:
        if all(name in columns for name in names):
            return _by_place(np.stack([columns[name] for name in names], axis=1), raw)
    raise ReadError(f"found the columns {', '.join(columns)}, {_HOW}")


def _by_number(given: FloatArray, raw: RawModel) -> IntArray:
    numbers = np.where(np.isfinite(given) & (np.abs(given) < 2.0**53), given, -1).astype(np.int64)
    if (numbers != given).any():
        raise ReadError(f"found the node number {given[numbers != given][0]}, expected an integer")
    own = raw.node_numbers
    if own is None:
        n = len(raw.points)
        first = int(numbers.min())
        if (first, int(numbers.max())) not in ((0, n - 1), (1, n)):
            raise ReadError(
                f"found node numbers from {first} to {numbers.max()} for a mesh of {n} nodes "
                "without numbers of its own, expected them from 0 or from 1, without gaps at the "
                "ends; write all nodes, or use coordinates"
            )
        own = np.arange(n) + first
    order = np.argsort(own)
    place = np.minimum(np.searchsorted(own[order], numbers), len(own) - 1)
    rows = order[place]
    unknown = np.flatnonzero(own[rows] != numbers)
    if len(unknown):
        raise ReadError(
            f"names node {numbers[unknown[0]]}, which the mesh does not have ({len(unknown)} such "
            "rows); is it the table of this mesh?"
        )
    return rows


def _by_place(places: FloatArray, raw: RawModel) -> IntArray:
    from scipy.spatial import cKDTree

    used = np.flatnonzero(raw.used() & np.isfinite(raw.points).all(axis=1))
    points = np.asarray(raw.points[used], dtype=np.float64)
    if not np.isfinite(places).all() or not len(points):
        raise ReadError("found coordinates that are not finite, expected numbers")
    reach = max(_DIGITS * float(np.abs(points).max()), 4 * raw.point_spacing(raw.used()))
    found = cKDTree(points).query(places, k=2, distance_upper_bound=reach)
    distance, nearest = np.asarray(found[0]), np.asarray(found[1])
    # Rows of nodes that belong to no solid cell may stand in the table, too.
    double = np.flatnonzero(np.isfinite(distance[:, 1]))
    if len(double):
        raise ReadError(
            f"row {double[0] + 1} at {places[double[0]]} belongs to two nodes of the mesh "
            f"({len(double)} such rows), as on crack faces: coordinates cannot tell them apart; "
            "write node numbers"
        )
    if not np.isfinite(distance[:, 0]).any():
        raise ReadError(
            "none of its rows stands at a node of the mesh; are they undeformed coordinates in the "
            "unit of the mesh?"
        )
    return np.where(np.isfinite(distance[:, 0]), np.append(used, -1)[nearest[:, 0]], -1)


def _steps(
    columns: dict[str, FloatArray], rows: IntArray, n_points: int, wanted: str | None
) -> list[Step]:
    keys = {*_NODE, *(name for names in _PLACES for name in names), *_STEP}
    values = {name: column for name, column in columns.items() if name not in keys}
    frame = next((columns[name] for name in _STEP if name in columns), np.zeros(len(rows)))
    finder = DisplacementFinder(wanted)
    for moment in dict.fromkeys(frame.tolist()):
        here = np.flatnonzero((frame == moment) & (rows >= 0))
        if len(np.unique(rows[here])) < len(here):
            counts = np.bincount(rows[here])
            raise ReadError(
                f"found {counts.max()} rows of one node{_at(moment, frame)}, expected one for each "
                "node and step (a column step tells steps apart)"
            )
        arrays: dict[str, NDArray[Any]] = {}
        for name, column in values.items():
            arrays[name] = np.full(n_points, np.nan)
            arrays[name][rows[here]] = column[here]
        finder.offer(arrays, moment)
    return finder.steps(True)


def _at(moment: float, frame: FloatArray) -> str:
    return f" in step {moment:g}" if frame.any() else ""
