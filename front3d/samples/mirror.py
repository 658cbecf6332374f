"""A solid made of a part and its reflections, and how loads split into symmetric classes.

The solid is unfolded from the part, plane by plane.  A load on it is a sum of classes that are
each symmetric or antisymmetric about every plane, and each class is a problem on the part alone.
"""

from collections.abc import Iterator
from dataclasses import dataclass
from itertools import product

import numpy as np

from front3d.arrays import BoolArray, FloatArray, IntArray
from front3d.elements import ELEMENTS
from front3d.solid import CellBlock, Solid


@dataclass(frozen=True, slots=True, eq=False)
class Plane:
    """The symmetry plane through the origin normal to a coordinate axis.

    `shared`, (n,), marks the nodes of the part that it has in common with its image.  Nodes in
    the plane that are not shared are doubled: they become a crack.
    """

    axis: int
    shared: BoolArray


@dataclass(frozen=True, slots=True, eq=False)
class Unfolded:
    """A solid, and the part it was unfolded from.

    Attributes
    ----------
    part : the part
    planes : the planes, in the order of unfolding
    solid : the whole
    source : (n_points,) the node of the part behind each node of the solid
    signs : (n_points, 3) -1 for each coordinate in which the node was reflected, else 1
    """

    part: Solid
    planes: tuple[Plane, ...]
    solid: Solid
    source: IntArray
    signs: FloatArray


def unfold(part: Solid, planes: tuple[Plane, ...], name: str) -> Unfolded:
    """Reflect `part` in each plane in turn; the cells keep a positive orientation."""
    points, blocks = part.points, part.blocks
    source = np.arange(len(points))
    signs = np.ones((len(points), 3))
    for plane in planes:
        n = len(points)
        shared = plane.shared[source]
        image = np.full(n, -1)
        image[shared] = np.flatnonzero(shared)
        image[~shared] = n + np.arange(n - shared.sum())
        flip = np.ones(3)
        flip[plane.axis] = -1.0
        points = np.concatenate([points, points[~shared] * flip + 0.0])  # + 0.0: no -0.0
        signs = np.concatenate([signs, signs[~shared] * flip])
        source = np.concatenate([source, source[~shared]])
        blocks = tuple(
            CellBlock(b.kind, np.concatenate([b.nodes, image[b.nodes[:, mirror_order(b.kind)]]]))
            for b in blocks
        )
    return Unfolded(part, planes, Solid(points, blocks, source=name), source, signs)


@dataclass(frozen=True, slots=True, eq=False)
class LoadClass:
    """Loads of one symmetry class.

    Attributes
    ----------
    parity : per plane, 1 symmetric or -1 antisymmetric
    held : (n_part, 3) displacement components that vanish on the planes
    loads : (n_loads, n_part, 3) nodal forces on the part
    """

    parity: tuple[int, ...]
    held: BoolArray
    loads: FloatArray


def load_classes(model: Unfolded, loads: FloatArray) -> Iterator[LoadClass]:
    """The classes in which nodal forces on the solid, (n_loads, n_points, 3), are not zero.

    By virtual work on displacements of the class: the force on a node of the part is the mean
    over its images, each reflected back.
    """
    sizes = np.abs(loads).max(axis=(1, 2))
    for parity in product((1, -1), repeat=len(model.planes)):
        factor = _factor(model, parity)
        part = np.zeros((len(loads), *model.part.points.shape))
        for k, load in enumerate(loads):
            np.add.at(part[k], model.source, load * factor / 2 ** len(model.planes))
        held = np.zeros(model.part.points.shape, dtype=bool)
        for plane, sign in zip(model.planes, parity, strict=True):
            normal = np.arange(3) == plane.axis
            held |= plane.shared[:, None] & (normal if sign == 1 else ~normal)
        part[:, held] = 0.0
        part[np.abs(part).max(axis=(1, 2)) <= 1e-11 * sizes] = 0.0  # rounding only
        if np.any(part):
            yield LoadClass(parity, held, part)


def unfolded_field(model: Unfolded, parity: tuple[int, ...], field: FloatArray) -> FloatArray:
    """A vector field of a class, (..., n_part, 3), on the whole solid, (..., n_points, 3)."""
    return field[..., model.source, :] * _factor(model, parity)


def _factor(model: Unfolded, parity: tuple[int, ...]) -> FloatArray:
    """(n_points, 3): value at a node over the value at its source."""
    factor = model.signs.copy()
    for plane, sign in zip(model.planes, parity, strict=True):
        if sign == -1:
            factor *= model.signs[:, plane.axis, None]
    return factor


def mirror_order(kind: str) -> IntArray:
    """Order of the nodes of a reflected cell that keeps its orientation positive.

    The reference cell has a plane of symmetry; walking the nodes in that reflection undoes
    the reversal.
    """
    nodes = ELEMENTS[kind].nodes
    image = nodes[:, [1, 0, 2]] if ELEMENTS[kind].family == "tetra" else nodes * (1, 1, -1)
    gap = np.abs(nodes[None] - image[:, None]).max(axis=2)
    order: IntArray = np.argmin(gap, axis=1).astype(np.int64)
    return order
