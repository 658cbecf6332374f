"""Where the stations of a front stand on the curve that a published solution is about.

An ellipse is placed by the front's own positions: its centre and axes need not be told, and it may
lie anywhere in space.  Only the semi-axes are given, and the front must lie on that ellipse.
"""

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
from scipy.optimize import least_squares

from front3d.arrays import BoolArray, FloatArray
from front3d.errors import CaseError
from front3d.units import percent

FREE, SYMMETRY = "free surface", "symmetry plane"

TOLERANCE = 0.02
"""How far the front may be from the ellipse, over its shorter semi-axis."""

NEAR_SURFACE = 0.125
"""2 phi/pi from a free surface within which stations are not judged."""


class FrontMismatch(CaseError):  # noqa: N818 - not a fault of the program: a reason
    """The front found is not the one that a solution is about."""


@dataclass(frozen=True, slots=True, eq=False)
class FrontShape:
    """What a solution may know about a front.

    Attributes
    ----------
    positions : (n, 3); frames : (n, 3, 3) rows e1, e2, e3
    s : (n,) arc length; length : of the whole front
    closed : whether it is a closed curve; ends : per end, "free surface" or "symmetry plane"
    """

    positions: FloatArray
    frames: FloatArray
    s: FloatArray
    length: float
    closed: bool
    ends: tuple[str, ...]

    @property
    def free(self) -> tuple[int, ...]:
        """Stations at a free surface: none, the first, the last, or both."""
        if self.closed:
            return ()
        return tuple(i for i, end in zip((0, -1), self.ends, strict=True) if end == FREE)


@dataclass(frozen=True, slots=True, eq=False)
class Placed:
    """The front on its curve.

    Attributes
    ----------
    phi : (n,) parametric angle, radians; NaN on a straight front
    long, deep : (3,) unit vectors of the semi-axes c and a; zero on a straight front
    frames : (n, 3, 3) of the stations
    judged : (n,) stations far enough from a free surface to be compared
    """

    phi: FloatArray
    long: FloatArray
    deep: FloatArray
    frames: FloatArray
    judged: BoolArray


def place_straight(shape: FrontShape) -> Placed:
    """A straight front; FrontMismatch where it is curved."""
    if shape.closed:
        raise FrontMismatch("the solution is of a straight front, this one is closed")
    start, end = shape.positions[0], shape.positions[-1]
    chord = (end - start) / np.linalg.norm(end - start)
    offset = shape.positions - start
    away = np.linalg.norm(offset - np.outer(offset @ chord, chord), axis=1).max()
    if away > TOLERANCE * shape.length:
        raise FrontMismatch(
            f"the solution is of a straight front, this one leaves its chord by {away:.3g} "
            f"({percent(away / shape.length)} of its length, allowed {100 * TOLERANCE:g} %)"
        )
    judged = np.ones(len(shape.s), dtype=bool)
    judged[list(shape.free)] = False
    nowhere = np.zeros(3)
    return Placed(np.full(len(shape.s), np.nan), nowhere, nowhere, shape.frames, judged)


def place_ellipse(
    shape: FrontShape,
    a: float,
    c: float,
    kind: str,
    depth: FloatArray | None = None,
    directed: bool = False,
) -> Placed:
    """The parametric angle of each station on the ellipse with the semi-axes a and c.

    Parameters
    ----------
    kind : "embedded" (closed, or parts of it between symmetry planes), "surface" (half, from free
        surface to free surface along c; or a quarter), "corner" (a quarter between free
        surfaces) or "ligament" (as embedded, the solid being inside the circle)
    depth : direction of the semi-axis a, (3,), where a and c are alike
    directed : whether the solution tells the two axes apart, so that `depth` may be needed

    Raises FrontMismatch with the reason.
    """
    plane = _Plane.through(shape)
    q = plane.flat(shape.positions)
    scale = min(a, c)
    if plane.thickness > TOLERANCE * scale:
        raise FrontMismatch(
            f"the front is not plane: it leaves its mean plane by {plane.thickness:.3g}, allowed "
            f"{TOLERANCE * scale:.3g}"
        )
    wanted = None if depth is None else plane.flat_vectors(depth)
    found = [
        (*frame, float(np.abs(_signed(q, *frame, a, c)).max()))
        for frame in _frames(shape, q, a, c, kind, wanted)
    ]
    best = min(away for *_, away in found)
    if best > TOLERANCE * scale:
        raise FrontMismatch(
            f"the front does not lie on the ellipse of a = {a:g}, c = {c:g}: it is off by up to "
            f"{best:.3g}, allowed {TOLERANCE * scale:.3g} ({100 * TOLERANCE:g} % of the shorter); "
            f"{_measured(shape, q, kind)}"
        )
    fitting = [frame for frame in found if frame[-1] <= TOLERANCE * scale]
    centre, long, deep, _ = _chosen(fitting, plane, wanted, directed)
    local = q - centre
    phi = np.arctan2(local @ deep / a, local @ long / c)
    outward = plane.flat_vectors(shape.frames[:, 0])
    steep = np.stack([np.cos(phi) / c, np.sin(phi) / a], axis=1) @ np.stack([long, deep])
    grows_out = bool(np.median((outward * steep).sum(axis=1)) > 0)
    if grows_out == (kind == "ligament"):
        raise FrontMismatch(
            "the front grows away from the centre; the solution is of a crack around a ligament"
            if grows_out
            else "the front grows towards the centre; the solution is of a crack inside the ellipse"
        )
    phi = _in_range(phi, kind, shape)
    judged = _judged(shape, phi)
    return Placed(phi, plane.lift(long), plane.lift(deep), shape.frames, judged)


def _in_range(phi: FloatArray, kind: str, shape: FrontShape) -> FloatArray:
    """Angles as the solution counts them: rounding may carry an end below 0."""
    if kind == "surface":
        phi = np.where(phi < -np.pi / 2, np.pi, phi)
        return np.clip(phi, 0.0, np.pi / 2 if len(shape.free) == 1 else np.pi)
    if kind == "corner":
        return np.clip(phi, 0.0, np.pi / 2)
    return np.mod(phi, 2 * np.pi) if shape.closed else phi


def _judged(shape: FrontShape, phi: FloatArray) -> BoolArray:
    judged = np.ones(len(phi), dtype=bool)
    for i in shape.free:
        judged &= np.abs(phi - phi[i]) * 2 / np.pi >= NEAR_SURFACE - 1e-9
    return judged


# --- the plane of the crack -------------------------------------------------------------------


@dataclass(frozen=True, slots=True, eq=False)
class _Plane:
    """Two directions in the plane (2, 3), a point of it, and how far the front leaves it."""

    axes: FloatArray
    point: FloatArray
    thickness: float

    @classmethod
    def through(cls, shape: FrontShape) -> "_Plane":
        normal = shape.frames[:, 1].mean(axis=0)
        normal /= np.linalg.norm(normal)
        first = np.cross(normal, np.eye(3)[np.argmin(np.abs(normal))])
        first /= np.linalg.norm(first)
        point = shape.positions.mean(axis=0)
        off = float(np.abs((shape.positions - point) @ normal).max())
        return cls(np.stack([first, np.cross(normal, first)]), point, off)

    def flat(self, positions: FloatArray) -> FloatArray:
        return (positions - self.point) @ self.axes.T

    def flat_vectors(self, vectors: FloatArray) -> FloatArray:
        return vectors @ self.axes.T

    def lift(self, vector: FloatArray) -> FloatArray:
        return vector @ self.axes


# --- candidates for centre and axes, in the plane ---------------------------------------------

Frame = tuple[FloatArray, FloatArray, FloatArray]
"""Centre, direction of c, direction of a; (2,) each."""


def _frames(
    shape: FrontShape, q: FloatArray, a: float, c: float, kind: str, depth: FloatArray | None
) -> Iterator[Frame]:
    """The ways in which the front may stand on its ellipse, from its ends."""
    if kind == "surface":
        if shape.closed or not shape.free:
            raise FrontMismatch(f"the solution is of a front from a free surface, {_say(shape)}")
        if len(shape.free) == 2:
            yield _half(q)
        else:
            yield from _quarter(q if shape.free == (0,) else q[::-1], a, c)
        return
    if kind == "corner":
        if len(shape.free) != 2:
            raise FrontMismatch(
                f"the solution is of a front between two free surfaces, {_say(shape)}"
            )
        yield from _quarter(q, a, c)
        yield from _quarter(q[::-1], a, c)
        return
    if shape.closed:
        centre, along, across = _full(shape, q, a, c)
        if abs(a - c) > TOLERANCE * min(a, c):
            yield centre, along, across
            return
        # A circle, or nearly: any direction may be that of a.
        if depth is not None and np.linalg.norm(depth) > 0:
            across = depth / np.linalg.norm(depth)
            along = np.array([-across[1], across[0]])
        yield centre, along, across
        yield centre, across, along
    elif shape.free:
        raise FrontMismatch(f"the solution is of a front that meets no free surface, {_say(shape)}")
    else:
        centre, along, across = _half(q)
        yield centre, along, across
        yield centre, across, along
        yield from _quarter(q, a, c)
        yield from _quarter(q[::-1], a, c)


def _half(q: FloatArray) -> Frame:
    """From one end of an axis to the other.

    A front runs along e3 = e1 x e2, so that a crack that grows outwards bulges to the left of the
    chord, seen against e2.
    """
    chord = q[-1] - q[0]
    along = chord / np.linalg.norm(chord)
    across = np.array([-along[1], along[0]])
    centre: FloatArray = (q[0] + q[-1]) / 2
    return centre, along, across


def _quarter(q: FloatArray, a: float, c: float) -> Iterator[Frame]:
    """From the end of the axis c to the end of the axis a, for both sides of the chord."""
    chord = q[-1] - q[0]  # a deep - c long, where deep is long turned by a right angle
    for side in (1.0, -1.0):
        turn = side * np.array([[0.0, -1.0], [1.0, 0.0]])
        long = np.linalg.solve(a * turn - c * np.eye(2), chord)
        long /= np.linalg.norm(long)
        deep = turn @ long
        yield (q[0] + q[-1] - c * long - a * deep) / 2, long, deep


def _full(shape: FrontShape, q: FloatArray, a: float, c: float) -> Frame:
    """Least squares over centre and direction, from the middle and the moments of the front."""
    step = np.diff(np.append(shape.s, shape.length))
    weight = (step + np.roll(step, 1)) / (2 * shape.length)
    centre = weight @ q
    _, axes = np.linalg.eigh((q - centre).T @ ((q - centre) * weight[:, None]))
    major = axes[:, 1]
    start = np.arctan2(major[1], major[0]) + (0.0 if c >= a else np.pi / 2)
    size = min(a, c)

    def frame(x: FloatArray) -> Frame:
        # A circle has no direction to be found: its own stays as it is.
        turned = start + (x[2] if abs(a - c) > 1e-3 * size else 0.0)
        long = np.array([np.cos(turned), np.sin(turned)])
        return centre + size * x[:2], long, np.array([-long[1], long[0]])

    def off(x: FloatArray) -> FloatArray:
        return _signed(q, *frame(x), a, c) / size

    return frame(least_squares(off, np.zeros(3)).x)


def _signed(
    q: FloatArray, centre: FloatArray, long: FloatArray, deep: FloatArray, a: float, c: float
) -> FloatArray:
    """Distance from the ellipse to first order, positive outside, (n,)."""
    x, y = (q - centre) @ long, (q - centre) @ deep
    level = np.hypot(x / c, y / a)
    slope = np.hypot(x / c**2, y / a**2)
    return (level - 1) * level / np.maximum(slope, 1e-300)


def _chosen(
    fitting: list[tuple[FloatArray, FloatArray, FloatArray, float]],
    plane: _Plane,
    wanted: FloatArray | None,
    directed: bool,
) -> tuple[FloatArray, FloatArray, FloatArray, float]:
    """The best of the frames that fit; by the depth wanted where the axes are alike."""
    best = min(fitting, key=lambda frame: frame[-1])
    if not directed:
        return best
    if wanted is None:
        turned = [f for f in fitting if abs(f[2] @ best[2]) < 0.7]
        if turned:
            raise FrontMismatch(
                "a and c are alike, so the front does not tell which axis is a; name the direction "
                "of a, such as depth=y"
            )
        return best
    along = [f for f in fitting if abs(f[2] @ wanted) > 0.9]
    if not along:
        found = np.round(plane.lift(best[2]), 3) + 0.0
        raise FrontMismatch(
            f"the semi-axis a was found along {'/'.join(f'{v:g}' for v in found)}, not along the "
            "depth given"
        )
    return min(along, key=lambda frame: frame[-1])


def _say(shape: FrontShape) -> str:
    if shape.closed:
        return "this one is closed"
    return f"this one goes from {shape.ends[0]} to {shape.ends[1]}"


def _measured(shape: FrontShape, q: FloatArray, kind: str) -> str:
    """The semi-axes that the front itself has, for the reader."""
    if shape.closed:
        centre = (q.max(axis=0) + q.min(axis=0)) / 2
        reach = np.linalg.norm(q - centre, axis=1)
        return f"the front's own semi-axes are about {reach.min():.4g} and {reach.max():.4g}"
    if kind == "surface" and len(shape.free) == 2:
        centre, _, across = _half(q)
        half, deepest = np.linalg.norm(q[0] - centre), ((q - centre) @ across).max()
        return f"the front's own are about c = {half:.4g} and a = {deepest:.4g}"
    chord = float(np.linalg.norm(q[0] - q[-1]))
    return f"its ends are {chord:.4g} apart"
