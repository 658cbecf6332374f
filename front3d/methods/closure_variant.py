"""Which form of closure a front got from its mesh, in a few words, and what to beware of in it."""

import numpy as np

from front3d.arrays import FloatArray, IntArray
from front3d.crack.cells import QUARTER
from front3d.elements import ELEMENTS
from front3d.methods.closure_columns import Columns, length_and_middle
from front3d.methods.closure_forces import Ligament
from front3d.methods.context import FrontContext

UNEQUAL = 1.2
"""Ratio of the lengths ahead and behind that is worth a word."""

_FAMILIES = {
    "tetra": "tetrahedra",
    "hexahedron": "bricks",
    "wedge": "wedges",
    "pyramid": "pyramids",
}


def variant_name(context: FrontContext, ligament: Ligament, columns: Columns | None) -> str:
    """E.g. "20-node bricks, quarter-points"; the cells are those above the faces ahead."""
    cells = _cells(context, ligament)
    if columns is None:
        return f"{cells}, faces of any shape"
    if (columns.ahead[:, 0] < 0).all():
        return cells
    _, middle = _places(context, columns.ahead)
    quarter = np.nanmean(middle) < QUARTER
    return f"{cells}, {'quarter-points' if quarter else 'mid-side nodes'}"


def column_notes(context: FrontContext, columns: Columns) -> tuple[str, ...]:
    """A word on lengths that differ ahead and behind: with quarter-points the opening is carried
    over exactly, with other cells only nearly.
    """
    ahead, middle = _places(context, columns.ahead)
    behind, _ = _places(context, columns.behind)
    ratio = float(np.maximum(ahead / behind, behind / ahead).max())
    quarter = not np.isnan(middle).all() and np.nanmean(middle) < QUARTER
    if quarter or ratio <= UNEQUAL:
        return ()
    return (
        f"closure: cells ahead of and behind the front differ in length by up to {ratio:.2g} "
        "times; without quarter-points the law that makes up for it leaves up to 2 % of K at a "
        "ratio of 2",
    )


def _cells(context: FrontContext, ligament: Ligament) -> str:
    """The types of the cells above the faces ahead, the most frequent first."""
    ahead, solid = ligament.ahead, context.solid
    count: dict[str, int] = {}
    for b in np.unique(ahead.block):
        cells = np.unique(ahead.cell[ahead.block == b])
        nodes = context.model.same.entity[solid.blocks[b].nodes[cells]]
        collapsed = (np.diff(np.sort(nodes, axis=1), axis=1) == 0).any(axis=1)
        for folded in np.unique(collapsed):
            name = _type_name(solid.blocks[b].kind, bool(folded))
            count[name] = count.get(name, 0) + int((collapsed == folded).sum())
    return " and ".join(sorted(count, key=lambda name: -count[name]))


def _type_name(kind: str, collapsed: bool) -> str:
    element = ELEMENTS[kind]
    name = f"{len(element.nodes)}-node {_FAMILIES[element.family]}"
    return f"collapsed {name}" if collapsed else name


def _places(context: FrontContext, nodes: IntArray) -> tuple[FloatArray, FloatArray]:
    """Lengths of the edges across the front, and where on them the mid-side nodes lie, in parts of
    the length; NaN on linear cells.
    """
    place, _, _ = context.front.curve.frames(context.front.corner_s)
    found = [length_and_middle(context, place[k], nodes[k]) for k in range(len(place))]
    middle = [np.nan if m is None else m for _, m in found]
    return np.array([length for length, _ in found]), np.array(middle)
