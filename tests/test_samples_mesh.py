"""Meshes of the samples: valid, conforming, cracked where they should be, true to the ellipse."""

from functools import cache
from itertools import product

import numpy as np
import pytest

from front3d.elements import FACES
from front3d.errors import CaseError
from front3d.samples import SAMPLES
from front3d.samples.elasticity import boundary_faces
from front3d.samples.mirror import Unfolded
from front3d.samples.tube import Tube
from front3d.solid import Solid

RATIOS = list(product((0.2, 0.3, 0.5, 1.0, 2.0), (0.1, 0.3, 0.8)))
EXTREME = [(0.2, 0.1), (0.2, 0.8), (2.0, 0.8)]
EVERY_SAMPLE = {
    "penny": {"radius": 3.0},
    "surface-crack": {"depth": 6.0, "half_length": 10.0, "thickness": 15.0},
    "embedded-ellipse": {"semi_x": 4.0, "semi_y": 2.0},
}
CELLS = ("bricks", "tetra10", "brick8")


@cache
def mesh(name: str, cells: str, **parameters: float) -> Unfolded:
    spec = SAMPLES[name]
    return spec.mesh(spec.values({"refine": 0, **EVERY_SAMPLE[name], **parameters}), cells)


def jacobian_ratio(solid: Solid) -> float:
    """Smallest over largest Jacobian determinant within a cell, the worst of the solid.

    At Gauss points and nodes; at Gauss points only where quarter-points make it vanish at the
    front, and there relative to what it is in a perfect quarter-point wedge.
    """
    worst = np.inf
    for block in solid.blocks:
        element = block.element
        xi = element.quadrature(3)[0]
        reference = 1.0
        if block.kind == "wedge15":
            radius = xi[:, 0] + xi[:, 1]
            reference = radius**2 / (radius**2).max()
        else:
            xi = np.vstack([xi, element.nodes])
        gradient = element.gradients(xi)
        jacobian = np.einsum("qnd,cni->cqdi", gradient, solid.points[block.nodes], optimize=True)
        det = np.linalg.det(jacobian) / reference
        worst = min(worst, float((det.min(axis=1) / np.abs(det).max(axis=1)).min()))
    return worst


def volume(solid: Solid) -> float:
    total = 0.0
    for block in solid.blocks:
        xi, weights = block.element.quadrature(3)
        gradient = block.element.gradients(xi)
        jacobian = np.einsum("qnd,cni->cqdi", gradient, solid.points[block.nodes], optimize=True)
        total += float((np.linalg.det(jacobian) * weights).sum())
    return total


def crack_faces(solid: Solid) -> list[tuple[str, np.ndarray]]:
    """Boundary faces in z = 0: in these samples the crack alone."""
    out = []
    for kind, faces in boundary_faces(solid):
        flat = (solid.points[faces][:, :, 2] == 0.0).all(axis=1)
        if flat.any():
            out.append((kind, faces[flat]))
    return out


def front_nodes(solid: Solid) -> np.ndarray:
    """Nodes of crack faces that have no twin."""
    nodes = np.unique(np.concatenate([f.ravel() for _, f in crack_faces(solid)]))
    _, inverse, counts = np.unique(
        np.round(solid.points[nodes], 9), axis=0, return_inverse=True, return_counts=True
    )
    return nodes[counts[inverse.ravel()] == 1]


# A lower limit of 0.02 is common practice for a usable cell; the laws are > 0.
@pytest.mark.parametrize("cells", ["bricks", "tetra10"])
@pytest.mark.parametrize(("a_c", "a_t"), EXTREME)
def test_jacobians_are_positive_at_extreme_ratios(cells: str, a_c: float, a_t: float) -> None:
    model = mesh("surface-crack", cells, depth=1.0, half_length=1 / a_c, thickness=1 / a_t)
    assert jacobian_ratio(model.part) > 0.02


@pytest.mark.slow
@pytest.mark.parametrize("refine", [0, 1, 2])
@pytest.mark.parametrize("cells", ["bricks", "tetra10"])
def test_jacobians_are_positive_over_the_whole_range(cells: str, refine: int) -> None:
    for a_c, a_t in RATIOS:
        model = mesh(
            "surface-crack",
            cells,
            depth=1.0,
            half_length=1 / a_c,
            thickness=1 / a_t,
            refine=refine,
        )
        assert jacobian_ratio(model.part) > 0.02, (a_c, a_t)
    for a_c in (0.2, 0.5, 2.0, 5.0):
        model = mesh("embedded-ellipse", cells, semi_x=1 / a_c, semi_y=1.0, refine=refine)
        assert jacobian_ratio(model.part) > 0.02, a_c


@pytest.mark.parametrize("body", [2.0, 3.0, 30.0])
def test_small_and_large_bodies_are_valid(body: float) -> None:
    assert jacobian_ratio(mesh("penny", "bricks", radius=1.0, body=body).part) > 0.02
    plate = mesh(
        "surface-crack",
        "bricks",
        depth=1.0,
        half_length=1.0,
        thickness=2.0,
        half_width=body,
        half_height=body,
    )
    assert jacobian_ratio(plate.part) > 0.02


def test_reflected_cells_keep_the_jacobian_of_their_source() -> None:
    for cells in ("bricks", "tetra10"):
        model = mesh("surface-crack", cells)
        assert jacobian_ratio(model.solid) == pytest.approx(jacobian_ratio(model.part), rel=1e-9)


@pytest.mark.parametrize("cells", CELLS)
@pytest.mark.parametrize("name", list(EVERY_SAMPLE))
def test_cells_are_conforming(name: str, cells: str) -> None:
    # A face is shared by two cells, with all its nodes, or it lies on the outside or the crack.
    model = mesh(name, cells)
    solid = model.solid
    groups: dict[str, list[np.ndarray]] = {}
    for block in solid.blocks:
        for kind, local in block.element.faces:
            groups.setdefault(kind, []).append(block.nodes[:, list(local)])
    size = np.abs(solid.points).max(axis=0)
    for kind, parts in groups.items():
        faces = np.concatenate(parts)
        corners = np.sort(faces[:, : FACES[kind].n_corners], axis=1)
        _, first, index, counts = np.unique(
            corners, axis=0, return_index=True, return_inverse=True, return_counts=True
        )
        assert set(counts.tolist()) <= {1, 2}
        whole = np.sort(faces, axis=1)
        np.testing.assert_array_equal(whole, whole[first][index.ravel()])
        x = solid.points[faces[counts[index.ravel()] == 1]]
        sides = np.abs(np.abs(x) - size) < 1e-9 * size
        sides[:, :, 2] |= x[:, :, 2] == 0.0  # the crack
        if name == "surface-crack":
            sides[:, :, 1] |= x[:, :, 1] == 0.0
        outside = sides.all(axis=1).any(axis=1)
        if name == "penny":
            corner_radius = np.hypot(x[..., 0], x[..., 1])[:, : FACES[kind].n_corners]
            outside |= (corner_radius > size[0] * (1 - 1e-9)).all(axis=1)
        assert outside.all()


@pytest.mark.parametrize("cells", CELLS)
@pytest.mark.parametrize("name", list(EVERY_SAMPLE))
def test_crack_faces_match_pairwise_and_have_the_area_of_the_crack(name: str, cells: str) -> None:
    solid = mesh(name, cells).solid
    area, n_twins = 0.0, 0
    for kind, faces in crack_faces(solid):
        face = FACES[kind]
        centres = solid.points[faces[:, : face.n_corners]].mean(axis=1)
        keys, counts = np.unique(np.round(centres, 9), axis=0, return_counts=True)
        assert (counts == 2).all(), "every crack face has one twin"
        n_twins += len(keys)
        xi, weights = face.quadrature(3)
        x = solid.points[faces]
        tangents = np.einsum("fni,qnd->fqdi", x, face.gradients(xi))
        normal = np.cross(tangents[:, :, 0], tangents[:, :, 1])
        area += float((np.abs(normal[:, :, 2]) * weights).sum())
        assert abs(float((normal[:, :, 2] * weights).sum())) < 1e-9 * area  # upper and lower oppose
    p = EVERY_SAMPLE[name]
    exact = {
        "penny": np.pi * 9.0,
        "surface-crack": np.pi * 6.0 * 10.0 / 2.0,
        "embedded-ellipse": np.pi * 8.0,
    }[name]
    assert n_twins > 10, p
    # Quadratic edges miss a circle's area by O(h^4), straight ones by O(h^2).
    assert area / 2.0 == pytest.approx(exact, rel=5e-2 if cells == "brick8" else 1e-3)


@pytest.mark.parametrize("cells", CELLS)
@pytest.mark.parametrize("name", list(EVERY_SAMPLE))
def test_front_nodes_lie_on_the_ellipse(name: str, cells: str) -> None:
    solid = mesh(name, cells).solid
    c, a = {"penny": (3, 3), "surface-crack": (10, 6), "embedded-ellipse": (4, 2)}[name]
    x = solid.points[front_nodes(solid)]
    assert len(x) >= 8
    np.testing.assert_allclose((x[:, 0] / c) ** 2 + (x[:, 1] / a) ** 2, 1.0, atol=1e-12)
    if name == "surface-crack":  # one open front: its ends and its deepest point are nodes
        assert {(-10.0, 0.0), (10.0, 0.0), (0.0, 6.0)} <= {tuple(p[:2]) for p in x.tolist()}


@pytest.mark.parametrize("name", list(EVERY_SAMPLE))
def test_wedges_have_quarter_points_in_planes_normal_to_the_front(name: str) -> None:
    model = mesh(name, "bricks")
    solid = model.solid
    c, a = {"penny": (3, 3), "surface-crack": (10, 6), "embedded-ellipse": (4, 2)}[name]
    (wedges,) = (b.nodes for b in solid.blocks if b.kind == "wedge15")
    front = set(front_nodes(solid).tolist())
    for tip, far, middle in ((0, 1, 6), (0, 2, 8), (3, 4, 9), (3, 5, 11)):
        assert set(wedges[:, tip].tolist()) <= front
        p, q, m = (solid.points[wedges[:, k]] for k in (tip, far, middle))
        np.testing.assert_allclose(m, p + (q - p) / 4.0, rtol=0, atol=1e-13 * c)
        tangent = np.stack([-c * p[:, 1] / a, a * p[:, 0] / c, np.zeros(len(p))], axis=1)
        tangent /= np.linalg.norm(tangent, axis=1, keepdims=True)
        gap = np.linalg.norm(q - p, axis=1)
        assert np.abs(np.einsum("ni,ni->n", q - p, tangent) / gap).max() < 1e-10
    n_front_cells = len(front) // 2
    assert len(wedges) == 2 * 4 * n_front_cells  # four sectors above, four below


def test_tetrahedra_at_the_front_have_mid_side_nodes_in_the_middle() -> None:
    solid = mesh("penny", "tetra10").solid
    front = front_nodes(solid)
    (block,) = solid.blocks
    edges = np.concatenate([block.nodes[:, list(edge)] for edge in block.element.edges])
    touching = np.isin(edges[:, 0], front) ^ np.isin(edges[:, 1], front)
    p, q, x = solid.points[edges[touching]].swapaxes(0, 1)
    offset = np.linalg.norm(x - (p + q) / 2.0, axis=1) / np.linalg.norm(q - p, axis=1)
    assert touching.sum() > 100
    assert offset.max() < 0.15  # curved a little, far from the 0.25 of quarter-points


@pytest.mark.parametrize("cells", CELLS)
def test_volumes(cells: str) -> None:
    plate = mesh("surface-crack", cells, half_width=40.0, half_height=30.0)
    assert volume(plate.solid) == pytest.approx(80.0 * 60.0 * 15.0, rel=1e-12)
    cylinder = mesh("penny", cells, radius=1.0, body=8.0)
    error = 0.06 if cells == "brick8" else 2e-4  # twelve or more cells around the circle
    assert volume(cylinder.solid) == pytest.approx(np.pi * 64.0 * 16.0, rel=error)


def test_tube_keeps_four_rings_of_bricks() -> None:
    for spec in SAMPLES.values():
        for refine in (0, 1):
            values = spec.values({"refine": refine})
            part = spec.mesh(values, "bricks").part
            bricks, wedges = part.blocks
            assert (bricks.kind, wedges.kind) == ("hexahedron20", "wedge15")
            near = np.unique(wedges.nodes[:, [1, 2, 4, 5]])
            left = bricks.nodes[:, :8]
            for _ in range(4):  # walk outwards, ring by ring: each has as many cells as wedges
                touching = np.isin(left, near).sum(axis=1) == 4
                assert touching.sum() == len(wedges)
                near = np.setdiff1d(left[touching], near)
                left = left[~touching]


def test_tube_section_is_symmetric_and_ends_in_the_square() -> None:
    for sectors in (4, 8):
        section = Tube(sectors=sectors, rings=4).section()
        np.testing.assert_allclose(section, section[::-1] * (-1, 1), atol=1e-15)
        np.testing.assert_allclose(np.abs(section[:, -1]).max(axis=1), 1.0, atol=1e-15)
        assert (section[:, 0] == 0.0).all()


@pytest.mark.parametrize(
    ("parameters", "message"),
    [
        ({"depth": 1.0, "half_length": 10.0}, "depth / half_length = 0.1, expected 0.2 to 2"),
        ({"thickness": 7.0}, "depth / thickness = 0.8571, expected 0.1 to 0.8"),
        ({"half_width": 11.0}, "half_width / half_length = 1.1, expected 2 to 50"),
        ({"depth": -1.0}, "depth: found -1.0, expected a number from 1e-09"),
        ({"refine": 0.5}, "refine: found 0.5, expected a whole number from 0 to 2"),
        ({"width": 3.0}, "found parameter 'width', expected one of depth, half_length"),
        ({"depth": float("nan")}, "depth: found nan"),
    ],
)
def test_wrong_parameters_are_refused(parameters: dict[str, float], message: str) -> None:
    with pytest.raises(CaseError, match=message):
        SAMPLES["surface-crack"].values(parameters)
