"""Blocks of cells in equilibrium, with an exact field held on their outer boundary.

Closure takes nodal forces, and those of an exact field that is merely imposed on every node are far
off in cells that cannot hold it.  So the nodes inside are set free: what is left is the
error of a solved model, without that of a body's size.
"""

from dataclasses import replace

import numpy as np

from front3d.samples.direct import direct_solver
from front3d.samples.elasticity import boundary_faces, stiffness
from front3d.solid import CellBlock, Material, Solid, Step
from tests.meshes.structured import Cracked, impose, straight
from tests.reference import exact


def near_tip_block(
    kind, n, young, poisson, along=1, stretch=None, tall=1.0, mirrored=False
) -> Solid:
    """Straight front along z with steps I, II, III: unit K held around.

    Parameters
    ----------
    mirrored : the cells below are made the mirror images of those above; else they are cut alike
    tall : factor on the heights of the four cells next to the crack plane on either side
    stretch : (ahead, behind) factors on the lengths of the four cells next to the front on either
        side; the rest make up for it, or where they cannot are stretched too
    """
    mesh = straight(kind, n, along=along, length=2.0 * along / n)
    if mirrored:
        mesh = _mirrored(mesh)
    if stretch is not None or tall != 1.0:
        ahead, behind = stretch or (1.0, 1.0)
        points = mesh.solid.points.copy()
        x, y = points[:, :2].T.copy()
        points[:, 0] = np.where(x > 0, _graded(x, ahead, n), -_graded(-x, behind, n))
        points[:, 1] = np.sign(y) * _graded(np.abs(y), tall, n)
        mesh = replace(mesh, solid=replace(mesh.solid, points=points))
    solid = mesh.solid
    elastic = exact.Elastic.from_young(young, poisson)
    for name, K in zip(("I", "II", "III"), np.eye(3), strict=True):
        solid = impose(solid, mesh.side, exact.near_tip(elastic, K), name)
    return _relaxed(mesh, solid, Material(young, poisson))


def _mirrored(mesh: Cracked) -> Cracked:
    """The cells below the crack plane replaced by the images of those above."""
    x = mesh.solid.points

    def names(points, side):
        return [tuple(row) for row in np.rint(np.column_stack([points * 1e6, side])).astype(int)]

    row = {name: k for k, name in enumerate(names(x, mesh.side))}
    image = np.array([row[name] for name in names(x * [1, -1, 1], -mesh.side)])
    blocks = []
    for block in mesh.solid.blocks:
        # An image has its nodes the wrong way round; exchanging two axes of the cell mends that.
        nodes = block.element.nodes
        turn = [int(np.abs(nodes - at).sum(axis=1).argmin()) for at in nodes[:, [1, 0, 2]]]
        upper = block.nodes[x[block.nodes][:, :, 1].mean(axis=1) > 0]
        blocks.append(CellBlock(block.kind, np.concatenate([upper, image[upper][:, turn]])))
    return replace(mesh, solid=replace(mesh.solid, blocks=tuple(blocks)))


def _graded(x, factor, n):
    near = 8.0 / n
    if factor == 1.0:
        return x
    if near * factor >= 1.0:
        return x * factor
    return np.where(
        x < near, x * factor, near * factor + (x - near) * (1 - near * factor) / (1 - near)
    )


def _relaxed(mesh: Cracked, solid: Solid, material: Material) -> Solid:
    """In-plane displacements of the ends are free in modes I and II, the others in mode III: the
    planes across the front are planes of symmetry, or of antisymmetry.
    """
    matrix = stiffness(solid, material)
    z = solid.points[:, 2]
    end = (z < 1e-9) | (z > z.max() - 1e-9)
    crack = mesh.side != 0
    crack[mesh.front] = True
    around = np.zeros(len(z), bool)
    for _, nodes in boundary_faces(solid):
        across = np.ptp(z[nodes], axis=1) < 1e-9
        around[nodes[~crack[nodes].all(axis=1) & ~across]] = True
    steps = []
    for group, at_ends in (
        (solid.steps[:2], [False, False, True]),
        (solid.steps[2:], [True, True, False]),
    ):
        held = np.repeat(around[:, None], 3, axis=1)
        held[end] |= np.array(at_ends)
        fixed = held.ravel()
        solve = direct_solver(matrix, fixed)
        for step in group:
            known = np.where(fixed, step.displacement.ravel(), 0.0)
            moved = known + solve(-(matrix.tocsr() @ known))
            steps.append(Step(step.name, moved.reshape(-1, 3), step.time))
    return replace(solid, steps=tuple(steps))
