"""Near-tip fields of the three modes: the auxiliary fields of the interaction integral.

In the plane across the front, with z = x1 + i x2, k = 3 - 4 nu and K = K_I - i K_II (plane strain;
Muskhelishvili 1953, Williams 1957),

    2 mu (u1 + i u2) = [k K z^(1/2) - K zc^(1/2) - (z - zc) Kc zc^(-1/2) / 2] / sqrt(2 pi),
    mu u3 = 2 K_III Im z^(1/2) / sqrt(2 pi),

where zc and Kc are complex conjugates.  Derivatives follow with d/dx1 = d/dz + d/dzc and
d/dx2 = i (d/dz - d/dzc).
"""

import numpy as np

from front3d.arrays import FloatArray
from front3d.jit import inlined


@inlined
def polar(x1: float, x2: float, side: int) -> tuple[float, float]:
    """Radius and angle from e1; the angle passes pi where the cell's side of the crack asks it.

    The faces of a curved crack leave the plane of the frame, so a point just above them may have
    x2 < 0: `side` is +1 for cells on the upper face, -1 on the lower, 0 elsewhere.
    """
    r = np.sqrt(x1 * x1 + x2 * x2)
    angle = np.arctan2(x2, x1)
    if side > 0 and angle < -0.5 * np.pi:
        angle += 2.0 * np.pi
    elif side < 0 and angle > 0.5 * np.pi:
        angle -= 2.0 * np.pi
    return r, angle


@inlined
def near_tip(
    r: float,
    angle: float,
    shear_modulus: float,
    poisson: float,
    u: FloatArray,
    first: FloatArray,
    second: FloatArray,
) -> None:
    """Displacements and derivatives for unit K_I, K_II and K_III at (r, angle), r > 0.

    Fills u, (3, 3) as [mode, i]; first, (3, 3, 2) as [mode, i, d/dx_j]; and second, (3, 3, 3) as
    [mode, i, (d11, d12, d22)].
    """
    u[:] = 0.0
    first[:] = 0.0
    second[:] = 0.0
    kolosov = 3.0 - 4.0 * poisson
    scale = 1.0 / (2.0 * shear_modulus * np.sqrt(2.0 * np.pi))
    # Powers of z as products of the root and its inverse: complex division is slow.
    turn = complex(np.cos(angle / 2), np.sin(angle / 2))
    root = np.sqrt(r) * turn
    over_root = turn.conjugate() / np.sqrt(r)
    over_z = over_root * over_root
    z, over_root_c, over_zc = root * root, over_root.conjugate(), over_z.conjugate()
    gap = z - z.conjugate()
    for mode in range(2):
        K = complex(1.0, 0.0) if mode == 0 else complex(0.0, -1.0)
        Kc = K.conjugate()
        w = kolosov * K * root - K * root.conjugate() - 0.5 * gap * Kc * over_root_c
        dz = 0.5 * (kolosov * K * over_root - Kc * over_root_c)
        dc = 0.5 * over_root_c * (Kc - K + 0.5 * gap * Kc * over_zc)
        dzz = -0.25 * kolosov * K * over_root * over_z
        dzc = 0.25 * Kc * over_root_c * over_zc
        dcc = over_root_c * over_zc * (0.25 * (K - 2.0 * Kc) - 0.375 * gap * Kc * over_zc)
        d1, d2 = dz + dc, 1j * (dz - dc)
        d11, d12, d22 = dzz + 2.0 * dzc + dcc, 1j * (dzz - dcc), -(dzz - 2.0 * dzc + dcc)
        u[mode, 0], u[mode, 1] = scale * w.real, scale * w.imag
        first[mode, 0, 0], first[mode, 1, 0] = scale * d1.real, scale * d1.imag
        first[mode, 0, 1], first[mode, 1, 1] = scale * d2.real, scale * d2.imag
        second[mode, 0, 0], second[mode, 1, 0] = scale * d11.real, scale * d11.imag
        second[mode, 0, 1], second[mode, 1, 1] = scale * d12.real, scale * d12.imag
        second[mode, 0, 2], second[mode, 1, 2] = scale * d22.real, scale * d22.imag
    # u3 = Im f with f = 4 scale z^(1/2): d/dx1 = Im f', d/dx2 = Re f'.
    df = 2.0 * scale * over_root
    ddf = -scale * over_root * over_z
    u[2, 2] = 4.0 * scale * root.imag
    first[2, 2, 0], first[2, 2, 1] = df.imag, df.real
    second[2, 2, 0], second[2, 2, 1], second[2, 2, 2] = ddf.imag, ddf.real, -ddf.imag


@inlined
def auxiliary(
    r: float,
    angle: float,
    turning: FloatArray,
    shear_modulus: float,
    poisson: float,
    gradient: FloatArray,
    stress: FloatArray,
    divergence: FloatArray,
    incompatibility: FloatArray,
    work: FloatArray,
) -> None:
    """Auxiliary fields of the three unit modes on a curved front, in the local frame.

    The components follow the moving frame, so differentiation along the front carries
    1/h, h = 1 - w2 x1 + w1 x2, and turns the base vectors (Gosz and Moran 2002).  For each mode:

    gradient [mode, i, j] = du_i/dx_j;  stress [mode, i, j], from the plane part of the strain;
    divergence [mode, i] = d(stress_ij)/dx_j, of first order in the curvature;
    incompatibility [mode, i, k] = d2 u_i / dx_3 dx_k for k = 1, 2: what is left of
    u_i,jk - eps_ij,k after contraction with a symmetric tensor.  Its part with k = 3 is of second
    order in the curvature, and q has next to no component along the front: it is left out.

    `work`, (3, 3, 9), is scratch space.
    """
    u, first, second = work[:, :, 0], work[:, :, 1:3], work[:, :, 3:6]
    near_tip(r, angle, shear_modulus, poisson, u, first, second)
    lame = 2.0 * shear_modulus * poisson / (1.0 - 2.0 * poisson)
    x1, x2 = r * np.cos(angle), r * np.sin(angle)
    w1, w2, w3 = turning[0], turning[1], turning[2]
    h = 1.0 - w2 * x1 + w1 * x2
    for m in range(3):
        for i in range(3):
            gradient[m, i, 0], gradient[m, i, 1] = first[m, i, 0], first[m, i, 1]
        # d/dx3 of u: (w x u - w3 d/dtheta u) / h, with d/dtheta = x1 d2 - x2 d1
        turned = (
            w2 * u[m, 2] - w3 * u[m, 1],
            w3 * u[m, 0] - w1 * u[m, 2],
            w1 * u[m, 1] - w2 * u[m, 0],
        )
        for i in range(3):
            around = x1 * first[m, i, 1] - x2 * first[m, i, 0]
            gradient[m, i, 2] = (turned[i] - w3 * around) / h
        for k in range(2):
            du0, du1, du2 = first[m, 0, k], first[m, 1, k], first[m, 2, k]
            turned = (w2 * du2 - w3 * du1, w3 * du0 - w1 * du2, w1 * du1 - w2 * du0)
            h_k = -w2 if k == 0 else w1
            for i in range(3):
                if k == 0:
                    around = first[m, i, 1] + x1 * second[m, i, 1] - x2 * second[m, i, 0]
                else:
                    around = x1 * second[m, i, 2] - first[m, i, 0] - x2 * second[m, i, 1]
                incompatibility[m, i, k] = (turned[i] - w3 * around - h_k * gradient[m, i, 2]) / h
        trace = lame * (first[m, 0, 0] + first[m, 1, 1])
        s = stress[m]
        s[0, 0] = trace + 2.0 * shear_modulus * first[m, 0, 0]
        s[1, 1] = trace + 2.0 * shear_modulus * first[m, 1, 1]
        s[2, 2] = trace
        s[0, 1] = s[1, 0] = shear_modulus * (first[m, 0, 1] + first[m, 1, 0])
        s[0, 2] = s[2, 0] = shear_modulus * first[m, 2, 0]
        s[1, 2] = s[2, 1] = shear_modulus * first[m, 2, 1]
        # The plane part of the divergence vanishes; d/dx3 of the third column is left:
        # (w x s.3 + s w x . - w3 d/dtheta s.3) / h.
        for i in range(3):
            if i < 2:
                d1 = shear_modulus * second[m, 2, i]
                d2 = shear_modulus * second[m, 2, i + 1]
            else:
                d1 = lame * (second[m, 0, 0] + second[m, 1, 1])
                d2 = lame * (second[m, 0, 1] + second[m, 1, 2])
            j, k = (i + 1) % 3, (i + 2) % 3
            value = turning[j] * s[k, 2] - turning[k] * s[j, 2]  # (w x s.3)_i
            value += w1 * s[i, 1] - w2 * s[i, 0]  # s_il (w x e_l)_3
            divergence[m, i] = (value - w3 * (x1 * d2 - x2 * d1)) / h
