"""A penny crack in a long cylinder under loads within its volume, solved: radius 1 in ten.

Both ends are held in the axial direction and the side is free, so that without the crack the
cylinder is in plane strain: the stress across the crack's place is known in closed form (Lame;
Timoshenko and Goodier), and with it K of the penny (Sneddon 1946).
"""

from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np

from front3d.elements import ELEMENTS
from front3d.samples.cells import cracked_solid
from front3d.samples.direct import direct_solver
from front3d.samples.elasticity import _sum_blocks, boundary_faces, traction_load
from front3d.samples.fineness import density
from front3d.samples.mirror import load_classes, unfolded_field
from front3d.samples.octant import octant
from front3d.samples.sheet import Quarter
from front3d.samples.solver import solve_unfolded
from front3d.solid import Material, Solid, Step

BODY = 10.0
MATERIAL = Material(1.0, 0.3)


@dataclass(frozen=True)
class Acting:
    """One step: pressure and traction on the crack faces, body force, and initial stress (sigma* of
    C : eps + sigma*), each a function of positions (n, 3) -> (n,), (n, 3), (n, 3, 3), the traction
    of normals too; and point arrays.
    """

    pressure: Callable | None = None
    traction: Callable | None = None
    force: Callable | None = None
    stress: Callable | None = None
    arrays: Callable = lambda x: {}


def model(cells):
    shape = Quarter(1.0, 1.0, radius=0.25, width=BODY, depth=BODY, round=True)
    fine = density(cells, 1, 1.0, closed=True)
    return cracked_solid(octant(shape, fine, BODY), (0, 1), cells, "cylinder")


def solved(cells, acting: dict[str, Acting]) -> Solid:
    """The whole cylinder with a step for each of the loads."""
    unfolded = model(cells)
    solid = unfolded.solid
    loads = np.stack([nodal_forces(solid, load) for load in acting.values()])
    part = unfolded.part.points
    held = np.zeros(part.shape, bool)
    held[np.abs(part[:, 2]) > BODY * (1 - 1e-9), 2] = True
    moved = solve_unfolded(unfolded, MATERIAL, loads, None, held)
    steps = [
        Step(name, u, 0.0, load.arrays(solid.points))
        for (name, load), u in zip(acting.items(), moved, strict=True)
    ]
    return replace(solid, steps=tuple(steps))


def nodal_forces(solid, load):
    """Work-equivalent forces of pressure, body force and initial stress."""
    out = np.zeros_like(solid.points)
    crack = [
        (kind, nodes[np.abs(solid.points[nodes][:, :, 2]).max(axis=1) < 1e-12])
        for kind, nodes in boundary_faces(solid)
    ]
    if load.pressure is not None:
        out += traction_load(solid.points, crack, lambda x, n: -load.pressure(x)[:, None] * n)
    if load.traction is not None:
        out += traction_load(solid.points, crack, load.traction)
    for block in solid.blocks:
        xi, weights = ELEMENTS[block.kind].quadrature(3)
        values, reference = block.element.values(xi), block.element.gradients(xi)
        x = solid.points[block.nodes]
        jacobian = np.einsum("cni,qnd->cqid", x, reference)
        volume = np.linalg.det(jacobian) * weights
        at = np.einsum("qn,cni->cqi", values, x)
        flat = at.reshape(-1, 3)
        f = np.zeros(x.shape)
        if load.force is not None:
            force = load.force(flat).reshape(at.shape)
            f += np.einsum("qn,cqi,cq->cni", values, force, volume)
        if load.stress is not None:
            gradient = np.matmul(reference[None], np.linalg.inv(jacobian))
            stress = load.stress(flat).reshape(*at.shape, 3)
            f -= np.einsum("cqij,cqnj,cq->cni", stress, gradient, volume)
        np.add.at(out, block.nodes, f)
    return out


def graded(cells, young, poisson) -> Solid:
    """The cylinder with constants that vary, functions of positions, under pressure on the faces.

    The temperature T of the step is the distance from the axis.
    """
    unfolded = model(cells)
    solid, part = unfolded.solid, unfolded.part
    load = nodal_forces(solid, Acting(pressure=lambda x: 1.0 + 0 * x[:, 0]))
    (group,) = load_classes(unfolded, load[None])
    fixed = group.held.copy()
    fixed[np.abs(part.points[:, 2]) > BODY * (1 - 1e-9), 2] = True
    solve = direct_solver(_stiffness(part, young, poisson), fixed.ravel())
    moved = solve(np.where(fixed, 0.0, group.loads[0]).ravel()).reshape(-1, 3)
    u = unfolded_field(unfolded, group.parity, moved)
    T = np.hypot(solid.points[:, 0], solid.points[:, 1])
    return replace(solid, steps=(Step("pressure", u, 0.0, {"T": T}),))


def _stiffness(solid, young, poisson):
    """Int B^T C B with C at each Gauss point."""
    n = len(solid.points)
    keys, values = [], []
    for block in solid.blocks:
        xi, weights = ELEMENTS[block.kind].quadrature(3)
        reference, shape = block.element.gradients(xi), block.element.values(xi)
        for nodes in np.array_split(block.nodes, len(block.nodes) // 500 + 1):
            x = solid.points[nodes]
            jacobian = np.einsum("cni,qnd->cqid", x, reference)
            gradient = np.matmul(reference[None], np.linalg.inv(jacobian))
            at = np.einsum("qn,cni->cqi", shape, x)
            E, nu = young(at), poisson(at)
            volume = np.linalg.det(jacobian) * weights
            lame, mu = volume * E * nu / ((1 + nu) * (1 - 2 * nu)), volume * E / (2 * (1 + nu))
            first = np.einsum("cqai,cqbj,cq->cabij", gradient, gradient, lame, optimize=True)
            shear = np.einsum("cqaj,cqbi,cq->cabij", gradient, gradient, mu, optimize=True)
            even = np.einsum("cabii->cab", shear)[..., None, None] * np.eye(3)
            keys.append((nodes[:, :, None] * n + nodes[:, None, :]).ravel())
            values.append((first + shear + even).reshape(-1, 9))
    return _sum_blocks(np.concatenate(keys), np.concatenate(values), n)
