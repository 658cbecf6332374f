"""Nodal shape functions from a list of monomials.

An element is given by its node positions and by the exponents of the functions it spans; the
shape functions follow from the Vandermonde matrix.  This keeps an element type down to data,
and makes the partition of unity and the nodal property hold by construction.
"""

import numpy as np

from front3d.arrays import FloatArray, IntArray

_BY_PRODUCTS = 4
"""Highest exponent that is reached by multiplying: several times as fast as a power."""


def _powers(x: FloatArray, exponents: IntArray) -> FloatArray:
    """x**n per column, with 0**negative taken as 0.

    Negative exponents occur only in the pyramids, as x y / w near the apex w = 0, where
    |x|, |y| <= w makes the product vanish.
    """
    highest = int(exponents.max(initial=0))
    if exponents.min(initial=0) >= 0 and highest <= _BY_PRODUCTS:
        table = np.ones((highest + 1, *x.shape))
        for k in range(highest):
            table[k + 1] = table[k] * x
        taken: FloatArray = table[exponents, :, np.arange(x.shape[1])].transpose(2, 0, 1)
        return taken
    base = np.where((x[:, None, :] == 0.0) & (exponents < 0), np.inf, x[:, None, :])
    out: FloatArray = np.power(base, exponents.astype(float))
    return out


def monomials(x: FloatArray, exponents: IntArray) -> FloatArray:
    """Values, (points, functions), of the monomials at x, (points, dimensions)."""
    return np.prod(_powers(x, exponents), axis=2)


def monomial_gradients(x: FloatArray, exponents: IntArray) -> FloatArray:
    """Gradients, (points, functions, dimensions), of the monomials."""
    columns = []
    for axis in range(x.shape[1]):
        lowered = exponents.copy()
        lowered[:, axis] -= 1
        factor = exponents[:, axis].astype(float)
        lowered[factor == 0.0, axis] = 0
        columns.append(factor * monomials(x, lowered))
    return np.stack(columns, axis=2)
