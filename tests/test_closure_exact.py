"""Closure on the exact near-tip fields of Westergaard (1939) and Williams (1957).

Quarter-point cells hold the field, so it may be imposed on every node.  Other cells do not: with
the field imposed their nodal forces are those of its interpolant, and K comes out 14 to 50 % high
at every size.  There the field is held around the block, and the error is first order in
cells across: cells at the front blunt the field, and the held boundary feels it.  That error is the
finite elements' own: the interaction integral has the same on the same model.
"""

from dataclasses import replace
from functools import cache

import numpy as np
import pytest

from front3d.methods import closure, interaction
from tests.closure_models import closed, contexts
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
def block(kind, n, along=1, stretch=None, poisson=POISSON, tall=1.0, mirrored=False):
    solid = near_tip_block(kind, n, YOUNG, poisson, along, stretch, tall, mirrored)
    (context,) = contexts(solid, YOUNG, poisson, up=(0, 1, 0))
    return context


@cache
def held(*args, method=closure, **options):
    """As `imposed`, with the field held around the block only."""
    results = method.evaluate(block(*args, **options))
    return np.array([r.K[len(r.K) // 2] for r in results]), results[0]


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
        # 6-node wedges are stiff, as the interaction integral shows, too: 1.7 % at 40 cells across.
        pytest.param("wedge", 80, 0.01, "6-node wedges", marks=SLOW),
    ],
)
def test_cells_without_quarter_points_converge(kind, n, allowed, name):
    coarse, found = held(kind, n // 4 * 2)
    fine, _ = held(kind, n)
    assert found.variant == name
    assert own(fine).max() < allowed
    assert np.log2(own(coarse).max() / own(fine).max()) > 0.85


CUT_ALIKE = [("wedge", 20, 1), ("wedge15", 8, 1), ("tetra10", 8, 2)]
"""Kinds whose cells above the crack plane are no mirror images of those below."""


@pytest.mark.parametrize(
    ("kind", "n", "along", "mirrored"),
    [("hexahedron", 24, 1, False), ("hexahedron20", 12, 1, False), ("wedge15", 12, 1, True)],
)
def test_the_error_is_that_of_the_finite_elements(kind, n, along, mirrored):
    """K within 0.02 % of the interaction integral's on the same model, which is 1.5 to 1.8 % off;
    the reason is in `signed_K`: in a mesh that repeats itself the work of closure is exact.
    """
    found = np.diag(held(kind, n, along, mirrored=mirrored)[0])
    other = np.diag(held(kind, n, along, mirrored=mirrored, method=interaction)[0])
    np.testing.assert_allclose(found, other, rtol=5e-4)
    assert np.abs(other - 1.0).max() > 0.0145


@pytest.mark.parametrize(("kind", "n", "along"), CUT_ALIKE)
def test_the_work_of_all_modes_is_right_where_they_mix(kind, n, along):
    """G of in-plane modes together, against the interaction integral.  Measured: 0.05 to 0.13 %."""
    found, other = (
        (held(kind, n, along, method=m)[0][:2, :2] ** 2).sum(axis=1) for m in (closure, interaction)
    )
    np.testing.assert_allclose(found, other, rtol=2e-3)


@pytest.mark.parametrize(
    ("kind", "n", "along", "mirrored"),
    [("hexahedron", 8, 1, False), ("hexahedron20", 8, 1, False), *((*c, True) for c in CUT_ALIKE)],
)
def test_modes_keep_apart_where_cells_below_mirror_those_above(kind, n, along, mirrored):
    K, _ = held(kind, n, along, mirrored=mirrored)
    assert others(K) < 1e-6


def test_what_a_symmetry_plane_holds_is_no_imbalance():
    """The ends of the front are held along it: 9 % of the closing force, were it counted."""
    solid = near_tip_block("hexahedron20", 8, YOUNG, POISSON)
    solid = replace(solid, steps=solid.steps[:1])
    context, _, found = closed(solid, YOUNG, POISSON, up=(0, 1, 0))
    assert context.front.ends == ("symmetry plane", "symmetry plane")
    assert not found.notes


def test_quadratic_tetrahedra_with_faces_ahead():
    """Measured at 8 cells across: 2.1, 2.3 and 1.2 % for the modes themselves; the interaction
    integral has 2.3, 2.4 and 1.2 %.  The cells of this mesh are cut alike above and below, not as
    mirror images, and so mode I appears as a K_II of 3.6 % at any size: the first cells slide and
    shear by a share of K_I that only the mesh decides.  It is 0.13 % of G, which is right as a
    whole, and is gone when the cells are mirrored; nothing that one row of cells holds tells it
    from a true K_II.
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
@pytest.mark.parametrize(("kind", "n"), [("hexahedron", 48), ("hexahedron20", 20)])
def test_unequal_lengths_without_quarter_points(kind, n, stretch):
    """Measured: 0.5 % in all; part of it is the finite elements' own, as the cells are longer."""
    grown, found = growth(kind, n, stretch)
    assert grown < 0.007
    assert any("differ in length" in note for note in found.notes)


def own_growth(stretch, *args, **options):
    """(3,) growth by unequal lengths of the difference from the interaction integral's K."""
    equal, unequal = (
        np.diag(held(*args, **options, stretch=s)[0])
        - np.diag(held(*args, **options, stretch=s, method=interaction)[0])
        for s in (None, stretch)
    )
    return np.abs(unequal - equal).max()


@SLOW
@pytest.mark.parametrize("stretch", STRETCHES[:2])
@pytest.mark.parametrize(
    ("kind", "n", "poisson", "allowed"),
    [
        ("hexahedron", 24, 0.0, 0.01),
        ("hexahedron", 24, 0.2, 0.01),
        # Nearly incompressible, fully integrated linear bricks lock: 1.4 %, above the 1 % wanted.
        ("hexahedron", 24, 0.45, 0.015),
        ("hexahedron20", 12, 0.0, 0.01),
        ("hexahedron20", 12, 0.2, 0.01),
        ("hexahedron20", 12, 0.45, 0.0125),
    ],
)
def test_unequal_lengths_at_other_poissons_ratios(kind, n, poisson, allowed, stretch):
    """Ratio 2, error of closure itself.  Measured: 0.5 % up to 0.2, 1.4 and 1.2 % at 0.45."""
    assert own_growth(stretch, kind, n, poisson=poisson) < allowed


@SLOW
@pytest.mark.parametrize("stretch", [(1.75, 1.0), (1.0, 1.75)])
@pytest.mark.parametrize(
    ("kind", "n", "allowed"),
    [
        ("hexahedron", 24, 0.01),
        ("hexahedron20", 12, 0.01),
        ("hexahedron27", 12, 0.01),
        ("wedge15", 12, 0.01),
        # Not of the kinds that the law was fitted to, and up to 1.6 % off: above the 1 % wanted.
        ("wedge", 24, 0.018),
    ],
)
def test_unequal_lengths_where_the_law_was_not_fitted(kind, n, allowed, stretch):
    """Other kinds of cells, heights, Poisson's ratio and ratios of length than in POWER_FIT."""
    options = {"poisson": 0.4, "tall": 1.5, "mirrored": kind.startswith("wedge")}
    assert own_growth(stretch, kind, n, **options) < allowed
