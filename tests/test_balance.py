"""Nodes out of balance and cells that do not join: found where they are, and nowhere else."""

import re
from dataclasses import replace

import numpy as np
import pytest

import front3d
import front3d.samples.elasticity
from front3d.crack import find_cracks
from front3d.methods import METHODS, FrontContext
from front3d.methods.internal_forces import add_cells, empty_sums
from front3d.methods.tube import build_tube
from front3d.options import Options
from front3d.samples import build
from front3d.samples.elasticity import stiffness
from front3d.sanity.balance import balance_warnings, forces_left, tube_of
from front3d.sanity.conformity import conformity_warnings
from front3d.solid import CellBlock, Material, Solid, Step
from tests.meshes.held import near_tip_block
from tests.meshes.structured import ALL_KINDS, curved, impose, straight
from tests.reading_models import KINDS, cells, displacement
from tests.reference import exact
from tests.whole_models import POISSON, YOUNG, block

MATERIAL = Material(YOUNG, POISSON)
ELASTIC = exact.Elastic.from_young(YOUNG, POISSON)


def context_of(solid, material=MATERIAL, **options):
    chosen = Options(**options)
    model = find_cracks(solid, chosen)
    u = np.stack([step.displacement for step in solid.steps])
    return FrontContext(
        solid, model, model.patches[0], model.fronts[0][0], material, chosen, u
    )  # fmt: skip


def said(solid, material=MATERIAL, **options):
    context = context_of(solid, material, **options)
    found = METHODS["interaction"](context)
    tube = tube_of(context, found)
    return balance_warnings(context, tube, found, METHODS["interaction"])


def left_in(context, reach):
    tube = build_tube(context, reach)
    return forces_left(context, tube, reach)


def gaping(solid):
    context = context_of(solid, up=(0, 1, 0))
    tube = build_tube(context, 0.5)
    return conformity_warnings(context, tube)


def with_displacement(solid, u):
    return replace(solid, steps=(replace(solid.steps[0], displacement=u),))


@pytest.mark.parametrize("kind", KINDS)
def test_forces_are_those_of_the_stiffness_matrix(kind):
    """The samples' matrix, which tests/test_samples_library.py compares with scikit-fem's."""
    points, nodes = cells(kind)
    solid = Solid(points, (CellBlock(kind, nodes),))
    u = np.stack([displacement(points), displacement(points, 2.0) ** 2])
    sums = empty_sums(2, len(points))
    every = np.arange(len(points))
    element = solid.blocks[0].element
    add_cells(sums, element, nodes, every, points, u, np.zeros((0, 0, 12)), MATERIAL)
    matrix = stiffness(solid, MATERIAL)
    for k in range(2):
        expected = (matrix @ u[k].ravel()).reshape(-1, 3)
        np.testing.assert_allclose(sums.force[k], expected, atol=1e-9 * np.abs(expected).max())


def test_nodes_inside_are_told_from_those_of_a_surface():
    """All checked nodes are in balance, crack faces too; the faces held around are not checked."""
    forces = left_in(context_of(block(), up=(0, 1, 0)), 90.0)
    scale = np.abs(forces.left).max()
    assert np.abs(forces.left[0, forces.checked]).max() < 1e-10 * scale
    x = block().points[forces.tube.nodes[forces.first]]
    inside = (np.hypot(x[:, 0], x[:, 1]) < 90) & (x[:, 2] > 1) & (x[:, 2] < 149)
    assert np.array_equal(np.flatnonzero(forces.checked), np.flatnonzero(inside))


@pytest.mark.parametrize(
    ("place", "single"),
    [
        ((25.0, 0.0, 50.0), False),
        pytest.param((-50.0, 0.0, 75.0), False, marks=pytest.mark.slow),
        pytest.param((0.0, 0.0, 100.0), True, marks=pytest.mark.slow),
        pytest.param((50.0, -50.0, 50.0), True, marks=pytest.mark.slow),
    ],
)
def test_a_damaged_displacement_is_found_and_its_worth_told(place, single):
    """Ahead, on a crack face, on the front, and in a corner.  The change of K that is told is that
    from the undamaged model, since all that was damaged is inside.
    """
    solid = block()
    u = solid.steps[0].displacement.copy()
    good = METHODS["interaction"](context_of(solid, up=(0, 1, 0)))[0].K
    node = int(np.argmin(np.linalg.norm(solid.points - place, axis=1)))
    u[node] += [0.0, 0.2 * np.abs(u).max(), 0.0]
    if single:
        u = u.astype(np.float32).astype(float)
    damaged = with_displacement(solid, u)
    bad = METHODS["interaction"](context_of(damaged, up=(0, 1, 0)))[0].K
    (text,) = said(damaged, up=(0, 1, 0))[0]
    worst = int(re.findall(r"most of all node (\d+) ", text)[0])
    assert worst == node
    told = float(re.findall(r"changes K by ([\d.e+]+) %", text)[0]) / 100
    assert told == pytest.approx(np.abs(bad - good).max() / np.abs(bad).max(), rel=0.06)


@pytest.mark.slow
def test_a_moved_node_is_found():
    solid = block()
    points = solid.points.copy()
    node = int(np.argmin(np.linalg.norm(points - [50, 50, 50], axis=1)))
    points[node] += [0, 6.0, 0]
    (text,) = said(replace(solid, points=points), up=(0, 1, 0))[0]
    assert "a coordinate was damaged" in text


@pytest.mark.slow
def test_what_K_does_not_feel_is_not_said():
    solid = block()
    u = solid.steps[0].displacement.copy()
    node = int(np.argmin(np.linalg.norm(solid.points - [50, 50, 50], axis=1)))
    u[node] += 1e-4 * np.abs(u).max()
    assert said(with_displacement(solid, u), up=(0, 1, 0)) == [()]


@pytest.mark.slow
@pytest.mark.parametrize("kind", ALL_KINDS)
def test_no_alarm_where_exact_fields_are_imposed(kind):
    """Cells cannot hold these fields, and forces are left at every node."""
    n = 6
    mesh = straight(kind, n)
    tip = impose(mesh.solid, mesh.side, exact.near_tip(ELASTIC, (1.0, 0.5, 0.3)))
    assert said(tip, up=(0, 1, 0)) == [()]


@pytest.mark.slow
@pytest.mark.parametrize("kind", ["hexahedron20", "quarter_wedge"])
def test_no_alarm_along_curved_fronts(kind):
    mesh = curved(kind, 6, half=0.3)
    sheared = impose(mesh.solid, mesh.side, exact.penny_shear(ELASTIC, 1.0))
    assert said(sheared, up=(0, 0, 1)) == [()]


@pytest.mark.slow
@pytest.mark.parametrize(("kind", "points"), [("hexahedron", 1), ("hexahedron20", 2)])
def test_no_alarm_with_reduced_quadrature(kind, points, monkeypatch):
    """Solved with one point a side less than the full rule, as many solvers do."""
    monkeypatch.setattr(front3d.samples.elasticity, "_POINTS_PER_SIDE", points)
    solid = near_tip_block(kind, 8, YOUNG, POISSON, along=4)
    monkeypatch.undo()
    forces = left_in(context_of(solid, up=(0, 1, 0)), 0.6)
    assert np.median(forces.shift[:, forces.checked]) > 1e-9  # not in balance by the full rule
    assert said(solid, up=(0, 1, 0)) == [(), (), ()]


@pytest.mark.slow
@pytest.mark.parametrize("name", ["penny", "through-crack", "round-bar", "slanted-crack"])
def test_no_alarm_on_samples(name):
    sample = build(name, refine=0)
    single = tuple(
        replace(s, displacement=s.displacement.astype(np.float32).astype(float))
        for s in sample.solid.steps
    )
    for solid in (sample.solid, replace(sample.solid, steps=single)):
        found = said(solid, sample.material, **sample.case.get("options", {}))
        assert found == [()] * len(solid.steps)


@pytest.mark.slow
def test_a_load_that_was_not_given_is_seen():
    """Pressure on the faces, by superposition with a remote one: the faces are out of balance."""
    solid = block()
    u = np.zeros_like(solid.points)
    u[:, :] = solid.points * [POISSON / YOUNG, -1.0 / YOUNG, POISSON / YOUNG]  # sigma_yy = -1
    pressed = with_displacement(solid, 0.02 * solid.steps[0].displacement - u)
    assert said(pressed, up=(0, 1, 0), face_pressure=-1.0) == [()]
    (text,) = said(pressed, up=(0, 1, 0))[0]
    assert "a load acts there that was not given" in text


# ------------------------------------------------------------------ cells that do not join


def test_a_brick_with_an_exchanged_corner_does_not_join():
    solid = near_tip_block("hexahedron", 4, YOUNG, POISSON, along=3)
    assert gaping(solid) == ()
    nodes = solid.blocks[0].nodes.copy()
    centre = solid.points[nodes].mean(axis=1)
    cell = int(np.argmin(np.linalg.norm(centre - [0.25, 0.25, 0.75], axis=1)))
    # One corner exchanged with that of the next cell along the front.
    other = int(np.argmin(np.linalg.norm(centre - [0.25, 0.25, 1.25], axis=1)))
    corner = next(k for k in nodes[cell] if np.allclose(solid.points[k], [0.5, 0.5, 1.0]))
    beyond = next(k for k in nodes[other] if np.allclose(solid.points[k], [0.5, 0.5, 1.5]))
    nodes[cell, nodes[cell] == corner] = beyond
    twisted = replace(solid, blocks=(CellBlock("hexahedron", nodes),))
    (text,) = gaping(twisted)
    assert "do not join face to face" in text and "hexahedron cell" in text


@pytest.mark.slow
@pytest.mark.parametrize("kind", ["tetra10", "quarter_collapsed", "mixed"])
def test_sound_meshes_join(kind):
    mesh = straight(kind, 6)
    tip = impose(mesh.solid, mesh.side, exact.near_tip(ELASTIC, (1.0, 0.5, 0.3)))
    assert gaping(tip) == ()


@pytest.mark.slow
def test_combined_steps_speak_for_their_own_damage():
    """Two steps, one damaged: only results that hold it are spoken of."""
    solid = block()
    u = solid.steps[0].displacement
    damaged = u.copy()
    node = int(np.argmin(np.linalg.norm(solid.points - [25, 0, 50], axis=1)))
    damaged[node] += [0.0, 0.2 * np.abs(u).max(), 0.0]
    both = replace(solid, steps=(Step("good", u), Step("bad", damaged)))
    found = front3d.evaluate(both, young=YOUNG, poisson=POISSON, up=(0, 1, 0))
    by_step = {front.step: " ".join(front.warnings) for front in found.fronts}
    assert "out of balance" in by_step["bad"] and "out of balance" not in by_step["good"]
