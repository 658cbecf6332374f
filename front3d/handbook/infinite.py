"""Penny and elliptical cracks in an infinite solid: exact solutions."""

from collections.abc import Callable

import numpy as np
from numpy.typing import ArrayLike
from scipy.special import elliprd, elliprf

from front3d.arrays import FloatArray
from front3d.handbook.checks import floats, require_poisson, require_sizes


def penny_tension(sigma: ArrayLike, a: ArrayLike) -> FloatArray:
    """K_I = 2 sigma sqrt(a/pi) of a penny under remote tension across it.

    Parameters
    ----------
    sigma : stress normal to the crack; an internal pressure gives the same K
    a : radius

    Exact.  Source: Sneddon, Proc. Roy. Soc. A 187 (1946) 229.
    """
    sigma, a = floats(sigma, a)
    require_sizes(a=a)
    return 2.0 * sigma * np.sqrt(a / np.pi)


def penny_shear(
    tau: ArrayLike, a: ArrayLike, omega: ArrayLike, nu: ArrayLike
) -> tuple[FloatArray, FloatArray]:
    """K_II and K_III of a penny under remote shear.

    K_II = 4 tau sqrt(a/pi) cos(omega) / (2 - nu), K_III = (1 - nu) times that with sin(omega).

    Parameters
    ----------
    tau : stress sigma_xz, the crack normal being z
    a : radius
    omega : polar angle of the front point from x, radians
    nu : Poisson's ratio

    Exact.  Source: Kassir and Sih, J. Appl. Mech. 33 (1966) 601.
    """
    tau, a, omega, nu = floats(tau, a, omega, nu)
    require_sizes(a=a)
    require_poisson(nu)
    unit = 4.0 * tau / (2.0 - nu) * np.sqrt(a / np.pi)
    return unit * np.cos(omega), (1.0 - nu) * unit * np.sin(omega)


def penny_inclined(
    sigma: ArrayLike, a: ArrayLike, beta: ArrayLike, omega: ArrayLike, nu: ArrayLike
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """K_I, K_II, K_III of a penny whose normal makes the angle beta with a remote tension.

    Parameters
    ----------
    sigma : uniaxial stress
    a : radius
    beta : angle from the crack normal to the load, radians; the load leans towards +x
    omega : polar angle of the front point from x, radians
    nu : Poisson's ratio

    Exact for open faces, sigma cos(beta) > 0.  Sources: those of `penny_tension`, `penny_shear`.
    """
    sigma, a, beta, omega, nu = floats(sigma, a, beta, omega, nu)
    k1 = penny_tension(sigma * np.cos(beta) ** 2, a)
    k2, k3 = penny_shear(sigma * np.sin(beta) * np.cos(beta), a, omega, nu)
    return k1, k2, k3


def penny_pressure(pressure: Callable[[FloatArray], FloatArray], a: float) -> float:
    """K_I of a penny under a pressure on its faces that depends on the radius.

    K_I = 2/sqrt(pi a) int_0^a p(r) r/sqrt(a^2 - r^2) dr.

    Parameters
    ----------
    pressure : p(r), (n,) -> (n,)
    a : radius

    Exact, up to a Gauss rule of 100 points after r = a sqrt(1 - u^2).  Source: Sneddon (1946).
    """
    require_sizes(a=np.asarray(a, dtype=np.float64))
    u, weight = np.polynomial.legendre.leggauss(100)
    u, weight = 0.5 * (u + 1.0), 0.5 * weight
    return float(2.0 * np.sqrt(a / np.pi) * (weight @ pressure(a * np.sqrt(1.0 - u**2))))


def penny_t_stress(
    sigma: ArrayLike, nu: ArrayLike, parallel: ArrayLike = 0.0
) -> tuple[FloatArray, FloatArray]:
    """T_11 = T_33 = parallel - (1 + 2 nu) sigma/2 of a penny under remote tension across it.

    Parameters
    ----------
    sigma : stress normal to the crack
    nu : Poisson's ratio
    parallel : remote stress in the crack plane, the same in all its directions

    Exact.  Derived for this project from the harmonic potential of the opening; no published value
    was found, and axisymmetric finite elements agree within 0.7 %.
    """
    sigma, nu, parallel = floats(sigma, nu, parallel)
    require_poisson(nu)
    t = parallel - (1.0 + 2.0 * nu) / 2.0 * sigma
    return t, t.copy()


def ellipse_tension(sigma: ArrayLike, a: ArrayLike, c: ArrayLike, phi: ArrayLike) -> FloatArray:
    """K_I of an elliptical crack under remote tension across it.

    K_I = sigma sqrt(pi b) / E(k) (sin^2 phi + (a/c)^2 cos^2 phi)^(1/4) for a <= c, b the
    shorter semi-axis.

    Parameters
    ----------
    sigma : stress normal to the crack; an internal pressure gives the same K
    a, c : semi-axes along y and x, in any ratio
    phi : parametric angle, radians

    Exact.  Sources: Irwin, J. Appl. Mech. 29 (1962) 651; Green and Sneddon, Proc. Camb. Phil.
    Soc. 46 (1950) 159.
    """
    sigma, a, c, phi = floats(sigma, a, c, phi)
    require_sizes(a=a, c=c)
    short = np.minimum(a, c)
    e, _, _ = _integrals(a, c)
    # Opening sigma b / E(k) times sqrt(2 h d) at a distance d behind the front.
    return sigma * short / e * np.sqrt(np.pi * _steepness(a, c, phi))


def ellipse_shear(
    tau_x: ArrayLike,
    tau_y: ArrayLike,
    a: ArrayLike,
    c: ArrayLike,
    phi: ArrayLike,
    nu: ArrayLike,
) -> tuple[FloatArray, FloatArray]:
    """K_II and K_III of an elliptical crack under remote shear.

    Parameters
    ----------
    tau_x, tau_y : stresses sigma_xz and sigma_yz, the crack normal being z
    a, c : semi-axes along y and x, in any ratio
    phi : parametric angle, radians
    nu : Poisson's ratio

    Exact.  Source: Kassir and Sih, J. Appl. Mech. 33 (1966) 601; the elliptic integrals are
    arranged so that the circle is no special case.
    """
    tau_x, tau_y, a, c, phi, nu = floats(tau_x, tau_y, a, c, phi, nu)
    require_sizes(a=a, c=c)
    require_poisson(nu)
    short = np.minimum(a, c)
    e, along_x, along_y = _integrals(a, c)
    slide_x = tau_x / (e - nu * along_x)
    slide_y = tau_y / (e - nu * along_y)
    h = _steepness(a, c, phi)
    n_x, n_y = np.cos(phi) / (c * h), np.sin(phi) / (a * h)
    unit = short * np.sqrt(np.pi * h)
    return (
        unit * (slide_x * n_x + slide_y * n_y),
        (1.0 - nu) * unit * (slide_x * n_y - slide_y * n_x),
    )


def _steepness(a: FloatArray, c: FloatArray, phi: FloatArray) -> FloatArray:
    """Half the gradient of x^2/c^2 + y^2/a^2 at the front."""
    return np.hypot(np.cos(phi) / c, np.sin(phi) / a)


def _integrals(a: FloatArray, c: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
    """E(k), and the parts of it that belong to sliding along x and along y.

    With rho = (short/long)^2 and m = 1 - rho: E = B + rho D, the part of the long axis is
    B = (E - rho K)/m, that of the short axis rho D, D = (K - E)/m.  Carlson's forms give B and D
    without the 0/0 of the circle.
    """
    short, long = np.minimum(a, c), np.maximum(a, c)
    ratio = (short / long) ** 2
    d = elliprd(0.0, ratio, 1.0) / 3.0
    b = elliprf(0.0, ratio, 1.0) - d
    e = b + ratio * d
    return e, np.where(c >= a, b, ratio * d), np.where(c >= a, ratio * d, b)
