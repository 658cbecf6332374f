"""Exact displacement fields, to be imposed on the nodes of any mesh.

Every field is a function (points (n, 3), side (n,)) -> displacements (n, 3).  `side` matters
for nodes on a crack face only: +1 on the upper one (towards e2), -1 on the lower one, 0 elsewhere.
K follows the frame e1 (growth), e2 (crack normal), e3 = e1 x e2.

The penny lies in z = 0, centred at the origin, in an infinite solid; e1 = radial, e2 = +z, so
e3 points against the polar angle.  Its fields are harmonic potentials in the oblate coordinates
z = a m zeta, r^2 = a^2 (1 + zeta^2)(1 - m^2) of Sneddon (1946) and Collins (1962); they were
derived for these tests, which hold them to Navier's equations, to free faces and to the K known
from Sneddon (1946), Kassir and Sih (1966).
"""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

Field = Callable[[np.ndarray, np.ndarray], np.ndarray]


@dataclass(frozen=True)
class Elastic:
    """Shear modulus and Poisson's ratio."""

    mu: float
    nu: float

    @classmethod
    def from_young(cls, young, poisson):
        return cls(young / (2 * (1 + poisson)), poisson)


def near_tip(elastic, K, frame=None, origin=(0.0, 0.0, 0.0)) -> Field:
    """Singular field of a straight front through `origin` along e3, plane strain.

    K = (K_I, K_II, K_III); rows of `frame` are e1, e2, e3.  Source: Westergaard (1939),
    Williams (1957).
    """
    frame = np.eye(3) if frame is None else np.asarray(frame)
    k1, k2, k3 = K

    def field(points, side):
        x1, x2, _ = frame @ (np.asarray(points) - origin).T
        angle = np.arctan2(x2, x1)
        angle = np.where(side == 0, angle, side * np.arctan2(np.abs(x2), x1))
        root = np.sqrt(np.hypot(x1, x2) / (2 * np.pi)) / (2 * elastic.mu)
        s, c = np.sin(angle / 2), np.cos(angle / 2)
        kappa = 3 - 4 * elastic.nu
        u1 = k1 * c * (kappa - 1 + 2 * s**2) + k2 * s * (kappa + 1 + 2 * c**2)
        u2 = k1 * s * (kappa + 1 - 2 * c**2) - k2 * c * (kappa - 1 - 2 * s**2)
        u3 = 4 * k3 * s
        return (root * np.stack([u1, u2, u3])).T @ frame

    return field


def penny_tension(elastic, sigma, a=1.0) -> Field:
    """Free-faced penny under remote sigma_zz = sigma: K_I = 2 sigma sqrt(a/pi)."""
    mu, nu = elastic.mu, elastic.nu
    strength = 2 * sigma / np.pi

    def field(points, side):
        p = _Oblate(points, side, a)
        along_r = -strength * ((1 - 2 * nu) * p.G_r + p.z_g_r)
        normal = strength * (2 * (1 - nu) * p.g - p.z_g_z)
        young = 2 * mu * (1 + nu)
        far = sigma / young * np.asarray(points) * [-nu, -nu, 1.0]
        return far + np.stack([along_r * p.cos, along_r * p.sin, p.side * normal], 1) / (2 * mu)

    return field


def penny_shear(elastic, tau, a=1.0) -> Field:
    """Free-faced penny under remote sigma_xz = tau.

    K_II = 4 tau sqrt(a/pi)/(2 - nu) cos w, K_III = (1 - nu) 4 tau sqrt(a/pi)/(2 - nu) sin w at
    the polar angle w.  The far field is u_x = tau z/mu.
    """
    mu, nu = elastic.mu, elastic.nu
    strength = 4 * (1 - nu) * tau / (np.pi * (2 - nu) * mu)
    potential = -strength / (2 * (1 - nu))

    def field(points, side):
        p = _Oblate(points, side, a)
        x, y = np.asarray(points).T[:2]
        u_x = strength * p.g + potential * (p.z * p.H + x**2 * p.z_H_r_over_r)
        u_y = potential * x * y * p.z_H_r_over_r
        u_z = potential * x * (-(1 - 2 * nu) * p.H + p.z_g_r_over_r)
        far = tau / mu * np.asarray(points)[:, 2]
        # The crack's own field is odd in z along the crack, even across it.
        return np.stack([p.side * u_x + far, p.side * u_y, u_z], 1)

    return field


def penny_torsion(elastic, tau0, a=1.0) -> Field:
    """Free-faced penny under the twist sigma_theta_z = tau0 r/a of the uncracked solid.

    K_III = -4/3 tau0 sqrt(a/pi) (e3 runs against theta); K_I = K_II = 0.
    """
    mu = elastic.mu
    strength = 4 * tau0 / (3 * np.pi * mu * a)

    def field(points, side):
        p = _Oblate(points, side, a)
        one = 1 + p.zeta**2
        # m sqrt(1 - m^2) sqrt(1 + zeta^2) q_2'(zeta): harmonic, r sqrt(a^2 - r^2) on the crack.
        profile = (3 * p.zeta**2 + 2) / one - 3 * p.zeta * p.arccot
        u_over_r = p.side * strength * a * p.m * profile / 2
        u_over_r = u_over_r + tau0 / mu * np.asarray(points)[:, 2] / a
        x, y = np.asarray(points).T[:2]
        return np.stack([-y * u_over_r, x * u_over_r, 0 * x], 1)

    return field


def moved(field: Field, frame, origin) -> Field:
    """The same field, its x, y, z axes turned to the rows of `frame`, its centre at `origin`."""
    frame = np.asarray(frame)

    def turned(points, side):
        return field((np.asarray(points) - origin) @ frame.T, side) @ frame

    return turned


def sum_of(*fields: Field) -> Field:
    """Superposition."""

    def total(points, side):
        return sum(f(points, side) for f in fields)

    return total


class _Oblate:
    """Oblate coordinates of the half-space z >= 0, to which points below are mirrored.

    g = a m (1 - zeta arccot zeta) is harmonic, sqrt(a^2 - r^2) on the crack and 0 on the rest of
    z = 0.  G is its integral over z from infinity, H = G_r/r.  Products with z stay bounded at
    the front, where the factors do not.
    """

    def __init__(self, points, side, a):
        x, y, z = np.asarray(points, dtype=float).T
        self.side = np.where(side != 0, side, np.where(z < 0, -1.0, 1.0))
        self.z = z = np.abs(z)
        r = np.hypot(x, y)
        with np.errstate(invalid="ignore"):
            self.cos, self.sin = (np.where(r > 0, v / np.where(r > 0, r, 1), 0) for v in (x, y))
        excess = ((r - a) * (r + a) + z**2) / a**2
        root = np.hypot(excess, 2 * z / a)
        # The larger of zeta, m first: the other follows from z without cancellation.
        large = np.sqrt((np.abs(excess) + root) / 2)
        small = np.where(large > 0, z / a / np.where(large > 0, large, 1), 0)
        self.zeta = zeta = np.where(excess > 0, large, small)
        self.m = m = np.where(excess > 0, small, large)
        self.arccot = np.arctan2(1.0, zeta)
        spread = zeta**2 + m**2
        spread = np.where(spread > 0, spread, 1.0)
        one = 1 + zeta**2
        self.g = a * m * (1 - zeta * self.arccot)
        self.H = (self.arccot - zeta / one) / 2
        self.G_r = r * self.H
        self.z_g_z = a * m * zeta * (zeta / spread - self.arccot)
        self.z_g_r_over_r = -zeta * m**2 / (spread * one)
        self.z_g_r = r * self.z_g_r_over_r
        self.z_H_r_over_r = -m * zeta**2 / (a * spread * one**2)
