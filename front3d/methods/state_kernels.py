"""Kernels for solids whose constants or initial stress vary, or that bear a body force.

What varies is the state: at every node the constants, the initial stress and the body force there.
"""

import numpy as np

from front3d.arrays import FloatArray, IntArray
from front3d.jit import inlined

N_COLUMNS = 12
LAME, SHEAR, INITIAL, BODY, RATIO = 0, 1, 2, 8, 11
"""Columns of the state at a node, where one is given: Lame's constants, sigma* (xx, yy, zz, xy, yz,
xz), the body force, and Poisson's ratio at the nearest point of the front."""


@inlined
def state_at(
    state: FloatArray,
    cell: IntArray,
    shape: FloatArray,
    frame: FloatArray,
    local: FloatArray,
    weight: float,
    here: FloatArray,
    slope: FloatArray,
    initial: FloatArray,
) -> None:
    """The state, (points, N_COLUMNS), at a Gauss point, in the frame.

    Fills here, (N_COLUMNS,), with its body force turned; slope, (2, 3), the gradients of Lame's
    constants times `weight`; and initial, (4, 3, 3): sigma*, and its derivative along each axis
    times `weight`.
    """
    reference = np.zeros((N_COLUMNS, 4))
    for n in range(len(cell)):
        for m in range(N_COLUMNS):
            value = state[cell[n], m]
            for row in range(4):
                reference[m, row] += value * shape[row, n]
    for m in range(N_COLUMNS):
        here[m] = reference[m, 0]
        for j in range(3):
            total = 0.0
            for d in range(3):
                total += reference[m, 1 + d] * local[d, j]
            if m < 2:
                slope[m, j] = weight * total
            elif m < BODY:
                _place(m - INITIAL, weight * total, initial[1 + j])
        if INITIAL <= m < BODY:
            _place(m - INITIAL, here[m], initial[0])
    for part in range(4):
        _turn(frame, initial[part])
    for i in range(3):
        here[BODY + i] = 0.0
        for j in range(3):
            here[BODY + i] += frame[i, j] * reference[BODY + j, 0]


@inlined
def _place(component: int, value: float, tensor: FloatArray) -> None:
    """Put one of xx, yy, zz, xy, yz, xz into a symmetric tensor."""
    if component < 3:
        tensor[component, component] = value
    else:
        i = 1 if component == 4 else 0
        j = 1 if component == 3 else 2
        tensor[i, j] = tensor[j, i] = value


@inlined
def _turn(frame: FloatArray, tensor: FloatArray) -> None:
    """The tensor along the axes of the frame, in place."""
    half = np.zeros((3, 3))
    for i in range(3):
        for j in range(3):
            for k in range(3):
                half[i, j] += frame[i, k] * tensor[k, j]
    for i in range(3):
        for j in range(3):
            tensor[i, j] = 0.0
            for k in range(3):
                tensor[i, j] += half[i, k] * frame[j, k]


@inlined
def local_auxiliary(
    aux_gradient: FloatArray,
    aux_second: FloatArray,
    here: FloatArray,
    slope: FloatArray,
    shear: float,
    poisson: float,
    aux_stress: FloatArray,
    aux_strain: FloatArray,
    divergence: FloatArray,
) -> float:
    """Auxiliary stress of the constants that are `here`, its divergence, and the strain, in place
    of those of the constants (shear, poisson) that the auxiliary displacements have.

    Returns what the ratio of the constants here adds to Lame's first one.
    """
    lame = 2.0 * shear * poisson / (1.0 - 2.0 * poisson)
    ratio = here[SHEAR] / shear
    more = here[LAME] - ratio * lame
    for m in range(3):
        trace = aux_gradient[m, 0, 0] + aux_gradient[m, 1, 1]
        for i in range(3):
            for j in range(3):
                strain = aux_stress[m, i, j]
                if i == j:
                    strain -= lame * trace
                aux_strain[m, i, j] = strain / (2.0 * shear)
                aux_stress[m, i, j] *= ratio
            aux_stress[m, i, i] += more * trace
        for i in range(3):
            divergence[m, i] = ratio * divergence[m, i] + slope[LAME, i] * trace
            for j in range(3):
                divergence[m, i] += 2.0 * slope[SHEAR, j] * aux_strain[m, i, j]
            if i < 2:  # of the plane strain; along the front it is of higher order
                d_trace = aux_second[m, 0, i] + aux_second[m, 1, i + 1]
                divergence[m, i] += more * d_trace
    return more


@inlined
def configurational(
    strain: FloatArray,
    gradient: FloatArray,
    displacement_gradient: FloatArray,
    part: float,
    here: FloatArray,
    slope: FloatArray,
    initial: FloatArray,
    T: FloatArray,
) -> None:
    """Subtract strain : (sigma*_,k + part C_,k : eps) + b_i gradient_ik from T; the strain is
    symmetric.
    """
    trace, own, both = 0.0, 0.0, 0.0
    for i in range(3):
        trace += displacement_gradient[i, i]
        own += strain[i, i]
        for j in range(3):
            both += strain[i, j] * displacement_gradient[i, j]
    for k in range(3):
        total = part * (slope[LAME, k] * trace * own + 2.0 * slope[SHEAR, k] * both)
        for i in range(3):
            total += here[BODY + i] * gradient[i, k]
            for j in range(3):
                total += strain[i, j] * initial[1 + k, i, j]
        T[k] -= total
