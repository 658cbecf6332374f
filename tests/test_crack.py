"""Finding cracks and fronts: what is found, how it is ordered, and what is refused."""

from dataclasses import replace

import numpy as np
import pytest

import front3d
from front3d.crack import describe
from front3d.crack.coincidence import find_coincidence
from front3d.errors import CrackError, MeshError
from front3d.options import Plane
from front3d.solid import CellBlock, Solid, Step
from tests.meshes import squares
from tests.meshes.structured import ALL_KINDS, curved, impose, straight


def opened(mesh):
    """The mesh with a step in which the crack faces part."""
    return impose(mesh.solid, mesh.side, lambda x, side: np.outer(side, [0.0, 0.01, 0.02]))


def only_front(solid, **options):
    model = front3d.find_fronts(solid, **options)
    assert model.n_fronts == 1
    return model.fronts[0][0]


@pytest.mark.parametrize("kind", ALL_KINDS)
def test_a_straight_front_is_found_whole_in_every_mesh_type(kind):
    mesh = straight(kind, 6, along=3)
    front = only_front(opened(mesh))
    assert not front.closed
    assert set(front.nodes) == set(mesh.front)
    assert front.length == pytest.approx(2.0)
    assert len(front.corners) == 4
    _, frames, turning = front.curve.frames(front.corner_s)
    np.testing.assert_allclose(frames, np.broadcast_to(np.eye(3), (4, 3, 3)), atol=1e-12)
    np.testing.assert_allclose(turning, 0.0, atol=1e-12)


@pytest.mark.parametrize("kind", ["hexahedron20", "tetra", "wedge15", "quarter_collapsed", "mixed"])
def test_a_circular_front_is_found_whole_with_its_curvature(kind):
    mesh = curved(kind, 6, around=24)
    front = only_front(opened(mesh), up=(0, 0, 1))
    assert front.closed
    assert front.ends == ()
    assert set(front.nodes) == set(mesh.front)
    assert front.length == pytest.approx(2 * np.pi, rel=3e-4)
    s = np.linspace(0, front.length, 50)
    places, frames, turning = front.curve.frames(s)
    np.testing.assert_allclose(np.linalg.norm(places, axis=1), 1.0, atol=2e-4)
    radial = places / np.linalg.norm(places, axis=1, keepdims=True)
    np.testing.assert_allclose(frames[:, 0], radial, atol=2e-3)
    np.testing.assert_allclose(frames[:, 1], np.tile([0, 0, 1.0], (50, 1)), atol=1e-12)
    np.testing.assert_allclose(np.cross(frames[:, 0], frames[:, 1]), frames[:, 2], atol=1e-12)
    # A circle of radius 1 walked along e3 = e1 x e2 turns by w2 = -1 per unit length.
    np.testing.assert_allclose(turning, np.tile([0, -1.0, 0], (50, 1)), atol=0.02)


def test_the_front_starts_where_geometry_says_not_node_numbers():
    mesh = curved("hexahedron", 2, around=12)
    front = only_front(opened(mesh))
    np.testing.assert_allclose(front.curve.frames(np.zeros(1))[0][0], [1, 0, 0], atol=1e-12)


def test_up_decides_which_side_is_the_upper_one():
    mesh = straight("hexahedron20", 4, along=3)
    up, down = only_front(opened(mesh), up=(0, 1, 0)), only_front(opened(mesh), up=(0, -1, 0))
    a, b = (f.curve.frames(np.array([1.0]))[1][0] for f in (up, down))
    np.testing.assert_allclose(a[0], b[0], atol=1e-12)  # e1 does not care
    np.testing.assert_allclose(a[1:], -b[1:], atol=1e-12)
    with pytest.raises(CrackError, match="lies in the crack plane"):
        front3d.find_fronts(opened(mesh), up=(1, 0, 0))


def bricks(shape, split=(), size=1.0):
    """A block of 8-node bricks, x fastest, with the nodes of plane z = `shape[2] / 2` at the given
    (x, y) split into two.
    """
    nx, ny, nz = shape
    grid = np.stack(
        np.meshgrid(*(np.arange(n + 1) for n in shape), indexing="ij"), axis=-1
    ).reshape(-1, 3)
    number = {tuple(p): i for i, p in enumerate(grid.tolist())}
    points = [*grid.astype(float)]
    above = dict(number)
    for x, y in split:
        above[x, y, nz // 2] = len(points)
        points.append(np.array([x, y, nz // 2], dtype=float))
    corners = [
        (0, 0, 0),
        (1, 0, 0),
        (1, 1, 0),
        (0, 1, 0),
        (0, 0, 1),
        (1, 0, 1),
        (1, 1, 1),
        (0, 1, 1),
    ]
    cells = []
    for i in range(nx):
        for j in range(ny):
            for k in range(nz):
                of = above if k >= nz // 2 else number
                cells.append([of[i + a, j + b, k + c] for a, b, c in corners])
    points = np.array(points) * size
    lift = np.zeros_like(points)
    lift[len(grid) :, 2] = 0.1
    return Solid(
        points, (CellBlock("hexahedron", np.array(cells)),), (Step("lift", lift),), "block"
    )


def test_several_cracks_give_several_fronts():
    solid = bricks((9, 4, 2), split=[(2, 2), (6, 2)])
    model = front3d.find_fronts(solid)
    assert [len(fronts) for fronts in model.fronts] == [1, 1]
    assert [f[0].closed for f in model.fronts] == [True, True]
    assert [len(f[0].edges) for f in model.fronts] == [8, 8]


def test_a_through_crack_has_two_fronts_and_its_mouths_are_none():
    split = [(x, y) for x in (2, 3, 4) for y in range(3)]
    model = front3d.find_fronts(bricks((6, 2, 2), split))
    (fronts,) = model.fronts
    assert len(fronts) == 2
    assert not any(front.closed for front in fronts)
    assert sorted(front.length for front in fronts) == [2.0, 2.0]


def test_fronts_that_touch_are_refused_by_node():
    solid = bricks((6, 6, 2), split=[(2, 2), (4, 4)])
    meeting = int(np.flatnonzero((solid.points == [3, 3, 1]).all(axis=1))[0])
    with pytest.raises(CrackError, match=rf"meet at node {meeting}\b"):
        front3d.find_fronts(solid)


def test_a_crack_that_parts_the_solid_has_no_front():
    solid = bricks((2, 2, 2), split=[(x, y) for x in range(3) for y in range(3)])
    with pytest.raises(CrackError, match="part the solid in two"):
        front3d.find_fronts(solid)


def test_a_solid_without_coincident_faces_has_no_crack():
    with pytest.raises(CrackError, match="found no crack"):
        front3d.find_fronts(bricks((2, 2, 2)))


def slotted(width):
    """A block of bricks with a slot of a given width, and a root as wide, half through it."""
    x = np.concatenate([np.arange(5.0), 4.0 + width + np.arange(5.0)])
    whole = squares.bricks(x, np.arange(5.0), np.arange(5.0))
    nodes = whole.blocks[0].nodes
    centre = whole.points[nodes].mean(axis=1)
    slot = (centre[:, 0] > 4.0) & (centre[:, 0] < 4.0 + width) & (centre[:, 2] > 2.0)
    block = CellBlock("hexahedron", nodes[~slot])
    pull = Step("pull", 1e-3 * whole.points + 1.0)
    return Solid(whole.points, (block,), (pull,), "slotted block")


@pytest.mark.parametrize("width", [0.05, 0.4, 2.0])
def test_a_notch_with_an_open_root_is_refused_with_its_width(width):
    """The slot is 4 by 2 faces of size 1 on either side; a thin wall is not a gap."""
    said = rf"across a gap of {width:g} to {width:g} at 16 faces.*no stress intensity factor"
    with pytest.raises(CrackError, match=said):
        front3d.find_fronts(slotted(width))
    with pytest.raises(CrackError, match="found no crack") as plain:
        front3d.find_fronts(bricks((8, 8, 1)))
    assert "gap of" not in str(plain.value)


def test_faces_that_never_part_are_candidates_only():
    solid = bricks((4, 4, 2), split=[(2, 2)])
    still = replace(solid, steps=(Step("pushed", np.ones_like(solid.points)),))
    with pytest.raises(CrackError, match="neither part nor slide"):
        front3d.find_fronts(still)
    unloaded = replace(solid, steps=(Step("still", np.zeros_like(solid.points)),))
    with pytest.raises(CrackError, match="zero everywhere"):
        front3d.find_fronts(unloaded)
    assert front3d.find_fronts(still, unopened=True).n_fronts == 1


def test_a_crack_and_an_unmerged_interface_in_one_solid_are_told_apart():
    solid = bricks((9, 4, 2), split=[(2, 2), (6, 2)])
    lift = solid.steps[0].displacement.copy()
    lift[-1] = 0.0
    model = front3d.find_fronts(replace(solid, steps=(Step("one", lift),)))
    assert (len(model.patches), len(model.unopened)) == (1, 1)
    assert len(describe(replace(solid, steps=(Step("one", lift),)))["fronts"]) == 1


@pytest.mark.parametrize("size", [1e-6, 1.0, 1e6])
def test_coincidence_is_relative_to_the_mesh(size):
    """Nodes a thousandth of an edge apart are two places, a millionth apart are one."""
    solid = bricks((4, 4, 2), split=[(2, 2)], size=size)
    for gap, double in ((1e-3, False), (1e-6, True)):
        points = solid.points.copy()
        points[-1] += size * gap
        moved = replace(solid, points=points)
        assert find_coincidence(moved).double.any() == double


def test_coincidence_survives_single_precision_far_from_the_origin():
    solid = bricks((4, 4, 2), split=[(2, 2)])
    for offset, fits in ((1e4, True), (1e6, False)):
        points = (solid.points + offset).astype(np.float32)
        spacing = float(np.spacing(np.float32(offset)))
        moved = replace(solid, points=points.astype(float), point_spacing=spacing)
        if fits:
            assert front3d.find_fronts(moved).n_fronts == 1
        else:
            with pytest.raises(MeshError, match=r"stored to 0\.0625 only"):
                find_coincidence(moved)


def test_coincident_nodes_are_found_across_the_borders_of_the_hash_grid():
    """Random pairs within tolerance, wherever they fall: every pair is found, nothing else."""
    rng = np.random.default_rng(7)
    nodes = rng.random((4000, 3)) * 50
    cells = np.arange(4000).reshape(-1, 8)
    twins = nodes + rng.uniform(-4e-6, 4e-6, nodes.shape)
    solid = Solid(
        np.vstack([nodes, twins]),
        (CellBlock("hexahedron", np.vstack([cells, cells + 4000])),),
        source="cloud",
    )
    place = find_coincidence(solid).place
    np.testing.assert_array_equal(place[:4000], np.arange(4000))
    np.testing.assert_array_equal(place[4000:], np.arange(4000))


def half_of(mesh, solid):
    """The cells above the crack plane, as a half model."""
    blocks = []
    for block in solid.blocks:
        centre = solid.points[block.nodes].mean(axis=1)
        blocks.append(CellBlock(block.kind, block.nodes[centre[:, 1] > 0]))
    return replace(solid, blocks=tuple(blocks))


@pytest.mark.parametrize("kind", ["hexahedron20", "tetra10", "quarter_wedge"])
def test_the_front_of_a_half_model_is_the_border_of_what_stays_in_the_plane(kind):
    mesh = straight(kind, 6, along=3)

    def lift(x, side):
        """Zero on the ligament and the front, open on the crack faces."""
        return np.stack([0 * x[:, 0], np.where(x[:, 0] < 0, 0.01, x[:, 1]), 0 * x[:, 0]], axis=1)

    half = half_of(mesh, impose(mesh.solid, mesh.side, lift))
    front = only_front(half, crack_plane=Plane.parse("y=0"))
    assert front.half
    assert set(front.nodes) == set(mesh.front)
    frame = front.curve.frames(np.array([1.0]))[1][0]
    np.testing.assert_allclose(frame, np.eye(3), atol=1e-12)
    with pytest.raises(CrackError, match="holds no outer face"):
        only_front(half, crack_plane=Plane.parse("y=0.123"))
    if kind != "quarter_wedge":  # its outer surface is round
        with pytest.raises(CrackError, match="all of it moves"):
            only_front(half, crack_plane=Plane.parse("y=1"))
    with pytest.raises(CrackError, match="--crack-plane"):
        only_front(half)


def test_ends_in_a_plane_that_never_moves_along_its_normal_are_symmetry_planes():
    mesh = straight("hexahedron20", 4, along=3)
    held = impose(mesh.solid, mesh.side, lambda x, side: np.outer(side, [0, 0.01, 0]) + 0.01 * x)
    flat = held.steps[0].displacement.copy()
    flat[mesh.solid.points[:, 2] == 0.0, 2] = 0.0
    flat[mesh.solid.points[:, 2] == 2.0, 2] += (
        0.001 * mesh.solid.points[mesh.solid.points[:, 2] == 2.0, 0]
    )
    ends = only_front(replace(held, steps=(Step("pull", flat),))).ends
    assert ends == ("symmetry plane", "free surface")
