"""Joining a solid that was written in pieces, whose border nodes are doubled.

Doubled nodes look like a crack, and crack faces are doubled nodes: joined must be what is one node,
and nothing else.  Nodes of one piece are never joined.  Between pieces, global node numbers
decide; without them, nodes are one if they stand at the same place and move alike in every step.
"""

from dataclasses import replace

import numpy as np

from front3d.arrays import BoolArray, IntArray
from front3d.errors import ReadError
from front3d.reading.raw import RawBlock, RawModel, merged
from front3d.solid import Step

# Parts of the largest displacement by which copies of one node may differ: single precision.
_ALIKE = 1e-6
_NUMBERS = "write the pieces with global node numbers (GlobalNodeIds), or as one file"


def concatenated(models: list[RawModel]) -> RawModel:
    """One model of several pieces; `pieces` says where each point comes from."""
    if len(models) == 1:
        return models[0]
    starts = np.cumsum([0, *(len(m.points) for m in models)])
    numbers = np.cumsum([0, *(sum(len(b.nodes) for b in m.blocks) for m in models)])
    whole = RawModel(
        np.concatenate([m.points for m in models]),
        merged(
            [
                RawBlock(b.kind, b.nodes + start, b.numbers + number)
                for m, start, number in zip(models, starts, numbers, strict=False)
                for b in m.blocks
            ]
        ),
        notes=[note for m in models for note in m.notes],
    )
    for m in models:
        whole.ignored += m.ignored
        whole.refused += m.refused
    whole.pieces = np.repeat(np.arange(len(models)), np.diff(starts))
    ids = [m.global_ids for m in models]
    if all(i is not None for i in ids):
        whole.global_ids = np.concatenate(ids)  # type: ignore[arg-type]
    return whole


def join_pieces(raw: RawModel, steps: list[Step]) -> tuple[RawModel, list[Step]]:
    """The model and its steps with the border nodes of the pieces joined.

    Parameters
    ----------
    raw : a checked model; returned as it is if it has one piece
    steps : displacements of all points of `raw`

    Raises
    ------
    ReadError : it cannot be told which nodes are one
    """
    if raw.pieces is None:
        return raw, steps
    used = raw.used()
    if not np.isfinite(raw.points[used]).all():
        return raw, steps  # refused by what comes after
    names = _by_numbers(raw, used)
    how = "by their global numbers"
    if names is None:
        names, how = _by_place(raw, used, steps), "where they stand and move alike"
    _, keep, row = np.unique(names, return_index=True, return_inverse=True)
    row = row.ravel()
    joined = replace(
        raw,
        points=raw.points[keep],
        blocks=[RawBlock(b.kind, row[b.nodes], b.numbers) for b in raw.blocks],
        pieces=None,
        global_ids=None,
    )
    joined.notes = [
        *raw.notes,
        f"{len(row) - len(keep)} border nodes of {int(raw.pieces.max()) + 1} pieces joined {how}",
    ]
    return joined, [
        Step(
            s.name,
            s.displacement[keep],
            s.time,
            {name: values[keep] for name, values in s.point_arrays.items()},
        )
        for s in steps
    ]


def _by_numbers(raw: RawModel, used: BoolArray) -> IntArray | None:
    """A name per point from the global numbers; None if they cannot be what they say."""
    if raw.global_ids is None or raw.pieces is None:
        return None
    ids = raw.global_ids.astype(np.int64)
    order = np.lexsort((raw.pieces, ids))
    follows = ids[order][1:] == ids[order][:-1]
    first, second = order[:-1][follows], order[1:][follows]
    apart = np.abs(raw.points[first] - raw.points[second]).max(axis=1) > _reach(raw, used)
    if (raw.pieces[first] == raw.pieces[second]).any() or apart[used[first] & used[second]].any():
        return None
    return ids


def _by_place(raw: RawModel, used: BoolArray, steps: list[Step]) -> IntArray:
    from scipy.sparse import coo_array
    from scipy.sparse.csgraph import connected_components
    from scipy.spatial import cKDTree

    assert raw.pieces is not None
    if not steps:
        raise ReadError(
            "the solid comes in pieces without global node numbers and without displacements: "
            f"borders of the pieces cannot be told from crack faces; {_NUMBERS}"
        )
    rows = np.flatnonzero(used)
    pairs = cKDTree(raw.points[rows]).query_pairs(_reach(raw, used), output_type="ndarray")
    first, second = rows[pairs[:, 0]], rows[pairs[:, 1]]
    across = raw.pieces[first] != raw.pieces[second]
    first, second = first[across], second[across]
    # 0 where the copies move exactly alike, up to 1 where they are alike in single precision.
    unlike = np.zeros(len(first))
    for step in steps:
        u = step.displacement
        far = np.abs(u[first] - u[second]).max(axis=1, initial=0.0)
        limit = _ALIKE * float(np.abs(u[used]).max())
        unlike = np.maximum(unlike, np.where(far > 0, far / max(limit, 1e-300), 0.0))
    for limit in (1.0, 0.0):
        one = unlike <= limit
        ends = (first[one], second[one])
        graph = coo_array((np.ones(one.sum()), ends), shape=(len(used), len(used)))
        names = connected_components(graph, directed=False)[1].astype(np.int64)
        taken = np.stack([names[rows], raw.pieces[rows]])
        if len(np.unique(taken, axis=1).T) == len(rows):
            return names
    raise ReadError(
        "the solid comes in pieces without global node numbers, and two nodes of one piece stand "
        "and move like one node of another: borders of the pieces cannot be told from crack "
        f"faces; {_NUMBERS}"
    )


def _reach(raw: RawModel, used: BoolArray) -> float:
    """Distance within which two nodes stand at one place."""
    points = raw.points[used]
    extent = float((points.max(axis=0) - points.min(axis=0)).max())
    return max(1e-9 * extent, 4 * raw.point_spacing(used))
