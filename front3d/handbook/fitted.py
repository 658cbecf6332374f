"""Factors that the fitted equations of Newman and Raju for cracks in plates have in common.

The equations have one set of coefficients for a/c <= 1 and another beyond.  Each set gets a
ratio of at most 1 (`flat` = a/c, `steep` = c/a, 1 where the other one holds), so that the one that
is not used stays finite.
"""

from dataclasses import dataclass

import numpy as np

from front3d.arrays import BoolArray, FloatArray


@dataclass(frozen=True, slots=True, eq=False)
class Aspect:
    """The ratio of the semi-axes, arrays of one shape: a/c, whether <= 1, a/c and c/a up to 1."""

    ratio: FloatArray
    shallow: BoolArray
    flat: FloatArray
    steep: FloatArray

    @classmethod
    def of(cls, a: FloatArray, c: FloatArray) -> "Aspect":
        shallow = a <= c
        return cls(a / c, shallow, np.where(shallow, a / c, 1.0), np.where(shallow, 1.0, c / a))

    def choose(self, shallow: FloatArray, deep: FloatArray) -> FloatArray:
        """The first for a/c <= 1, the second beyond."""
        return np.where(self.shallow, shallow, deep)

    @property
    def shape_factor(self) -> FloatArray:
        """Q = 1 + 1.464 (short/long)^1.65, within 0.07 % of the elliptic integral in K."""
        return 1.0 + 1.464 * (self.flat * self.steep) ** 1.65

    def angular(self, phi: FloatArray) -> FloatArray:
        """The ellipse's own variation of K along the front."""
        sine2, cosine2 = np.sin(phi) ** 2, np.cos(phi) ** 2
        return self.choose(sine2 + self.flat**2 * cosine2, cosine2 + self.steep**2 * sine2) ** 0.25


def surface_polynomial(aspect: Aspect, depth: FloatArray) -> FloatArray:
    """M1 + M2 (a/t)^2 + M3 (a/t)^4 of a surface crack, taken over for cracks at holes."""
    flat, steep = aspect.flat, aspect.steep
    m1 = aspect.choose(1.13 - 0.09 * flat, np.sqrt(steep) * (1.0 + 0.04 * steep))
    m2 = aspect.choose(-0.54 + 0.89 / (0.2 + flat), 0.2 * steep**4)
    m3 = aspect.choose(0.5 - 1.0 / (0.65 + flat) + 14.0 * (1.0 - flat) ** 24, -0.11 * steep**4)
    return m1 + m2 * depth**2 + m3 * depth**4


def surface_rise(aspect: Aspect, depth: FloatArray, sine: FloatArray) -> FloatArray:
    """g: the rise of K towards the free surface of a surface crack."""
    return 1.0 + (0.1 + 0.35 * aspect.steep * depth**2) * (1.0 - sine) ** 2


def bending_share(
    aspect: Aspect, depth: FloatArray, sine: FloatArray, leading: float
) -> FloatArray:
    """H: the bending stress that counts, over its outer-fibre value.

    `leading` is the constant of the quadratic coefficient at the deepest point, the one number in
    which surface (0.55) and corner cracks (0.64) differ.
    """
    flat, steep = aspect.flat, aspect.steep
    power = 0.2 + flat * steep + 0.6 * depth
    at_surface = aspect.choose(
        1.0 - (0.34 + 0.11 * flat) * depth,
        1.0
        - (0.04 + 0.41 * steep) * depth
        + (0.55 - 1.93 * steep**0.75 + 1.38 * steep**1.5) * depth**2,
    )
    linear = aspect.choose(-1.22 - 0.12 * flat, -2.11 + 0.77 * steep)
    square = aspect.choose(
        leading - 1.05 * flat**0.75 + 0.47 * flat**1.5,
        leading - 0.72 * steep**0.75 + 0.14 * steep**1.5,
    )
    deepest = 1.0 + linear * depth + square * depth**2
    return at_surface + (deepest - at_surface) * sine**power
