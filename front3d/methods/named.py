"""Values of the arrays that loads name, at nodes and at cells."""

import numpy as np

from front3d.arrays import FloatArray, IntArray
from front3d.crack.facetable import cells_with
from front3d.crack.patches import marked
from front3d.errors import CaseError
from front3d.solid import Solid, Step

_RIDGE = 1e-4
"""Weight that keeps the slope of a fit small where centroids do not settle it."""


def at_nodes(
    solid: Solid, step: Step, name: str, nodes: IntArray, components: tuple[int, ...]
) -> FloatArray:
    """(len(nodes), components) of a point array, or of a cell array carried to the nodes.

    CaseError where there is no such array, or it has other components or no finite values.
    """
    values = step.point_arrays.get(name)
    if values is not None:
        found = values[nodes]
    elif name in step.cell_arrays:
        unique, row = np.unique(nodes, return_inverse=True)
        found = _from_cells(solid, step.cell_arrays[name], unique)[row]
    else:
        raise _missing(solid, step, name)
    _check(solid, step, name, found, components)
    return found


def at_cells(
    solid: Solid, step: Step, name: str, block: int, cells: IntArray, components: tuple[int, ...]
) -> FloatArray | None:
    """(len(cells), components) of a cell array; None if it is a point array."""
    if name in step.point_arrays:
        return None
    if name not in step.cell_arrays:
        raise _missing(solid, step, name)
    found = step.cell_arrays[name][block][cells]
    _check(solid, step, name, found, components)
    return found


def _missing(solid: Solid, step: Step, name: str) -> CaseError:
    there = ", ".join([*step.point_arrays, *step.cell_arrays]) or "none"
    return CaseError(
        f"{solid.source}: step {step.name} has no array {name!r} by point or by cell; check the "
        f"name and its capitals (read were: {there}; from Python, load(.., arrays=[..]) reads them)"
    )


def _check(
    solid: Solid, step: Step, name: str, values: FloatArray, components: tuple[int, ...]
) -> None:
    if values.shape[1] not in components:
        expected = " or ".join(map(str, components))
        raise CaseError(
            f"{solid.source}: array {name!r} has {values.shape[1]} components, expected {expected}"
        )
    bad = int((~np.isfinite(values).all(axis=1)).sum())
    if bad:
        raise CaseError(
            f"{solid.source}: array {name!r} of step {step.name} has {bad} values near the front "
            "that are not finite numbers, expected one everywhere"
        )


def _from_cells(solid: Solid, parts: tuple[FloatArray, ...], nodes: IntArray) -> FloatArray:
    """At different nodes: a plane fitted to the values at the centroids of the cells around each.

    Exact for a field that varies linearly where a node has four cells or more around it in general
    position; a mean where the cells do not tell the slope.  The two faces of a crack have nodes of
    their own, and so values of their own.
    """
    inside = marked(len(solid.points), nodes)
    row = np.full(len(solid.points), -1)
    row[nodes] = np.arange(len(nodes))
    width = parts[0].shape[1]
    at, offset, values = [], [], []
    around = cells_with(solid, inside)
    for block, part, cells in zip(solid.blocks, parts, around, strict=True):
        members = block.nodes[cells]
        centre = solid.points[members].mean(axis=1)
        cell, place = np.nonzero(inside[members])
        node = members[cell, place]
        at.append(row[node])
        offset.append(centre[cell] - solid.points[node])
        values.append(part[cells][cell])
    where, d, v = np.concatenate(at), np.concatenate(offset), np.concatenate(values)
    n = len(nodes)
    size = np.sqrt(np.bincount(where, (d * d).sum(axis=1), n) / np.bincount(where, minlength=n))
    basis = np.column_stack([np.ones(len(d)), d / size[where][:, None]])
    matrix, right = np.zeros((n, 4, 4)), np.zeros((n, 4, width))
    np.add.at(matrix, where, basis[:, :, None] * basis[:, None, :])
    np.add.at(right, where, basis[:, :, None] * v[:, None, :])
    matrix[:, [1, 2, 3], [1, 2, 3]] += _RIDGE
    return np.asarray(np.linalg.solve(matrix, right)[:, 0], dtype=np.float64)
