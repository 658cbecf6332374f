"""Closed formulas of crack closure: which opening goes with which nodal force, and K from G.

The work that closes the crack by one face is half the sum over the nodes ahead of
force times mirrored opening.  Rows of nodes are counted from the front: row 0 on it, row 1 the
mid-side nodes; the far corners stay shut.  Sources: Rybicki and Kanninen (1977) for 4-node and
8-node cells, Raju (1987) for higher orders and quarter-points, Shivakumar, Tan and Newman (1988)
in three dimensions, Krueger (2004) for unequal lengths.
"""

import numpy as np

from front3d.arrays import FloatArray
from front3d.crack.cells import QUARTER
from front3d.solid import Constants

POWER_FIT = {1: (0.321, 0.0, 0.686, -0.061), 2: (0.144, 0.369, 0.417, -0.050)}
"""Coefficients of `length_powers` by the cells' order: constant, of the rise within the first cell,
of that over the first two, and of the logarithm of the ratio of lengths.

A fit of our own, not a published formula.  Fitted to near-tip fields held around a block: Poisson's
ratios 0, 0.3, 0.45; cells half as high as those of a square section, as high and twice as high;
ratios of length 1/2 to 2; three modes; 8-node and 20-node bricks.  What is left in K is 0.4 %
(root mean square), at most 1.4 % on 8-node and 1.8 % on 20-node bricks.  The square root alone
leaves up to 10 %, one constant power a mode up to 7 %: in cells that are nearly incompressible, or
high, sliding rises much more steeply behind the front, and needs a power up to 0.95."""

RISE_RANGE = (0.4, 1.1)
"""Powers of the distance with which an opening next to the front was seen to rise."""

USUAL_RISE = ((0.62, 0.85, 0.68), (0.55, 0.69, 0.54))
"""The same on cells of equal lengths at a Poisson's ratio of 0.3, for modes I, II and III, within
the first cell and over the first two: taken where it cannot be read."""


def rise(near: FloatArray, far: FloatArray, ratio: FloatArray, usual: FloatArray) -> FloatArray:
    """Power of the distance with which the opening rises from one place behind the front to the
    next, (steps, 3), by its root mean square along the front: there it may vanish at a station.

    Parameters
    ----------
    near, far : (steps, n_stations, 3) openings, by mode
    ratio : (n_stations,) distance of the far place over that of the near one
    usual : (3,) what is taken where a mode has no opening
    """
    squares = np.stack([(near**2).sum(axis=1), (far**2).sum(axis=1)])
    there = (squares > 0.0).all(axis=0)
    squares = np.where(there, squares, 1.0)
    power = 0.5 * np.log(squares[1] / squares[0]) / np.log(ratio).mean()
    return np.where(there, np.clip(power, *RISE_RANGE), usual)


def length_powers(order: int, ratio: float, within: FloatArray, over: FloatArray) -> FloatArray:
    """Power of length ahead over length behind, `ratio`, that carries the opening over; (..., 3).

    In the exact field it is 1/2 (Krueger 2004).  Cells without quarter-points blunt the field, and
    the force at the front as well as the opening depends on both lengths.  How blunt the
    field is shows in the opening itself: `within` and `over` are its `rise` from the middle of the
    first cell to its end, and from there to the end of the next.  See POWER_FIT.
    """
    constant, first, second, bend = POWER_FIT[order]
    return constant + first * within + second * over + bend * np.log(ratio)


def mirrored_openings(
    middle: FloatArray | None,
    far: FloatArray,
    ahead: float,
    behind: float,
    ahead_middle: float | None,
    behind_middle: float | None,
    powers: FloatArray | float = 0.5,
) -> tuple[FloatArray, FloatArray]:
    """Openings that go with the forces of rows 0 and 1.

    Parameters
    ----------
    middle, far : (..., 3) opening, per mode, at the mid-side node and the far corner behind
    ahead, behind : lengths of the faces ahead of and behind the front
    ahead_middle, behind_middle : where their mid-side nodes lie, in parts of the length; None on
        linear cells
    powers : by which the opening behind is carried to the length ahead: the law of the square root
        (Krueger 2004), but on cells without quarter-points those of `length_powers`
    """
    quarter_ahead = ahead_middle is not None and ahead_middle < QUARTER
    scale = (ahead / behind) ** np.asarray(powers)
    if ahead_middle is None:
        return scale * far, np.zeros_like(far)
    quarter_behind = behind_middle is not None and behind_middle < QUARTER
    if middle is None:
        middle = np.sqrt(0.25 if quarter_ahead else 0.5) * far
    elif quarter_ahead != quarter_behind:
        middle = _between(middle, far, 0.25 if quarter_behind else 0.5)
    if quarter_ahead:
        first, second = quarter_point_openings(middle, far)
    else:
        first, second = far, middle
    return scale * first, scale * second


def quarter_point_openings(quarter: FloatArray, far: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Raju's weights (1987): what the forces at the front and at the quarter-point do work on.

    With x in parts of the face, the traction is A/sqrt(x) + B ahead, the opening p sqrt(d) + q d
    behind; A and B follow from the two forces, and int traction times opening(1 - x) is
    F_0 [(6 - 3 pi/2) far + (6 pi - 20) quarter] + F_1 [far/2 + quarter].
    """
    front = (6.0 - 1.5 * np.pi) * far + (6.0 * np.pi - 20.0) * quarter
    return front, far / 2.0 + quarter


def _between(middle: FloatArray, far: FloatArray, at: float) -> FloatArray:
    """Opening at 1/4 from that at 1/2, or the other way, as p sqrt(d) + q d."""
    root = np.sqrt(at)
    p = (middle - at * far) / (root - at)
    wanted = 0.75 - at
    value: FloatArray = p * np.sqrt(wanted) + (far - p) * wanted
    return value


def signed_K(G: FloatArray, opening: FloatArray, material: Constants) -> FloatArray:
    """K_I, K_II, K_III, (..., 3), from G of each mode, with the sign of its opening or sliding.

    G_I = K_I^2 / E', G_II = K_II^2 / E', G_III = K_III^2 / (2 mu).

    The sum over the modes is the sounder number.  In a mesh that repeats itself from cell to cell,
    a crack longer by one cell is the same crack moved by one cell.  The force at the front times
    half its opening after that is the energy released, exactly as the finite elements have it; and
    that opening is the one which is now a cell behind.  How it falls to the modes is not so
    guarded: above and below cells that are no mirror images of each other, K_I alone opens, slides
    and shears the first cells, and the work of the sliding may be negative.  So where force and
    opening of a mode disagree, that mode gets no K, and its part is taken from the others, so that
    the sum stays what it was.
    """
    plane, shear = material.plane_strain_modulus, material.shear_modulus
    modulus = np.stack([plane, plane, 2 * np.asarray(shear)], axis=-1)
    positive = np.maximum(G, 0.0)
    whole, counted = G.sum(axis=-1, keepdims=True), positive.sum(axis=-1, keepdims=True)
    share = np.maximum(whole, 0.0) / np.where(counted > 0.0, counted, 1.0)
    K: FloatArray = np.sign(opening) * np.sqrt(modulus * positive * share)
    return K
