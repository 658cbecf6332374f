"""Surface cracks in plates: fitted equations."""

import numpy as np
from numpy.typing import ArrayLike

from front3d.arrays import BoolArray, FloatArray
from front3d.handbook.checks import floats, require, require_sizes


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
    aspect, depth = a / c, a / t
    require(aspect <= 2, "a/c", aspect, "at most 2")
    require(depth < 1, "a/t", depth, "below 1")
    limit = 1.25 * (aspect + 0.6)
    require((aspect > 0.2) | (depth < limit), "a/t", depth, "below 1.25 (a/c + 0.6)")
    require(c < 0.5 * b, "c/b", c / b, "below 0.5")
    require((phi >= -1e-12) & (phi <= np.pi + 1e-12), "phi", phi, "0 to pi")

    sine, shallow = np.clip(np.sin(phi), 0.0, 1.0), aspect <= 1
    # Each branch gets a ratio at most 1, so that the other one stays finite.
    flat = np.where(shallow, aspect, 1.0)
    steep = np.where(shallow, 1.0, c / a)
    q = 1 + 1.464 * np.where(shallow, flat, steep) ** 1.65
    m1 = np.where(shallow, 1.13 - 0.09 * flat, np.sqrt(steep) * (1 + 0.04 * steep))
    m2 = np.where(shallow, -0.54 + 0.89 / (0.2 + flat), 0.2 * steep**4)
    m3 = np.where(shallow, 0.5 - 1 / (0.65 + flat) + 14 * (1 - flat) ** 24, -0.11 * steep**4)
    g = 1 + (0.1 + 0.35 * steep * depth**2) * (1 - sine) ** 2
    cosine2 = np.cos(phi) ** 2
    ellipse = np.where(shallow, sine**2 + flat**2 * cosine2, cosine2 + steep**2 * sine**2) ** 0.25
    width = 1 / np.sqrt(np.cos(np.pi * c / (2 * b) * np.sqrt(depth)))
    factor = (m1 + m2 * depth**2 + m3 * depth**4) * g * ellipse * width
    h = _bending(sine, depth, flat, steep, shallow)
    return (s_t + h * s_b) * np.sqrt(np.pi * a / q) * factor


def _bending(
    sine: FloatArray,
    depth: FloatArray,
    flat: FloatArray,
    steep: FloatArray,
    shallow: BoolArray,
) -> FloatArray:
    """H: the bending stress that counts, over its outer-fibre value."""
    power = 0.2 + np.where(shallow, flat, steep) + 0.6 * depth
    surface = np.where(
        shallow,
        1 - (0.34 + 0.11 * flat) * depth,
        1
        - (0.04 + 0.41 * steep) * depth
        + (0.55 - 1.93 * steep**0.75 + 1.38 * steep**1.5) * depth**2,
    )
    g1 = np.where(shallow, -1.22 - 0.12 * flat, -2.11 + 0.77 * steep)
    g2 = np.where(
        shallow,
        0.55 - 1.05 * flat**0.75 + 0.47 * flat**1.5,
        0.55 - 0.72 * steep**0.75 + 0.14 * steep**1.5,
    )
    deepest = 1 + g1 * depth + g2 * depth**2
    return surface + (deepest - surface) * sine**power
