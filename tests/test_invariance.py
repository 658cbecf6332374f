"""What must not change K: where the solid stands, how it is numbered, and its units."""

from dataclasses import replace

import numpy as np
import pytest

import front3d
from front3d.errors import MeshError
from front3d.solid import CellBlock, Step
from tests.meshes.structured import curved, impose, straight
from tests.reference import exact

YOUNG, POISSON = 200e3, 0.3
ELASTIC = exact.Elastic.from_young(YOUNG, POISSON)
UP = np.array([0.0, 0.0, 1.0])
RADII = (0.34, 0.38)


@pytest.fixture(scope="module", params=["hexahedron20", "tetra10"])
def penny(request):
    """A penny crack in tension plus shear: all three modes vary along the front."""
    mesh = curved(request.param, 4, around=16)
    both = exact.sum_of(exact.penny_tension(ELASTIC, 1.0), exact.penny_shear(ELASTIC, 0.7))
    return impose(mesh.solid, mesh.side, both)


def evaluate(solid, young=YOUNG, up=UP, **options):
    """The one front; rings stay inside the mesh, whose outer faces are only cuts."""
    options.setdefault("radii", RADII)
    (front,) = front3d.evaluate(solid, young=young, poisson=POISSON, up=tuple(up), **options).fronts
    return front


@pytest.fixture(scope="module")
def before(penny):
    return evaluate(penny)


def by_place(front, positions):
    """K at the stations nearest to given positions."""
    distance = np.linalg.norm(front.positions[:, None] - positions, axis=2)
    assert distance.min(axis=0).max() < 1e-5 * front.length
    return front.K[distance.argmin(axis=0)]


def close(K, expected, relative=1e-8):
    np.testing.assert_allclose(K, expected, atol=relative * np.abs(expected).max())


def test_rigid_rotation(penny, before):
    turn = np.array([[2.0, -1.0, 2.0], [2.0, 2.0, -1.0], [-1.0, 2.0, 2.0]]) / 3.0
    turned = replace(
        penny,
        points=penny.points @ turn.T,
        steps=(Step("turned", penny.steps[0].displacement @ turn.T),),
    )
    after = evaluate(turned, up=turn @ UP)
    close(by_place(after, before.positions @ turn.T), before.K)


def test_added_rigid_motion_of_the_displacements(penny, before):
    """A translation and a small rotation carry no strain."""
    size = np.abs(penny.steps[0].displacement).max()
    moved = penny.steps[0].displacement + size * (
        np.array([3.0, -5.0, 2.0]) + np.cross([0.3, 0.2, -0.4], penny.points)
    )
    after = evaluate(replace(penny, steps=(Step("moved", moved),)))
    close(after.K, before.K)


def test_translation_by_a_hundred_thousand_lengths(penny, before):
    """As far as the coordinates' precision allows: 1e5 of 1.5e-16 is 1.5e-11 of a length."""
    shift = np.array([1e5, -2e5, 1.5e5])
    after = evaluate(replace(penny, points=penny.points + shift))
    close(by_place(after, before.positions + shift), before.K, 1e-7)


def test_renumbered_nodes_and_shuffled_cells(penny, before):
    rng = np.random.default_rng(3)
    order = rng.permutation(len(penny.points))
    place = np.argsort(order)
    blocks = [CellBlock(b.kind, rng.permutation(place[b.nodes])) for b in reversed(penny.blocks)]
    shuffled = replace(
        penny,
        points=penny.points[order],
        blocks=tuple(blocks),
        steps=(Step("shuffled", penny.steps[0].displacement[order]),),
    )
    after = evaluate(shuffled)
    assert after.s == pytest.approx(before.s, rel=1e-12)  # even the start of the front
    close(after.K, before.K)


def test_upper_and_lower_nodes_swapped(penny, before):
    """Mirrored in the crack plane, what was above is below: the same K, but for the signs of the
    antisymmetric modes, with K_III's e3 turned as well.
    """
    mirror = np.array([1.0, 1.0, -1.0])
    blocks = []
    for block in penny.blocks:
        nodes = {
            "hexahedron20": [4, 5, 6, 7, 0, 1, 2, 3, *range(12, 16), *range(8, 12), *range(16, 20)],
            "tetra10": [0, 2, 1, 3, 6, 5, 4, 7, 9, 8],
        }[block.kind]
        blocks.append(CellBlock(block.kind, block.nodes[:, nodes]))
    mirrored = replace(
        penny,
        points=penny.points * mirror,
        blocks=tuple(blocks),
        steps=(Step("mirrored", penny.steps[0].displacement * mirror),),
    )
    after = evaluate(mirrored)
    close(by_place(after, before.positions * mirror), before.K * [1, -1, -1])
    # With up turned too, the faces keep their names and only the mirror's handedness is left.
    turned = evaluate(mirrored, up=-UP)
    close(by_place(turned, before.positions * mirror), before.K * [1, 1, -1])


def test_up_turned_round(penny, before):
    """e1 stays, e2 and e3 turn: K_II changes its sign, K_I and K_III stay."""
    before, after = evaluate(penny), evaluate(penny, up=-UP)
    close(by_place(after, before.positions), before.K * [1, -1, 1])


def test_change_of_units(penny, before):
    """Millimetres and megapascals against metres and pascals: K in the unit of each."""
    metres = replace(
        penny,
        points=penny.points * 1e-3,
        steps=(Step("SI", penny.steps[0].displacement * 1e-3),),
    )
    after = evaluate(metres, young=YOUNG * 1e6, radii=tuple(r * 1e-3 for r in RADII))
    close(after.K, before.K * 1e6 * np.sqrt(1e-3))
    close(after.G, before.G * 1e6 * 1e-3)


def test_unused_nodes_at_the_crack_and_far_away(penny, before):
    extra = np.vstack([penny.points[:50], [[1e6, 0, 0]]])
    more = replace(
        penny,
        points=np.vstack([penny.points, extra]),
        steps=(Step("more", np.vstack([penny.steps[0].displacement, np.full((51, 3), np.nan)])),),
    )
    close(evaluate(more).K, before.K, 1e-14)


def test_single_precision_far_from_the_origin_is_used_as_far_as_it_goes():
    """Coordinates rounded to a thousandth of a cell still give K within a per cent; coarser ones
    are refused.
    """
    mesh = straight("hexahedron20", 8, along=4, length=1.0)
    solid = impose(mesh.solid, mesh.side, exact.near_tip(ELASTIC, (1.0, 0.0, 0.0)))
    for offset, fits in ((1e3, True), (1e6, False)):
        rounded = (solid.points + offset).astype(np.float32)
        spacing = float(np.spacing(rounded.max()))
        far = replace(solid, points=rounded.astype(float), point_spacing=spacing)
        if fits:
            front = evaluate(far, up=(0, 1, 0), radii=(0.75, 0.9))
            np.testing.assert_allclose(front.K[1:-1, 0], 1.0, atol=0.01)
        else:
            with pytest.raises(MeshError, match="stored to"):
                evaluate(far, up=(0, 1, 0))


def test_half_model_of_mode_I_is_the_full_model():
    mesh = straight("quarter_wedge", 8, along=4, length=1.0)
    full = impose(mesh.solid, mesh.side, exact.near_tip(ELASTIC, (1.0, 0.0, 0.0)))
    blocks = []
    for block in full.blocks:
        above = full.points[block.nodes].mean(axis=1)[:, 1] > 0
        blocks.append(CellBlock(block.kind, block.nodes[above]))
    half = replace(full, blocks=tuple(blocks))
    from front3d.options import Plane

    K = evaluate(half, up=(0, 1, 0), radii=(0.75, 0.9), crack_plane=Plane.parse("y=0")).K
    expected = evaluate(full, up=(0, 1, 0), radii=(0.75, 0.9)).K
    np.testing.assert_allclose(K[1:-1, 0], expected[1:-1, 0], rtol=5e-3)
    np.testing.assert_allclose(K[:, 1:], 0.0)
