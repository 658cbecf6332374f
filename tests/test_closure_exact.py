"""Closure on the exact near-tip fields of Westergaard (1939) and Williams (1957).

Quarter-point cells hold the field, so it may be imposed on every node.  Other cells do not: with
the field imposed their nodal forces are those of its interpolant, and K comes out 14 to 50 % high
at every size.  There the field is held around the block, and the error is first order in
cells across: cells at the front blunt the field, and the held boundary feels it.
"""

from dataclasses import replace
from functools import cache

import numpy as np
import pytest

from tests.closure_models import closed
from tests.meshes.held import near_tip_block
from tests.meshes.structured import impose, straight
from tests.reference import exact

pytestmark = pytest.mark.slow

YOUNG, POISSON = 200e3, 0.3
ELASTIC = exact.Elastic.from_young(YOUNG, POISSON)
TURNED = np.array([[2.0, -1.0, 2.0], [2.0, 2.0, -1.0], [-1.0, 2.0, 2.0]]) / 3.0


def imposed(kind, n):
    """(3 imposed modes, 3) K at the middle of a turned front, and the result of the first."""
    mesh = straight(kind, n, along=4, length=8.0 / n, frame=TURNED, origin=(3.0, -2.0, 5.0))
    solid = mesh.solid
    for name, K in zip(("I", "II", "III"), np.eye(3), strict=True):
        solid = impose(solid, mesh.side, exact.near_tip(ELASTIC, K, TURNED, (3, -2, 5)), name)
    _, K, found = closed(solid, YOUNG, POISSON, up=tuple(TURNED[1]))
    return K[:, K.shape[1] // 2], found


@cache
def held(kind, n, along=1, stretch=None):
    """As `imposed`, with the field held around the block only."""
    solid = near_tip_block(kind, n, YOUNG, POISSON, along, stretch)
    _, K, found = closed(solid, YOUNG, POISSON, up=(0, 1, 0))
    return K[:, K.shape[1] // 2], found


def own(K):
    """Errors of the imposed modes."""
    return np.abs(np.diag(K) - 1.0)


def others(K):
    return np.abs(K - np.diag(np.diag(K))).max()


@pytest.mark.parametrize("kind", ["quarter_wedge", "quarter_collapsed"])
def test_quarter_points_with_the_field_on_every_node(kind):
    """Measured: 15-node wedges 0.4 % at 8 cells across, 0.13 % at 16; collapsed bricks 0.01 %."""
    coarse, found = imposed(kind, 8)
    fine, _ = imposed(kind, 16)
    assert (
        found.variant
        == {
            "quarter_wedge": "15-node wedges, quarter-points",
            "quarter_collapsed": "collapsed 20-node bricks, quarter-points",
        }[kind]
    )
    assert own(coarse).max() < 0.005
    assert own(fine).max() < 0.0015
    assert own(fine).max() < 0.5 * own(coarse).max()
    assert others(fine) < 1e-6


@pytest.mark.parametrize("kind", ["quarter_wedge", "quarter_collapsed"])
def test_quarter_points_with_the_field_held_around(kind):
    K, _ = held(kind, 8, along=2)
    assert own(K).max() < 0.001
    assert others(K) < 1e-3


SLOW = pytest.mark.slow


@pytest.mark.parametrize(
    ("kind", "n", "allowed", "name"),
    [
        ("hexahedron", 24, 0.018, "8-node bricks"),
        ("hexahedron20", 8, 0.023, "20-node bricks, mid-side nodes"),
        pytest.param("hexahedron", 48, 0.01, "8-node bricks", marks=SLOW),
        pytest.param("hexahedron20", 24, 0.01, "20-node bricks, mid-side nodes", marks=SLOW),
        pytest.param("hexahedron27", 20, 0.01, "27-node bricks, mid-side nodes", marks=SLOW),
        pytest.param("wedge15", 24, 0.01, "15-node wedges, mid-side nodes", marks=SLOW),
        pytest.param("collapsed", 20, 0.01, "collapsed 20-node bricks, mid-side nodes", marks=SLOW),
        pytest.param("mixed", 24, 0.01, "15-node wedges, mid-side nodes", marks=SLOW),
        pytest.param("pyramid13", 16, 0.01, "13-node pyramids, mid-side nodes", marks=SLOW),
        # 6-node wedges are stiff: 1.3 % at 80 cells across.
        pytest.param("wedge", 40, 0.025, "6-node wedges", marks=SLOW),
    ],
)
def test_cells_without_quarter_points_converge(kind, n, allowed, name):
    coarse, found = held(kind, n // 4 * 2)
    fine, _ = held(kind, n)
    assert found.variant == name
    assert own(fine).max() < allowed
    assert np.log2(own(coarse).max() / own(fine).max()) > 0.85


@pytest.mark.parametrize("kind", ["hexahedron", "hexahedron20"])
def test_modes_keep_apart_on_meshes_alike_above_and_below(kind):
    K, _ = held(kind, 8)
    assert others(K) < 1e-3


def test_what_a_symmetry_plane_holds_is_no_imbalance():
    """The ends of the front are held along it: 9 % of the closing force, were it counted."""
    solid = near_tip_block("hexahedron20", 8, YOUNG, POISSON)
    solid = replace(solid, steps=solid.steps[:1])
    context, _, found = closed(solid, YOUNG, POISSON, up=(0, 1, 0))
    assert context.front.ends == ("symmetry plane", "symmetry plane")
    assert not found.notes


def test_quadratic_tetrahedra_with_faces_ahead():
    """Measured at 8 cells across: 2.2, 2.4 and 1.2 % for the modes themselves.  The cells of
    this mesh are cut alike above and below, not as mirror images, and so mode I appears as a K_II
    of 3.6 % at any size: sliding and force at the front, both due to the mesh.
    """
    K, found = held("tetra10", 8, along=2)
    assert found.variant == "10-node tetrahedra, faces of any shape"
    assert own(K).max() < 0.03
    assert others(K) < 0.04


@SLOW
def test_quadratic_tetrahedra_converge():
    coarse, fine = held("tetra10", 8, along=2)[0], held("tetra10", 16, along=2)[0]
    assert own(fine).max() < 0.014
    assert np.log2(own(coarse).max() / own(fine).max()) > 0.85


def growth(kind, n, stretch):
    """By how much the error of any mode grows over cells of equal lengths."""
    equal, _ = held(kind, n)
    unequal, found = held(kind, n, stretch=stretch)
    return (own(unequal) - own(equal)).max(), found


STRETCHES = [(2.0, 1.0), (1.0, 2.0), (1.5, 1.0), (1.0, 1.5)]


@pytest.mark.parametrize("stretch", [(2.0, 1.0), (1.0, 2.0)])
@pytest.mark.parametrize("kind", ["quarter_wedge", "quarter_collapsed"])
def test_unequal_lengths_with_quarter_points(kind, stretch):
    """Measured: less than 0.05 %."""
    assert growth(kind, 12, stretch)[0] < 0.001


@SLOW
@pytest.mark.parametrize("stretch", STRETCHES)
@pytest.mark.parametrize(
    ("kind", "n", "allowed"), [("hexahedron", 48, 0.011), ("hexahedron20", 20, 0.005)]
)
def test_unequal_lengths_without_quarter_points(kind, n, allowed, stretch):
    """Poisson's ratio 0.3, square cells at a ratio of 1: where the powers were measured.  At a
    ratio of 2, 8-node bricks gain 1.1 % in mode I, just above the 1 % wanted; no power does better.
    """
    grown, found = growth(kind, n, stretch)
    assert grown < allowed
    assert any("differ in length" in note for note in found.notes)
