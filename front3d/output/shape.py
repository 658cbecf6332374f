"""What a front looks like in its own plane: depth under its surface, and its ellipse.

Only for drawing: where K stands beside the section, and which parametric angle a station has.  The
front alone decides, by the way it meets its ends; fronts meet surfaces nearly at right angles.
"""

from dataclasses import dataclass

import numpy as np

from front3d.arrays import FloatArray
from front3d.crack.front import FREE_SURFACE
from front3d.results import FrontResult

FLAT = 0.02
"""Largest distance from the front's plane, in its size, of a front that counts as plane."""

FITS = 0.02
"""Largest |x^2/c^2 + y^2/a^2 - 1| of a front that counts as an ellipse."""


ROUND = 0.98
"""Ratio of the semi-axes from which a closed front counts as a circle."""


@dataclass(frozen=True, slots=True, eq=False)
class Section:
    """The front in the crack plane, stations as (across, depth).

    Attributes
    ----------
    kind : "surface", "corner" or "through"
    across, depth : (n,) coordinates; the free surface that depth counts from is depth = 0
    outline : (m, 2) corners of the crack's area in the section
    depth_name : what depth is, in words
    """

    kind: str
    across: FloatArray
    depth: FloatArray
    outline: FloatArray
    depth_name: str


@dataclass(frozen=True, slots=True, eq=False)
class Ellipse:
    """Semi-axes and parametric angle of an elliptic front.

    Attributes
    ----------
    a, c : semi-axes across the surface (or the shorter one), and along it (or the longer)
    angle : (n,) degrees; a station stands at (c cos, a sin)
    """

    a: float
    c: float
    angle: FloatArray


def section_of(front: FrontResult) -> Section | None:
    """How to draw K beside the section; None for a closed front, one between symmetry planes, or
    one that is not plane.
    """
    if front.closed or FREE_SURFACE not in front.ends or len(front) < 3:
        return None
    plane = _plane(front)
    if plane is None:
        return None
    x, ways = plane
    facing = float(ways[0] @ ways[1])
    both = front.ends.count(FREE_SURFACE) == 2
    start = 0 if front.ends[0] == FREE_SURFACE else -1
    if facing < -0.7:
        down = _unit(x[-1] - x[0]) * (1 if start == 0 else -1)
        name = "position through the thickness" if both else "distance from the free surface"
        return _section("through", front, x, start, down, name)
    if facing > 0.7 and both:
        along = _unit(x[-1] - x[0])
        middle = x.mean(axis=0) - x[0]
        return _section(
            "surface",
            front,
            x,
            0,
            _unit(middle - middle @ along * along),
            "depth below the surface",
        )
    if abs(facing) > 0.7:
        return None
    name = "distance from the surface at s = 0" if both else "depth below the surface"
    return _section("corner" if both else "surface", front, x, start, ways[start], name)


def ellipse_of(front: FrontResult) -> Ellipse | None:
    """The ellipse through the stations, if they lie on a whole one that is not a circle, or on a
    half or a quarter of one.
    """
    plane = _plane(front) if len(front) > 4 else None
    if plane is None:
        return None
    x, ways = plane
    if front.closed:
        return _whole(x)
    facing = float(ways[0] @ ways[1])
    if facing > 0.7:
        centre = (x[0] + x[-1]) / 2
        first = _unit(x[0] - centre)
        second = np.array([-first[1], first[0]])
    elif abs(facing) < 0.3:
        # The axes run through the ends along the surfaces that these lie on.
        second = _unit(ways[0])
        first = np.array([second[1], -second[0]])
        centre = x[0] + (x[-1] - x[0]) @ first * first
    else:
        return None
    u, v = (x - centre) @ first, (x - centre) @ second
    u, v = u * np.sign(u[0]), v * np.sign(v[len(v) // 2])
    if min(np.ptp(u), np.ptp(v)) < 1e-6 * front.length:
        return None
    squares = np.stack([u**2, v**2], axis=1)
    return _checked(np.linalg.lstsq(squares, np.ones(len(u)), rcond=None)[0], u, v)


def _plane(front: FrontResult) -> tuple[FloatArray, tuple[FloatArray, FloatArray]] | None:
    """Stations (n, 2) in the front's plane, and the ways into the solid from both ends, (2,)."""
    normal = _unit(front.frames[:, 1].mean(axis=0))
    across = front.frames[0, 2] - front.frames[0, 2] @ normal * normal
    if not np.linalg.norm(across) > 0.5:
        return None
    basis = np.stack([_unit(across), np.cross(normal, _unit(across))])
    offset = front.positions - front.positions[0]
    if np.abs(offset @ normal).max() > FLAT * np.linalg.norm(np.ptp(offset, axis=0)):
        return None
    flat = front.frames[[0, -1], 2] @ basis.T
    return offset @ basis.T, (_unit(flat[0]), -_unit(flat[1]))


def _section(
    kind: str, front: FrontResult, x: FloatArray, start: int, down: FloatArray, name: str
) -> Section:
    along = np.array([-down[1], down[0]])
    middle = len(x) // 2
    if kind == "surface" and front.ends.count(FREE_SURFACE) == 2:
        origin = (x[0] + x[-1]) / 2
        along *= np.sign((x[-1] - x[0]) @ along) or 1
    else:
        # From the crack towards the solid: the crack is on the left of the picture.
        growth = front.frames[middle, 0]
        normal = _unit(front.frames[:, 1].mean(axis=0))
        first = _unit(front.frames[0, 2] - front.frames[0, 2] @ normal * normal)
        flat = np.array([growth @ first, growth @ np.cross(normal, first)])
        along *= np.sign(flat @ along) or 1
        origin = x[start].copy()
        if kind != "through":
            origin += (x[-1 - start if start == 0 else 0] - x[start]) @ along * along
    across, depth = (x - origin) @ along, (x - x[start]) @ down
    points = np.stack([across, depth], axis=1)
    if kind == "through":
        reach = across.min() - 0.35 * np.ptp(depth)
        outline = np.vstack([points, [[reach, depth[-1]], [reach, depth[0]]]])
    elif kind == "surface" and front.ends.count(FREE_SURFACE) == 2:
        outline = points
    else:
        outline = np.vstack([points, [[0.0, 0.0]]])
    return Section(kind, across, depth, outline, name)


def _whole(x: FloatArray) -> Ellipse | None:
    """A whole ellipse: the conic A x^2 + B x y + C y^2 + D x + E y = 1 by least squares."""
    middle, size = x.mean(axis=0), float(np.ptp(x, axis=0).max())
    u, v = ((x - middle) / size).T
    terms = np.stack([u * u, u * v, v * v, u, v], axis=1)
    A, B, C, D, E = np.linalg.lstsq(terms, np.ones(len(x)), rcond=None)[0]
    form = np.array([[A, B / 2], [B / 2, C]])
    values, axes = np.linalg.eigh(form)
    if values[0] <= 0:
        return None
    centre = np.linalg.solve(-2 * form, [D, E])
    scale = 1 + centre @ form @ centre
    turned = (np.stack([u, v], axis=1) - centre) @ axes * size  # the longer axis first
    found = _checked(values / scale / size**2, *turned.T)
    # A circle has no longer axis to count an angle from.
    return found if found is not None and found.a < ROUND * found.c else None


def _checked(inverse_squares: FloatArray, u: FloatArray, v: FloatArray) -> Ellipse | None:
    if inverse_squares.min() <= 0:
        return None
    if np.abs(np.stack([u**2, v**2], axis=1) @ inverse_squares - 1).max() > FITS:
        return None
    c, a = inverse_squares**-0.5
    return Ellipse(float(a), float(c), np.degrees(np.unwrap(np.arctan2(v / a, u / c))))


def _unit(vector: FloatArray) -> FloatArray:
    return vector / max(float(np.linalg.norm(vector)), 1e-300)
