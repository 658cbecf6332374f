"""Circumferential cracks: round bars, and the external crack of an infinite solid.

`a` is the radius of the ligament, not the depth of the crack.
"""

import numpy as np
from numpy.typing import ArrayLike

from front3d.arrays import FloatArray
from front3d.handbook.checks import floats, require, require_sizes


def external_crack_tension(force: ArrayLike, a: ArrayLike) -> FloatArray:
    """K_I = P/(2 sqrt(pi) a^1.5): two half-spaces joined over a circle, pulled apart.

    Parameters
    ----------
    force : P
    a : radius of the circle

    Exact.  Source: Tada, Paris and Irwin, The Stress Analysis of Cracks Handbook (1985).
    """
    force, a = floats(force, a)
    require_sizes(a=a)
    return force / (2 * np.sqrt(np.pi) * a**1.5)


def external_crack_torsion(torque: ArrayLike, a: ArrayLike) -> FloatArray:
    """K_III = 3 T/(4 sqrt(pi) a^2.5) of the same body, twisted.

    Parameters
    ----------
    torque : T, right-handed about the outward normal at each end
    a : radius of the circle

    Exact.  Source: Tada, Paris and Irwin (1985).
    """
    torque, a = floats(torque, a)
    require_sizes(a=a)
    return 3 * torque / (4 * np.sqrt(np.pi) * a**2.5)


def round_bar_tension(force: ArrayLike, a: ArrayLike, b: ArrayLike) -> FloatArray:
    """K_I = P/(pi a^2) sqrt(pi a) G of a round bar with a crack all around.

    G = sqrt(1 - x) (1 + x/2 + 3 x^2/8 - 0.363 x^3 + 0.731 x^4)/2, x = a/b.

    Parameters
    ----------
    force : P
    a, b : radius of the ligament, radius of the bar

    Claimed within 1 % for any a/b (from memory).  Axisymmetric finite elements found the formula
    low, most near a/b = 0.8: by 4.2 % for Poisson's ratio 0, 2.9 % for 0.3 (K depends on it, the
    formula does not).
    Source: Tada, Paris and Irwin (1985), from Benthem and Koiter (1973); quoted in Dowling,
    Mechanical Behavior of Materials.
    """
    force, a, b = _bar(force, a, b)
    x = a / b
    g = 0.5 * np.sqrt(1 - x) * (1 + x / 2 + 3 * x**2 / 8 - 0.363 * x**3 + 0.731 * x**4)
    return force / (np.pi * a**2) * np.sqrt(np.pi * a) * g


def round_bar_torsion(torque: ArrayLike, a: ArrayLike, b: ArrayLike) -> FloatArray:
    """K_III = 2 T/(pi a^3) sqrt(pi a) G of the same bar, twisted; K_I = K_II = 0.

    G = 3/8 sqrt(1 - x) (1 + x/2 + 3 x^2/8 + 5 x^3/16 + 35 x^4/128 + 0.208 x^5), x = a/b.

    Parameters
    ----------
    torque : T, right-handed about the outward normal at each end
    a, b : radius of the ligament, radius of the bar

    Claimed within 1 % for any a/b (from memory).  Axisymmetric finite elements found the formula
    high by up to 1.9 % near a/b = 0.85, by less than 0.5 % for a/b <= 0.5.
    Source: as `round_bar_tension`.
    """
    torque, a, b = _bar(torque, a, b)
    g = _series(a / b, 0.208)
    return 2 * torque / (np.pi * a**3) * np.sqrt(np.pi * a) * g


def round_bar_bending(
    moment: ArrayLike, a: ArrayLike, b: ArrayLike, theta: ArrayLike = 0.0
) -> FloatArray:
    """K_I = 4 M/(pi a^3) sqrt(pi a) G cos(theta) of the same bar, bent.

    G = 3/8 sqrt(1 - x) (1 + x/2 + 3 x^2/8 + 5 x^3/16 + 35 x^4/128 + 0.537 x^5), x = a/b.

    Parameters
    ----------
    moment : M
    a, b : radius of the ligament, radius of the bar
    theta : angle around the bar from its most stretched side, radians

    Claimed within 1 % for any a/b (from memory), not compared with anything but its limits.
    Source: as `round_bar_tension`; the cosine by the symmetry of the load.
    """
    moment, a, b, theta = floats(moment, a, b, theta)
    _bar(moment, a, b)
    g = _series(a / b, 0.537)
    return 4 * moment / (np.pi * a**3) * np.sqrt(np.pi * a) * g * np.cos(theta)


def _series(x: FloatArray, last: float) -> FloatArray:
    series = 1 + x / 2 + 3 * x**2 / 8 + 5 * x**3 / 16 + 35 * x**4 / 128 + last * x**5
    return 0.375 * np.sqrt(1 - x) * series


def _bar(load: ArrayLike, a: ArrayLike, b: ArrayLike) -> tuple[FloatArray, FloatArray, FloatArray]:
    load, a, b = floats(load, a, b)
    require_sizes(a=a, b=b)
    require(a < b, "a/b", a / b, "below 1")
    return load, a, b
