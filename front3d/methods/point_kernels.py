"""Kernels at one Gauss point: its place, the strains there, and what they give to the nodes."""

from front3d.arrays import FloatArray, IntArray
from front3d.crack.curve import CurveArrays, frame_at, nearest
from front3d.fields.neartip import polar
from front3d.jit import kernel


@kernel
def map_point(
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


@kernel
def to_frame(inverse: FloatArray, frame: FloatArray, local: FloatArray) -> None:
    """local[d, j] = dxi_d/dx_j along the frame's own axes."""
    for d in range(3):
        for j in range(3):
            local[d, j] = (
                inverse[d, 0] * frame[j, 0]
                + inverse[d, 1] * frame[j, 1]
                + inverse[d, 2] * frame[j, 2]
            )


@kernel
def first_constant(shear: float, poisson: float) -> float:
    """Lame's first constant."""
    return 2.0 * shear * poisson / (1.0 - 2.0 * poisson)


@kernel
def displacement_gradient(
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


@kernel
def product(aux_stress: FloatArray, gradient: FloatArray) -> float:
    """sigma^aux_ij u_i,j, or sigma*_ij of it."""
    total = 0.0
    for i in range(3):
        for j in range(3):
            total += aux_stress[i, j] * gradient[i, j]
    return total


@kernel
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


@kernel
def spread(
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


@kernel
def area_vector(
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
