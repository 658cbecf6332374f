"""The front as a smooth curve with a moving frame, in arrays that kernels can evaluate.

A cubic spline runs through the nodes of the front, with arc length as its parameter; a second
one carries the crack normal.  At arc length s,
    e3 = c'(s) / |c'(s)|,   e2 = the normal made orthogonal to e3,   e1 = e2 x e3,
and the frame turns as de_i/ds = w x e_i.
"""

from dataclasses import dataclass

import numpy as np
from scipy.interpolate import CubicSpline

from front3d.arrays import FloatArray, frozen_floats
from front3d.jit import inlined, kernel

CurveArrays = tuple[FloatArray, FloatArray, FloatArray, bool]
"""Knots, position, normal and closed of a `Curve`, as kernels take them."""

_SAMPLES = 8
"""Places in a piece where points near the curve are looked for."""


@dataclass(frozen=True, slots=True, eq=False)
class Curve:
    """A curve with normals: piecewise cubics in arc length.

    Attributes
    ----------
    knots : (m + 1,) arc length at the nodes
    position, normal : (m, 4, 3) coefficients per piece, lowest power of (s - knot) first
    closed : whether the last knot is the first one again
    """

    knots: FloatArray
    position: FloatArray
    normal: FloatArray
    closed: bool

    def __post_init__(self) -> None:
        for name in ("knots", "position", "normal"):
            object.__setattr__(self, name, frozen_floats(getattr(self, name)))

    @property
    def length(self) -> float:
        return float(self.knots[-1])

    @property
    def arrays(self) -> CurveArrays:
        """What the kernels take."""
        return self.knots, self.position, self.normal, self.closed

    def frames(self, s: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
        """Positions (n, 3), frames (n, 3, 3) with rows e1, e2, e3, and turning w (n, 3)."""
        s = frozen_floats(s)
        place, frame, turning = (
            np.empty((len(s), 3)),
            np.empty((len(s), 3, 3)),
            np.empty((len(s), 3)),
        )
        _frames(s, self.arrays, place, frame, turning)
        return place, frame, turning

    def samples(self) -> tuple[FloatArray, float]:
        """Arc lengths (n,) all along, and a distance that none is farther from the next."""
        parts = np.arange(_SAMPLES) / _SAMPLES
        s = parts[None, :] * np.diff(self.knots)[:, None] + self.knots[:-1, None]
        gap = float(np.diff(self.knots).max()) / _SAMPLES
        return np.append(s.ravel(), self.knots[-1]), gap

    def project(self, x: FloatArray, seed: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Arc length of the nearest point and distance, (n,) each, for points x, (n, 3)."""
        s, distance = np.ascontiguousarray(seed, float).copy(), np.empty(len(x))
        _project_all(np.ascontiguousarray(x), self.arrays, s, distance)
        return s, distance


def fit_curve(nodes: FloatArray, normals: FloatArray, closed: bool) -> Curve:
    """Curve through nodes, (m, 3), with the crack normal at each; a closed one is not repeated."""
    if closed:
        nodes, normals = np.vstack([nodes, nodes[:1]]), np.vstack([normals, normals[:1]])
    chord = np.linalg.norm(np.diff(nodes, axis=0), axis=1)
    s = np.concatenate([[0.0], np.cumsum(chord)])
    for _ in range(2):  # chord length, then the arc length of the curve that it gave
        position = _spline(s, nodes, closed)
        s = np.concatenate([[0.0], np.cumsum(_piece_lengths(position))])
    position = _spline(s, nodes, closed)
    normal = _spline(s, normals, closed)
    return Curve(s, _pieces(position), _pieces(normal), closed)


def _spline(s: FloatArray, values: FloatArray, closed: bool) -> CubicSpline:
    return CubicSpline(s, values, bc_type="periodic" if closed else "not-a-knot")


def _piece_lengths(spline: CubicSpline) -> FloatArray:
    x, w = np.polynomial.legendre.leggauss(5)
    knots = spline.x
    half = np.diff(knots) / 2
    t = knots[:-1, None] + half[:, None] * (x + 1)
    speed = np.linalg.norm(spline(t, 1), axis=2)
    lengths: FloatArray = half * (speed @ w)
    return lengths


def _pieces(spline: CubicSpline) -> FloatArray:
    """(m, 4, 3) coefficients, lowest power first; a straight line or parabola is padded."""
    c = spline.c[::-1]
    padded = np.zeros((4, *c.shape[1:]))
    padded[: len(c)] = c
    return padded.transpose(1, 0, 2)


@inlined
def locate(s: float, knots: FloatArray, closed: bool) -> tuple[int, float, float]:
    """Piece, offset in it, and the part of s beyond an end of an open curve."""
    last = knots[-1]
    beyond = 0.0
    if closed:
        s -= np.floor(s / last) * last
    elif s < 0.0:
        beyond, s = s, 0.0
    elif s > last:
        beyond, s = s - last, last
    low, high = 0, len(knots) - 2
    while low < high:
        middle = (low + high + 1) // 2
        if knots[middle] <= s:
            low = middle
        else:
            high = middle - 1
    return low, s - knots[low], beyond


@inlined
def _value(c: FloatArray, t: float, k: int) -> float:
    """Component k of a piece with coefficients c, (4, 3), lowest power first."""
    return c[0, k] + t * (c[1, k] + t * (c[2, k] + t * c[3, k]))


@inlined
def _slope(c: FloatArray, t: float, k: int) -> float:
    return c[1, k] + t * (2.0 * c[2, k] + 3.0 * t * c[3, k])


@inlined
def _bend(c: FloatArray, t: float, k: int) -> float:
    return 2.0 * c[2, k] + 6.0 * t * c[3, k]


@inlined
def frame_at(
    s: float, curve: CurveArrays, place: FloatArray, frame: FloatArray, turning: FloatArray
) -> None:
    """Position, frame (rows e1, e2, e3) and turning w (components along e1, e2, e3) at s.

    Beyond the ends of an open curve the frame goes on unturned along the tangent.
    """
    knots, position, normal, closed = curve
    piece, t, beyond = locate(s, knots, closed)
    c, n = position[piece], normal[piece]
    speed = 0.0
    for k in range(3):
        frame[2, k] = _slope(c, t, k)
        speed += frame[2, k] ** 2
    speed = np.sqrt(speed)
    along = 0.0
    for k in range(3):
        frame[2, k] /= speed
        place[k] = _value(c, t, k) + beyond * frame[2, k]
        along += _value(n, t, k) * frame[2, k]
    size = 0.0
    for k in range(3):
        frame[1, k] = _value(n, t, k) - along * frame[2, k]
        size += frame[1, k] ** 2
    size = np.sqrt(size)
    for k in range(3):
        frame[1, k] /= size
    for k in range(3):
        i, j = (k + 1) % 3, (k + 2) % 3
        frame[0, k] = frame[1, i] * frame[2, j] - frame[1, j] * frame[2, i]
        turning[k] = 0.0
    if beyond != 0.0:
        return
    # de3/ds is the part of c'' across the tangent; de2/ds needs its component along e1 only.
    # w1 = e3 . de2/ds = -e2 . de3/ds,  w2 = e1 . de3/ds,  w3 = e2 . de1/ds = -e1 . de2/ds.
    for k in range(3):
        bend = _bend(c, t, k) / speed**2
        turning[0] -= frame[1, k] * bend
        turning[1] += frame[0, k] * bend
        turning[2] += frame[0, k] * (bend * along - _slope(n, t, k) / speed) / size


@inlined
def nearest(x: FloatArray, seed: float, curve: CurveArrays) -> tuple[float, float]:
    """Arc length of the point of the curve nearest to x, (3,), and its distance.

    Newton's method on (x - c(s)) . c'(s) = 0 from a seed within a cell or two of the answer; it
    converges quadratically, so a last step below 1e-8 of the length leaves rounding only.
    """
    knots, position, _, closed = curve
    s = seed
    for _ in range(30):
        piece, t, beyond = locate(s, knots, closed)
        c = position[piece]
        f, square, bent = 0.0, 0.0, 0.0
        for k in range(3):
            slope = _slope(c, t, k)
            gap = x[k] - _value(c, t, k) - beyond * slope
            f += gap * slope
            square += slope**2
            bent += gap * _bend(c, t, k)
        if beyond == 0.0 and square > bent:
            square -= bent
        step = f / square
        s += step
        if abs(step) <= 1e-8 * knots[-1]:
            break
    piece, t, beyond = locate(s, knots, closed)
    c = position[piece]
    distance = 0.0
    for k in range(3):
        distance += (x[k] - _value(c, t, k) - beyond * _slope(c, t, k)) ** 2
    if closed:
        s -= np.floor(s / knots[-1]) * knots[-1]
    return s, np.sqrt(distance)


@kernel
def _project_all(x: FloatArray, curve: CurveArrays, s: FloatArray, distance: FloatArray) -> None:
    for n in range(len(x)):
        s[n], distance[n] = nearest(x[n], s[n], curve)


@kernel
def _frames(
    s: FloatArray, curve: CurveArrays, place: FloatArray, frame: FloatArray, turning: FloatArray
) -> None:
    for n in range(len(s)):
        frame_at(s[n], curve, place[n], frame[n], turning[n])
