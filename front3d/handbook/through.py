"""Through cracks in plates: exact solutions and the two-dimensional references."""

import numpy as np
from numpy.typing import ArrayLike

from front3d.arrays import FloatArray
from front3d.handbook.checks import floats, require, require_sizes


def through_crack(sigma: ArrayLike, a: ArrayLike) -> FloatArray:
    """K_I = sigma sqrt(pi a) of a crack of length 2 a in an infinite plate.

    Parameters
    ----------
    sigma : remote stress across the crack
    a : half-length

    Exact.  Sources: Griffith, Phil. Trans. Roy. Soc. A 221 (1921) 163; Irwin, J. Appl. Mech. 24
    (1957) 361.
    """
    sigma, a = floats(sigma, a)
    require_sizes(a=a)
    return sigma * np.sqrt(np.pi * a)


def inclined_through_crack(
    sigma: ArrayLike, a: ArrayLike, beta: ArrayLike, lateral: ArrayLike = 0.0
) -> tuple[FloatArray, FloatArray]:
    """K_I and K_II of a through crack whose normal makes the angle beta with a remote tension.

    Parameters
    ----------
    sigma : stress along the load axis
    a : half-length, infinite plate
    beta : angle from the crack normal e2 to the load axis, radians, positive towards the e1 of
        the tip considered (at the other tip it is negative)
    lateral : stress in the plate at right angles to the load axis

    Exact for open faces.  Source: as `through_crack`, with the stress turned to the crack.
    """
    sigma, a, beta, lateral = floats(sigma, a, beta, lateral)
    require_sizes(a=a)
    root = np.sqrt(np.pi * a)
    sine, cosine = np.sin(beta), np.cos(beta)
    across = sigma * cosine**2 + lateral * sine**2
    return across * root, (sigma - lateral) * sine * cosine * root


def antiplane_through_crack(tau: ArrayLike, a: ArrayLike, b: ArrayLike = np.inf) -> FloatArray:
    """K_III = tau sqrt(2 b tan(pi a/(2 b))) of a centre crack under antiplane shear.

    Parameters
    ----------
    tau : remote stress sigma_23 in the frame of the tip considered
    a : half-length of the crack, or the depth of two opposite edge cracks: the same K
    b : half-width of the strip

    Exact.  Source: Westergaard's row of cracks, whose mid-planes are free of antiplane traction;
    Tada, Paris and Irwin, The Stress Analysis of Cracks Handbook (1985).
    """
    tau, a, b = floats(tau, a, b)
    require_sizes(a=a, b=b)
    require(a < b, "a/b", a / b, "below 1")
    angle = np.pi * a / (2 * b)
    slender = angle > 1e-8
    ratio = np.where(slender, np.tan(angle) / np.where(slender, angle, 1.0), 1.0)
    return tau * np.sqrt(np.pi * a * ratio)


def centre_crack(sigma: ArrayLike, a: ArrayLike, b: ArrayLike) -> FloatArray:
    """K_I of a centre crack in a strip under tension.

    K_I = sigma sqrt(pi a) (1 - 0.025 x^2 + 0.06 x^4) / sqrt(cos(pi x/2)), x = a/b.

    Parameters
    ----------
    sigma : remote gross stress
    a, b : half-length of the crack, half-width of the strip

    Claimed within 0.1 % for any a/b.  Source: Tada, Paris and Irwin (1985), quoted in Anderson,
    Fracture Mechanics (2005), table 2.4.
    """
    sigma, a, x = _of_width(sigma, a, b)
    factor = (1 - 0.025 * x**2 + 0.06 * x**4) / np.sqrt(np.cos(np.pi * x / 2))
    return sigma * np.sqrt(np.pi * a) * factor


def edge_crack(sigma: ArrayLike, a: ArrayLike, b: ArrayLike) -> FloatArray:
    """K_I of a crack at one edge of a strip under tension, its ends free to turn.

    K_I = sigma sqrt(2 b tan h) (0.752 + 2.02 a/b + 0.37 (1 - sin h)^3) / cos h, h = pi a/(2 b).

    Parameters
    ----------
    sigma : remote gross stress
    a, b : depth of the crack, width of the strip

    Claimed within 0.5 % for any a/b; 0.55 % was found against two-dimensional finite elements.
    Source: Tada, Paris and Irwin (1985), quoted in Anderson (2005), table 2.4.
    """
    sigma, a, x = _of_width(sigma, a, b)
    h = np.pi * x / 2
    factor = (0.752 + 2.02 * x + 0.37 * (1 - np.sin(h)) ** 3) / np.cos(h)
    return sigma * np.sqrt(np.pi * a * np.tan(h) / h) * factor


def edge_crack_bending(sigma: ArrayLike, a: ArrayLike, b: ArrayLike) -> FloatArray:
    """K_I of a crack at one edge of a strip in pure bending.

    K_I = sigma sqrt(pi a) (1.122 - 1.40 x + 7.33 x^2 - 13.08 x^3 + 14.0 x^4), x = a/b.

    Parameters
    ----------
    sigma : outer-fibre stress 6 M/(B b^2) of the uncracked strip, tensile at the crack
    a, b : depth of the crack, width of the strip

    Range: a/b <= 0.6.  Claimed within 0.2 %; 0.36 % was found against two-dimensional finite
    elements.  Source: Brown and Srawley, ASTM STP 410 (1966).  From memory.
    """
    sigma, a, x = _of_width(sigma, a, b)
    require(x <= 0.6, "a/b", x, "at most 0.6")
    factor = 1.122 - 1.40 * x + 7.33 * x**2 - 13.08 * x**3 + 14.0 * x**4
    return sigma * np.sqrt(np.pi * a) * factor


def double_edge_crack(sigma: ArrayLike, a: ArrayLike, b: ArrayLike) -> FloatArray:
    """K_I = sigma sqrt(2 b tan h) (1 + 0.122 cos^4 h), h = pi a/(2 b), of two edge cracks.

    Parameters
    ----------
    sigma : remote gross stress
    a, b : depth of each crack, half-width of the strip

    Claimed within 0.5 % for any a/b; 0.7 % was found against two-dimensional finite elements.
    Source: Tada, Paris and Irwin (1985), quoted in Dowling, Mechanical Behavior of Materials.
    """
    sigma, a, x = _of_width(sigma, a, b)
    h = np.pi * x / 2
    return sigma * np.sqrt(np.pi * a * np.tan(h) / h) * (1 + 0.122 * np.cos(h) ** 4)


def through_crack_t_stress(sigma: ArrayLike, parallel: ArrayLike = 0.0) -> FloatArray:
    """T = parallel - sigma of a through crack in an infinite plate.

    Parameters
    ----------
    sigma, parallel : remote stresses across the crack and along it

    Exact.  Source: the field of Westergaard, J. Appl. Mech. 6 (1939) A49.
    """
    sigma, parallel = floats(sigma, parallel)
    return parallel - sigma


def _of_width(
    sigma: ArrayLike, a: ArrayLike, b: ArrayLike
) -> tuple[FloatArray, FloatArray, FloatArray]:
    sigma, a, b = floats(sigma, a, b)
    require_sizes(a=a, b=b)
    require(a < b, "a/b", a / b, "below 1")
    return sigma, a, a / b
