"""Laws that every element type of the library obeys."""

import numpy as np
import pytest

from front3d.elements import ELEMENTS, FACES

CELLS = list(ELEMENTS.values())
VOLUMES = {"tetra": 1 / 6, "hexahedron": 8.0, "wedge": 1.0, "pyramid": 4 / 3}


def name_of(cell):
    return cell.name


@pytest.mark.parametrize("cell", [*CELLS, *FACES.values()], ids=name_of)
def test_nodal_property_and_partition_of_unity(cell):
    np.testing.assert_allclose(cell.values(cell.nodes), np.eye(len(cell.nodes)), atol=1e-13)
    xi, _ = cell.quadrature(3)
    np.testing.assert_allclose(cell.values(xi).sum(axis=1), 1.0, atol=1e-13)
    np.testing.assert_allclose(cell.gradients(xi).sum(axis=1), 0.0, atol=1e-12)


@pytest.mark.parametrize("cell", [*CELLS, *FACES.values()], ids=name_of)
def test_complete_polynomials_of_the_stated_order_are_reproduced(cell):
    xi, _ = cell.quadrature(3)
    direction = np.array([0.3, -0.7, 0.5])[: cell.nodes.shape[1]]

    def polynomial(x):
        return (1.0 + x @ direction) ** cell.order

    np.testing.assert_allclose(cell.values(xi) @ polynomial(cell.nodes), polynomial(xi), atol=1e-13)


@pytest.mark.parametrize("cell", [*CELLS, *FACES.values()], ids=name_of)
def test_gradients_are_the_derivatives_of_the_values(cell):
    xi, _ = cell.quadrature(2)
    step = 1e-6
    for axis in range(cell.nodes.shape[1]):
        shift = np.zeros(cell.nodes.shape[1])
        shift[axis] = step
        difference = (cell.values(xi + shift) - cell.values(xi - shift)) / (2 * step)
        np.testing.assert_allclose(cell.gradients(xi)[..., axis], difference, atol=1e-8)


@pytest.mark.parametrize("cell", CELLS, ids=name_of)
def test_quadrature_has_the_volume_and_the_stated_degree(cell):
    for n in (1, 2, 3):
        xi, weights = cell.quadrature(n)
        assert weights.sum() == pytest.approx(VOLUMES[cell.family], rel=1e-13)
        fine, fine_weights = cell.quadrature(6)
        direction = np.array([0.4, 0.3, -0.6])
        degree = 2 * n - 1
        assert weights @ (1 + xi @ direction) ** degree == pytest.approx(
            fine_weights @ (1 + fine @ direction) ** degree, rel=1e-12
        )


@pytest.mark.parametrize("cell", CELLS, ids=name_of)
def test_faces_close_the_cell_and_point_outwards(cell):
    """Divergence theorem: the flux of the position vector out of the faces is 3 volumes."""
    flux = 0.0
    for kind, nodes in cell.faces:
        face = FACES[kind]
        xi, weights = face.quadrature(3)
        x = face.values(xi) @ cell.nodes[list(nodes)]
        tangents = np.einsum("qnd,nx->qdx", face.gradients(xi), cell.nodes[list(nodes)])
        normal = np.cross(tangents[:, 0], tangents[:, 1])
        flux += weights @ np.sum(x * normal, axis=1)
    assert flux == pytest.approx(3 * VOLUMES[cell.family], rel=1e-12)


@pytest.mark.parametrize("cell", CELLS, ids=name_of)
def test_edges_join_corners_and_carry_their_midpoint(cell):
    corners = cell.edges[:, :2]
    assert corners.max() < cell.n_corners
    if cell.quadratic:
        np.testing.assert_allclose(
            cell.nodes[cell.edges[:, 2]], cell.nodes[corners].mean(axis=1), atol=1e-15
        )
    assert len(np.unique(np.sort(corners, axis=1), axis=0)) == len(corners)
