"""From the linear element on the corner nodes to all nodes."""

import numpy as np
from scipy.sparse import csr_array

from front3d.elements import ELEMENTS, ElementType
from front3d.solid import Solid


def linear_interpolation(solid: Solid) -> csr_array:
    """Matrix, (nodes, corner nodes), from values at corner nodes to values at all nodes.

    A mid-side node takes the mean of its edge, other nodes the mean of their face or body, as
    the linear element on the same corners does.
    """
    n = len(solid.points)
    is_corner = np.zeros(n, dtype=bool)
    for block in solid.blocks:
        is_corner[block.nodes[:, : block.element.n_corners]] = True
    corners = np.flatnonzero(is_corner)
    number = np.cumsum(is_corner) - 1
    rows, columns, values = [corners], [number[corners]], [np.ones(len(corners))]
    seen = is_corner.copy()
    for block in solid.blocks:
        for local, weights in _interior_weights(block.element):
            node = block.nodes[:, local]
            fresh, first = np.unique(node, return_index=True)
            first = first[~seen[fresh]]
            seen[node[first]] = True
            for corner, weight in weights:
                rows.append(node[first])
                columns.append(number[block.nodes[first, corner]])
                values.append(np.full(len(first), weight))
    return csr_array(
        (np.concatenate(values), (np.concatenate(rows), np.concatenate(columns))),
        shape=(n, len(corners)),
    )


def _interior_weights(element: ElementType) -> list[tuple[int, list[tuple[int, float]]]]:
    base = ELEMENTS[element.family]  # linear types are called as their family
    out = []
    for local in range(element.n_corners, len(element.nodes)):
        shape = base.values(element.nodes[local : local + 1])[0]
        used = np.flatnonzero(np.abs(shape) > 1e-12)
        out.append((local, [(int(k), float(shape[k])) for k in used]))
    return out
