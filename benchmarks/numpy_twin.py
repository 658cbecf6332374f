"""The volume kernel of the interaction integral in numpy, vectorised, where constants do not vary.

It is what the compiled kernel is measured against, and checked with.

Every array runs over (cells, Gauss points); the formulas are those of `methods/nodal_forces.py`,
`fields/neartip.py` and `crack/curve.py`, written down anew.
"""

import numpy as np

from front3d.arrays import FloatArray, IntArray
from front3d.crack.curve import CurveArrays
from front3d.methods.nodal_forces import Rule


def cell_forces(
    points: FloatArray,
    cells: IntArray,
    side: IntArray,
    seed: FloatArray,
    displacement: FloatArray,
    rule: Rule,
    curve: CurveArrays,
    shear: float,
    poisson: float,
) -> FloatArray:
    """(cells, steps, 4 modes, nodes, 3) nodal forces."""
    shapes, weights = rule
    values, gradients = shapes[:, 0], shapes[:, 1:].swapaxes(1, 2)
    x = points[cells]
    place = values @ x
    jacobian = np.einsum("cni,gnd->cgid", x, gradients, optimize=True)
    inverse, factor = np.linalg.inv(jacobian), np.linalg.det(jacobian) * weights
    shape = factor.shape
    s = _nearest(place.reshape(-1, 3), np.repeat(seed, shape[1]), curve)
    foot, frame, turning = _frames(s, curve)
    away = np.einsum("pij,pj->pi", frame, place.reshape(-1, 3) - foot)
    r, angle = np.hypot(away[:, 0], away[:, 1]), np.arctan2(away[:, 1], away[:, 0])
    sides = np.repeat(side, shape[1])
    angle = np.where((sides > 0) & (angle < -np.pi / 2), angle + 2 * np.pi, angle)
    angle = np.where((sides < 0) & (angle > np.pi / 2), angle - 2 * np.pi, angle)
    fields = _auxiliary(r, angle, turning, shear, poisson)
    G, S, divergence, incompatibility = (f.reshape(*shape, *f.shape[1:]) for f in fields)
    frame = frame.reshape(*shape, 3, 3)
    lame = 2 * shear * poisson / (1 - 2 * poisson)
    out = np.empty((len(cells), len(displacement), 4, cells.shape[1], 3))
    for step, u in enumerate(displacement):
        raw = np.einsum("cni,gnd->cgid", u[cells], gradients, optimize=True)
        H = frame @ (raw @ inverse) @ frame.swapaxes(2, 3)
        strain = (H + H.swapaxes(2, 3)) / 2
        trace = np.trace(H, axis1=2, axis2=3)
        stress = 2 * shear * strain + lame * trace[..., None, None] * np.eye(3)
        energy = np.einsum("cgij,cgij->cg", stress, strain) / 2
        for mode in range(4):
            if mode < 3:
                P = G[:, :, mode].swapaxes(2, 3) @ stress + H.swapaxes(2, 3) @ S[:, :, mode]
                mutual = np.einsum("cgij,cgij->cg", S[:, :, mode], H)
                T = np.einsum("cgi,cgik->cgk", divergence[:, :, mode], H)
                T[..., :2] += np.einsum(
                    "cgi,cgik->cgk", stress[..., 2], incompatibility[:, :, mode]
                )
            else:
                P, mutual, T = H.swapaxes(2, 3) @ stress, energy, np.zeros((*shape, 3))
            P = P - mutual[..., None, None] * np.eye(3)
            pull = frame.swapaxes(2, 3) @ P @ frame @ inverse.swapaxes(2, 3)
            pull *= factor[..., None, None]
            push = np.einsum("cgm,cgmk->cgk", T, frame) * factor[..., None]
            out[:, step, mode] = np.einsum("cgkd,gnd->cnk", pull, gradients, optimize=True)
            out[:, step, mode] += np.einsum("cgk,gn->cnk", push, values, optimize=True)
    return out


def _pieces(s: FloatArray, curve: CurveArrays) -> tuple[IntArray, FloatArray, FloatArray]:
    """Piece of the curve, offset in it, and what lies beyond an open end."""
    knots, _, _, closed = curve
    inside = s % knots[-1] if closed else np.clip(s, 0.0, knots[-1])
    piece = np.clip(np.searchsorted(knots, inside, "right") - 1, 0, len(knots) - 2)
    return piece, inside - knots[piece], np.zeros_like(s) if closed else s - inside


def _nearest(x: FloatArray, seed: FloatArray, curve: CurveArrays) -> FloatArray:
    knots, position, _, closed = curve
    s = seed.copy()
    for _ in range(30):
        piece, t, beyond = _pieces(s, curve)
        c, t = position[piece], t[:, None]
        slope = c[:, 1] + t * (2 * c[:, 2] + 3 * t * c[:, 3])
        gap = x - (c[:, 0] + t * (c[:, 1] + t * (c[:, 2] + t * c[:, 3]))) - beyond[:, None] * slope
        square = np.sum(slope**2, axis=1)
        bent = np.sum(gap * (2 * c[:, 2] + 6 * t * c[:, 3]), axis=1)
        square -= np.where((beyond == 0) & (square > bent), bent, 0.0)
        step = np.sum(gap * slope, axis=1) / square
        s += step
        if np.abs(step).max() <= 1e-8 * knots[-1]:
            break
    return s % knots[-1] if closed else s


def _frames(s: FloatArray, curve: CurveArrays) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Positions, frames with rows e1, e2, e3, and turning."""
    piece, t, beyond = _pieces(s, curve)
    c, n, t = curve[1][piece], curve[2][piece], t[:, None]
    first = c[:, 1] + t * (2 * c[:, 2] + 3 * t * c[:, 3])
    speed = np.linalg.norm(first, axis=1, keepdims=True)
    e3 = first / speed
    place = c[:, 0] + t * (c[:, 1] + t * (c[:, 2] + t * c[:, 3])) + beyond[:, None] * e3
    normal = n[:, 0] + t * (n[:, 1] + t * (n[:, 2] + t * n[:, 3]))
    along = np.sum(normal * e3, axis=1, keepdims=True)
    across = normal - along * e3
    size = np.linalg.norm(across, axis=1, keepdims=True)
    e2 = across / size
    e1 = np.cross(e2, e3)
    bend = (2 * c[:, 2] + 6 * t * c[:, 3]) / speed**2
    tilt = (n[:, 1] + t * (2 * n[:, 2] + 3 * t * n[:, 3])) / speed
    turning = np.stack(
        [
            -np.sum(e2 * bend, axis=1),
            np.sum(e1 * bend, axis=1),
            np.sum(e1 * (bend * along - tilt) / size, axis=1),
        ],
        axis=1,
    )
    turning[beyond != 0] = 0.0
    return place, np.stack([e1, e2, e3], axis=1), turning


def _near_tip(
    r: FloatArray, angle: FloatArray, shear: float, poisson: float
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Displacements (p, mode, i), first (p, mode, i, j) and second (p, mode, i, 11 12 22)."""
    z = r * np.exp(1j * angle)
    root = np.sqrt(r) * np.exp(0.5j * angle)
    zc, root_c = z.conj(), root.conj()
    kolosov, scale = 3 - 4 * poisson, 1 / (2 * shear * np.sqrt(2 * np.pi))
    u, d1, d2 = (np.zeros((len(r), 3, 3, *more)) for more in ((), (2,), (3,)))
    for mode, K in enumerate((1.0 + 0j, -1j)):
        Kc = np.conj(K)
        w = kolosov * K * root - K * root_c - (z - zc) * Kc / root_c / 2
        dz = (kolosov * K / root - Kc / root_c) / 2
        dc = (Kc - K + (z - zc) * Kc / zc / 2) / root_c / 2
        dzz = -kolosov * K / (4 * root * z)
        dzc = Kc / (4 * root_c * zc)
        dcc = (0.25 * (K - 2 * Kc) - 0.375 * (z - zc) * Kc / zc) / (root_c * zc)
        for out, value in (
            (u[:, mode], w),
            (d1[:, mode, :, 0], dz + dc),
            (d1[:, mode, :, 1], 1j * (dz - dc)),
            (d2[:, mode, :, 0], dzz + 2 * dzc + dcc),
            (d2[:, mode, :, 1], 1j * (dzz - dcc)),
            (d2[:, mode, :, 2], -(dzz - 2 * dzc + dcc)),
        ):
            out[:, 0], out[:, 1] = scale * value.real, scale * value.imag
    df, ddf = 2 * scale / root, -scale / (root * z)
    u[:, 2, 2] = 4 * scale * root.imag
    d1[:, 2, 2] = np.stack([df.imag, df.real], axis=1)
    d2[:, 2, 2] = np.stack([ddf.imag, ddf.real, -ddf.imag], axis=1)
    return u, d1, d2


def _auxiliary(
    r: FloatArray, angle: FloatArray, turning: FloatArray, shear: float, poisson: float
) -> tuple[FloatArray, FloatArray, FloatArray, FloatArray]:
    """Gradient and stress (p, mode, 3, 3), divergence (p, mode, 3), incompatibility
    (p, mode, 3, 2).
    """
    u, d1, d2 = _near_tip(r, angle, shear, poisson)
    lame = 2 * shear * poisson / (1 - 2 * poisson)
    x1, x2 = ((r * f(angle))[:, None, None] for f in (np.cos, np.sin))
    w = turning[:, None]
    w3 = w[..., 2:]
    h = 1 - w[..., 1:2] * x1 + w[..., :1] * x2
    third = (np.cross(w, u) - w3 * (x1 * d1[..., 1] - x2 * d1[..., 0])) / h
    gradient = np.concatenate([d1, third[..., None]], axis=3)
    around = (
        d1[..., 1] + x1 * d2[..., 1] - x2 * d2[..., 0],
        x1 * d2[..., 2] - d1[..., 0] - x2 * d2[..., 1],
    )
    incompatibility = np.stack(
        [
            (np.cross(w, d1[..., k]) - w3 * around[k] - hk * third) / h
            for k, hk in ((0, -w[..., 1:2]), (1, w[..., :1]))
        ],
        axis=3,
    )
    plane = np.zeros((*d1.shape[:3], 3))
    plane[..., :2] = d1
    stress = shear * (plane + plane.swapaxes(2, 3))
    trace = plane[..., 0, 0] + plane[..., 1, 1]
    stress += lame * trace[..., None, None] * np.eye(3)
    columns = shear * d2[:, :, 2]  # of sigma_i3, by 11, 12, 22
    traces = lame * (d2[:, :, 0, :2] + d2[:, :, 1, 1:])
    by_x1 = np.stack([columns[..., 0], columns[..., 1], traces[..., 0]], axis=2)
    by_x2 = np.stack([columns[..., 1], columns[..., 2], traces[..., 1]], axis=2)
    divergence = np.cross(w, stress[..., 2])
    divergence += w[..., :1] * stress[..., 1] - w[..., 1:2] * stress[..., 0]
    divergence = (divergence - w3 * (x1 * by_x2 - x2 * by_x1)) / h
    return gradient, stress, divergence, incompatibility
