"""What an element type is: reference nodes, spanned functions, edges, faces and quadrature."""

from collections.abc import Callable
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from front3d.arrays import FloatArray, IntArray, frozen_floats, frozen_ints
from front3d.elements.basis import monomial_gradients, monomials

Quadrature = Callable[[int], tuple[FloatArray, FloatArray]]


@dataclass(frozen=True, eq=False)
class ReferenceCell:
    """A reference cell with nodal shape functions.

    Attributes
    ----------
    name : name of the type; those of volume cells are meshio's
    nodes : (n_nodes, d) positions of the nodes in the reference cell, in VTK order
    exponents : (n_nodes, d) exponents of the spanned monomials
    order : 1 or 2, the degree of the complete polynomials among them
    n_corners : the first `n_corners` nodes are the corners
    quadrature : n -> (points, weights), exact for polynomials of degree 2 n - 1
    """

    name: str
    nodes: FloatArray
    exponents: IntArray
    order: int
    n_corners: int
    quadrature: Quadrature

    def __post_init__(self) -> None:
        object.__setattr__(self, "nodes", frozen_floats(self.nodes))
        object.__setattr__(self, "exponents", frozen_ints(self.exponents))

    def _map(self, xi: FloatArray) -> FloatArray:
        """Coordinates in which the spanned functions are monomials."""
        return xi

    _map_sign = 1.0

    @cached_property
    def _coefficients(self) -> FloatArray:
        vandermonde = monomials(self._map(self.nodes), self.exponents)
        return np.linalg.inv(vandermonde).astype(np.float64)

    def values(self, xi: FloatArray) -> FloatArray:
        """Shape functions, (points, n_nodes), at reference points xi, (points, d)."""
        return monomials(self._map(np.atleast_2d(xi)), self.exponents) @ self._coefficients

    def gradients(self, xi: FloatArray) -> FloatArray:
        """Reference gradients of the shape functions, (points, n_nodes, d)."""
        raw = monomial_gradients(self._map(np.atleast_2d(xi)), self.exponents)
        grad = np.einsum("pfd,fn->pnd", raw, self._coefficients)
        grad[..., -1] *= self._map_sign
        return grad


@dataclass(frozen=True, eq=False)
class FaceType(ReferenceCell):
    """A face: a two-dimensional reference cell."""


@dataclass(frozen=True, eq=False)
class ElementType(ReferenceCell):
    """A volume element.

    Attributes
    ----------
    vtk_type : number of the cell type in VTK files
    family : tetra, hexahedron, wedge or pyramid
    edges : (n_edges, 2) corner pairs, or (n_edges, 3) with the mid-side node last
    faces : per face its type name and its nodes; the corners run anticlockwise seen from outside
    """

    vtk_type: int
    family: str
    edges: IntArray
    faces: tuple[tuple[str, tuple[int, ...]], ...]

    def __post_init__(self) -> None:
        super().__post_init__()
        object.__setattr__(self, "edges", frozen_ints(self.edges))

    @property
    def quadratic(self) -> bool:
        return self.order == 2


def tensor_exponents(*degrees: int) -> IntArray:
    """Exponents of the full tensor product of degrees, e.g. (1, 1, 1) for the 8-node brick."""
    grids = np.meshgrid(*(np.arange(d + 1) for d in degrees), indexing="ij")
    return np.stack([g.ravel() for g in grids], axis=1)


def complete_exponents(degree: int, dimensions: int) -> IntArray:
    """Exponents of all monomials up to a total degree."""
    full = tensor_exponents(*(degree,) * dimensions)
    return full[full.sum(axis=1) <= degree]


def with_midsides(corners: FloatArray, edges: list[tuple[int, int]]) -> FloatArray:
    """Corner positions followed by the midpoints of the edges."""
    return np.vstack([corners, [(corners[i] + corners[j]) / 2 for i, j in edges]])


def quadratic_edges(edges: list[tuple[int, int]], n_corners: int) -> IntArray:
    """Edges with the number of their mid-side node, numbered after the corners."""
    return np.array([(i, j, n_corners + k) for k, (i, j) in enumerate(edges)])


def quadratic_faces(
    faces: tuple[tuple[str, tuple[int, ...]], ...], edges: list[tuple[int, int]], n_corners: int
) -> tuple[tuple[str, tuple[int, ...]], ...]:
    """Faces with their mid-side nodes appended, in the order of their sides."""
    midside = {frozenset(edge): n_corners + k for k, edge in enumerate(edges)}
    kinds = {"triangle3": "triangle6", "quad4": "quad8"}
    out = []
    for kind, corners in faces:
        sides = zip(corners, corners[1:] + corners[:1], strict=True)
        mids = tuple(midside[frozenset(side)] for side in sides)
        out.append((kinds[kind], corners + mids))
    return tuple(out)
