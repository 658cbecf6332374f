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
from front3d.crack.curve import CurveArrays, frame_at, nearest
from front3d.fields.neartip import auxiliary, polar
from front3d.jit import kernel, parallel_kernel

N_MODES = 4
"""K_I, K_II, K_III and J."""

Rule = tuple[FloatArray, FloatArray, FloatArray]
"""Shape functions (q, nodes), their reference gradients (q, nodes, 3), and weights (q,)."""

OUTER, PRESSED, CUT, BENT = 0, 1, 2, 3
"""What is known of a face: an outer surface under a given pressure or none; a crack face under a
given pressure; nothing, so that its traction is taken from the stresses; or a crack face that
leaves the plane of the front's frame, under a given pressure or none."""


@kernel
def _map(
    points: FloatArray,
    cell: IntArray,
    values: FloatArray,
    gradients: FloatArray,
    x: FloatArray,
    jacobian: FloatArray,
    inverse: FloatArray,
) -> float:
    """Position, Jacobian dx_i/dxi_d and its inverse at one Gauss point; returns its determinant."""
    x[:] = 0.0
    jacobian[:] = 0.0
    for n in range(len(cell)):
        for i in range(3):
            value = points[cell[n], i]
            x[i] += values[n] * value
            for d in range(3):
                jacobian[i, d] += value * gradients[n, d]
    for i in range(3):
        a, b = (i + 1) % 3, (i + 2) % 3
        for j in range(3):
            c, d = (j + 1) % 3, (j + 2) % 3
            inverse[j, i] = jacobian[a, c] * jacobian[b, d] - jacobian[a, d] * jacobian[b, c]
    det = 0.0
    for d in range(3):
        det += jacobian[0, d] * inverse[d, 0]
    inverse /= det
    return det


@kernel
def _look(
    x: FloatArray,
    seed: float,
    side: int,
    curve: CurveArrays,
    turn: float,
    place: FloatArray,
    frame: FloatArray,
    turning: FloatArray,
) -> tuple[float, float, float]:
    """Frame of the front nearest to x, its turning times `turn`; returns its arc length, and radius
    and angle of x in it.
    """
    s, _ = nearest(x, seed, curve)
    frame_at(s, curve, place, frame, turning)
    turning *= turn
    x1, x2 = 0.0, 0.0
    for i in range(3):
        x1 += (x[i] - place[i]) * frame[0, i]
        x2 += (x[i] - place[i]) * frame[1, i]
    r, angle = polar(x1, x2, side)
    return s, r, angle


@kernel
def _to_frame(inverse: FloatArray, frame: FloatArray, local: FloatArray) -> None:
    """local[d, j] = dxi_d/dx_j along the frame's own axes."""
    for d in range(3):
        for j in range(3):
            local[d, j] = (
                inverse[d, 0] * frame[j, 0]
                + inverse[d, 1] * frame[j, 1]
                + inverse[d, 2] * frame[j, 2]
            )


@kernel
def _displacement_gradient(
    displacement: FloatArray,
    cell: IntArray,
    gradients: FloatArray,
    frame: FloatArray,
    local: FloatArray,
    raw: FloatArray,
    gradient: FloatArray,
) -> None:
    """gradient[i, j] = du_i/dx_j in the frame, from nodal displacements (points, 3)."""
    raw[:] = 0.0
    for n in range(len(cell)):
        for i in range(3):
            value = displacement[cell[n], i]
            for d in range(3):
                raw[i, d] += value * gradients[n, d]
    for i in range(3):
        for j in range(3):
            total = 0.0
            for k in range(3):
                part = raw[k, 0] * local[0, j] + raw[k, 1] * local[1, j] + raw[k, 2] * local[2, j]
                total += frame[i, k] * part
            gradient[i, j] = total


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
def _mutual_energy(aux_stress: FloatArray, gradient: FloatArray) -> float:
    """sigma^aux_ij u_i,j."""
    total = 0.0
    for i in range(3):
        for j in range(3):
            total += aux_stress[i, j] * gradient[i, j]
    return total


@kernel
def _eshelby(
    stress: FloatArray,
    gradient: FloatArray,
    aux_stress: FloatArray,
    aux_gradient: FloatArray,
    energy: float,
    P: FloatArray,
) -> None:
    """P_kj = sigma_ij u^aux_i,k + sigma^aux_ij u_i,k - energy delta_kj."""
    for k in range(3):
        for j in range(3):
            total = 0.0
            for i in range(3):
                total += stress[i, j] * aux_gradient[i, k] + aux_stress[i, j] * gradient[i, k]
            P[k, j] = total
        P[k, k] -= energy


@kernel
def _spread(
    P: FloatArray,
    T: FloatArray,
    factor: float,
    frame: FloatArray,
    local: FloatArray,
    values: FloatArray,
    gradients: FloatArray,
    pull: FloatArray,
    forces: FloatArray,
) -> None:
    """Add factor (P_kj dphi_n/dx_j + T_k phi_n), turned to global axes, to forces, (nodes, 3)."""
    for k in range(3):
        for d in range(3):
            total = 0.0
            for m in range(3):
                part = P[m, 0] * local[d, 0] + P[m, 1] * local[d, 1] + P[m, 2] * local[d, 2]
                total += frame[m, k] * part
            pull[k, d] = factor * total
        pull[k, 3] = factor * (frame[0, k] * T[0] + frame[1, k] * T[1] + frame[2, k] * T[2])
    for n in range(len(values)):
        for k in range(3):
            forces[n, k] += (
                pull[k, 0] * gradients[n, 0]
                + pull[k, 1] * gradients[n, 1]
                + pull[k, 2] * gradients[n, 2]
                + pull[k, 3] * values[n]
            )


@parallel_kernel
def cell_forces(
    points: FloatArray,
    cells: IntArray,
    side: IntArray,
    seed: FloatArray,
    displacement: FloatArray,
    rule: Rule,
    curve: CurveArrays,
    constants: tuple[float, float, float],
    out: FloatArray,
    status: IntArray,
) -> None:
    """Volume part of F for every cell.

    cells (n, nodes); side (n,) of the crack; seed (n,) arc length near each cell; displacement
    (steps, points, 3); constants: shear modulus, Poisson's ratio, and 1, or 0 to leave the turning
    of the frame out.  Fills out, (n, steps, N_MODES, nodes, 3), and status, (n,): 0, or 1 + the
    Gauss point where the Jacobian is not positive.
    """
    shear, poisson, turn = constants
    lame = 2.0 * shear * poisson / (1.0 - 2.0 * poisson)
    values, gradients, weights = rule
    for c in numba.prange(len(cells)):
        vectors, matrices = np.zeros((4, 3)), np.zeros((8, 3, 3))
        x, place, turning, T = vectors[0], vectors[1], vectors[2], vectors[3]
        jacobian, inverse, frame, local = matrices[0], matrices[1], matrices[2], matrices[3]
        raw, H, stress, P = matrices[4], matrices[5], matrices[6], matrices[7]
        aux_gradient, aux_stress = np.empty((3, 3, 3)), np.empty((3, 3, 3))
        divergence, incompatibility = np.empty((3, 3)), np.empty((3, 3, 2))
        work, pull = np.empty((3, 3, 9)), np.empty((3, 4))
        status[c] = 0
        out[c] = 0.0
        s = seed[c]
        for g in range(len(weights)):
            det = _map(points, cells[c], values[g], gradients[g], x, jacobian, inverse)
            if not det > 0.0:
                status[c] = 1 + g
                break
            s, r, angle = _look(x, s, side[c], curve, turn, place, frame, turning)
            auxiliary(
                r, angle, turning, shear, poisson,
                aux_gradient, aux_stress, divergence, incompatibility, work,
            )  # fmt: skip
            _to_frame(inverse, frame, local)
            for step in range(len(displacement)):
                _displacement_gradient(
                    displacement[step], cells[c], gradients[g], frame, local, raw, H
                )
                energy = _hooke(H, lame, shear, stress)
                for mode in range(3):
                    mutual = _mutual_energy(aux_stress[mode], H)
                    _eshelby(stress, H, aux_stress[mode], aux_gradient[mode], mutual, P)
                    for k in range(3):
                        T[k] = 0.0
                        for i in range(3):
                            T[k] += divergence[mode, i] * H[i, k]
                            if k < 2:
                                T[k] += stress[i, 2] * incompatibility[mode, i, k]
                    _spread(
                        P, T, weights[g] * det, frame, local, values[g], gradients[g],
                        pull, out[c, step, mode],
                    )  # fmt: skip
                # J: the actual state with itself, half of each product.
                stress *= 0.5
                _eshelby(stress, H, stress, H, energy, P)
                T[:] = 0.0
                _spread(
                    P, T, weights[g] * det, frame, local, values[g], gradients[g],
                    pull, out[c, step, 3],
                )  # fmt: skip


@parallel_kernel
def face_forces(
    points: FloatArray,
    cells: IntArray,
    side: IntArray,
    seed: FloatArray,
    displacement: FloatArray,
    rule: Rule,
    tangents: FloatArray,
    kind: int,
    pressure: float,
    curve: CurveArrays,
    constants: tuple[float, float, float],
    out: FloatArray,
) -> None:
    """Surface part of F for one face of every cell: - int P_kj n_j phi_n dA.

    `cells` are the cells that own the faces, all by the same local face; the rule holds the cell's
    own shape functions at the face's Gauss points; tangents (q, 3, 2) is the derivative of the
    cell's reference coordinates along the face's own two.
    Where the traction is known, t = - pressure n, t_i u^aux_i,k is counted with it.  On an OUTER
    face and a BENT one sigma^aux_ij n_j u_i,k - (sigma : eps^aux) n_k comes with it; on a PRESSED
    crack face the auxiliary traction is zero, and q lies in the face.  On a CUT all of P_kj n_j
    counts.
    Fills out, (n, steps, N_MODES, nodes, 3).
    """
    shear, poisson, turn = constants
    lame = 2.0 * shear * poisson / (1.0 - 2.0 * poisson)
    values, gradients, weights = rule
    for c in numba.prange(len(cells)):
        vectors, matrices = np.zeros((5, 3)), np.zeros((7, 3, 3))
        x, place, turning, area = vectors[0], vectors[1], vectors[2], vectors[3]
        T = vectors[4]
        jacobian, inverse, frame, local = matrices[0], matrices[1], matrices[2], matrices[3]
        raw, H, stress = matrices[4], matrices[5], matrices[6]
        P = np.zeros((3, 3))
        aux_gradient, aux_stress = np.empty((3, 3, 3)), np.empty((3, 3, 3))
        divergence, incompatibility = np.empty((3, 3)), np.empty((3, 3, 2))
        work, pull = np.empty((3, 3, 9)), np.empty((3, 4))
        out[c] = 0.0
        s = seed[c]
        for g in range(len(weights)):
            _map(points, cells[c], values[g], gradients[g], x, jacobian, inverse)
            s, r, angle = _look(x, s, side[c], curve, turn, place, frame, turning)
            auxiliary(
                r, angle, turning, shear, poisson,
                aux_gradient, aux_stress, divergence, incompatibility, work,
            )  # fmt: skip
            _to_frame(inverse, frame, local)
            _area_vector(jacobian, tangents[g], frame, weights[g], area)
            for step in range(len(displacement)):
                _displacement_gradient(
                    displacement[step], cells[c], gradients[g], frame, local, raw, H
                )
                energy = _hooke(H, lame, shear, stress)
                for mode in range(N_MODES):
                    T[:] = 0.0
                    if pressure != 0.0:
                        for k in range(3):
                            for i in range(3):
                                moved = H[i, k] if mode == 3 else aux_gradient[mode, i, k]
                                T[k] += pressure * area[i] * moved
                    if kind != PRESSED and not (kind == BENT and mode == 3):
                        mutual = energy if mode == 3 else _mutual_energy(aux_stress[mode], H)
                        for k in range(3):
                            T[k] += mutual * area[k]
                            for i in range(3):
                                for j in range(3):
                                    if mode < 3:
                                        T[k] -= aux_stress[mode, i, j] * area[j] * H[i, k]
                                    if kind == CUT:
                                        moved = H[i, k] if mode == 3 else aux_gradient[mode, i, k]
                                        T[k] -= stress[i, j] * area[j] * moved
                    _spread(
                        P, T, 1.0, frame, local, values[g], gradients[g], pull, out[c, step, mode]
                    )


@kernel
def _area_vector(
    jacobian: FloatArray, tangents: FloatArray, frame: FloatArray, weight: float, area: FloatArray
) -> None:
    """Outward area vector of a face at a Gauss point, in the frame, times its weight."""
    for i in range(3):
        area[i] = 0.0
    for k in range(3):
        a, b = (k + 1) % 3, (k + 2) % 3
        a0, a1, b0, b1 = 0.0, 0.0, 0.0, 0.0
        for d in range(3):
            a0 += jacobian[a, d] * tangents[d, 0]
            a1 += jacobian[a, d] * tangents[d, 1]
            b0 += jacobian[b, d] * tangents[d, 0]
            b1 += jacobian[b, d] * tangents[d, 1]
        component = weight * (a0 * b1 - b0 * a1)
        for i in range(3):
            area[i] += frame[i, k] * component
