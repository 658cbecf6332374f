"""Quarter-elliptical corner cracks, in a plate and at a hole: fitted equations."""

import numpy as np
from numpy.typing import ArrayLike

from front3d.arrays import FloatArray
from front3d.handbook.checks import floats, require, require_sizes
from front3d.handbook.fitted import Aspect, bending_share, surface_polynomial, surface_rise


def corner_crack(
    phi: ArrayLike,
    a: ArrayLike,
    c: ArrayLike,
    t: ArrayLike,
    b: ArrayLike = np.inf,
    tension: ArrayLike = 0.0,
    bending: ArrayLike = 0.0,
) -> FloatArray:
    """K_I = (S_t + H S_b) sqrt(pi a/Q) F of a corner crack in a plate.

    Parameters
    ----------
    phi : parametric angle, radians: 0 on the face of the plate, pi/2 on its edge
    a, c : semi-axes along the thickness and along the width
    t, b : thickness and full width of the plate
    tension : remote stress S_t
    bending : remote outer-fibre stress S_b, tensile on the cracked face (where phi = 0)

    Range: 0.2 <= a/c <= 2, a/t < 1, c/b < 0.5, 0 <= phi <= pi/2.  Fitted to finite-element results
    for Poisson's ratio 0.3; claimed within 5 % of them.  High-order finite elements made for this
    project differ, in per cent of the largest K of the front, by up to 4.5 in tension but for
    a/c <= 0.4 with a/t = 0.8 (10 to 16 high towards phi = pi/2), and by up to 17.5 in bending.
    At the free surfaces themselves no K exists in the strict sense.

    Source: Newman and Raju, NASA TM-85793 (1984), and chapter 9 of Atluri (ed.), Computational
    Methods in the Mechanics of Fracture (1986).  From memory.
    """
    phi, a, c, t, b, s_t, s_b = floats(phi, a, c, t, b, tension, bending)
    require_sizes(a=a, c=c, t=t, b=b)
    aspect, depth = Aspect.of(a, c), a / t
    _require_quarter(phi, aspect, depth)
    require(c < 0.5 * b, "c/b", c / b, "below 0.5")

    flat, steep = aspect.flat, aspect.steep
    m1 = aspect.choose(1.08 - 0.03 * flat, np.sqrt(steep) * (1.08 - 0.03 * steep))
    m2 = aspect.choose(-0.44 + 1.06 / (0.3 + flat), 0.375 * steep**2)
    m3 = aspect.choose(-0.5 + 0.25 * flat + 14.8 * (1.0 - flat) ** 15, -0.25 * steep**2)
    sine, cosine = np.clip(np.sin(phi), 0.0, 1.0), np.clip(np.cos(phi), 0.0, 1.0)
    reach = aspect.choose(depth, c / t) ** 2
    to_face = 1.0 + (0.08 + 0.4 * reach) * (1.0 - sine) ** 3
    to_edge = 1.0 + (0.08 + 0.15 * reach) * (1.0 - cosine) ** 3
    x = c / b * np.sqrt(depth)
    width = 1.0 - 0.2 * x + 9.4 * x**2 - 19.4 * x**3 + 27.1 * x**4
    polynomial = m1 + m2 * depth**2 + m3 * depth**4
    factor = polynomial * to_face * to_edge * aspect.angular(phi) * width
    h = bending_share(aspect, depth, sine, leading=0.64)
    return (s_t + h * s_b) * np.sqrt(np.pi * a / aspect.shape_factor) * factor


def corner_crack_at_hole(
    phi: ArrayLike,
    a: ArrayLike,
    c: ArrayLike,
    t: ArrayLike,
    r: ArrayLike,
    b: ArrayLike = np.inf,
    tension: ArrayLike = 0.0,
    cracks: int = 2,
) -> FloatArray:
    """K_I = S sqrt(pi a/Q) F of corner cracks at a circular hole in a plate.

    Parameters
    ----------
    phi : parametric angle, radians: 0 on the face of the plate, pi/2 in the bore
    a, c : semi-axes along the thickness and away from the hole
    t, r, b : thickness of the plate, radius of the hole, half-width of the plate
    tension : remote gross stress S
    cracks : 2 for two equal cracks on opposite sides, which the equation was fitted to; 1 for
        a single one, by a conversion attributed to Shah

    Range: 0.2 <= a/c <= 2, a/t < 1, 0.5 <= r/t <= 2, (r + c)/b < 0.5, 0 <= phi <= pi/2.  Fitted to
    finite-element results with r/t from 0.5 to 1 and Poisson's ratio 0.3; claimed within 5 % of
    them for two cracks.  High-order finite elements made for this project differ by up to 5 % of
    the largest K of the front for a/c >= 1, and by up to 8.3 % (the equation is low) for
    a/c = 0.5.

    Source: Newman and Raju, NASA TM-83200 (1981), TM-85793 (1984).  From memory, the factor for
    a/c < 1 with the least certainty in this handbook.
    """
    phi, a, c, t, r, b, stress = floats(phi, a, c, t, r, b, tension)
    require_sizes(a=a, c=c, t=t, r=r, b=b)
    require(cracks in (1, 2), "number of cracks", np.asarray(cracks, dtype=float), "1 or 2")
    aspect, depth = Aspect.of(a, c), a / t
    _require_quarter(phi, aspect, depth)
    require((r / t >= 0.5) & (r / t <= 2), "r/t", r / t, "0.5 to 2")
    require(r + c < 0.5 * b, "(r + c)/b", (r + c) / b, "below 0.5")

    flat, steep = aspect.flat, aspect.steep
    sine, cosine = np.clip(np.sin(phi), 0.0, 1.0), np.clip(np.cos(phi), 0.0, 1.0)
    near = 1.0 / (1.0 + c / r * np.cos(0.85 * phi))  # 1 at the bore, 0 far from it
    hole = 1.0 + 0.358 * near + 1.425 * near**2 - 1.578 * near**3 + 2.156 * near**4
    hole = hole / (1.0 + 0.13 * near**2)
    to_bore = aspect.choose(1.0 + 0.04 * flat, 1.13 - 0.09 * steep)
    to_bore = to_bore * (1.0 + 0.1 * (1.0 - cosine) ** 2) * (0.85 + 0.15 * depth**0.25)
    long = 1.0 - 0.7 * (1.0 - depth) * (flat - 0.2) * (1.0 - flat)  # 1 for a/c >= 1
    factor = surface_polynomial(aspect, depth) * surface_rise(aspect, depth, sine)
    factor = factor * hole * to_bore * long * aspect.angular(phi)
    # The crack in the net section; an infinite b makes it 0.
    share = (2.0 * r + cracks * c) / (4.0 * (b - c) + 2.0 * cracks * c)
    factor = factor / np.sqrt(np.cos(np.pi * r / (2.0 * b)))
    factor = factor / np.sqrt(np.cos(np.pi * share * np.sqrt(depth)))
    if cracks == 1:
        area = a * c / (t * r)
        factor = factor * np.sqrt((4.0 / np.pi + area / 2.0) / (4.0 / np.pi + area))
    return stress * np.sqrt(np.pi * a / aspect.shape_factor) * factor


def _require_quarter(phi: FloatArray, aspect: Aspect, depth: FloatArray) -> None:
    ratio = aspect.ratio
    inside = (ratio >= 0.2 - 1e-9) & (ratio <= 2 + 1e-9)  # a quotient may miss 0.2 by rounding
    require(inside, "a/c", ratio, "0.2 to 2")
    require(depth < 1, "a/t", depth, "below 1")
    require((phi >= -1e-12) & (phi <= np.pi / 2 + 1e-12), "phi", phi, "0 to pi/2")
