"""The samples' solver against scikit-fem, an independent general finite-element library.

Same cells, same loads, same held components; straight-sided cells and equal quadrature, so that
both integrate the same thing and only rounding may differ.
"""

import numpy as np
import pytest
import skfem
from scipy.sparse import csc_matrix
from scipy.sparse.linalg import splu
from skfem.models.elasticity import lame_parameters, linear_elasticity

from front3d.elements import ELEMENTS
from front3d.samples import SAMPLES
from front3d.samples.constraints import hold_rigid_motion
from front3d.samples.elasticity import boundary_faces, stiffness, traction_load
from front3d.samples.mirror import load_classes, unfolded_field
from front3d.samples.solver import solve, solve_unfolded
from front3d.solid import CellBlock, Material, Solid
from tests.test_samples_solver import cube

MATERIAL = Material(210e3, 0.28)


# Our corner at each of the library's: both reference bricks are cubes, (-1, 1)^3 and (0, 1)^3.
_HEX = [
    int(np.argmin(np.abs(ELEMENTS["hexahedron"].nodes - (2.0 * place - 1.0)).max(axis=1)))
    for place in skfem.ElementHex1.doflocs
]


def with_straight_sides(solid: Solid) -> Solid:
    points = solid.points.copy()
    for block in solid.blocks:
        for i, j, m in block.element.edges if block.element.quadratic else ():
            points[block.nodes[:, m]] = (points[block.nodes[:, i]] + points[block.nodes[:, j]]) / 2
    return Solid(points, solid.blocks)


def library_stiffness(solid: Solid) -> tuple[object, np.ndarray]:
    """scikit-fem's matrix, and for each of its degrees of freedom the number 3 node + component.

    Nodes are told apart by the cell they belong to, so the double nodes of a crack stay double.
    """
    (block,) = solid.blocks
    corners = block.nodes[:, : block.element.n_corners]
    used, numbered = np.unique(corners, return_inverse=True)
    numbered = numbered.reshape(corners.shape)
    mesh_type, scalar, order = {
        "tetra10": (skfem.MeshTet, skfem.ElementTetP2(), [0, 1, 2, 3]),
        "tetra": (skfem.MeshTet, skfem.ElementTetP1(), [0, 1, 2, 3]),
        "hexahedron": (skfem.MeshHex, skfem.ElementHex1(), _HEX),
        "hexahedron20": (skfem.MeshHex, skfem.ElementHexS2(), _HEX),
    }[block.kind]
    mesh = mesh_type(solid.points[used].T, numbered[:, order].T)
    basis = skfem.Basis(mesh, skfem.ElementVector(scalar), intorder=5)
    matrix = linear_elasticity(*lame_parameters(MATERIAL.young, MATERIAL.poisson)).assemble(basis)
    places = np.full(basis.N, -1)
    at = basis.doflocs
    for row in basis.element_dofs:  # one local degree of freedom of every cell
        here = at[:, row].T
        nodes = solid.points[block.nodes]
        gap = np.abs(nodes - here[:, None]).max(axis=2)
        node = block.nodes[np.arange(len(nodes)), gap.argmin(axis=1)]
        assert gap.min(axis=1).max() < 1e-9 * np.ptp(solid.points)
        places[row] = 3 * node
    # The components follow each other at every vertex and edge.
    for part in (basis.nodal_dofs, basis.edge_dofs):
        for component, row in enumerate(part):
            places[row] += component % 3
    assert np.array_equal(np.sort(places), np.arange(3 * len(solid.points)))
    return matrix, places


def _factorise(matrix: object, right: np.ndarray) -> np.ndarray:
    # The library's default ordering takes minutes in three dimensions.
    return splu(csc_matrix(matrix), permc_spec="MMD_AT_PLUS_A").solve(right)


def library_solution(solid: Solid, load: np.ndarray, held: np.ndarray) -> np.ndarray:
    matrix, places = library_stiffness(solid)
    right = load.ravel()[places]
    fixed = np.flatnonzero(held.ravel()[places])
    x = skfem.solve(*skfem.condense(matrix, right, D=fixed), solver=_factorise)
    out = np.zeros(load.size)
    out[places] = x
    return out.reshape(-1, 3)


@pytest.mark.parametrize("kind", ["tetra", "tetra10", "hexahedron", "hexahedron20"])
def test_distorted_cube_agrees(kind: str) -> None:
    solid = with_straight_sides(cube(kind))
    load = traction_load(
        solid.points,
        boundary_faces(solid),
        lambda points, normals: (points**2 + 1.0) * (points[:, 2:] > 1 - 1e-9),
    )
    held = np.zeros(solid.points.shape, dtype=bool)
    held[solid.points[:, 2] < 1e-9] = True
    found = solve(solid, MATERIAL, load[None], held)[0]
    expected = library_solution(solid, load, held)
    np.testing.assert_allclose(found, expected, rtol=0, atol=1e-10 * np.abs(expected).max())


@pytest.mark.parametrize("kind", ["tetra10", "hexahedron20"])
def test_stiffness_agrees(kind: str) -> None:
    solid = with_straight_sides(cube(kind))
    matrix, places = library_stiffness(solid)
    mine = stiffness(solid, MATERIAL).toarray()[np.ix_(places, places)]
    np.testing.assert_allclose(mine, matrix.toarray(), rtol=0, atol=1e-12 * np.abs(mine).max())


@pytest.mark.slow
@pytest.mark.parametrize("name", ["penny", "surface-crack"])
def test_cracked_sample_agrees(name: str) -> None:
    # The whole cracked solid in the library; ours on its part, one symmetry class at a time.
    spec = SAMPLES[name]
    values = spec.values({"refine": 0, **({"tilt": 35.0} if name == "penny" else {})})
    model = spec.mesh(values, "tetra10")
    solid, part = with_straight_sides(model.solid), with_straight_sides(model.part)
    model = type(model)(part, model.planes, solid, model.source, model.signs)
    faces = boundary_faces(solid)
    (load, *_) = spec.loads(values)
    force = traction_load(
        solid.points, [(k, f[load.on(solid.points[f])]) for k, f in faces], load.traction
    )
    found = solve_unfolded(model, MATERIAL, force[None])[0]
    rest = found
    for group in load_classes(model, force[None]):
        held = hold_rigid_motion(part.points, group.held, group.loads)
        expected = unfolded_field(model, group.parity, library_solution(part, group.loads[0], held))
        rest = rest - expected
    assert np.abs(rest).max() < 1e-8 * np.abs(found).max()


@pytest.mark.slow
def test_whole_solid_with_double_nodes_agrees() -> None:
    spec = SAMPLES["surface-crack"]
    values = spec.values({"refine": 0, "depth": 10.0, "thickness": 20.0})
    quadratic = spec.mesh(values, "tetra10").solid
    corners = quadratic.blocks[0].nodes[:, :4]
    used, nodes = np.unique(corners, return_inverse=True)
    solid = Solid(quadratic.points[used], (CellBlock("tetra", nodes.reshape(corners.shape)),))
    faces = boundary_faces(solid)
    (load, *_) = spec.loads(values)
    force = traction_load(
        solid.points, [(k, f[load.on(solid.points[f])]) for k, f in faces], load.traction
    )
    held = hold_rigid_motion(solid.points, np.zeros(force.shape, dtype=bool), force[None])
    found = solve(solid, MATERIAL, force[None], held)[0]
    expected = library_solution(solid, force, held)
    np.testing.assert_allclose(found, expected, atol=1e-8 * np.abs(expected).max())
    twins = np.unique(np.round(solid.points, 9), axis=0)
    assert len(twins) < len(solid.points)  # the crack is there, and it opens
