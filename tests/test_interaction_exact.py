"""The interaction integral on exact displacement fields, imposed on the nodes of every mesh type.

No solver is involved, so what is measured is the method and its discretisation alone.  Straight
fronts carry the near-tip fields (Westergaard 1939, Williams 1957); circular ones the exact fields
of the penny crack (Sneddon 1946; Kassir and Sih 1966; torsion by the same potentials).
"""

import numpy as np
import pytest

import front3d
from front3d.elements import ELEMENTS
from tests.meshes.structured import ALL_KINDS, curved, impose, straight
from tests.reference import exact

ONE = {"methods": "interaction"}  # the others have tests of their own

YOUNG, POISSON = 200e3, 0.3
ELASTIC = exact.Elastic.from_young(YOUNG, POISSON)
QUARTER_POINT = ("quarter_wedge", "quarter_collapsed")
TURNED = np.array([[2.0, -1.0, 2.0], [2.0, 2.0, -1.0], [-1.0, 2.0, 2.0]]) / 3.0


def order_of(kind):
    return ELEMENTS[kind].order if kind in ELEMENTS else 2


def straight_errors(kind, n):
    """(3, 3) error of K at a middle station, per imposed unit mode, rings of fixed radius."""
    up = TURNED[1]
    mesh = straight(kind, n, along=4, length=8.0 / n, frame=TURNED, origin=(3.0, -2.0, 5.0))
    solid = mesh.solid
    for name, K in zip(("I", "II", "III"), np.eye(3), strict=True):
        field = exact.near_tip(ELASTIC, K, TURNED, (3.0, -2.0, 5.0))
        solid = impose(solid, mesh.side, field, name)
    result = front3d.evaluate(
        solid,
        young=YOUNG,
        poisson=POISSON,
        methods="interaction",
        radii=(0.75, 0.9),
        hat=1.0,
        up=tuple(up),
    )
    middle = len(result.fronts[0]) // 2
    found = [f.methods["interaction"].rings.K[:, middle] for f in result.fronts]
    return np.abs(np.moveaxis(found, 1, 0) - np.eye(3)).max(axis=0)


HEAVY = {
    "collapsed",
    "tetra",
    "tetra10",
    "pyramid",
    "pyramid13",
    "wedge",
    "wedge15",
    "hexahedron27",
    "mixed",
}


def costly_marked(chosen):
    """Those cut from bricks hold many cells: they run with the slow tests."""
    return [
        pytest.param(kind, marks=pytest.mark.slow) if kind in HEAVY else kind for kind in chosen
    ]


@pytest.mark.parametrize("kind", costly_marked(ALL_KINDS))
def test_each_mode_of_a_straight_front_converges_at_the_rate_of_the_element(kind):
    coarse, fine = straight_errors(kind, 8), straight_errors(kind, 16)
    assert fine.max() < 1e-3
    rate = np.log2(coarse.max() / fine.max())
    assert rate > order_of(kind), f"error {coarse.max():.2e} to {fine.max():.2e}"


def penny(kind, n, straight_edges=False):
    """Evaluation of a penny under tension, shear and torsion, and the exact K, (3, stations, 3)."""
    mesh = curved(kind, n, straight_edges=straight_edges)
    solid = mesh.solid
    for name, field in (
        ("tension", exact.penny_tension(ELASTIC, 1.0)),
        ("shear", exact.penny_shear(ELASTIC, 1.0)),
        ("torsion", exact.penny_torsion(ELASTIC, 1.0)),
    ):
        solid = impose(solid, mesh.side, field, name)
    result = front3d.evaluate(
        solid, young=YOUNG, poisson=POISSON, **ONE, radii=(0.3, 0.36), hat=1.0
    )
    x, y, _ = result.fronts[0].positions.T
    angle = np.arctan2(y, x)
    unit = np.sqrt(1 / np.pi)
    expected = np.zeros((3, len(angle), 3))
    expected[0, :, 0] = 2 * unit
    expected[1, :, 1] = 4 / (2 - POISSON) * unit * np.cos(angle)
    expected[1, :, 2] = 4 * (1 - POISSON) / (2 - POISSON) * unit * np.sin(angle)
    expected[2, :, 2] = -4 / 3 * unit  # e3 runs against the polar angle
    return result, expected


def penny_errors(kind, n):
    """(3,) worst error of any mode in each step, in parts of that step's largest K."""
    result, expected = penny(kind, n)
    rings = np.array([f.methods["interaction"].rings.K for f in result.fronts])
    worst = np.abs(rings - expected[:, None]).max(axis=(1, 2, 3))
    return worst / np.abs(expected).max(axis=(1, 2))


@pytest.mark.parametrize("kind", costly_marked(k for k in ALL_KINDS if k not in QUARTER_POINT))
def test_a_circular_front_converges_with_its_own_curvature_terms(kind):
    """Without quarter-points the cells at the front hold the singular field with an error that
    does not fall, and curvature weighs it by their size over the radius of the front: first order
    in the element size, whatever the element's order.  Measured at 12 cells across: 0.3 to
    1.4 % in shear, 0.1 to 0.4 % in tension.
    """
    n = 6 if kind == "mixed" else 4
    coarse, fine = penny_errors(kind, n), penny_errors(kind, 2 * n)
    assert fine.max() < (0.025 if order_of(kind) == 1 else 0.01)
    assert np.log2(coarse.max() / fine.max()) > 0.85


@pytest.mark.slow
@pytest.mark.parametrize("kind", QUARTER_POINT)
def test_a_circular_front_with_quarter_points_converges_quadratically(kind):
    coarse, fine = penny_errors(kind, 4), penny_errors(kind, 8)
    assert fine.max() < 1e-3
    assert np.log2(coarse.max() / fine.max()) > 1.9


@pytest.mark.slow
def test_edges_that_cut_the_corners_of_the_front_cost_little():
    """Straight edges leave a polygon inside the circle; the curve goes through its corners."""
    result, expected = penny("tetra10", 6, straight_edges=True)
    K = np.array([f.K for f in result.fronts])
    assert np.abs(K - expected)[0].max() < 0.01 * np.abs(expected[0]).max()
    assert result.fronts[0].length == pytest.approx(2 * np.pi, rel=1e-5)


@pytest.mark.parametrize(
    ("kind", "allowed"),
    [
        ("hexahedron20", 0.04),
        pytest.param("collapsed", 0.03, marks=pytest.mark.slow),
        *(pytest.param(k, 0.01, marks=pytest.mark.slow) for k in QUARTER_POINT),
    ],
)
def test_J_of_the_same_domain_agrees_with_G_of_the_three_modes(kind, allowed):
    """J is quadratic in the field near the front, so it needs quarter-points more than K does:
    without them it was off by up to 3 % on cells of a tenth of the radius.
    """
    result, _ = penny(kind, 8)
    for front in result.fronts:
        J = front.methods["interaction"].columns["J_interaction"]
        np.testing.assert_allclose(J, front.G, atol=allowed * front.G.max())


def test_modes_superpose():
    """K is linear in the displacements: a sum of steps has the sum of their K."""
    mesh = curved("hexahedron20", 6)
    fields = [exact.penny_tension(ELASTIC, 1.0), exact.penny_shear(ELASTIC, 1.0)]
    solid = mesh.solid
    for name, field in zip("ab", fields, strict=True):
        solid = impose(solid, mesh.side, field, name)
    solid = impose(solid, mesh.side, exact.sum_of(*fields), "a + b")
    a, b, both = (f.K for f in front3d.evaluate(solid, young=YOUNG, poisson=POISSON, **ONE).fronts)
    np.testing.assert_allclose(both, a + b, atol=1e-12 * np.abs(both).max())


@pytest.mark.parametrize(
    ("kind", "allowed"),
    [
        pytest.param("quarter_wedge", 0.002, marks=pytest.mark.slow),
        pytest.param("hexahedron20", 0.006, marks=pytest.mark.slow),
        pytest.param("tetra10", 0.006, marks=pytest.mark.slow),
    ],
)
def test_internal_pressure_equals_remote_tension(kind, allowed):
    """Superposition: the field of remote tension less its uniform part is that of pressure."""
    mesh = curved(kind, 8)
    uniform = np.array([-POISSON, -POISSON, 1.0]) / YOUNG

    def pressed(points, side):
        return exact.penny_tension(ELASTIC, 1.0)(points, side) - points * uniform

    solid = impose(mesh.solid, mesh.side, pressed)
    front = front3d.evaluate(
        solid,
        young=YOUNG,
        poisson=POISSON,
        methods="interaction",
        radii=(0.3, 0.36),
        face_pressure=1.0,
    ).fronts[0]
    rings = front.methods["interaction"].rings
    expected = 2 * np.sqrt(1 / np.pi)  # Sneddon (1946)
    np.testing.assert_allclose(rings.K[..., 0], expected, rtol=allowed)
    if kind == "quarter_wedge":
        np.testing.assert_allclose(rings.J, expected**2 * (1 - POISSON**2) / YOUNG, rtol=1e-2)
    without = front3d.evaluate(solid, young=YOUNG, poisson=POISSON, **ONE).fronts[0]
    assert without.methods["interaction"].K[:, 0].max() < 0.9 * expected
