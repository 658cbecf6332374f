"""Closed formulas of crack closure: which opening goes with which nodal force, and K from G.

The work that closes the crack by one face is half the sum over the nodes ahead of
force times mirrored opening.  Rows of nodes are counted from the front: row 0 on it, row 1 the
mid-side nodes; the far corners stay shut.  Sources: Rybicki and Kanninen (1977) for 4-node and
8-node cells, Raju (1987) for higher orders and quarter-points, Shivakumar, Tan and Newman (1988)
in three dimensions, Krueger (2004) for unequal lengths.
"""

import numpy as np

from front3d.arrays import FloatArray
from front3d.solid import Material

QUARTER = 0.375
"""A mid-side node nearer to the front than this part of its edge is a quarter-point."""

LENGTH_POWERS = {1: (0.69, 0.76, 0.68), 2: (0.60, 0.654, 0.586)}
"""Power of length ahead over length behind that carries the opening over, by the cells' order, for
modes I, II and III.  It exceeds 1/2 because cells without quarter-points blunt the singular field
over both lengths.  Our own measurement, with near-tip fields held around a block, Poisson's ratio
0.3, cells as high as the shorter length: at a ratio of 2 Krueger's 1/2 left K 5 to 10 % off on
8-node and 3 to 6 % on 20-node bricks, these powers 1 % and 0.5 %; at a Poisson's ratio of 0.45 or
with cells twice as high up to 4 to 7 % remain in mode II, 3 % in the others."""


def mirrored_openings(
    middle: FloatArray | None,
    far: FloatArray,
    ahead: float,
    behind: float,
    ahead_middle: float | None,
    behind_middle: float | None,
) -> tuple[FloatArray, FloatArray]:
    """Openings that go with the forces of rows 0 and 1.

    Parameters
    ----------
    middle, far : (..., 3) opening, per mode, at the mid-side node and the far corner behind
    ahead, behind : lengths of the faces ahead of and behind the front
    ahead_middle, behind_middle : where their mid-side nodes lie, in parts of the length; None on
        linear cells

    Notes
    -----
    The opening behind is carried to the length ahead by the law of the square root (Krueger), and
    on cells without quarter-points by the power in `LENGTH_POWERS`.
    """
    quarter_ahead = ahead_middle is not None and ahead_middle < QUARTER
    order = 1 if ahead_middle is None else 2
    powers = np.full(3, 0.5) if quarter_ahead else np.array(LENGTH_POWERS[order])
    scale = (ahead / behind) ** powers
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


def signed_K(G: FloatArray, opening: FloatArray, material: Material) -> FloatArray:
    """K_I, K_II, K_III, (..., 3), from G of each mode, with the sign of its opening or sliding.

    G_I = K_I^2 / E', G_II = K_II^2 / E', G_III = K_III^2 / (2 mu); a G below zero, where force and
    opening disagree, gives no K.
    """
    modulus = np.array(
        [material.plane_strain_modulus, material.plane_strain_modulus, 2 * material.shear_modulus]
    )
    K: FloatArray = np.sign(opening) * np.sqrt(modulus * np.maximum(G, 0.0))
    return K
