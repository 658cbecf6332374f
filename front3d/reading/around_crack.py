"""Large solids in pieces: of each piece only the cells around the crack are kept.

The pieces are read one at a time, three times over: for the places of the nodes, which show where
two of them coincide; for the size of the cells there; and for the cells around.  So memory holds
one piece, the places of all nodes, and what is kept.  The cut through the solid is an outer surface
like others, and far enough from the crack to play no part.
"""

from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from front3d.arrays import BoolArray, FloatArray, frozen_floats
from front3d.elements import ELEMENTS
from front3d.places import (
    RELATIVE_TOLERANCE,
    coincident_pairs,
    rows_holding,
    shortest_edges,
    tolerances,
    within,
)
from front3d.reading.raw import RawBlock, RawModel
from front3d.reading.vtk_grid import cell_arrays, point_arrays, to_model

LARGE = 2_000_000
"""Points of all pieces together from which on the cells around the crack are enough: smaller solids
fit into memory whole, and their pictures show them whole."""

SPAN = 8.0
"""How far from the crack cells are kept, in sizes of the largest cell at it: rings reach some five
from the front."""

_SPARSE = 4
"""Largest global number, in numbers of points, up to which an array over all numbers is made."""

Piece = Callable[[], Any]


@dataclass(frozen=True, slots=True, eq=False)
class Kept:
    """What is left of a piece: its model, its point arrays and its cell arrays."""

    model: RawModel
    points: Mapping[str, NDArray[Any]]
    cells: Mapping[str, NDArray[Any]]


def around_crack(pieces: list[Piece], source: Any) -> tuple[list[Kept], str] | None:
    """What to keep of pieces, and a sentence on it; None where they are better read whole.

    That is where they are few or small, bear no global node numbers, or have no coincident nodes,
    as a half model of a crack has none.
    """
    places = _places(pieces, source)
    if places is None:
        return None
    points, shortest = places
    spacing = 0.0 if points.dtype == np.float64 else float(np.spacing(np.nanmax(np.abs(points))))
    points = points.astype(np.float64, copy=False)
    tolerance = tolerances(shortest, spacing)
    if not tolerance.max() > 0.0:
        return None
    first, second = coincident_pairs(frozen_floats(points), tolerance)
    del shortest, tolerance
    if not len(first):
        return None
    at_crack = np.zeros(len(points), bool)
    at_crack[first] = at_crack[second] = True
    reach = SPAN * max(_size_at(model, at_crack) for model in _models(pieces, source))
    near = within(points, points[at_crack], reach)
    del points
    kept = [_reduced(piece(), near, source) for piece in pieces]
    kept = [part for part in kept if part.model.blocks]
    cells = sum(len(block.nodes) for part in kept for block in part.model.blocks)
    return kept, (
        f"read piece by piece: only the {cells} cells within {reach:.3g} of coincident nodes were "
        "kept, and pictures and numbers of nodes and cells are of these"
    )


def _models(pieces: list[Piece], source: Any) -> Iterator[RawModel]:
    for piece in pieces:
        yield to_model(piece(), source)


def _places(pieces: list[Piece], source: Any) -> tuple[NDArray[Any], FloatArray] | None:
    """Coordinates and shortest edges by global number; None where that cannot be."""
    ids, points, edges = [], [], []
    for model in _models(pieces, source):
        if model.global_ids is None or model.points.ndim != 2 or model.points.shape[1] != 3:
            return None
        ids.append(np.array(model.global_ids, np.int64))
        points.append(np.array(model.points))
        shortest = np.full(len(model.points), np.inf)
        x = np.ascontiguousarray(model.points, np.float64)
        for block in model.blocks:
            nodes = np.ascontiguousarray(block.nodes, np.int64)
            x.flags.writeable = nodes.flags.writeable = False
            shortest_edges(x, nodes, ELEMENTS[block.kind].edges, shortest)
        edges.append(shortest)
    total = sum(len(i) for i in ids)
    numbers = max(int(i.max(initial=0)) for i in ids) + 1
    if total < LARGE or numbers > _SPARSE * total or min(int(i.min(initial=0)) for i in ids) < 0:
        return None
    places = np.full((numbers, 3), np.nan, points[0].dtype)
    shortest = np.full(numbers, np.inf)
    while ids:
        own, x, size = ids.pop(), points.pop(), edges.pop()
        if len(np.unique(own)) < len(own) or _moved(places[own], x, size):
            return None  # no numbers that name nodes
        places[own] = x
        shortest[own] = np.minimum(shortest[own], size)
    return places, shortest


def _moved(known: NDArray[Any], new: NDArray[Any], size: FloatArray) -> bool:
    """Whether a node stands elsewhere than in a piece before."""
    there = np.isfinite(known).all(axis=1) & np.isfinite(size)
    apart = np.abs(known[there] - new[there]).max(axis=1)
    return bool((apart > RELATIVE_TOLERANCE * size[there]).any())


def _size_at(model: RawModel, marked: BoolArray) -> float:
    """Size of the largest cell that holds a marked node."""
    assert model.global_ids is not None
    mine, largest = marked[model.global_ids], 0.0
    for block in model.blocks:
        corners = block.nodes[rows_holding(block.nodes, mine)][:, : ELEMENTS[block.kind].n_corners]
        if len(corners):
            x = np.asarray(model.points[corners], np.float64)
            extent = x.max(axis=1) - x.min(axis=1)
            largest = max(largest, float(np.linalg.norm(extent, axis=1).max()))
    return largest


def _reduced(grids: list[Any], near: BoolArray, source: Any) -> Kept:
    """A piece without the cells that hold no near node."""
    model = to_model(grids, source)
    assert model.global_ids is not None
    mine = near[model.global_ids]
    used = np.zeros(len(model.points), bool)
    rows = [rows_holding(block.nodes, mine) for block in model.blocks]
    for block, chosen in zip(model.blocks, rows, strict=True):
        used[block.nodes[chosen]] = True
    nodes, new = np.flatnonzero(used), np.cumsum(used) - 1
    blocks, numbers, count = [], [], 0
    for block, chosen in zip(model.blocks, rows, strict=True):
        if len(chosen):
            own = count + np.arange(len(chosen))
            blocks.append(RawBlock(block.kind, new[block.nodes[chosen]], own))
            numbers.append(block.numbers[chosen])
            count += len(chosen)
    chosen_cells = np.concatenate(numbers) if numbers else np.zeros(0, np.int64)
    small = RawModel(np.array(model.points[nodes]), blocks, model.ignored, model.refused,
                     global_ids=model.global_ids[nodes])  # fmt: skip
    return Kept(
        small,
        {name: values[nodes] for name, values in point_arrays(grids).items()},
        {name: values[chosen_cells] for name, values in cell_arrays(grids).items()},
    )


def joined(parts: list[Mapping[str, NDArray[Any]]]) -> dict[str, NDArray[Any]]:
    """Arrays that all parts have alike, one after the other."""
    return {
        name: np.concatenate([part[name] for part in parts])
        for name in parts[0]
        if all(name in part for part in parts)
        and len({(part[name].shape[1:], part[name].dtype) for part in parts}) == 1
    }
