"""Fronts on ellipses as a comparison takes them, in any place."""

import numpy as np
from scipy.spatial.transform import Rotation

from front3d.handbook.placing import FREE, FrontShape

NU = 0.3
A, C = 6.0, 10.0


def elliptic(start, stop, n=33, *, a=A, c=C, closed=False, ends=(FREE, FREE), inward=False):
    """A front on the ellipse (c cos phi, a sin phi, 0) with e2 = +z, in the direction of its e3.

    `inward`: the ligament is inside.  Returns the shape and phi of its stations, degrees.
    """
    phi = np.linspace(np.radians(start), np.radians(stop), n, endpoint=not closed)
    x, y = c * np.cos(phi), a * np.sin(phi)
    e1 = np.stack([np.cos(phi) / c, np.sin(phi) / a, 0 * phi], axis=1)
    e1 *= (-1 if inward else 1) / np.linalg.norm(e1, axis=1, keepdims=True)
    return shaped(np.stack([x, y, 0 * x], axis=1), e1, (0.0, 0.0, 1.0), closed, ends), phi


def shaped(positions, e1, normal, closed=False, ends=(FREE, FREE)):
    """A front that runs along e3 = e1 x e2, whichever way the positions are given."""
    e2 = np.tile(np.asarray(normal), (len(e1), 1))
    e3 = np.cross(e1, e2)
    if (np.diff(positions, axis=0) * e3[:-1]).sum() < 0:
        positions, e1, e2, e3 = positions[::-1], e1[::-1], e2[::-1], e3[::-1]
        ends = ends[::-1]
    step = np.linalg.norm(np.diff(positions, axis=0), axis=1)
    s = np.append(0.0, np.cumsum(step))
    length = s[-1] + (np.linalg.norm(positions[0] - positions[-1]) if closed else 0.0)
    frames = np.stack([e1, e2, e3], axis=1)
    return FrontShape(positions, frames, s, float(length), closed, () if closed else ends)


def moved(shape, turn, shift=(0.0, 0.0, 0.0)):
    """The same front elsewhere, the axes turned."""
    positions = shape.positions @ turn.T + shift
    return FrontShape(
        positions, shape.frames @ turn.T, shape.s, shape.length, shape.closed, shape.ends
    )


def flipped(shape):
    """The same front with the other face called the upper one: e2 turns, and e3 with it."""
    return shaped(
        shape.positions, shape.frames[:, 0], -shape.frames[0, 1], shape.closed, shape.ends
    )


TURNS = [np.eye(3), *Rotation.random(4, random_state=3).as_matrix()]
SHIFT = np.array([1e3, -40.0, 7.0])


def straight(e1, ends=(FREE, FREE)):
    """A front along y at the end of a crack in z = 0 that grows along e1 = +x or -x."""
    positions = np.outer(np.linspace(-2, 2, 9), [0.0, 1.0, 0.0])
    return shaped(positions, np.tile([e1, 0.0, 0.0], (9, 1)), (0, 0, 1.0), ends=ends)
