"""Surface and embedded cracks in plates: fitted equations."""

import numpy as np
from numpy.typing import ArrayLike

from front3d.arrays import FloatArray
from front3d.handbook.checks import floats, require, require_sizes
from front3d.handbook.fitted import Aspect, bending_share, surface_polynomial, surface_rise


def surface_crack(
    phi: ArrayLike,
    a: ArrayLike,
    c: ArrayLike,
    t: ArrayLike,
    b: ArrayLike = np.inf,
    tension: ArrayLike = 0.0,
    bending: ArrayLike = 0.0,
) -> FloatArray:
    """K_I = (S_t + H S_b) sqrt(pi a/Q) F of a semi-elliptical surface crack in a plate.

    Parameters
    ----------
    phi : parametric angle, radians: 0 and pi at the surface, pi/2 at the deepest point
    a, c : depth and half-length at the surface
    t, b : thickness and half-width of the plate
    tension : remote stress S_t
    bending : remote outer-fibre stress S_b = 3 M/(b t^2), tensile on the cracked surface

    Range: a/c <= 2, c/b < 0.5, 0 <= phi <= pi, a/t < 1, and a/t < 1.25 (a/c + 0.6) where
    a/c <= 0.2.  Fitted to finite-element results for Poisson's ratio 0.3; claimed within 5 % of
    them.  High-order finite elements made for this project differ, in per cent of the largest K
    of the front, by up to 4 in tension for a/c >= 0.4 and a/t <= 0.6 and 9 for deeper cracks; in
    bending by up to 9 for a/c >= 0.4 and a/t <= 0.6 and 16 for a/c = 0.2.
    At the free surface itself no K exists in the strict sense.

    Source: Newman and Raju, Eng. Fract. Mech. 15 (1981) 185, and NASA TM-83200 (1981),
    TM-85793 (1984).  The M factors, Q and f_w for a/c <= 1 were checked against a textbook that
    quotes them; the angular factor g, a/c > 1 and bending are from memory.
    """
    phi, a, c, t, b, s_t, s_b = floats(phi, a, c, t, b, tension, bending)
    require_sizes(a=a, c=c, t=t, b=b)
    aspect, depth = Aspect.of(a, c), a / t
    require(aspect.ratio <= 2, "a/c", aspect.ratio, "at most 2")
    require(depth < 1, "a/t", depth, "below 1")
    limit = 1.25 * (aspect.ratio + 0.6)
    require((aspect.ratio > 0.2) | (depth < limit), "a/t", depth, "below 1.25 (a/c + 0.6)")
    require(c < 0.5 * b, "c/b", c / b, "below 0.5")
    require((phi >= -1e-12) & (phi <= np.pi + 1e-12), "phi", phi, "0 to pi")

    sine = np.clip(np.sin(phi), 0.0, 1.0)
    width = 1 / np.sqrt(np.cos(np.pi * c / (2 * b) * np.sqrt(depth)))
    rise = surface_rise(aspect, depth, sine)
    factor = surface_polynomial(aspect, depth) * rise * aspect.angular(phi) * width
    h = bending_share(aspect, depth, sine, leading=0.55)
    return (s_t + h * s_b) * np.sqrt(np.pi * a / aspect.shape_factor) * factor


def embedded_crack(
    phi: ArrayLike,
    a: ArrayLike,
    c: ArrayLike,
    t: ArrayLike,
    b: ArrayLike = np.inf,
    tension: ArrayLike = 0.0,
) -> FloatArray:
    """K_I = S sqrt(pi a/Q) F of an elliptical crack at mid-thickness of a plate.

    Parameters
    ----------
    phi : parametric angle, radians, any: 0 on the axis along the width, pi/2 towards the faces
    a, c : semi-axes along the thickness and along the width
    t, b : half the thickness and half the width of the plate
    tension : remote stress S

    Range: c/b < 0.5, a/t < 1, and a/t < 1.25 (a/c + 0.6) where a/c <= 0.2.  Claimed within 3 % for
    a/t < 0.8.  High-order finite elements made for this project differ by up to 2 % of the
    largest K of the front for a/t <= 0.5 and 4.4 % at a/t = 0.8.

    Source: Newman and Raju, NASA TM-83200 (1981), TM-85793 (1984).  From memory; the exact
    ellipse is its limit.
    """
    phi, a, c, t, b, stress = floats(phi, a, c, t, b, tension)
    require_sizes(a=a, c=c, t=t, b=b)
    aspect, depth = Aspect.of(a, c), a / t
    ratio = aspect.ratio
    require(depth < 1, "a/t", depth, "below 1 (t is half the thickness)")
    limit = 1.25 * (ratio + 0.6)
    require((ratio > 0.2) | (depth < limit), "a/t", depth, "below 1.25 (a/c + 0.6)")
    require(c < 0.5 * b, "c/b", c / b, "below 0.5")

    m1 = np.sqrt(aspect.steep)
    m2 = 0.05 / (0.11 + ratio**1.5)
    m3 = 0.29 / (0.23 + ratio**1.5)
    off_axis = np.abs(np.cos(phi)) / (1.0 + 4.0 * ratio)
    g = 1.0 - depth**4 * np.sqrt(2.6 - 2.0 * depth) * off_axis
    width = 1 / np.sqrt(np.cos(np.pi * c / (2 * b) * np.sqrt(depth)))
    factor = (m1 + m2 * depth**2 + m3 * depth**4) * g * aspect.angular(phi) * width
    return stress * np.sqrt(np.pi * a / aspect.shape_factor) * factor
