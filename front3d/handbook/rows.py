"""Rows of through cracks."""

import numpy as np
from numpy.typing import ArrayLike

from front3d.arrays import FloatArray
from front3d.handbook.checks import floats, require, require_sizes


def collinear_row(sigma: ArrayLike, a: ArrayLike, b: ArrayLike) -> FloatArray:
    """K_I = sigma sqrt(2 b tan(pi a/(2 b))) at both ends of each crack of an endless row.

    Parameters
    ----------
    sigma : remote stress across the cracks; stress along the row adds nothing
    a : half-length of each crack, below b
    b : half-period: the cracks repeat every 2 b along their own line

    Exact for an infinite plate, plane stress or plane strain.  Sources: Westergaard, J. Appl.
    Mech. 6 (1939) A49; Irwin, J. Appl. Mech. 24 (1957) 361.  From memory; tested against a
    numerical solution of the integral equation of the row.
    """
    sigma, a, b = floats(sigma, a, b)
    require_sizes(a=a, b=b)
    require(a < b, "a/b", a / b, "below 1 (the cracks would meet)")
    return sigma * np.sqrt(2 * b * np.tan(np.pi * a / (2 * b)))
