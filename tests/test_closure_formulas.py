"""Each closed formula of crack closure against an example worked by hand.

8-node bricks and 6-node wedges; 20-node bricks and 15-node wedges with mid-side nodes; 27-node
bricks; quarter-points; mid-side nodes at different places ahead and behind, or on one side only;
unequal lengths; faces of any shape; G to K; nodal forces, loaded faces, body force, a half model.
"""

from dataclasses import replace

import numpy as np
import pytest
from scipy.integrate import quad

from front3d.methods import closure
from front3d.methods.closure_columns import find_columns, rows_of_nodes
from front3d.methods.closure_forces import closing_forces, find_ligament
from front3d.methods.closure_formulas import (
    RISE_RANGE,
    USUAL_RISE,
    length_powers,
    mirrored_openings,
    rise,
    signed_K,
)
from front3d.methods.closure_profile import front_offset, places_ahead
from front3d.methods.closure_weights import build_tents
from front3d.options import Plane
from front3d.solid import CellBlock, Material, Solid, Step
from tests.closure_models import contexts
from tests.meshes.structured import curved, impose, straight


def test_eight_node_bricks():
    """Rybicki and Kanninen (1977): G = F delta / (2 length width).

    By hand: 0.5 mm long, 2 mm wide; forces 30, -12, 8 N at the front node; openings 4e-3,
    -2e-3, 1e-3 mm: G = 0.12 / 2, 0.024 / 2, 0.008 / 2 N/mm.  With E = 91000, nu = 0.3,
    E' = 100000 and 2 mu = 70000: K = sqrt(6000), -sqrt(1200), sqrt(280).
    """
    far = np.array([4e-3, -2e-3, 1e-3])
    first, second = mirrored_openings(None, far, 0.5, 0.5, None, None)
    G = np.array([30.0, -12.0, 8.0]) * first / (2 * 0.5 * 2.0)
    np.testing.assert_allclose(G, [0.06, 0.012, 0.004])
    assert not second.any()
    K = signed_K(G, far, Material(91000.0, 0.3))
    np.testing.assert_allclose(K, [np.sqrt(6000.0), -np.sqrt(1200.0), np.sqrt(280.0)])


def test_faces_that_overlap_give_a_negative_K_I():
    """Force and opening both negative: G is positive, K takes the sign of the opening.
    E' = 100000: G = 0.04 gives 63.2.
    """
    material = Material(91000.0, 0.3)
    K = signed_K(np.array([0.04, 0.0, 0.0]), np.array([-1e-3, 1e-3, 0.0]), material)
    np.testing.assert_allclose(K, [-np.sqrt(4000.0), 0.0, 0.0])


def test_a_mode_whose_force_and_opening_disagree_is_taken_from_the_others():
    """By hand: 0.04 + 0.01 - 0.01 = 0.04 in all, shared 4 : 1, so 0.032 and 0.008; E' = 100000,
    2 mu = 70000.  Nothing is left where the whole is below zero.
    """
    material, opening = Material(91000.0, 0.3), np.array([1e-3, 1e-3, -1e-3])
    K = signed_K(np.array([[0.04, -0.01, 0.01], [0.01, -0.04, 0.0]]), opening, material)
    np.testing.assert_allclose(K[0], [np.sqrt(3200.0), 0.0, -np.sqrt(560.0)])
    assert not K[1].any()


def test_twenty_node_bricks():
    """Raju (1987): the front's force works on the opening at the far corner, that of the mid-side
    node ahead on the opening at the mid-side node behind.

    By hand, length 1, width 3: (10 * 5e-3 + 4 * 3.5e-3) / 6 = 0.064 / 6.
    """
    middle, far = np.full(3, 3.5e-3), np.full(3, 5e-3)
    first, second = mirrored_openings(middle, far, 1.0, 1.0, 0.5, 0.5)
    G = (10.0 * first + 4.0 * second) / (2 * 1.0 * 3.0)
    np.testing.assert_allclose(G, 0.064 / 6.0)


def test_quarter_points():
    """Raju (1987): 2 G length = F_0 (1.28761 far - 1.15044 quarter) + F_1 (far/2 + quarter),
    since 6 - 3 pi/2 = 1.28761 and 6 pi - 20 = -1.15044.

    By hand, length and width 1, F = 6 and 30, openings 2.2e-3 and 4e-3: the brackets are
    5.15044e-3 - 2.53097e-3 = 2.61947e-3 and 4.2e-3; G = (0.0157168 + 0.126) / 2.
    """
    quarter, far = np.full(3, 2.2e-3), np.full(3, 4e-3)
    first, second = mirrored_openings(quarter, far, 1.0, 1.0, 0.25, 0.25)
    np.testing.assert_allclose((6.0 * first + 30.0 * second) / 2.0, 0.0708584, rtol=1e-5)


@pytest.mark.parametrize(("A", "B", "p", "q"), [(1, 0, 1, 0), (0.7, 2.0, 3.0, -0.4), (0, 1, 0, 1)])
def test_quarter_point_weights_integrate_the_field_they_stand_for(A, B, p, q):
    """Traction A/sqrt(x) + B against opening p sqrt(1-x) + q (1-x), by scipy's quadrature; the
    nodal forces are those of the quarter-point shape functions (Barsoum 1976).
    """

    def traction(x):
        return A / np.sqrt(x) + B

    def opening(d):
        return p * np.sqrt(d) + q * d

    def integral(f):  # x = t^2 takes the singularity away
        return quad(lambda t: 2 * t * f(t * t), 0, 1, epsabs=1e-13)[0]

    F_0 = integral(lambda x: traction(x) * (1 - np.sqrt(x)) * (1 - 2 * np.sqrt(x)))
    F_1 = integral(lambda x: traction(x) * 4 * np.sqrt(x) * (1 - np.sqrt(x)))
    first, second = mirrored_openings(
        np.full(3, opening(0.25)), np.full(3, opening(1.0)), 1.0, 1.0, 0.25, 0.25
    )
    expected = integral(lambda x: traction(x) * opening(1 - x))
    np.testing.assert_allclose(F_0 * first + F_1 * second, expected, rtol=1e-9)


def test_unequal_lengths_with_quarter_points():
    """Krueger (2004): the opening goes with the root of the length.  By hand: 2 mm ahead, 0.5 mm
    behind, so twice the opening.
    """
    quarter, far = np.full(3, 2e-3), np.full(3, 4e-3)
    equal = mirrored_openings(quarter, far, 1.0, 1.0, 0.25, 0.25)
    longer = mirrored_openings(quarter, far, 2.0, 0.5, 0.25, 0.25)
    np.testing.assert_allclose(longer, 2.0 * np.array(equal))


def test_unequal_lengths_without_quarter_points():
    """Our own law.  By hand, 8-node bricks, twice as long ahead, openings 1.414 times as large at
    twice the distance: a rise of 1/2, the power 0.321 + 0.686 / 2 - 0.061 ln 2 = 0.62172, and
    2^0.62172 = 1.53870 times the opening.  20-node bricks, rises 0.6 and 0.5, half as long ahead:
    0.144 + 0.369 * 0.6 + 0.417 / 2 + 0.050 ln 2 = 0.60856, and 2^-0.60856 = 0.65585.
    """
    near = np.array([[[3.0] * 3, [4.0] * 3]])
    usual = np.array(USUAL_RISE[1])
    over = rise(near, np.sqrt(2.0) * near, np.array([2.0, 2.0]), usual)
    np.testing.assert_allclose(over, 0.5)
    powers = length_powers(1, 2.0, over, over)
    longer, _ = mirrored_openings(None, np.full(3, 4e-3), 2.0, 1.0, None, None, powers[0])
    np.testing.assert_allclose(longer, 4e-3 * 1.53870, rtol=1e-5)
    powers = length_powers(2, 0.5, np.array(0.6), np.array(0.5))
    middle, far = np.full(3, 3e-3), np.full(3, 4e-3)
    shorter = mirrored_openings(middle, far, 0.5, 1.0, 0.5, 0.5, powers)
    np.testing.assert_allclose(shorter, 0.65585 * np.array([far, middle]), rtol=1e-5)


def test_the_rise_of_a_mode_that_does_not_open_is_the_usual_one():
    """Nor is one believed that no cell shows: 8 times over twice the distance is a rise of 3."""
    near = np.array([[[1.0, 0.0, 1.0]]])
    found = rise(near, np.array([[[8.0, 0.0, 1.0]]]), np.array([2.0]), np.array([0.5, 0.6, 0.7]))
    np.testing.assert_allclose(found, [[RISE_RANGE[1], 0.6, RISE_RANGE[0]]])


def test_mid_side_node_ahead_only():
    """8-node bricks behind: the opening halfway is that of the square root.  By hand 4e-3 at the
    far corner gives 2.82843e-3, and 2e-3 at a quarter.
    """
    far = np.full(3, 4e-3)
    first, second = mirrored_openings(None, far, 1.0, 1.0, 0.5, None)
    np.testing.assert_allclose([first[0], second[0]], [4e-3, 2.82843e-3], rtol=2e-6)
    quarter = mirrored_openings(None, far, 1.0, 1.0, 0.25, None)
    np.testing.assert_allclose(quarter, mirrored_openings(far / 2, far, 1.0, 1.0, 0.25, 0.25))


@pytest.mark.parametrize(("ahead", "behind"), [(0.5, 0.25), (0.25, 0.5)])
def test_mid_side_nodes_at_different_places(ahead, behind):
    """An opening p sqrt(d) + q d is read at the place the other side asks for: by hand, with p = 2
    and q = 1, 1.25 at d = 1/4 and 1.9142 at d = 1/2.
    """
    values = {0.25: 1.25, 0.5: np.sqrt(2.0) + 0.5, 1.0: 3.0}
    mixed = mirrored_openings(np.full(3, values[behind]), np.full(3, 3.0), 1.0, 1.0, ahead, behind)
    alike = mirrored_openings(np.full(3, values[ahead]), np.full(3, 3.0), 1.0, 1.0, ahead, ahead)
    np.testing.assert_allclose(mixed, alike)


def block(kind="hexahedron", stress=6.0):
    """Block of eight bricks 1 x 1 x 1 cut by the crack x < 0, y = 0, under uniform sigma_yy with
    E = 2, nu = 0: u_y = stress y / 2.  No opening, only forces.
    """
    mesh = straight(kind, 2, along=2, length=2.0)
    return impose(mesh.solid, mesh.side, lambda x, _: 0.5 * stress * x * [0.0, 1.0, 0.0])


def front_forces(solid, **options):
    """Closing forces along y at the front's corners, found with any faces taken for a crack."""
    (context,) = contexts(solid, young=2.0, poisson=0.0, unopened=True, up=(0, 1, 0), **options)
    ligament = find_ligament(context)
    forces, imbalance = closing_forces(context, ligament)
    corners = context.model.same.entity[context.front.corners]
    return context, ligament, forces[0, corners, 1], imbalance[0, corners]


def test_nodal_forces_of_a_uniform_stress():
    """By hand: the upper bricks ahead and behind both pull with stress 6 on a quarter of each
    unit face at every corner of the front: 6 (1 + 1) / 4 at its ends, twice that in the middle.
    """
    _, _, forces, imbalance = front_forces(block())
    np.testing.assert_allclose(forces, [3.0, 6.0, 3.0])
    np.testing.assert_allclose(imbalance, 0.0, atol=1e-12)


def test_loaded_faces():
    """Nairn (2011).  A crack under pressure 2 in the same field: the faces behind push 2 on their
    share, and the faces ahead would carry 2 as well once open: 8 instead of 6 per unit area.
    Pulled with 6 the crack is not there: no closing force is left.
    """
    _, _, forces, _ = front_forces(block(), face_pressure=2.0)
    np.testing.assert_allclose(forces, [4.0, 8.0, 4.0])
    _, _, forces, _ = front_forces(block(), face_pressure=-6.0)
    np.testing.assert_allclose(forces, 0.0, atol=1e-12)


def test_body_force_is_shared_by_both_sides():
    """sigma_yy = 6 + 4 y, balanced by a body force of -4: u_y = 3 y + y^2.

    By hand, on 20-node bricks, which hold it exactly: the traction on y = 0 is 6, and the
    serendipity share of a corner in a uniform load on a unit face is -1/12, so -6 (1 + 1) / 12 at
    an end of the front and twice that in the middle.
    """
    mesh = straight("hexahedron20", 2, along=2, length=2.0)
    solid = impose(mesh.solid, mesh.side, lambda x, _: (3 + x[:, 1:2]) * x * [0.0, 1.0, 0.0])
    _, _, forces, imbalance = front_forces(solid)
    np.testing.assert_allclose(forces, [-1.0, -2.0, -1.0])
    # A corner's share of a unit brick is -1/8; four bricks at an end, eight in the middle.
    np.testing.assert_allclose(imbalance[:, 1], -4.0 * np.array([4, 8, 4]) * (-1 / 8))


def test_a_half_model_counts_its_opening_twice():
    """By hand: 2e-3 above the plane is an opening of 4e-3; along the plane nothing is counted."""
    solid = block()
    upper = [b.nodes[solid.points[b.nodes][:, :, 1].mean(axis=1) > 0] for b in solid.blocks]
    used = np.unique(np.concatenate([nodes.ravel() for nodes in upper]))
    cells = tuple(
        CellBlock(b.kind, np.searchsorted(used, nodes))
        for b, nodes in zip(solid.blocks, upper, strict=True)
    )
    points = solid.points[used]
    moved = np.where(points[:, :1] < 0.0, [[7e-3, 2e-3, 0.0]], 0.0)
    half = Solid(points, cells, (Step("half", moved),), source="half")
    (context,) = contexts(half, crack_plane=Plane.parse("y=0"), up=(0, 1, 0))
    at = context.model.same.entity[(points[:, 0] == -1.0) & (points[:, 1] == 0.0)]
    np.testing.assert_allclose(closure.openings(context)[0, at], [[0.0, 4e-3, 0.0]] * 3)


def columns_of(kind, n):
    context, ligament, _, _ = front_forces(wide(kind, n))
    columns = find_columns(context, ligament)
    return context, ligament, columns


def wide(kind, n):
    """As `block`, n cells across: each 2 / n long."""
    mesh = straight(kind, n, along=2, length=2.0)
    return impose(mesh.solid, mesh.side, lambda x, _: 3.0 * x * [0.0, 1.0, 0.0])


@pytest.mark.parametrize("kind", ["hexahedron", "wedge15", "hexahedron27"])
def test_the_second_edge_behind_goes_straight_on(kind):
    """By hand: cells half a unit long, so at x = -1; in a crack one cell deep there is none."""
    context, _, columns = columns_of(kind, 4)
    x = context.solid.points
    expected = x[context.front.corners] - [1.0, 0.0, 0.0]
    np.testing.assert_allclose(x[columns.beyond], expected, atol=1e-12)
    assert (columns_of(kind, 2)[2].beyond == -1).all()


def test_the_centre_of_a_27_node_bricks_face_counts_with_the_mid_side_nodes():
    """Uniform stress 6 on a 9-node face of 1 x 1, by hand (Simpson's rule twice): corners 1/36,
    sides 4/36, centre 16/36.  On row 1, halfway across, a unit length along the front holds
    6 (4 + 16 + 4) / 36 = 4; of the cells ahead only.
    """
    context, ligament, columns = columns_of("hexahedron27", 2)
    forces, _ = closing_forces(context, ligament)
    row = rows_of_nodes(context, ligament, columns)
    x, entity = context.solid.points, context.model.same.entity
    first = np.unique(entity[(row == 1)])
    z, ahead = x[first, 2], forces[0, first, 1]
    assert set(x[first, 0]) == {0.5}
    np.testing.assert_allclose(ahead[np.argsort(z)], 6 * np.array([4, 16, 8, 16, 4]) / 36)


def test_faces_of_any_shape():
    """Okada, Kawai and Araki (2008), on triangles.  By hand: two unit squares ahead, each cut in
    two triangles that all touch the front, end 1 from it.  Force 10, -3, 8 at the middle node of
    the front works on the opening 1 behind it, 4e-3, -2e-3, 1e-3; the tent has area 1:
    2 G = 0.04, 0.006, 0.008.  Nodes at the end of the faces stay shut.
    """
    context, ligament, _, _ = front_forces(block("tetra"))
    assert find_columns(context, ligament) is None
    entity, x = context.model.same.entity, context.solid.points
    forces, jump = np.zeros((1, len(x), 3)), np.zeros((1, len(x), 3))
    forces[0, entity[context.front.corners]] = [-3.0, 10.0, 8.0]
    forces[0, entity[np.isclose(x[:, 0], 1.0)]] = 1e6
    behind = np.isclose(x[:, 0], -1.0) & (np.abs(x[:, 1]) < 1e-9)
    jump[0, entity[behind]] = [-2e-3, 4e-3, 1e-3]
    tents = build_tents(context, ligament, np.ones(3))
    work, opening = closure._work_of_faces(context, ligament, tents, forces, jump)
    np.testing.assert_allclose(work[0, 1], [0.04, 0.006, 0.008], rtol=1e-9)
    np.testing.assert_allclose(np.abs(opening[0, 1]), [4e-3, 2e-3, 1e-3], rtol=1e-9)


def test_each_station_gets_the_area_it_sweeps():
    """By hand: two faces of 1 x 1 ahead.  The middle station's tent has area 1: its weights are
    1/2 at mid-edges.  An end on a symmetry plane has the half tent, of area 1/2.  At a free end,
    whose half tent is centred at 1/3, half the excess over the next station is added:
    2 (1 + 1/2) (1 - s) - 1/2 s, so 1.25 at mid-edge.
    """
    places = np.array([0.0, 0.5, 1.0])
    for solid, first in (
        (block(), [2.0, 1.0, 0.0]),
        (moved_ends(block()), [3.0, 1.25, -0.5]),
    ):
        context, ligament, _, _ = front_forces(solid)
        weights = (
            build_tents(context, ligament, np.ones(len(context.front.corners)))
            .weights(places)
            .toarray()
        )
        np.testing.assert_allclose(weights[:, 1], [0.0, 0.5, 1.0], atol=1e-12)
        np.testing.assert_allclose(weights[:, 0], first, atol=1e-12)


def moved_ends(solid):
    """The ends no longer flat: they are no symmetry planes."""
    (step,) = solid.steps
    warped = step.displacement + 0.3 * solid.points[:, :1] ** 2 * [0.0, 0.0, 1.0]
    return replace(solid, steps=(replace(step, displacement=warped),))


def test_distances_are_taken_from_the_edges_of_the_mesh():
    """By hand: a chord over the angle b of a circle of radius 1 stands off it by 1 - cos(b/2) in
    its middle, a quarter of the way by a quarter less, and meets it at the corners.  The curve
    itself, a cubic spline, misses the circle by b^4/384 = 1.2e-5, 0.15 % of that.
    """
    mesh = curved("tetra10", 4, around=24, straight_edges=True)
    solid = impose(mesh.solid, mesh.side, lambda x, side: side[:, None] * [0.0, 0.0, 1e-3])
    (context,) = contexts(solid)
    front = context.front
    s = front.corner_s[3] + np.array([0.0, 0.25, 0.5]) * (front.corner_s[4] - front.corner_s[3])
    sagitta = 1.0 - np.cos(np.pi / 24)
    expected = -sagitta * np.array([0.0, 0.75, 1.0])
    np.testing.assert_allclose(front_offset(context, s), expected, atol=2e-3 * sagitta)
    _, distance = places_ahead(context, front.edges[:, 2])
    np.testing.assert_allclose(distance, 0.0, atol=1e-9)
