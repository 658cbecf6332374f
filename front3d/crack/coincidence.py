"""Distinct nodes at the same place, found in one pass over the nodes.

Crack faces of a finite-element model carry double nodes.  "The same place" is judged against the
shortest edge at each node, so graded meshes are safe, and never more finely than the coordinates
of the file resolve.
"""

from dataclasses import dataclass

import numpy as np
from scipy.sparse import coo_array
from scipy.sparse.csgraph import connected_components

from front3d.arrays import BoolArray, IntArray
from front3d.crack.facetable import cells_with
from front3d.errors import MeshError
from front3d.places import coincident_pairs, shortest_edges, tolerances
from front3d.solid import Solid

_MAX_SPACING = 0.05
"""Largest coordinate resolution, in edges, at which coincidence can still be judged."""


@dataclass(frozen=True, slots=True, eq=False)
class Coincidence:
    """Who stands where.

    Attributes
    ----------
    place : (n_points,) one number per place; nodes at the same place share it
    entity : (n_points,) like `place`, but nodes of one collapsed cell count as one node, and the
        two sides of a crack as two
    double : (n_points,) whether another entity stands at the node's place
    """

    place: IntArray
    entity: IntArray
    double: BoolArray


def find_coincidence(solid: Solid) -> Coincidence:
    """Group the nodes of a solid by place; MeshError if the coordinates are too coarse."""
    n = len(solid.points)
    shortest = np.full(n, np.inf)
    for block in solid.blocks:
        shortest_edges(solid.points, block.nodes, block.element.edges, shortest)
    least, spacing = shortest.min(initial=np.inf), solid.point_spacing
    if least * _MAX_SPACING < spacing:
        node = int(np.argmin(shortest))
        raise MeshError(
            f"{solid.source}: the coordinates are stored to {spacing:.3g} only, but the edges at "
            f"node {node} are {shortest[node]:.3g} long; store them in double precision, or move "
            "the model nearer to the origin"
        )
    if not np.isfinite(least):
        return Coincidence(np.arange(n), np.arange(n), np.zeros(n, bool))
    first, second = coincident_pairs(solid.points, tolerances(shortest, spacing))
    del shortest
    place = _components(n, first, second)
    first, second = _pairs_inside_cells(solid, place, first, second)
    entity = _components(n, first, second)
    return Coincidence(place, entity, _several_entities(place, entity))


def _components(n: int, first: IntArray, second: IntArray) -> IntArray:
    """Smallest node number of the group each node belongs to."""
    out = np.arange(n)
    if not len(first):
        return out
    nodes, row = np.unique(np.concatenate([first, second]), return_inverse=True)
    ends = row.reshape(2, -1)
    graph = coo_array((np.ones(len(first), np.int8), (ends[0], ends[1])), shape=(len(nodes),) * 2)
    count, label = connected_components(graph, directed=False)
    smallest = np.full(count, n)
    np.minimum.at(smallest, label, nodes)
    out[nodes] = smallest[label]
    return out


def _several_entities(place: IntArray, entity: IntArray) -> BoolArray:
    """(n_points,) whether the place of a node holds more than one entity.

    A place is named by one of its entities, so it has several when another one is of it.
    """
    shared = np.zeros(len(place), bool)
    shared[place[entity != place]] = True
    return shared[place]


def _pairs_inside_cells(
    solid: Solid, place: IntArray, first: IntArray, second: IntArray
) -> tuple[IntArray, IntArray]:
    """Pairs of coincident nodes that belong to one cell: a collapsed edge or face, not a crack."""
    crowded = np.zeros(len(place), bool)
    crowded[first] = crowded[second] = True
    pairs: list[IntArray] = []
    for block, holding in zip(solid.blocks, cells_with(solid, crowded), strict=True):
        cells = block.nodes[holding]
        cells = cells[crowded[cells].sum(axis=1) > 1]
        where = place[cells]
        order = np.argsort(where, axis=1, kind="stable")
        where = np.take_along_axis(where, order, axis=1)
        nodes = np.take_along_axis(cells, order, axis=1)
        same = (where[:, 1:] == where[:, :-1]) & (nodes[:, 1:] != nodes[:, :-1])
        pairs.append(np.stack([nodes[:, :-1][same], nodes[:, 1:][same]], axis=1))
    found = np.concatenate(pairs) if pairs else np.zeros((0, 2), np.int64)
    return found[:, 0], found[:, 1]
