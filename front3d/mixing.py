"""How the modes mix at a station, and where a crack would turn by published criteria.

Angles are in degrees in the frame of a station: the kink angle phi turns the direction of growth
from e1 towards e2 (about e3); the twist angle turns the normal of the new surface from there
towards e3 (about the direction of growth).  Both criteria look at the singular stresses on a small
cylinder around the front, times sqrt(2 pi r):

    s(phi) = cos(phi/2) (K_I cos^2(phi/2) - 3/2 K_II sin(phi))      tangential
    t(phi) = K_III cos(phi/2)                                       shear along the front

Both need open faces: no criterion is defined where K_I is negative, since the singular stresses
there belong to faces that overlap.  Such stations get NaN (see `open_K`), and so do those without
load.  They say where a crack would turn, in a material without preferred directions; they do not
say whether it grows.
"""

from collections.abc import Mapping

import numpy as np

from front3d.arrays import BoolArray, FloatArray
from front3d.results import pure_tearing
from front3d.solid import Constants

CLOSED = 0.01
"""Negative K_I, in parts of the station's own |K|, up to which it is taken for scatter around
nought, and K_I for nought."""

SOURCES: Mapping[str, str] = {
    "mts": "maximum tangential stress: Erdogan and Sih, J. Basic Eng. 85 (1963) 519",
    "schollmann": (
        "largest principal stress on a cylinder around the front: Schollmann, Richard, Kullmer "
        "and Fulland, Int. J. Fracture 117 (2002) 129"
    ),
}
"""The published criteria by the suffix of their columns."""


def mix_columns(K: FloatArray, material: Constants) -> dict[str, FloatArray]:
    """Every figure of the mode mix by column name, (n,) each, from K (n, 3).

    `G_I`, `G_II`, `G_III`; `kink_deg_mts`, `K_eq_mts`; `kink_deg_schollmann`,
    `twist_deg_schollmann`, `K_eq_schollmann`.
    """
    split = energy_by_mode(K, material)
    columns = {f"G_{mode}": split[:, k] for k, mode in enumerate(("I", "II", "III"))}
    columns["kink_deg_mts"], columns["K_eq_mts"] = tangential(K)
    kink, twist, equivalent = principal(K)
    return columns | {
        "kink_deg_schollmann": kink,
        "twist_deg_schollmann": twist,
        "K_eq_schollmann": equivalent,
    }


def energy_by_mode(K: FloatArray, material: Constants) -> FloatArray:
    """(n, 3) energy release rate of each mode alone; their sum is G.  Irwin (1957)."""
    plane, shear = np.asarray(material.plane_strain_modulus), np.asarray(material.shear_modulus)
    compliance = np.stack([1 / plane, 1 / plane, 1 / (2 * shear)], axis=-1)
    return K**2 * compliance


def open_K(K: FloatArray) -> FloatArray:
    """K (n, 3) for the criteria: NaN where faces are closed, K_I = 0 where it scatters around it.

    Closed: K_I below nought by more than CLOSED of the station's |K|.
    """
    size = np.linalg.norm(K, axis=1)
    closed = K[:, 0] < -CLOSED * size
    out = np.array(K)
    out[:, 0] = np.maximum(K[:, 0], 0.0)
    out[closed | ~(size > 0)] = np.nan
    return out


def tangential(K: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Kink angle in degrees and equivalent K of the maximum tangential stress, (n,) each.

    The direction of the largest s(phi), where s'(phi) = 0, and its value there; K_III plays no
    part.  In closed form, cos(phi) = (3 K_II^2 + K_I sqrt(K_I^2 + 8 K_II^2)) / (K_I^2 + 9 K_II^2),
    with the sign opposite to K_II.  NaN where K_I is negative, and in pure mode III, where K_I and
    K_II only scatter around nought and would turn the angle from side to side.

    Source: Erdogan and Sih, J. Basic Eng. 85 (1963) 519-525.
    """
    K = open_K(K)
    K[pure_tearing(K)] = np.nan
    kink = _tangential_kink(K)
    stress, _ = _cylinder_stresses(kink, K)
    return np.degrees(kink), stress


def principal(K: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Kink and twist angle in degrees and equivalent K of the largest principal stress on the
    cylinder, (n,) each.

    The kink is the direction of the largest s1(phi) = s/2 + sqrt(s^2/4 + t^2), the equivalent K its
    value there, and the twist atan2(2 t, s)/2 the direction of that stress out of the plane across
    the front (the stress along the front is neglected, as published).  NaN where K_I is negative.

    Source: Schollmann, Richard, Kullmer and Fulland, Int. J. Fracture 117 (2002) 129-141.
    """
    K = open_K(K)
    kink = _largest_between(K)
    s, t = _cylinder_stresses(kink, K)
    return np.degrees(kink), np.degrees(0.5 * np.arctan2(2 * t, s)), _principal_stress(kink, K)


def _cylinder_stresses(phi: FloatArray, K: FloatArray) -> tuple[FloatArray, FloatArray]:
    k1, k2, k3 = K.T
    half = np.cos(phi / 2)
    return half * (k1 * half**2 - 1.5 * k2 * np.sin(phi)), k3 * half


def _principal_stress(phi: FloatArray, K: FloatArray) -> FloatArray:
    s, t = _cylinder_stresses(phi, K)
    return 0.5 * (s + np.hypot(s, 2 * t))


def _tangential_kink(K: FloatArray) -> FloatArray:
    """Radians; NaN without K_I and K_II."""
    k1, k2, _ = K.T
    below = k1**2 + 9 * k2**2
    known: BoolArray = below > 0
    cosine = (3 * k2**2 + k1 * np.sqrt(k1**2 + 8 * k2**2)) / np.where(known, below, np.nan)
    return -np.sign(k2) * np.arccos(np.clip(cosine, -1, 1))


_GOLDEN = (np.sqrt(5.0) - 1) / 2
_HALVINGS = 45  # golden sections: 1.2 rad shrink below 1e-9


def _largest_between(K: FloatArray) -> FloatArray:
    """Radians of the largest principal stress, between 0 and the kink of the tangential stress.

    It lies there because s1 grows with s and with |t|: t falls on both sides of 0, s has its one
    maximum at the tangential kink, and with K_I >= 0 s is smaller on the other side of 0.
    """
    kink = np.nan_to_num(_tangential_kink(K))
    low, high = np.minimum(kink, 0), np.maximum(kink, 0)
    for _ in range(_HALVINGS):
        left, right = high - _GOLDEN * (high - low), low + _GOLDEN * (high - low)
        rising = _principal_stress(left, K) < _principal_stress(right, K)
        low, high = np.where(rising, left, low), np.where(rising, high, right)
    return np.where(np.isfinite(K[:, 0]), 0.5 * (low + high), np.nan)
