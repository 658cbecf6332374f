"""How the methods vouch for each other: which K is reported, and which method is suspected."""

from dataclasses import replace
from types import SimpleNamespace

import numpy as np
import pytest

import front3d
from front3d.crack.cells import FrontCells, cells_of_front
from front3d.evidence import justified, weigh
from front3d.results import MethodResult, Rings, energy_release_rate, free_surface_layer
from front3d.solid import Material
from tests.meshes.structured import curved

STEEL = Material(200e3, 0.3)
N = 20
GOOD = FrontCells(
    kinds=("hexahedron20",), structured=True, quadratic=True, quarter_points=False,
    fewest=4, smallest_angle=60.0, worst=("hexahedron20", 7), turn=5.0,
)  # fmt: skip
CLOSED = SimpleNamespace(corner_s=np.arange(N) / N, length=1.0, ends=(), closed=True)
TRUE = np.stack([np.full(N, 100.0), 20 * np.ones(N), np.zeros(N)], axis=1)


def interaction(K=TRUE, spread=0.0, rings=3, J_over_G=1.0):
    """An interaction integral whose rings differ by `spread` of the largest K at station 0."""
    at_rings = np.stack([K] * rings)
    if rings > 1:
        at_rings[-1, 0] += spread * np.abs(K).max()
    J = J_over_G * energy_release_rate(K, STEEL)
    record = Rings(np.ones((rings, N)), at_rings, np.stack([J] * rings))
    columns = {"ring_spread": record.spread.max(axis=1), "J_interaction": J}
    return MethodResult("interaction", K, columns, record)


def judge(cells=GOOD, front=CLOSED, first=None, **others):
    methods = {"interaction": first or interaction()}
    methods |= {name: MethodResult(name, K) for name, K in others.items()}
    return weigh(front, cells, methods, STEEL)


def test_methods_that_agree_leave_nothing_to_say():
    found = judge(closure=1.01 * TRUE, opening=0.99 * TRUE)
    assert found.warnings == () and not found.apart.any()
    np.testing.assert_array_equal(found.K, TRUE)
    assert set(found.source) == {"interaction"}


def test_where_rings_disagree_the_method_in_the_middle_is_reported():
    """One wrong method cannot set the value, whichever it is."""
    first = interaction(1.3 * TRUE, spread=0.1)
    found = judge(first=first, closure=1.01 * TRUE, opening=TRUE)
    np.testing.assert_array_equal(found.K[0], 1.01 * TRUE[0])
    np.testing.assert_array_equal(found.K[1:], 1.3 * TRUE[1:])
    assert found.source == ("closure", *["interaction"] * (N - 1))


def test_without_a_third_method_the_interaction_integral_stays():
    found = judge(first=interaction(1.3 * TRUE, spread=0.1), opening=TRUE)
    np.testing.assert_array_equal(found.K, 1.3 * TRUE)
    missing = np.full_like(TRUE, np.nan)
    found = judge(first=interaction(1.3 * TRUE, spread=0.1), opening=TRUE, closure=missing)
    np.testing.assert_array_equal(found.K, 1.3 * TRUE)


def test_at_a_free_surface_the_interaction_integral_stays():
    front = SimpleNamespace(
        corner_s=np.arange(N) / (N - 1), length=1.0, ends=("free surface",) * 2, closed=False
    )
    first = interaction(1.3 * TRUE, spread=0.1)
    found = judge(first=first, front=front, closure=1.01 * TRUE, opening=TRUE)
    assert found.source[0] == "interaction"


def test_the_odd_one_out_is_suspected():
    (said,) = judge(closure=1.2 * TRUE, opening=TRUE).warnings
    assert "closure and interaction differ by up to 20 %" in said and "20 of 20" in said
    assert "closure is more likely wrong (opening agrees with interaction" in said
    both = judge(first=interaction(1.2 * TRUE), closure=TRUE, opening=TRUE)
    assert len(both.warnings) == 2 and both.apart.all()
    assert all("interaction is more likely wrong" in said for said in both.warnings)


def test_methods_agree_in_a_verdict_as_they_do_in_a_warning():
    """Where all three are apart by more than the cells justify, none is said to agree."""
    found = judge(closure=1.8 * TRUE, opening=0.8 * TRUE)
    assert len(found.warnings) == 2
    assert not any("agrees" in said for said in found.warnings)


def test_forces_out_of_balance_point_at_the_material_and_a_load_apart_at_the_faces():
    methods = {
        "interaction": interaction(),
        "closure": MethodResult("closure", 1.8 * TRUE, {"closure_unbalance": np.full(N, 0.3)}),
        "opening": MethodResult("opening", 0.8 * TRUE),
    }
    for said in weigh(CLOSED, GOOD, methods, STEEL).warnings:
        assert "30 % unbalanced, as with a wrong Poisson's ratio" in said
    for said in judge(first=interaction(1.2 * TRUE), closure=TRUE, opening=TRUE).warnings:
        assert "a load on the crack faces not given" in said


@pytest.mark.parametrize(
    ("cells", "first", "name", "said"),
    [
        ({}, {"spread": 0.1}, "opening", "interaction is more likely wrong (its rings disagree)"),
        ({}, {"rings": 2}, "opening", "interaction is more likely wrong (it has too few rings, 2)"),
        ({}, {"J_over_G": 1.1}, "closure", "wrong Poisson's ratio"),
        ({"turn": 30.0}, {}, "opening", "turns 30 degrees from edge to edge, a coarse mesh"),
        ({"smallest_angle": 5.0}, {}, "closure", "distorted, hexahedron20 cell 7 down to 5"),
        ({"quadratic": False}, {}, "closure", "linear cells hold the square-root field poorly"),
        ({}, {}, "opening", "no figure tells which is wrong; a load on the crack faces"),
        ({"turn": 30.0}, {"spread": 0.1}, "opening", "none is cleared"),
    ],
)
def test_each_figure_names_its_suspect(cells, first, name, said):
    found = judge(replace(GOOD, **cells), first=interaction(**first), **{name: 1.2 * TRUE})
    assert len(found.warnings) == 1 and said in found.warnings[0]


def test_coarser_elements_justify_larger_differences():
    order = [
        replace(GOOD, quarter_points=True),
        GOOD,
        replace(GOOD, quadratic=False),
        replace(GOOD, structured=False, quadratic=False),
    ]
    for method in ("closure", "opening"):
        allowed = [justified(cells, method) for cells in order]
        assert allowed == sorted(allowed) and allowed[0] < allowed[-1]


def test_the_free_surface_layer_is_three_stations_or_a_twentieth_of_the_front():
    s = np.linspace(0.0, 1.0, 13)
    ends = ("free surface", "symmetry plane")
    np.testing.assert_array_equal(np.flatnonzero(free_surface_layer(s, 1.0, ends)), [0, 1, 2])
    s = np.linspace(0.0, 1.0, 103)
    assert np.flatnonzero(free_surface_layer(s, 1.0, ends[::-1])).tolist() == list(range(97, 103))
    assert not free_surface_layer(s, 1.0, ()).any()
    short = free_surface_layer(np.linspace(0.0, 1.0, 5), 1.0, ("free surface",) * 2)
    assert short.tolist() == [True, False, False, False, True]


@pytest.mark.slow
def test_a_ring_with_the_wrong_load_is_warned_of():
    """The faces of a pressed crack move as if pulled, but their load is missing in the integral
    alone: opening and closure differ from it, and it is the one that is suspected.
    """
    from tests.meshes.structured import impose
    from tests.reference import exact

    mesh = curved("quarter_wedge", 6)
    field = exact.penny_tension(exact.Elastic.from_young(1.0, 0.3), 1.0)
    solid = impose(mesh.solid, mesh.side, field, "pull")
    (sound,) = front3d.evaluate(solid, young=1.0, poisson=0.3, radii=(0.3, 0.36)).fronts
    assert not any("differ by" in text for text in sound.warnings)
    (front,) = front3d.evaluate(
        solid, young=1.0, poisson=0.3, radii=(0.3, 0.36), face_pressure=1.0
    ).fronts
    assert any("interaction differ by" in text for text in front.warnings)
    assert any("methods disagree" in flag for flag in front.flags)


@pytest.mark.parametrize(
    ("kind", "structured", "quadratic", "quarter_points", "fewest", "angle"),
    [
        ("hexahedron", True, False, False, 4, 84.375),
        ("quarter_wedge", True, True, True, 12, 30.0),
        ("quarter_collapsed", True, True, True, 12, 75.0),
        ("tetra", False, False, False, 6, 28.04),
    ],
)
def test_the_cells_around_a_front(kind, structured, quadratic, quarter_points, fewest, angle):
    """Counts and angles by hand from how these meshes are made: 32 edges around the circle."""
    solid = curved(kind, 4).solid
    model = front3d.find_fronts(solid)
    cells = cells_of_front(solid, model.fronts[0][0], model.same, model.near)
    found = (cells.structured, cells.quadratic, cells.quarter_points, cells.fewest)
    assert found == (structured, quadratic, quarter_points, fewest)
    assert cells.smallest_angle == pytest.approx(angle, abs=0.01)
    assert cells.turn == pytest.approx(360 / 32)
