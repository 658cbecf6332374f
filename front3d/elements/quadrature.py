"""Gauss rules of any order on the reference cells, by collapsing the unit cube.

Source: Stroud (1971), conical product formulas; the one-dimensional rules are scipy's.
Each rule with n points a side is exact for polynomials of degree 2 n - 1.
"""

import itertools
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


# Orbits (first barycentric coordinate, weight times 6) of the symmetric 14-point rule of degree 5:
# Walkington (2000), Keast (1986).  From memory; the test of the degree is the check.
_FOUR_POINTS = ((0.31088591926330060980, 0.11268792571801585080),
                (0.09273525031089122640, 0.07349304311636194954))  # fmt: skip
_SIX_POINTS = (0.04550370412564964949, 0.04254602077708146644)


@lru_cache
def tetrahedron(n: int) -> Rule:
    """Rule on the tetrahedron with corners 0, e1, e2, e3.

    With n = 3 it has full symmetry, so that integrals do not depend on the order of the corners.
    """
    if n == 3:
        return _symmetric_tetrahedron()
    p, w = _product(_unit_interval(n, 0), _unit_interval(n, 1), _unit_interval(n, 2))
    u, v, t = p.T
    return _freeze(np.stack([u * (1 - v) * (1 - t), v * (1 - t), t], axis=1), w)


def _symmetric_tetrahedron() -> Rule:
    points, weights = [], []
    for a, w in _FOUR_POINTS:
        points += [np.full(4, a) + (1 - 4 * a) * np.eye(4)[k] for k in range(4)]
        weights += [w] * 4
    a, w = _SIX_POINTS
    for i, j in itertools.combinations(range(4), 2):
        points.append(np.full(4, 0.5 - a) + (2 * a - 0.5) * (np.eye(4)[i] + np.eye(4)[j]))
        weights.append(w)
    return _freeze(np.array(points)[:, 1:], np.array(weights) / 6)


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
