"""Gauss rules of any order on the reference cells, by collapsing the unit cube.

Source: Stroud (1971), conical product formulas; the one-dimensional rules are scipy's.
Each rule with n points a side is exact for polynomials of degree 2 n - 1.
"""

from functools import lru_cache

import numpy as np
from scipy.special import roots_jacobi

from front3d.arrays import FloatArray, frozen_floats

Rule = tuple[FloatArray, FloatArray]


def _unit_interval(n: int, power: int) -> Rule:
    """Gauss rule on (0, 1) with weight (1 - t)**power."""
    x, w = roots_jacobi(n, float(power), 0.0)
    return (x + 1.0) / 2.0, w / 2.0 ** (power + 1)


def _product(*rules: Rule) -> Rule:
    points = np.meshgrid(*(r[0] for r in rules), indexing="ij")
    weights = np.meshgrid(*(r[1] for r in rules), indexing="ij")
    return (
        np.stack([p.ravel() for p in points], axis=1),
        np.prod([w.ravel() for w in weights], axis=0),
    )


def _freeze(points: FloatArray, weights: FloatArray) -> Rule:
    return frozen_floats(points), frozen_floats(weights)


@lru_cache
def triangle(n: int) -> Rule:
    """Rule on the triangle (0,0), (1,0), (0,1)."""
    p, w = _product(_unit_interval(n, 0), _unit_interval(n, 1))
    u, v = p.T
    return _freeze(np.stack([u * (1 - v), v], axis=1), w)


@lru_cache
def quadrilateral(n: int) -> Rule:
    """Rule on the square (-1, 1)^2."""
    p, w = _product(_unit_interval(n, 0), _unit_interval(n, 0))
    return _freeze(2 * p - 1, 4 * w)


@lru_cache
def tetrahedron(n: int) -> Rule:
    """Rule on the tetrahedron with corners 0, e1, e2, e3."""
    p, w = _product(_unit_interval(n, 0), _unit_interval(n, 1), _unit_interval(n, 2))
    u, v, t = p.T
    return _freeze(np.stack([u * (1 - v) * (1 - t), v * (1 - t), t], axis=1), w)


@lru_cache
def hexahedron(n: int) -> Rule:
    """Rule on the cube (-1, 1)^3."""
    p, w = _product(*(_unit_interval(n, 0),) * 3)
    return _freeze(2 * p - 1, 8 * w)


@lru_cache
def wedge(n: int) -> Rule:
    """Rule on the triangle times (-1, 1)."""
    p, w = _product(_unit_interval(n, 0), _unit_interval(n, 1), _unit_interval(n, 0))
    u, v, t = p.T
    return _freeze(np.stack([u * (1 - v), v, 2 * t - 1], axis=1), 2 * w)


@lru_cache
def pyramid(n: int) -> Rule:
    """Rule on the pyramid with base (-1, 1)^2 at z = 0 and apex (0, 0, 1)."""
    p, w = _product(_unit_interval(n, 0), _unit_interval(n, 0), _unit_interval(n, 2))
    u, v, t = p.T
    return _freeze(np.stack([(2 * u - 1) * (1 - t), (2 * v - 1) * (1 - t), t], axis=1), 4 * w)
