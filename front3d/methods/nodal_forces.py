"""Kernels: what each cell and each face gives to the interaction integral, node by node.

With q interpolated by the element's own shape functions, q_k = sum_n q_k^n phi_n, the integral of
any mode over any ring with any hat is sum_n q^n . F^n, where
    F_k^n = int (P_kj dphi_n/dx_j + T_k phi_n) dV - int_S P_kj n_j phi_n dA,
    P_kj = sigma_ij u^aux_i,k + sigma^aux_ij u_i,k - (sigma : eps^aux) delta_kj,
    T_k = sigma_i3 u^aux_i,3k (k = 1, 2) + sigma^aux_ij,j u_i,k.
So every Gauss point is visited once, whatever the number of rings, hats and modes.  The fourth
"mode" is the domain form of J: P_kj = sigma_ij u_i,k - W delta_kj and T = 0.
Sources: Li, Shih and Needleman (1985); Nakamura and Parks (1989); Gosz and Moran (2002).
"""

import numba
import numpy as np

from front3d.arrays import FloatArray, IntArray
from front3d.crack.curve import frame_at, nearest
from front3d.fields.neartip import auxiliary, polar
from front3d.jit import kernel, parallel_kernel

N_MODES = 4
"""K_I, K_II, K_III and J."""

FREE, PRESSED = 0, 1
"""What is known of a face: no traction; or a crack face under a given pressure."""


@kernel
def _invert(J: FloatArray, inverse: FloatArray) -> float:
    """Determinant of J, (3, 3); fills its inverse."""
    for i in range(3):
        a, b = (i + 1) % 3, (i + 2) % 3
        for j in range(3):
            c, d = (j + 1) % 3, (j + 2) % 3
            inverse[j, i] = J[a, c] * J[b, d] - J[a, d] * J[b, c]
    det = J[0, 0] * inverse[0, 0] + J[0, 1] * inverse[1, 0] + J[0, 2] * inverse[2, 0]
    for i in range(3):
        for j in range(3):
            inverse[i, j] /= det
    return det


@kernel
def _rotate_in(frame: FloatArray, a: FloatArray, out: FloatArray) -> None:
    """Components of the tensor a, (3, 3), in the frame whose rows are its base vectors."""
    for i in range(3):
        for j in range(3):
            total = 0.0
            for k in range(3):
                for m in range(3):
                    total += frame[i, k] * a[k, m] * frame[j, m]
            out[i, j] = total


@kernel
def _hooke(gradient: FloatArray, lame: float, shear: float, stress: FloatArray) -> float:
    """Stress from a displacement gradient; returns the strain energy density."""
    trace = gradient[0, 0] + gradient[1, 1] + gradient[2, 2]
    energy = 0.0
    for i in range(3):
        for j in range(3):
            strain = 0.5 * (gradient[i, j] + gradient[j, i])
            stress[i, j] = 2.0 * shear * strain
            if i == j:
                stress[i, j] += lame * trace
            energy += 0.5 * stress[i, j] * strain
    return energy


@kernel
def _eshelby(
    stress: FloatArray,
    gradient: FloatArray,
    aux_stress: FloatArray,
    aux_gradient: FloatArray,
    P: FloatArray,
) -> None:
    """P_kj of the interaction of the actual and one auxiliary state, (3, 3)."""
    mutual = 0.0
    for i in range(3):
        for j in range(3):
            mutual += aux_stress[i, j] * gradient[i, j]
    for k in range(3):
        for j in range(3):
            total = 0.0
            for i in range(3):
                total += stress[i, j] * aux_gradient[i, k] + aux_stress[i, j] * gradient[i, k]
            P[k, j] = total
        P[k, k] -= mutual


@parallel_kernel
def cell_forces(
    points: FloatArray,
    cells: IntArray,
    side: IntArray,
    seed: FloatArray,
    displacement: FloatArray,
    values: FloatArray,
    gradients: FloatArray,
    weights: FloatArray,
    knots: FloatArray,
    position: FloatArray,
    normal: FloatArray,
    closed: bool,
    young: float,
    poisson: float,
    out: FloatArray,
    status: IntArray,
) -> None:
    """Volume part of F for every cell.

    cells (n, nodes); side (n,) of the crack; seed (n,) arc length near each cell; displacement
    (steps, points, 3); values (q, nodes), gradients (q, nodes, 3) and weights (q,) of the rule.
    Fills out, (n, steps, N_MODES, nodes, 3), and status, (n,): 0, or 1 + the Gauss point at which
    the Jacobian is not positive.
    """
    shear = young / (2.0 * (1.0 + poisson))
    lame = 2.0 * shear * poisson / (1.0 - 2.0 * poisson)
    n_nodes = cells.shape[1]
    n_steps = displacement.shape[0]
    for c in numba.prange(len(cells)):
        status[c] = 0
        out[c] = 0.0
        J, inverse = np.empty((3, 3)), np.empty((3, 3))
        x, place, turning = np.empty(3), np.empty(3), np.empty(3)
        frame = np.empty((3, 3))
        aux_gradient, aux_stress = np.empty((3, 3, 3)), np.empty((3, 3, 3))
        divergence, incompatibility = np.empty((3, 3)), np.empty((3, 3, 2))
        work = np.empty((3, 3, 9))
        raw, global_gradient, H = np.empty((3, 3)), np.empty((3, 3)), np.empty((3, 3))
        stress, P, mixed = np.empty((3, 3)), np.empty((3, 3)), np.empty((3, 3))
        T = np.empty(3)
        pull = np.empty((3, 4))
        s = seed[c]
        for g in range(len(weights)):
            x[:] = 0.0
            J[:] = 0.0
            for n in range(n_nodes):
                node = cells[c, n]
                for i in range(3):
                    xi = points[node, i]
                    x[i] += values[g, n] * xi
                    for d in range(3):
                        J[i, d] += xi * gradients[g, n, d]
            det = _invert(J, inverse)
            if not det > 0.0:
                status[c] = 1 + g
                break
            s, r = nearest(x, s, knots, position, closed)
            frame_at(s, knots, position, normal, closed, place, frame, turning)
            x1, x2 = 0.0, 0.0
            for i in range(3):
                x1 += (x[i] - place[i]) * frame[0, i]
                x2 += (x[i] - place[i]) * frame[1, i]
            r, angle = polar(x1, x2, side[c])
            auxiliary(
                r, angle, turning, shear, poisson,
                aux_gradient, aux_stress, divergence, incompatibility, work,
            )  # fmt: skip
            factor = weights[g] * det
            for step in range(n_steps):
                raw[:] = 0.0
                for n in range(n_nodes):
                    node = cells[c, n]
                    for i in range(3):
                        for d in range(3):
                            raw[i, d] += displacement[step, node, i] * gradients[g, n, d]
                for i in range(3):
                    for j in range(3):
                        global_gradient[i, j] = (
                            raw[i, 0] * inverse[0, j]
                            + raw[i, 1] * inverse[1, j]
                            + raw[i, 2] * inverse[2, j]
                        )
                _rotate_in(frame, global_gradient, H)
                energy = _hooke(H, lame, shear, stress)
                for mode in range(N_MODES):
                    T[:] = 0.0
                    if mode < 3:
                        _eshelby(stress, H, aux_stress[mode], aux_gradient[mode], P)
                        for k in range(3):
                            for i in range(3):
                                T[k] += divergence[mode, i] * H[i, k]
                                if k < 2:
                                    T[k] += stress[i, 2] * incompatibility[mode, i, k]
                    else:
                        for k in range(3):
                            for j in range(3):
                                P[k, j] = 0.0
                                for i in range(3):
                                    P[k, j] += stress[i, j] * H[i, k]
                            P[k, k] -= energy
                    # To global rows and reference columns, then to the nodes.
                    for k in range(3):
                        for d in range(3):
                            mixed[k, d] = 0.0
                            for j in range(3):
                                along = 0.0
                                for m in range(3):
                                    along += inverse[d, m] * frame[j, m]
                                mixed[k, d] += P[k, j] * along
                    for k in range(3):
                        for d in range(3):
                            pull[k, d] = factor * (
                                frame[0, k] * mixed[0, d]
                                + frame[1, k] * mixed[1, d]
                                + frame[2, k] * mixed[2, d]
                            )
                        pull[k, 3] = factor * (
                            frame[0, k] * T[0] + frame[1, k] * T[1] + frame[2, k] * T[2]
                        )
                    for n in range(n_nodes):
                        for k in range(3):
                            out[c, step, mode, n, k] += (
                                pull[k, 0] * gradients[g, n, 0]
                                + pull[k, 1] * gradients[g, n, 1]
                                + pull[k, 2] * gradients[g, n, 2]
                                + pull[k, 3] * values[g, n]
                            )


@parallel_kernel
def face_forces(
    points: FloatArray,
    cells: IntArray,
    side: IntArray,
    seed: FloatArray,
    displacement: FloatArray,
    values: FloatArray,
    gradients: FloatArray,
    tangents: FloatArray,
    weights: FloatArray,
    kind: int,
    pressure: float,
    knots: FloatArray,
    position: FloatArray,
    normal: FloatArray,
    closed: bool,
    young: float,
    poisson: float,
    out: FloatArray,
) -> None:
    """Surface part of F for one face of every cell: - int P_kj n_j phi_n dA.

    `cells` are the cells that own the faces, all by the same local face; values (q, nodes) and
    gradients (q, nodes, 3) are the cell's at the face's Gauss points; tangents (q, 3, 2) is the
    derivative of the cell's reference coordinates along the face's own two.
    On a FREE face the traction is zero, so sigma^aux_ij n_j u_i,k - (sigma : eps^aux) n_k is
    left; on a PRESSED crack face the auxiliary traction is zero and t_i u^aux_i,k is left, with
    t = - pressure n.  Fills out, (n, steps, N_MODES, nodes, 3).
    """
    shear = young / (2.0 * (1.0 + poisson))
    lame = 2.0 * shear * poisson / (1.0 - 2.0 * poisson)
    n_nodes = cells.shape[1]
    n_steps = displacement.shape[0]
    for c in numba.prange(len(cells)):
        out[c] = 0.0
        J, inverse = np.empty((3, 3)), np.empty((3, 3))
        x, place, turning, area = np.empty(3), np.empty(3), np.empty(3), np.empty(3)
        frame = np.empty((3, 3))
        aux_gradient, aux_stress = np.empty((3, 3, 3)), np.empty((3, 3, 3))
        divergence, incompatibility = np.empty((3, 3)), np.empty((3, 3, 2))
        work = np.empty((3, 3, 9))
        raw, global_gradient, H = np.empty((3, 3)), np.empty((3, 3)), np.empty((3, 3))
        stress = np.empty((3, 3))
        normal_area, traction, pull = np.empty(3), np.empty(3), np.empty(3)
        s = seed[c]
        for g in range(len(weights)):
            x[:] = 0.0
            J[:] = 0.0
            for n in range(n_nodes):
                node = cells[c, n]
                for i in range(3):
                    xi = points[node, i]
                    x[i] += values[g, n] * xi
                    for d in range(3):
                        J[i, d] += xi * gradients[g, n, d]
            _invert(J, inverse)
            for i in range(3):
                a, b = (i + 1) % 3, (i + 2) % 3
                area[i] = 0.0
                t_a0, t_a1, t_b0, t_b1 = 0.0, 0.0, 0.0, 0.0
                for d in range(3):
                    t_a0 += J[a, d] * tangents[g, d, 0]
                    t_a1 += J[a, d] * tangents[g, d, 1]
                    t_b0 += J[b, d] * tangents[g, d, 0]
                    t_b1 += J[b, d] * tangents[g, d, 1]
                area[i] = weights[g] * (t_a0 * t_b1 - t_b0 * t_a1)
            s, r = nearest(x, s, knots, position, closed)
            frame_at(s, knots, position, normal, closed, place, frame, turning)
            x1, x2 = 0.0, 0.0
            for i in range(3):
                x1 += (x[i] - place[i]) * frame[0, i]
                x2 += (x[i] - place[i]) * frame[1, i]
                normal_area[i] = (
                    frame[i, 0] * area[0] + frame[i, 1] * area[1] + frame[i, 2] * area[2]
                )
                traction[i] = -pressure * normal_area[i] if kind == PRESSED else 0.0
            r, angle = polar(x1, x2, side[c])
            auxiliary(
                r, angle, turning, shear, poisson,
                aux_gradient, aux_stress, divergence, incompatibility, work,
            )  # fmt: skip
            for step in range(n_steps):
                raw[:] = 0.0
                for n in range(n_nodes):
                    node = cells[c, n]
                    for i in range(3):
                        for d in range(3):
                            raw[i, d] += displacement[step, node, i] * gradients[g, n, d]
                for i in range(3):
                    for j in range(3):
                        global_gradient[i, j] = (
                            raw[i, 0] * inverse[0, j]
                            + raw[i, 1] * inverse[1, j]
                            + raw[i, 2] * inverse[2, j]
                        )
                _rotate_in(frame, global_gradient, H)
                energy = _hooke(H, lame, shear, stress)
                for mode in range(N_MODES):
                    for k in range(3):
                        pull[k] = 0.0
                        for i in range(3):
                            if mode == 3:
                                pull[k] -= traction[i] * H[i, k]
                            elif kind == PRESSED:
                                pull[k] -= traction[i] * aux_gradient[mode, i, k]
                            else:
                                aux_traction = 0.0
                                for j in range(3):
                                    aux_traction += aux_stress[mode, i, j] * normal_area[j]
                                pull[k] -= aux_traction * H[i, k]
                    if kind == FREE:
                        mutual = energy
                        if mode < 3:
                            mutual = 0.0
                            for i in range(3):
                                for j in range(3):
                                    mutual += aux_stress[mode, i, j] * H[i, j]
                        for k in range(3):
                            pull[k] += mutual * normal_area[k]
                    for k in range(3):
                        total = (
                            frame[0, k] * pull[0] + frame[1, k] * pull[1] + frame[2, k] * pull[2]
                        )
                        for n in range(n_nodes):
                            out[c, step, mode, n, k] += total * values[g, n]
