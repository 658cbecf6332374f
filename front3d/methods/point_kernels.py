"""Kernels at one Gauss point: its place, the strains there, and what they give to the nodes."""

from front3d.arrays import FloatArray, IntArray
from front3d.crack.curve import CurveArrays, frame_at, nearest
from front3d.fields.neartip import polar
from front3d.jit import inlined


@inlined
def interpolate(field: FloatArray, cell: IntArray, shape: FloatArray, at: FloatArray) -> None:
    """A vector field (points, 3) and its derivatives at one Gauss point of a cell.

    shape, (4, nodes), holds phi_n and dphi_n/dxi_d, and so does `at`, (4, 3), the field and its
    derivatives.
    """
    for row in range(4):
        a, b, c = 0.0, 0.0, 0.0
        for n in range(len(cell)):
            weight = shape[row, n]
            a += weight * field[cell[n], 0]
            b += weight * field[cell[n], 1]
            c += weight * field[cell[n], 2]
        at[row, 0], at[row, 1], at[row, 2] = a, b, c


@inlined
def map_point(
    points: FloatArray, cell: IntArray, shape: FloatArray, at: FloatArray, inverse: FloatArray
) -> float:
    """Position and dx_i/dxi_d at one Gauss point, at[0, i] and at[1 + d, i], and the inverse
    dxi_d/dx_i, inverse[d, i]; returns the determinant of the Jacobian.
    """
    interpolate(points, cell, shape, at)
    for i in range(3):
        a, b = (i + 1) % 3, (i + 2) % 3
        for j in range(3):
            c, d = 1 + (j + 1) % 3, 1 + (j + 2) % 3
            inverse[j, i] = at[c, a] * at[d, b] - at[d, a] * at[c, b]
    det = 0.0
    for d in range(3):
        det += at[1 + d, 0] * inverse[d, 0]
    inverse /= det
    return det


@inlined
def look_at_front(
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


@inlined
def to_frame(inverse: FloatArray, frame: FloatArray, local: FloatArray) -> None:
    """local[d, j] = dxi_d/dx_j along the frame's own axes."""
    for d in range(3):
        for j in range(3):
            local[d, j] = (
                inverse[d, 0] * frame[j, 0]
                + inverse[d, 1] * frame[j, 1]
                + inverse[d, 2] * frame[j, 2]
            )


@inlined
def first_constant(shear: float, poisson: float) -> float:
    """Lame's first constant."""
    return 2.0 * shear * poisson / (1.0 - 2.0 * poisson)


@inlined
def displacement_gradient(
    displacement: FloatArray,
    cell: IntArray,
    shape: FloatArray,
    frame: FloatArray,
    local: FloatArray,
    at: FloatArray,
    gradient: FloatArray,
) -> None:
    """gradient[i, j] = du_i/dx_j in the frame, from nodal displacements (points, 3)."""
    interpolate(displacement, cell, shape, at)
    for i in range(3):
        for j in range(3):
            total = 0.0
            for k in range(3):
                part = at[1, k] * local[0, j] + at[2, k] * local[1, j] + at[3, k] * local[2, j]
                total += frame[i, k] * part
            gradient[i, j] = total


@inlined
def hooke(gradient: FloatArray, lame: float, shear: float, stress: FloatArray) -> float:
    """C : eps from a displacement gradient; returns half its product with the strain."""
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


@inlined
def product(aux_stress: FloatArray, gradient: FloatArray) -> float:
    """sigma^aux_ij u_i,j, or sigma*_ij of it."""
    total = 0.0
    for i in range(3):
        for j in range(3):
            total += aux_stress[i, j] * gradient[i, j]
    return total


@inlined
def eshelby(
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


@inlined
def pull_of_tensor(
    P: FloatArray, factor: float, frame: FloatArray, local: FloatArray, mode: int, pull: FloatArray
) -> None:
    """Put factor P_kj dxi_d/dx_j along global axes into rows 1 + d and columns 3 mode + k of pull.

    pull, (4, 3 modes), holds what multiplies phi_n, and dphi_n/dxi_d.
    """
    for k in range(3):
        for d in range(3):
            total = 0.0
            for m in range(3):
                part = P[m, 0] * local[d, 0] + P[m, 1] * local[d, 1] + P[m, 2] * local[d, 2]
                total += frame[m, k] * part
            pull[1 + d, 3 * mode + k] = factor * total


@inlined
def pull_of_vector(
    T: FloatArray, factor: float, frame: FloatArray, mode: int, pull: FloatArray
) -> None:
    """Put factor T_k along global axes into the first row and columns 3 mode + k of pull."""
    for k in range(3):
        turned = frame[0, k] * T[0] + frame[1, k] * T[1] + frame[2, k] * T[2]
        pull[0, 3 * mode + k] = factor * turned


@inlined
def spread(pull: FloatArray, shape: FloatArray, forces: FloatArray) -> None:
    """Add what pulls at a Gauss point, all modes at once, to the forces, (nodes, 3 modes)."""
    for n in range(shape.shape[1]):
        value, a, b, c = shape[0, n], shape[1, n], shape[2, n], shape[3, n]
        for m in range(pull.shape[1]):
            forces[n, m] += value * pull[0, m] + a * pull[1, m] + b * pull[2, m] + c * pull[3, m]


@inlined
def area_vector(
    at: FloatArray, tangents: FloatArray, frame: FloatArray, weight: float, area: FloatArray
) -> None:
    """Outward area vector of a face at a Gauss point, in the frame, times its weight."""
    for i in range(3):
        area[i] = 0.0
    for k in range(3):
        a, b = (k + 1) % 3, (k + 2) % 3
        a0, a1, b0, b1 = 0.0, 0.0, 0.0, 0.0
        for d in range(3):
            a0 += at[1 + d, a] * tangents[d, 0]
            a1 += at[1 + d, a] * tangents[d, 1]
            b0 += at[1 + d, b] * tangents[d, 0]
            b1 += at[1 + d, b] * tangents[d, 1]
        component = weight * (a0 * b1 - b0 * a1)
        for i in range(3):
            area[i] += frame[i, k] * component
