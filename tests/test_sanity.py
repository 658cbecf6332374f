"""What is said of models that cannot be right, or are rough: each with its numbers."""

import re
from dataclasses import replace

import numpy as np
import pytest

import front3d
from front3d.crack.cells import FrontCells
from front3d.errors import CaseError
from front3d.sanity.cells import cell_warnings
from front3d.sanity.displacements import constant_warnings, mean_gradient
from front3d.solid import Material, Solid, Step
from front3d.units import Units
from tests.meshes.structured import curved, impose, straight
from tests.reference import exact

YOUNG = 1000.0
ELASTIC = exact.Elastic.from_young(YOUNG, 0.3)


@pytest.fixture(scope="module")
def mesh():
    return curved("quarter_wedge", 6)


@pytest.fixture(scope="module")
def pulled(mesh):
    return impose(mesh.solid, mesh.side, exact.penny_tension(ELASTIC, 1.0), "pull")


def said(solid, **options):
    """Warnings of the evaluation and its fronts, and the notes of the fronts."""
    found = front3d.evaluate(
        solid, young=YOUNG, poisson=0.3, methods="interaction", radii=(0.3, 0.36), **options
    )
    warnings = [*found.warnings, *(w for front in found.fronts for w in front.warnings)]
    return warnings, [n for front in found.fronts for n in front.notes]


def changed(solid, change):
    (step,) = solid.steps
    return replace(solid, steps=(replace(step, displacement=change(solid.points, step)),))


def only(warnings):
    assert len(warnings) == 1, warnings
    return warnings[0]


def test_a_sound_model_is_left_in_peace(pulled):
    assert said(pulled, expected_stress=1.0)[0] == []


def test_deformed_positions_are_refused(pulled):
    def placed(points, step):
        return points + np.array([3.0, 0.0, 0.0]) + step.displacement

    with pytest.raises(CaseError, match=r"follow the coordinates .*--displacement"):
        said(changed(pulled, placed))


def test_a_large_rotation_is_said_in_degrees(pulled):
    """A rigid rotation about x by 10 degrees: the mean gradient's spin is sin 10 degrees."""
    c, s = np.cos(np.radians(10.0)), np.sin(np.radians(10.0))
    turn = np.array([[1, 0, 0], [0, c, -s], [0, s, c]])

    def turned(points, step):
        return points @ turn.T - points + step.displacement @ turn.T

    (found,) = re.findall(r"turn by ([\d.]+) degrees", "".join(said(changed(pulled, turned))[0]))
    assert float(found) == pytest.approx(np.degrees(s), abs=0.1)
    small = np.array([[0, 0, 0], [0, 0, -0.05], [0, 0.05, 0]])  # 2.9 degrees
    assert said(changed(pulled, lambda x, step: step.displacement + x @ small.T))[0] == []


@pytest.mark.slow
def test_millimetres_in_a_model_in_metres(pulled):
    """The mean strain near the penny is about 1/E; a thousand times that is not small."""
    magnified = changed(pulled, lambda x, step: 1000.0 * step.displacement)
    warnings, _ = said(magnified)
    assert "in one unit (millimetres, metres)" in only(warnings)
    warnings, _ = said(magnified, expected_stress=1.0)
    assert any("off by about 10^3;" in text for text in warnings)
    shrunk = changed(pulled, lambda x, step: 1e-3 * step.displacement)
    assert said(shrunk)[0] == []  # nothing tells, unless a stress is stated
    assert "off by about 10^-3;" in only(said(shrunk, expected_stress=-1.0)[0])


def test_the_mean_gradient_is_that_of_a_linear_field():
    rng = np.random.default_rng(5)
    x, gradient = rng.normal(size=(50, 3)), rng.normal(size=(3, 3))
    np.testing.assert_allclose(mean_gradient(x, x @ gradient.T + 7.0), gradient, atol=1e-12)


@pytest.mark.parametrize(
    ("young", "poisson", "unit", "words"),
    [
        (200e3, 0.3, "MPa", []),
        (200e3, 0.3, "", []),
        (200e3, 0.3, "GPa", [r"200000 GPa \(2e\+05 GPa\), expected 0.01 to 1300"]),
        (200.0, 0.3, "kPa", ["check the unit of stress"]),
        (30e3, 0.3, "ksi", []),
        (200e3, -0.1, "MPa", ["Poisson's ratio: found -0.1"]),
        (200e3, 0.495, "MPa", ["most elements lock"]),
    ],
)
def test_constants_out_of_the_range_of_solids(young, poisson, unit, words):
    found = constant_warnings(Material(young, poisson), Units("mm" if unit else "", unit))
    assert len(found) == len(words)
    for text, word in zip(found, words, strict=True):
        assert re.search(word, text)


def test_faces_that_overlap_are_counted_and_measured(mesh):
    pressed = impose(mesh.solid, mesh.side, exact.penny_tension(ELASTIC, -1.0), "press")
    warnings, _ = said(pressed)
    (text,) = [w for w in warnings if "node pairs" in w]
    # All pairs but those next to the front; the deepest by all of their movement.
    assert "(100 % of their largest movement)" in text
    assert any("K_I is negative" in w for w in warnings)


def test_faces_closed_by_contact_are_seen(mesh, pulled):
    """Half of the crack is pressed shut: its sides get one displacement."""
    model = front3d.find_fronts(pulled)
    upper, lower = model.patches[0].pairs.T
    shut = pulled.points[upper, 0] > 0

    def closed(points, step):
        u = step.displacement.copy()
        u[upper[shut]] = u[lower[shut]]
        return u

    text = "".join(said(changed(pulled, closed))[0])
    assert f"touch at {shut.sum()} of {len(upper)} node pairs" in text


def test_a_crack_that_only_slides_is_noted(mesh):
    sheared = impose(mesh.solid, mesh.side, exact.penny_shear(ELASTIC, 1.0), "shear")
    warnings, notes = said(sheared)
    assert warnings == []
    assert any("pure shear, or a crack closed by contact" in note for note in notes)


def tip_cells(kind, n=6):
    mesh = straight(kind, n, along=3)
    return mesh, impose(mesh.solid, mesh.side, exact.near_tip(ELASTIC, (1.0, 0, 0)))


def of_cells(solid):
    found = front3d.evaluate(solid, young=YOUNG, poisson=0.3, methods="interaction")
    return [w for front in found.fronts for w in front.warnings if "node" in w or "cell" in w]


def moved_middles(solid, front, share, every):
    """Each `every`th mid-side node of the edges that leave the front, moved to a part of it."""
    points = solid.points.copy()
    for block in solid.blocks:
        edges = block.nodes[:, block.element.edges].reshape(-1, 3)
        edges = np.where(np.isin(edges[:, 1:2], front), edges[:, [1, 0, 2]], edges)
        leaving = np.isin(edges[:, 0], front) & ~np.isin(edges[:, 1], front)
        _, first = np.unique(edges[leaving, 2], return_index=True)
        for start, end, middle in edges[leaving][np.sort(first)][::every]:
            both_sides = np.linalg.norm(solid.points - solid.points[middle], axis=1) < 1e-9
            points[both_sides] = (1 - share) * points[start] + share * points[end]
    return replace(solid, points=points)


def test_mid_side_nodes_must_stand_alike():
    mesh, solid = tip_cells("quarter_wedge")
    assert of_cells(solid) == []
    text = only([w for w in of_cells(moved_middles(solid, mesh.front, 0.36, 4)) if "mid-side" in w])
    assert "0.36 to 0.36 of their edges, the others at a quarter" in text
    mesh, solid = tip_cells("hexahedron20")
    text = only([w for w in of_cells(moved_middles(solid, mesh.front, 0.25, 4)) if "mid-side" in w])
    assert "0.25 to 0.25 of their edges, the others at the middle" in text


def test_quarter_points_must_stand_on_straight_edges():
    _, solid = tip_cells("quarter_wedge")
    points = solid.points.copy()
    radius = np.hypot(points[:, 0], points[:, 1])
    first = np.isclose(radius, radius[radius > 1e-9].min())  # the ring of quarter-points
    points[first, 1] += 0.004 * 4 * radius[radius > 1e-9].min()
    text = only([w for w in of_cells(replace(solid, points=points)) if "straight" in w])
    assert "by up to 0.4 % of the edge, expected less than 0.2 %" in text


def test_a_flat_cell_at_the_front_is_named():
    _, solid = tip_cells("hexahedron")
    squeezed = replace(solid, points=solid.points * [1, 0.005, 1])
    text = "".join(of_cells(squeezed))
    assert "angle of" not in text  # flat bricks keep their right angles
    sheared = solid.points.copy()
    sheared[:, 0] += 60.0 * sheared[:, 1]
    text = "".join(of_cells(replace(solid, points=sheared)))
    assert "hexahedron cell" in text and "expected 2 or more" in text


def test_linear_tetrahedra_at_the_front_are_warned_of():
    """Their K does not converge: benchmarks/convergence.py."""
    assert "10-node tetrahedra" in only(of_cells(tip_cells("tetra")[1]))
    assert of_cells(tip_cells("hexahedron")[1]) == []


def test_too_few_cells_around_the_front_are_counted():
    cells = FrontCells(("hexahedron",), True, False, False, 3, 60.0, ("hexahedron", 0), 5.0)
    assert "found 3 cells around an edge of the front, expected 4" in only(
        cell_warnings(cells, half=False)
    )
    assert cell_warnings(cells, half=True) == ()


def test_a_crack_that_does_not_move_has_no_K_and_says_so(mesh, pulled):
    rest = Step("rest", np.zeros_like(pulled.points))
    both = Solid(pulled.points, pulled.blocks, (*pulled.steps, rest), "penny")
    _, notes = said(both)
    assert sum("do not move against each other" in note for note in notes) == 1
