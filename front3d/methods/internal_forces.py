"""Forces with which cells hold on to their nodes: how far a displacement is from equilibrium.

All sums over nodes are products of matrices and all else goes Gauss point by Gauss point, with the
cells in the last axis: nothing is compiled for it, and it costs little beside the integral.
"""

from dataclasses import dataclass

import numpy as np

from front3d.arrays import FloatArray, IntArray
from front3d.elements import ElementType, element_type
from front3d.methods.state_kernels import BODY, INITIAL, LAME, SHEAR
from front3d.solid import Material

RULE = 3
"""Gauss points a side: the full rule of quadratic elements, exact for straight tetrahedra."""

# Small enough for the cache, and for BLAS not to start threads.
_CHUNK = 512

# What that many cells give is summed at the nodes at once.
_BATCH = 32 * _CHUNK

_PLACE = ((0, 3, 5), (3, 1, 4), (5, 4, 2))


@dataclass(frozen=True, slots=True, eq=False)
class NodalSums:
    """What cells give to their nodes, summed node by node.

    Attributes
    ----------
    force : (steps, nodes, 3) int (sigma_ij dN/dx_j - b_i N) dV
    stiffness : (nodes,) about int |grad N|^2 dV, times the modulus lame + 2 shear
    area : (nodes, 3) int dN/dx_j dV: nothing inside a solid, the outward area at its surface; N is
        the linear function at corners, since the quadratic one has no mean on a triangle
    area_parts : (nodes,) the sum of its sizes, cell by cell
    """

    force: FloatArray
    stiffness: FloatArray
    area: FloatArray
    area_parts: FloatArray


def empty_sums(steps: int, nodes: int) -> NodalSums:
    """Sums of no cells."""
    return NodalSums(
        np.zeros((steps, nodes, 3)), np.zeros(nodes), np.zeros((nodes, 3)), np.zeros(nodes)
    )


def add_cells(
    sums: NodalSums,
    element: ElementType,
    cells: IntArray,
    rows: IntArray,
    points: FloatArray,
    displacement: FloatArray,
    state: FloatArray,
    material: Material,
) -> IntArray:
    """Add cells, (n, nodes) rows of `points` (m, 3) and of displacement (steps, m, 3).

    rows : (m,) the row of the sums that each point counts for
    state : (steps, m, columns), see `methods.state_kernels`, or empty
    Returns which cells are inside out at a Gauss point, which counts for nothing.
    """
    xi, weights = element.quadrature(RULE)
    values, gradients = element.values(xi), element.gradients(xi)
    by_axis = np.ascontiguousarray(gradients.transpose(2, 0, 1))
    linear = gradients.copy()
    linear[:, : element.n_corners] = element_type(element.family).gradients(xi)
    of_area = np.ascontiguousarray(linear.transpose(2, 1, 0))
    squares = by_axis**2
    modulus = material.lame + 2.0 * material.shear_modulus
    size, n_steps = len(sums.stiffness), len(displacement)
    inside_out = [np.zeros(0, np.int64)]
    for first in range(0, len(cells), _BATCH):
        batch = cells[first : first + _BATCH].T
        given = np.empty((5 + 3 * n_steps, *batch.shape))
        for start in range(0, batch.shape[1], _CHUNK):
            part = batch[:, start : start + _CHUNK]
            out = given[:, :, start : start + _CHUNK]
            inverse, volume = _geometry(_columns(points, part), by_axis, weights)
            inside_out.append(first + start + np.flatnonzero((volume <= 0.0).any(axis=0)))
            out[0] = sum(squares[d].T @ (_dot(inverse[d], inverse[d]) * volume) for d in range(3))
            weighed = [[volume * inverse[d][j] for j in range(3)] for d in range(3)]
            for j in range(3):
                out[2 + j] = sum(of_area[d] @ weighed[d][j] for d in range(3))
            np.sqrt(_dot(out[2:], out[2:]), out=out[1])
            for step, u in enumerate(displacement):
                here = None
                if len(state):
                    here = [values @ state[step][part, m] for m in range(state.shape[2])]
                slope = _slope(_columns(u, part), by_axis, inverse)
                stress = _stress(slope, material, here)
                for i in range(3):
                    force = out[5 + 3 * step + i]
                    force[:] = sum(by_axis[d].T @ _dot(stress[i], weighed[d]) for d in range(3))
                    if here is not None:
                        force -= values.T @ (here[BODY + i] * volume)
        at = rows[batch].ravel()
        summed = [np.bincount(at, what.ravel(), size) for what in given]
        sums.stiffness[:] += modulus * summed[0]
        sums.area_parts[:] += summed[1]
        sums.area[:] += np.stack(summed[2:5], axis=1)
        for step in range(n_steps):
            sums.force[step] += np.stack(summed[5 + 3 * step : 8 + 3 * step], axis=1)
    return np.concatenate(inside_out)


def _columns(values: FloatArray, part: IntArray) -> list[FloatArray]:
    """Three arrays (nodes, cells), relative to one node: a rigid shift must not cost digits."""
    return [values[part, i] - values[part[0], i] for i in range(3)]


def _dot(a: list[FloatArray] | FloatArray, b: list[FloatArray] | FloatArray) -> FloatArray:
    return a[0] * b[0] + a[1] * b[1] + a[2] * b[2]


def _geometry(
    x: list[FloatArray], by_axis: FloatArray, weights: FloatArray
) -> tuple[list[list[FloatArray]], FloatArray]:
    """inverse[d][j] = dxi_d/dx_j, each (q, cells), and weights times Jacobian, (q, cells)."""
    j = [[gradient @ x[i] for gradient in by_axis] for i in range(3)]
    inverse = [
        [j[(i + 1) % 3][(d + 1) % 3] * j[(i + 2) % 3][(d + 2) % 3]
         - j[(i + 1) % 3][(d + 2) % 3] * j[(i + 2) % 3][(d + 1) % 3] for i in range(3)]
        for d in range(3)
    ]  # fmt: skip
    det = sum(j[0][d] * inverse[d][0] for d in range(3))
    safe = np.where(det > 0.0, det, np.inf)
    inverse = [[cofactor / safe for cofactor in row] for row in inverse]
    return inverse, np.where(det > 0.0, det, 0.0) * weights[:, None]


def _slope(
    u: list[FloatArray], by_axis: FloatArray, inverse: list[list[FloatArray]]
) -> list[list[FloatArray]]:
    """slope[i][j] = du_i/dx_j, each (q, cells)."""
    raw = [[gradient @ u[i] for gradient in by_axis] for i in range(3)]
    return [[sum(raw[i][d] * inverse[d][j] for d in range(3)) for j in range(3)] for i in range(3)]


def _stress(
    slope: list[list[FloatArray]], material: Material, here: list[FloatArray] | None
) -> list[list[FloatArray]]:
    lame = material.lame if here is None else here[LAME]
    shear = material.shear_modulus if here is None else here[SHEAR]
    pressure = lame * (slope[0][0] + slope[1][1] + slope[2][2])
    stress = [[shear * (slope[i][j] + slope[j][i]) for j in range(3)] for i in range(3)]
    for i in range(3):
        stress[i][i] = stress[i][i] + pressure
        if here is not None:
            stress[i] = [stress[i][j] + here[INITIAL + _PLACE[i][j]] for j in range(3)]
    return stress
