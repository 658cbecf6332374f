"""Kernels: what each cell and each face gives to the interaction integral, node by node.

With q interpolated by the element's own shape functions, q_k = sum_n q_k^n phi_n, the integral of
any mode over any ring with any hat is sum_n q^n . F^n, where
    F_k^n = int (P_kj dphi_n/dx_j + T_k phi_n) dV - int_S P_kj n_j phi_n dA,
    P_kj = sigma_ij u^aux_i,k + sigma^aux_ij u_i,k - (sigma : eps^aux) delta_kj,
    T_k = sigma_i3 u^aux_i,3k (k = 1, 2) + sigma^aux_ij,j u_i,k - eps^aux_ij X_ij,k - b_i u^aux_i,k,
    sigma = C : eps + sigma*,    X_ij,k = sigma*_ij,k + C_ijmn,k eps_mn.
sigma* is the initial stress less C : eps0, where eps0 is thermal or initial strain, b the body
force.  With sigma^aux = C : eps^aux and the displacements of a solid of constants that do not vary,
X is all that a varying C, eps0 or initial stress asks for (the non-equilibrium form; Kim and
Paulino 2005, from memory); for constant C it is sigma^aux_ij eps0_ij,k.
So every Gauss point is visited once, whatever the number of rings, hats and modes.  The fourth
"mode" is the domain form of J: P_kj = sigma_ij u_i,k - W delta_kj with W = eps : C : eps / 2 +
sigma* : eps, and T_k = - (sigma*_ij,k + C_ijmn,k eps_mn / 2) eps_ij - b_i u_i,k.
Sources: Li, Shih and Needleman (1985); Nakamura and Parks (1989); Gosz and Moran (2002).
"""

import numpy as np

from front3d.arrays import FloatArray, IntArray
from front3d.crack.curve import CurveArrays
from front3d.fields.neartip import auxiliary
from front3d.jit import kernel
from front3d.methods.point_kernels import (
    area_vector,
    displacement_gradient,
    eshelby,
    first_constant,
    hooke,
    look_at_front,
    map_point,
    product,
    pull_of_tensor,
    pull_of_vector,
    spread,
    to_frame,
)
from front3d.methods.state_kernels import (
    LAME,
    N_COLUMNS,
    RATIO,
    SHEAR,
    configurational,
    local_auxiliary,
    state_at,
)

N_MODES = 4
"""K_I, K_II, K_III and J."""

Rule = tuple[FloatArray, FloatArray]
"""Shape functions and their reference gradients, (q, 4, nodes), and weights, (q,)."""

OUTER, PRESSED, CUT, BENT = 0, 1, 2, 3
"""What is known of a face: an outer surface under a given load or none; a crack face under a
given load; nothing, so that its traction is taken from the stresses; or a crack face that leaves
the plane of the front's frame, under a given load or none."""


@kernel
def cell_forces(
    points: FloatArray,
    cells: IntArray,
    side: IntArray,
    seed: FloatArray,
    displacement: FloatArray,
    state: FloatArray,
    rule: Rule,
    curve: CurveArrays,
    constants: tuple[float, float, float, float],
    out: FloatArray,
    status: IntArray,
) -> None:
    """Volume part of F for every cell.

    cells (n, nodes); side (n,) of the crack; seed (n,) arc length near each cell; displacement
    (steps, points, 3); state (steps, points, N_COLUMNS), or empty where nothing varies and no
    force acts; constants: shear modulus and Poisson's ratio of the auxiliary fields, and 1, or 0
    to leave the turning of the frame, and the gradients of the state, out.  Fills out, (n, steps,
    nodes, 3 N_MODES), and status, (n,): 0, or 1 + the Gauss point where the Jacobian is not
    positive.
    """
    shear, poisson, turn, weight = constants
    shapes, weights = rule
    here, slope, initial = np.zeros(N_COLUMNS), np.zeros((2, 3)), np.zeros((4, 3, 3))
    here[LAME], here[SHEAR], here[RATIO] = first_constant(shear, poisson), shear, poisson
    aux_strain = np.zeros((3, 3, 3))
    place, turning, T = np.zeros(3), np.zeros(3), np.zeros(3)
    inverse, frame, local = np.zeros((3, 3)), np.zeros((3, 3)), np.zeros((3, 3))
    strain, H, stress, P = np.zeros((3, 3)), np.zeros((3, 3)), np.zeros((3, 3)), np.zeros((3, 3))
    at, moved = np.zeros((4, 3)), np.zeros((4, 3))
    aux_gradient, aux_stress = np.empty((3, 3, 3)), np.empty((3, 3, 3))
    divergence, incompatibility = np.empty((3, 3)), np.empty((3, 3, 2))
    work, pull = np.empty((3, 3, 9)), np.empty((4, 3 * N_MODES))
    for c in range(len(cells)):
        status[c] = 0
        out[c] = 0.0
        s = seed[c]
        for g in range(len(weights)):
            det = map_point(points, cells[c], shapes[g], at, inverse)
            if not det > 0.0:
                status[c] = 1 + g
                break
            volume = weights[g] * det
            s, r, angle = look_at_front(at[0], s, side[c], curve, turn, place, frame, turning)
            to_frame(inverse, frame, local)
            for step in range(len(displacement)):
                displacement_gradient(
                    displacement[step], cells[c], shapes[g], frame, local, moved, H
                )
                if len(state):
                    state_at(
                        state[step], cells[c], shapes[g], frame, local, weight,
                        here, slope, initial,
                    )  # fmt: skip
                if step == 0 or len(state):
                    auxiliary(
                        r, angle, turning, shear, here[RATIO],
                        aux_gradient, aux_stress, divergence, incompatibility, work,
                    )  # fmt: skip
                if len(state):
                    local_auxiliary(
                        aux_gradient, work[:, :, 3:6], here, slope, shear, here[RATIO],
                        aux_stress, aux_strain, divergence,
                    )  # fmt: skip
                energy = hooke(H, here[LAME], here[SHEAR], stress)
                energy += product(initial[0], H)
                stress += initial[0]
                for mode in range(3):
                    mutual = product(aux_stress[mode], H)
                    mutual += product(initial[0], aux_strain[mode])
                    eshelby(stress, H, aux_stress[mode], aux_gradient[mode], mutual, P)
                    for k in range(3):
                        T[k] = 0.0
                        for i in range(3):
                            T[k] += divergence[mode, i] * H[i, k]
                            if k < 2:
                                T[k] += stress[i, 2] * incompatibility[mode, i, k]
                    if len(state):
                        configurational(
                            aux_strain[mode], aux_gradient[mode], H, 1.0, here, slope, initial, T
                        )
                    pull_of_tensor(P, volume, frame, local, mode, pull)
                    pull_of_vector(T, volume, frame, mode, pull)
                # J: the actual state with itself, half of each product.
                stress *= 0.5
                eshelby(stress, H, stress, H, energy, P)
                T[:] = 0.0
                if len(state):
                    for i in range(3):
                        for j in range(3):
                            strain[i, j] = 0.5 * (H[i, j] + H[j, i])
                    configurational(strain, H, H, 0.5, here, slope, initial, T)
                pull_of_tensor(P, volume, frame, local, 3, pull)
                pull_of_vector(T, volume, frame, 3, pull)
                spread(pull, shapes[g], out[c, step])


@kernel
def face_forces(
    points: FloatArray,
    cells: IntArray,
    side: IntArray,
    seed: FloatArray,
    displacement: FloatArray,
    state: FloatArray,
    rule: Rule,
    tangents: FloatArray,
    kind: int,
    load: FloatArray,
    curve: CurveArrays,
    constants: tuple[float, float, float, float],
    out: FloatArray,
) -> None:
    """Surface part of F for one face of every cell: - int P_kj n_j phi_n dA.

    `cells` are the cells that own the faces, all by the same local face; the rule holds the cell's
    own shape functions at the face's Gauss points; tangents (q, 3, 2) is the derivative of the
    cell's reference coordinates along the face's own two.
    load, (n, 1 or steps, q, 4) or empty, is pressure and traction: t = traction - pressure n.
    Where the traction is known, t_i u^aux_i,k is counted with it.  On an OUTER face and a BENT one
    sigma^aux_ij n_j u_i,k - (sigma : eps^aux) n_k comes with it; on a PRESSED crack face the
    auxiliary traction is zero but for what a ratio that varies brings, and q lies in the face.  On
    a CUT all of P_kj n_j counts.
    Fills out, (n, steps, nodes, 3 N_MODES).
    """
    shear, poisson, turn, weight = constants
    shapes, weights = rule
    here, slope, initial = np.zeros(N_COLUMNS), np.zeros((2, 3)), np.zeros((4, 3, 3))
    here[LAME], here[SHEAR], here[RATIO] = first_constant(shear, poisson), shear, poisson
    aux_strain, more = np.zeros((3, 3, 3)), 0.0
    place, turning, area = np.zeros(3), np.zeros(3), np.zeros(3)
    T, traction = np.zeros(3), np.zeros(3)
    inverse, frame, local = np.zeros((3, 3)), np.zeros((3, 3)), np.zeros((3, 3))
    H, stress = np.zeros((3, 3)), np.zeros((3, 3))
    at, moved = np.zeros((4, 3)), np.zeros((4, 3))
    aux_gradient, aux_stress = np.empty((3, 3, 3)), np.empty((3, 3, 3))
    divergence, incompatibility = np.empty((3, 3)), np.empty((3, 3, 2))
    work, pull = np.empty((3, 3, 9)), np.zeros((4, 3 * N_MODES))  # faces pull by phi_n alone
    for c in range(len(cells)):
        out[c] = 0.0
        s = seed[c]
        for g in range(len(weights)):
            map_point(points, cells[c], shapes[g], at, inverse)
            s, r, angle = look_at_front(at[0], s, side[c], curve, turn, place, frame, turning)
            to_frame(inverse, frame, local)
            area_vector(at, tangents[g], frame, weights[g], area)
            size = np.sqrt(area[0] ** 2 + area[1] ** 2 + area[2] ** 2)
            for step in range(len(displacement)):
                displacement_gradient(
                    displacement[step], cells[c], shapes[g], frame, local, moved, H
                )
                if len(state):
                    state_at(
                        state[step], cells[c], shapes[g], frame, local, weight,
                        here, slope, initial,
                    )  # fmt: skip
                if step == 0 or len(state):
                    auxiliary(
                        r, angle, turning, shear, here[RATIO],
                        aux_gradient, aux_stress, divergence, incompatibility, work,
                    )  # fmt: skip
                if len(state):
                    more = local_auxiliary(
                        aux_gradient, work[:, :, 3:6], here, slope, shear, here[RATIO],
                        aux_stress, aux_strain, divergence,
                    )  # fmt: skip
                energy = hooke(H, here[LAME], here[SHEAR], stress)
                energy += product(initial[0], H)
                stress += initial[0]
                traction[:] = 0.0
                if len(load):
                    acting = load[c, min(step, load.shape[1] - 1), g]
                    for i in range(3):
                        traction[i] = -acting[0] * area[i]
                        for j in range(3):
                            traction[i] += size * frame[i, j] * acting[1 + j]
                for mode in range(N_MODES):
                    T[:] = 0.0
                    for k in range(3):
                        for i in range(3):
                            shift = H[i, k] if mode == 3 else aux_gradient[mode, i, k]
                            T[k] -= traction[i] * shift
                            if kind == PRESSED and mode < 3:
                                trace = aux_gradient[mode, 0, 0] + aux_gradient[mode, 1, 1]
                                T[k] -= more * trace * area[i] * H[i, k]
                    if kind != PRESSED and not (kind == BENT and mode == 3):
                        mutual = energy
                        if mode < 3:
                            mutual = product(aux_stress[mode], H)
                            mutual += product(initial[0], aux_strain[mode])
                        for k in range(3):
                            T[k] += mutual * area[k]
                            for i in range(3):
                                for j in range(3):
                                    if mode < 3:
                                        T[k] -= aux_stress[mode, i, j] * area[j] * H[i, k]
                                    if kind == CUT:
                                        shift = H[i, k] if mode == 3 else aux_gradient[mode, i, k]
                                        T[k] -= stress[i, j] * area[j] * shift
                    pull_of_vector(T, 1.0, frame, mode, pull)
                spread(pull, shapes[g], out[c, step])


@kernel
def sum_at_nodes(cells: IntArray, of_cells: FloatArray, forces: FloatArray) -> None:
    """Add forces of cells, (n, steps, nodes, 3 N_MODES), to those at nodes, (steps, N_MODES,
    points, 3).
    """
    for c in range(len(cells)):
        for step in range(forces.shape[0]):
            for n in range(cells.shape[1]):
                for mode in range(N_MODES):
                    for k in range(3):
                        forces[step, mode, cells[c, n], k] += of_cells[c, step, n, 3 * mode + k]
