"""The elastic solver of the samples: patch tests, symmetry, equilibrium, refusals."""

from collections.abc import Callable

import numpy as np
import pytest

from front3d.elements import ELEMENTS
from front3d.errors import MeshError, MethodError
from front3d.samples import SAMPLES, schwarz
from front3d.samples.elasticity import boundary_faces, stiffness, traction_load
from front3d.samples.mirror import load_classes
from front3d.samples.sample import uniform
from front3d.samples.solver import solve, solve_unfolded
from front3d.solid import CellBlock, Material, Solid

MATERIAL = Material(200e3, 0.3)
GRADIENT = 1e-3 * np.array([[1.0, -0.4, 0.3], [0.2, 0.7, -0.5], [0.6, 0.1, -0.8]])
CUBE = np.array([[i, j, k] for k in (0, 1) for j in (0, 1) for i in (0, 1)], dtype=float)[
    [0, 1, 3, 2, 4, 5, 7, 6]
]


@pytest.fixture(autouse=True)
def small_clusters(monkeypatch: pytest.MonkeyPatch) -> None:
    """Several clusters even on the small meshes here, so that iterating is put to the test."""
    monkeypatch.setattr(schwarz, "CLUSTER", 30)


def linear_cells(family: str, n: int = 2) -> tuple[np.ndarray, np.ndarray]:
    """The unit cube of n^3 bricks, each cut into the family's linear cells, distorted inside."""
    grid = np.arange(n + 1) / n
    points = np.stack(np.meshgrid(grid, grid, grid, indexing="ij"), axis=-1).reshape(-1, 3)
    number = np.arange((n + 1) ** 3).reshape((n + 1,) * 3)
    i, j, k = (g.ravel()[:, None] for g in np.indices((n, n, n)))
    di, dj, dk = CUBE.astype(int).T
    bricks = number[i + di, j + dj, k + dk]
    inside = ((points > 0) & (points < 1)).all(axis=1)
    points[inside] += np.random.default_rng(7).uniform(-0.12, 0.12, (inside.sum(), 3))
    if family == "hexahedron":
        return points, bricks
    if family == "wedge":
        halves = [bricks[:, c] for c in ((0, 1, 3, 4, 5, 7), (1, 2, 3, 5, 6, 7))]
        return points, np.concatenate(halves)
    if family == "tetra":
        wedges = linear_cells("wedge", n)[1]
        # The ordering by node number keeps the diagonals of neighbours alike (see tetrahedra.py).
        cells = [_tetra_of_wedge(points, wedge) for wedge in wedges]
        return points, np.concatenate(cells)
    centres = points[bricks].mean(axis=1)
    apex = len(points) + np.arange(len(bricks))
    base = [(0, 3, 2, 1), (4, 5, 6, 7), (0, 1, 5, 4), (1, 2, 6, 5), (2, 3, 7, 6), (3, 0, 4, 7)]
    cells = [np.column_stack([bricks[:, f[::-1]], apex]) for f in base]
    return np.vstack([points, centres]), np.concatenate(cells)


def _tetra_of_wedge(points: np.ndarray, wedge: np.ndarray) -> np.ndarray:
    apex = int(np.argmin(wedge))
    out = []
    for _, face in ELEMENTS["wedge"].faces:
        corners = [int(wedge[k]) for k in face]
        if wedge[apex] in corners:
            continue
        start = int(np.argmin(corners))
        ring = corners[start:] + corners[:start]
        out += [[ring[0], ring[m + 1], ring[m], wedge[apex]] for m in range(1, len(ring) - 1)]
    return np.array(out)


def cube(kind: str, bend: float = 0.0) -> Solid:
    """The distorted unit cube in cells of one kind; `bend` moves interior mid-side nodes."""
    element = ELEMENTS[kind]
    points, corners = linear_cells(element.family)
    linear = next(e for e in ELEMENTS.values() if e.family == element.family and e.order == 1)
    x = np.einsum("mn,cni->cmi", linear.values(element.nodes), points[corners]).reshape(-1, 3)
    _, first, nodes = np.unique(np.round(x, 9), axis=0, return_index=True, return_inverse=True)
    solid_points = x[first]
    inside = ((solid_points > 1e-9) & (solid_points < 1 - 1e-9)).all(axis=1)
    middle = np.ones(len(solid_points), dtype=bool)
    middle[nodes.reshape(len(corners), -1)[:, : element.n_corners]] = False
    moved = np.random.default_rng(3).uniform(-bend, bend, solid_points.shape)
    solid_points = solid_points + moved * (inside & middle)[:, None]
    return Solid(solid_points, (CellBlock(kind, nodes.reshape(len(corners), -1)),))


def on_surface(points: np.ndarray) -> np.ndarray:
    return ((points < 1e-9) | (points > 1 - 1e-9)).any(axis=1)


@pytest.mark.parametrize("direct", [True, False])
@pytest.mark.parametrize("kind", list(ELEMENTS))
def test_patch_of_prescribed_displacements(kind: str, direct: bool) -> None:
    # Irons' patch test: a linear displacement on the surface is linear inside, whatever the
    # shape of the cells; isoparametric elements pass it with curved edges, too.
    solid = cube(kind, bend=0.03)
    exact = solid.points @ GRADIENT.T
    held = np.repeat(on_surface(solid.points)[:, None], 3, axis=1)
    assert not held.all()
    found = solve(solid, MATERIAL, np.zeros((1, *exact.shape)), held, exact, direct=direct)[0]
    np.testing.assert_allclose(found, exact, rtol=0, atol=2e-9 * np.abs(exact).max())


@pytest.mark.parametrize("kind", list(ELEMENTS))
def test_patch_of_uniform_tractions(kind: str) -> None:
    # Loads in equilibrium on a solid that nothing holds: uniform stress, strain by Hooke's law.
    solid = cube(kind, bend=0.03)
    stress = np.array([[100.0, 20.0, -30.0], [20.0, -50.0, 10.0], [-30.0, 10.0, 70.0]])
    load = traction_load(solid.points, boundary_faces(solid), uniform(stress))
    found = solve(solid, MATERIAL, load[None])[0]
    e, nu = MATERIAL.young, MATERIAL.poisson
    strain = (1 + nu) / e * stress - nu / e * np.trace(stress) * np.eye(3)
    # Up to a rigid motion: fit the displacement gradient and compare its symmetric part.
    basis = np.column_stack([solid.points, np.ones(len(solid.points))])
    fit, *_ = np.linalg.lstsq(basis, found, rcond=None)
    np.testing.assert_allclose((fit[:3] + fit[:3].T) / 2, strain, atol=1e-9 * np.abs(strain).max())
    np.testing.assert_allclose(basis @ fit, found, atol=1e-9 * np.abs(found).max())


@pytest.mark.parametrize("kind", list(ELEMENTS))
def test_stiffness_is_symmetric_and_blind_to_rigid_motion(kind: str) -> None:
    solid = cube(kind)
    matrix = stiffness(solid, MATERIAL).tocsr()
    assert abs(matrix - matrix.T).max() < 1e-12 * abs(matrix).max()
    spin = np.array([[0.0, -3.0, 2.0], [3.0, 0.0, -1.0], [-2.0, 1.0, 0.0]])
    motion = (solid.points @ spin.T + (1.0, 2.0, 3.0)).ravel()
    assert np.abs(matrix @ motion).max() < 1e-11 * abs(matrix).max()
    assert np.linalg.eigvalsh(matrix.toarray())[6] > 0.0  # and to nothing else


def coarse(name: str, **parameters: float) -> tuple[object, np.ndarray]:
    spec = SAMPLES[name]
    values = spec.values({"refine": 0, **parameters})
    model = spec.mesh(values, "brick8")
    faces = boundary_faces(model.solid)
    loads = [
        traction_load(
            model.solid.points,
            [(kind, f[load.on(model.solid.points[f])]) for kind, f in faces],
            load.traction,
        )
        for load in spec.loads(values)
    ]
    return model, np.stack(loads)


@pytest.mark.parametrize(
    ("name", "parameters", "classes"),
    [
        ("penny", {"tilt": 30.0}, 2),
        pytest.param(
            "embedded-ellipse", {"shear_x": 30.0, "shear_y": 50.0}, 3, marks=pytest.mark.slow
        ),
        ("surface-crack", {}, 1),
    ],
)
def test_solving_on_the_part_equals_solving_the_whole(
    name: str, parameters: dict[str, float], classes: int
) -> None:
    model, loads = coarse(name, **parameters)
    assert len(list(load_classes(model, loads))) == classes
    folded = solve_unfolded(model, MATERIAL, loads)
    whole = solve(model.solid, MATERIAL, loads)
    # The two differ by the rigid motion that each leaves at its own held points.
    points = model.solid.points
    for u, v in zip(folded, whole, strict=True):
        motions = np.zeros((*points.shape, 6))
        motions[:, [0, 1, 2], [0, 1, 2]] = 1.0
        for k, axis in enumerate(np.eye(3)):
            motions[:, :, 3 + k] = np.cross(axis, points)
        basis = motions.reshape(-1, 6)
        difference = (u - v).ravel()
        rest = difference - basis @ np.linalg.lstsq(basis, difference, rcond=None)[0]
        assert np.abs(rest).max() < 1e-8 * np.abs(u).max()


@pytest.mark.parametrize("name", ["penny", "surface-crack", "embedded-ellipse"])
def test_reactions_vanish(name: str) -> None:
    # Loads are in equilibrium, so every internal force equals its load, at held points, too.
    model, loads = coarse(name, tension=80.0)
    moved = solve_unfolded(model, MATERIAL, loads)
    matrix = stiffness(model.solid, MATERIAL)
    for u, load in zip(moved, loads, strict=True):
        assert np.abs(load).max() > 0.0
        gap = np.abs(matrix @ u.ravel() - load.ravel()).max()
        assert gap < 1e-7 * np.abs(load).max()


@pytest.mark.parametrize("kind", list(ELEMENTS))
def test_tractions_add_up_to_area_times_stress(kind: str) -> None:
    # A unit traction along z on every face of the unit cube; then one that grows with x.
    solid = cube(kind)
    faces = boundary_faces(solid)
    up = traction_load(solid.points, faces, lambda x, n: np.tile([0.0, 0.0, 1.0], (len(x), 1)))
    np.testing.assert_allclose(up.sum(axis=0), (0.0, 0.0, 6.0), atol=1e-12)
    ramp = traction_load(solid.points, faces, lambda x, n: x[:, :1] * np.array([1.0, 0.0, 0.0]))
    assert ramp.sum() == pytest.approx(3.0)  # mean of x on six faces: 0 + 1 + 4 / 2


def test_bending_of_the_plate_is_a_pure_moment() -> None:
    # Beam theory: M = S_b b t^2 / 6 about x on the upper end; no resultant; tension at y = 0.
    model, loads = coarse("surface-crack", bending=120.0, half_width=50.0)
    points, end = model.solid.points, loads[1] * (model.solid.points[:, 2:] > 0)
    np.testing.assert_allclose(end.sum(axis=0), 0.0, atol=1e-9 * np.abs(end).sum())
    moment = -(end[:, 2] * points[:, 1]).sum()
    assert moment == pytest.approx(120.0 * 100.0 * 15.0**2 / 6.0)


@pytest.mark.parametrize("kind", ["hexahedron20", "tetra10", "wedge15"])
def test_iterating_agrees_with_factorising(kind: str) -> None:
    solid = cube(kind, bend=0.03)
    pull = traction_load(
        solid.points,
        boundary_faces(solid),
        lambda points, normals: 50.0 * points[:, 2:] * normals * (np.abs(normals[:, 2:]) > 0.5),
    )
    held = np.zeros(solid.points.shape, dtype=bool)
    held[solid.points[:, 2] < 1e-9] = True
    one, two = (solve(solid, MATERIAL, pull[None], held, direct=d)[0] for d in (True, False))
    np.testing.assert_allclose(two, one, atol=1e-8 * np.abs(one).max())


def test_loads_out_of_equilibrium_are_refused() -> None:
    solid = cube("hexahedron")
    load = np.zeros((1, *solid.points.shape))
    load[0, 0, 2] = 1.0
    with pytest.raises(MethodError, match="expected equilibrium"):
        solve(solid, MATERIAL, load)


def test_a_turned_cell_is_named() -> None:
    solid = cube("hexahedron")
    nodes = solid.blocks[0].nodes.copy()
    nodes[5] = nodes[5, [4, 5, 6, 7, 0, 1, 2, 3]]
    turned = Solid(solid.points, (CellBlock("hexahedron", nodes),))
    with pytest.raises(MeshError, match=r"hexahedron cell 5: found Jacobian determinant -"):
        stiffness(turned, MATERIAL)


def test_iteration_that_does_not_converge_is_refused(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(schwarz, "MAX_ITERATIONS", 2)
    solid = cube("hexahedron20")
    load = traction_load(solid.points, boundary_faces(solid), uniform(np.diag([0, 0, 1.0])))
    with pytest.raises(MethodError, match=r"residual of .* after 2 iterations, expected 1e-10"):
        solve(solid, MATERIAL, load[None], direct=False)


def test_progress_is_told_and_never_falls_within_a_stage() -> None:
    told: list[tuple[str, float]] = []
    note: Callable[[str, float], None] = lambda stage, part: told.append((stage, part))  # noqa: E731
    solid = cube("hexahedron20")
    load = traction_load(solid.points, boundary_faces(solid), uniform(np.diag([0, 0, 1.0])))
    solve(solid, MATERIAL, np.stack([load, 2 * load]), direct=False, progress=note)
    stages = list(dict.fromkeys(stage for stage, _ in told))
    assert stages == ["assembling", "preparing the solver", "solving"]
    fractions = [part for stage, part in told if stage == "solving"]
    assert fractions == sorted(fractions) and fractions[-1] == 1.0
