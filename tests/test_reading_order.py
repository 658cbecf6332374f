"""Node order: right orders are left alone, known others mended, unknown ones refused, by rates."""

import numpy as np
import pytest

from front3d.elements import ELEMENTS
from front3d.errors import ReadError
from front3d.reading.conventions import candidates, mirrored
from front3d.reading.normalise import normalise_nodes as normalise
from front3d.reading.raw import RawBlock
from tests.reading_models import KINDS, assert_same_cells, cells, displacement, volumes

QUADRATIC = [kind for kind in KINDS if ELEMENTS[kind].quadratic]
ORDERS = [(kind, name) for kind in KINDS for name in candidates(ELEMENTS[kind])]

# The orders of the mesh formats' own manuals, as places in VTK order; a second statement of what
# front3d.reading.conventions holds the other way round.  Exodus II: Sandia SAND92-2137, figures of
# HEX20 and WEDGE15.  MSH: reference manual of the format, section "Node ordering", by edges.
MANUALS = {
    ("hexahedron20", "Exodus"): [*range(12), 16, 17, 18, 19, 12, 13, 14, 15],
    ("wedge15", "Exodus"): [*range(9), 12, 13, 14, 9, 10, 11],
    ("tetra10", "MSH"): [(0, 1), (1, 2), (0, 2), (0, 3), (2, 3), (1, 3)],
    ("hexahedron20", "MSH"): [
        (0, 1), (0, 3), (0, 4), (1, 2), (1, 5), (2, 3),
        (2, 6), (3, 7), (4, 5), (4, 7), (5, 6), (6, 7),
    ],
    ("wedge15", "MSH"): [
        (0, 1), (0, 2), (0, 3), (1, 2), (1, 4), (2, 5), (3, 4), (3, 5), (4, 5),
    ],
    ("pyramid13", "MSH"): [(0, 1), (0, 3), (0, 4), (1, 2), (1, 4), (2, 3), (2, 4), (3, 4)],
}  # fmt: skip


def block(kind, nodes):
    nodes = np.atleast_2d(nodes)
    return RawBlock(kind, nodes, np.arange(len(nodes)))


def random_cell(kind, rng):
    """Points of one cell: a random affine map and a random quadratic one, kept well-shaped."""
    element = ELEMENTS[kind]
    u, v, w = element.nodes.T
    terms = np.stack([u * v, v * w, w * u, u * u, v * v, w * w], axis=1)
    gradients = element.gradients(element.quadrature(3)[0])
    while True:
        points = element.nodes @ (np.eye(3) + 0.25 * rng.standard_normal((3, 3)))
        points += terms @ (0.08 * rng.standard_normal((6, 3)))
        det = np.linalg.det(np.einsum("pnd,nk->pkd", gradients, points))
        if det.min() > 0.2 * det.max():
            return points


def in_file(nodes, order):
    """The nodes as a file of another convention lists them: file[order[k]] is VTK's node k."""
    listed = np.empty_like(nodes)
    listed[:, list(order)] = nodes
    return listed


@pytest.mark.parametrize("kind", KINDS)
def test_the_mirrored_order_turns_the_sign_of_the_volume_and_nothing_else(kind):
    points, nodes = cells(kind)
    turned = nodes[:, mirrored(ELEMENTS[kind])]
    np.testing.assert_allclose(volumes(points, kind, turned), -volumes(points, kind, nodes))
    u = displacement(points)
    assert_same_cells(points, kind, nodes, turned, u, u)


@pytest.mark.parametrize("kind", KINDS)
def test_a_right_order_is_left_alone_in_50_random_cells(kind):
    rng = np.random.default_rng(1)
    nodes = np.arange(len(ELEMENTS[kind].nodes))[None]
    for _ in range(50):
        out, notes = normalise(random_cell(kind, rng), block(kind, nodes), 0.0)
        assert np.array_equal(out, nodes) and not notes


@pytest.mark.parametrize("kind", KINDS)
def test_single_cells_of_opposite_sign_are_turned(kind):
    points, nodes = cells(kind, 5)
    given = nodes.copy()
    given[[1, 4]] = given[[1, 4]][:, mirrored(ELEMENTS[kind])]
    out, notes = normalise(points, block(kind, given), 0.0)
    assert (volumes(points, kind, out) > 0).all()
    assert_same_cells(points, kind, nodes, out, points, points)
    assert notes == [
        f"{kind}: 2 of 5 cells had a negative Jacobian and were given the mirrored node order"
    ]


@pytest.mark.parametrize("kind, name", ORDERS)
def test_a_known_order_is_mended_in_all_of_10_random_cells(kind, name):
    """Each cell alone is a whole model: nothing but its own shape tells the order."""
    rng = np.random.default_rng(2)
    nodes = np.arange(len(ELEMENTS[kind].nodes))[None]
    for _ in range(10):
        points = random_cell(kind, rng)
        given = in_file(nodes, candidates(ELEMENTS[kind])[name])
        out, notes = normalise(points, block(kind, given), 0.0)
        assert_same_cells(points, kind, nodes, out, points, points)
        assert "node order mended" in notes[0]


@pytest.mark.parametrize("kind, form", MANUALS)
def test_the_orders_of_the_manuals_are_mended(kind, form):
    element = ELEMENTS[kind]
    listed = MANUALS[kind, form]
    if isinstance(listed[0], tuple):
        midside = {frozenset(edge[:2].tolist()): int(edge[2]) for edge in element.edges}
        listed = [*range(element.n_corners), *(midside[frozenset(edge)] for edge in listed)]
    points, nodes = cells(kind)
    out, notes = normalise(points, block(kind, nodes[:, listed]), 0.0)
    assert np.array_equal(out, nodes)
    assert len(notes) == 1


@pytest.mark.parametrize("kind", QUADRATIC)
def test_shuffled_midside_nodes_never_pass_unnoticed(kind):
    """Of 40 random orders each is refused, or mended to the right cell."""
    rng = np.random.default_rng(3)
    element = ELEMENTS[kind]
    nodes = np.arange(len(element.nodes))[None]
    refused = 0
    for _ in range(40):
        points = random_cell(kind, rng)
        order = nodes.copy()
        order[0, element.n_corners :] = rng.permutation(order[0, element.n_corners :])
        try:
            out, _ = normalise(points, block(kind, order), 0.0)
        except ReadError as error:
            refused += 1
            assert str(error).startswith(f"{kind} cell 0: ")
            assert "check its node order" in str(error) or "and 0.8" in str(error)
        else:
            assert_same_cells(points, kind, nodes, out, points, points)
    assert refused >= 36


@pytest.mark.parametrize("kind", QUADRATIC)
def test_two_exchanged_midside_nodes_in_one_cell_of_many_are_refused_by_name(kind):
    points, nodes = cells(kind, 8)
    given = nodes.copy()
    first, second = ELEMENTS[kind].edges[:2, 2]
    given[5, [first, second]] = given[5, [second, first]]
    with pytest.raises(ReadError, match=rf"^{kind} cell 5: .*node order"):
        normalise(points, block(kind, given), 0.0)


def test_a_folded_cell_is_refused_with_its_number_and_gauss_point():
    points, nodes = cells("hexahedron", 4)
    given = nodes.copy()
    given[2, [0, 1]] = given[2, [1, 0]]
    given[2, [6, 7]] = given[2, [7, 6]]
    numbers = np.array([10, 11, 4127, 13])
    with pytest.raises(
        ReadError, match=r"^hexahedron cell 4127: Jacobian determinant -.* at Gauss"
    ):
        normalise(points, RawBlock("hexahedron", given, numbers), 0.0)


@pytest.mark.parametrize("kind", KINDS)
@pytest.mark.parametrize("place", [0.0, 1e6 + 0.1], ids=["near", "far"])
def test_a_flat_cell_is_refused(kind, place):
    points = np.array(ELEMENTS[kind].nodes)
    points[:, 2] = 0.0
    points += place
    with pytest.raises(ReadError, match="not zero"):
        normalise(points, block(kind, np.arange(len(points))), 0.0)


# ------------------------------------------------------------------- legal degenerate cells


def quarter_point(kind, place=0.25):
    """A cell whose mid-side nodes next to the corners of one edge stand at `place`."""
    element = ELEMENTS[kind]
    points = np.array(element.nodes)
    front = {int(c) for c in element.edges[0, :2]}
    for i, j, m in element.edges:
        if (i in front) != (j in front):
            near, far = (i, j) if i in front else (j, i)
            points[m] = (1 - place) * element.nodes[near] + place * element.nodes[far]
    if kind == "hexahedron27":
        # The centres of the two faces along the edge, and of the cell, follow.
        points[[22, 24, 26], 1:] = [[-1, -0.5], [-0.5, -1], [-0.5, -0.5]]
    return points


@pytest.mark.parametrize("kind", QUADRATIC)
def test_quarter_points_are_legal(kind):
    points = quarter_point(kind)
    nodes = np.arange(len(points))[None]
    out, notes = normalise(points, block(kind, nodes), 0.0)
    assert np.array_equal(out, nodes) and not notes


@pytest.mark.parametrize("kind", [k for k in QUADRATIC if k != "hexahedron27"])
@pytest.mark.parametrize("place, legal", [(0.22, True), (0.78, True), (0.15, False), (0.9, False)])
def test_midside_nodes_are_legal_between_a_fifth_and_four_fifths(kind, place, legal):
    """Only one node is moved; the bounds are common practice."""
    element = ELEMENTS[kind]
    points = np.array(element.nodes)
    i, j, m = element.edges[-1]
    points[m] = (1 - place) * points[i] + place * points[j]
    nodes = np.arange(len(points))
    if legal:
        assert np.array_equal(normalise(points, block(kind, nodes), 0.0)[0][0], nodes)
    else:
        with pytest.raises(
            ReadError, match=rf"node {m} is a mid-side node at 0.(15|85|1|9) of|Jac"
        ):
            normalise(points, block(kind, nodes), 0.0)


# Which nodes of a brick fall together when one face becomes an edge: the corners 0, 3 and 4, 7.
COLLAPSED = {0: [0, 3, 11], 4: [4, 7, 15], 16: [16, 19]}


@pytest.mark.parametrize("kind", ["hexahedron", "hexahedron20"])
@pytest.mark.parametrize("shared", [True, False], ids=["repeated nodes", "coincident nodes"])
@pytest.mark.parametrize("other", [None, "mirrored", "Exodus"])
def test_collapsed_bricks_with_quarter_points_are_legal(kind, shared, other):
    if other == "Exodus" and kind == "hexahedron":
        pytest.skip("linear bricks have one order only")
    element = ELEMENTS[kind]
    points = np.array(element.nodes)
    nodes = np.arange(len(points))
    points[[0, 3, 4, 7], 1] = 0.0
    if element.quadratic:
        points[[11, 15, 16, 19], 1] = 0.0
        for i, j, m in element.edges:
            points[m] = points[[i, j]].mean(axis=0)
            if (i in (0, 3, 4, 7)) != (j in (0, 3, 4, 7)):
                near, far = (i, j) if i in (0, 3, 4, 7) else (j, i)
                points[m] = 0.75 * points[near] + 0.25 * points[far]
    if shared:
        for first, together in COLLAPSED.items():
            for node in together:
                if node < len(nodes):
                    nodes[node] = first
    given = nodes[None]
    if other == "mirrored":
        given = given[:, mirrored(element)]
    elif other == "Exodus":
        given = in_file(given, candidates(element)["vertical edges before the top ones"])
    out, notes = normalise(points, block(kind, given), 0.0)
    assert volumes(points, kind, out)[0] > 0
    assert len(notes) == (other is not None)
    if other == "Exodus":
        assert np.array_equal(out[0], nodes)
    # The volume of the wedge left over: triangle of base 2 and height 2, length 2.
    assert volumes(points, kind, out)[0] == pytest.approx(4.0, rel=1e-12)


@pytest.mark.parametrize("angle", [30, 60, 90])
def test_strongly_curved_edges_are_legal(angle):
    """One brick per sector of a pipe: the mid-side nodes stand off their chords."""
    element = ELEMENTS["hexahedron20"]
    radius = 2.0 + 0.5 * element.nodes[:, 0]
    phi = np.radians(angle / 2) * element.nodes[:, 1]
    points = np.stack([radius * np.cos(phi), radius * np.sin(phi), element.nodes[:, 2]], axis=1)
    nodes = np.arange(20)[None]
    out, notes = normalise(points, block("hexahedron20", nodes), 0.0)
    assert np.array_equal(out, nodes) and not notes


def test_single_precision_noise_far_away_is_no_fault():
    points, nodes = cells("tetra10")
    rounded = (100 * points + 1e4).astype(np.float32).astype(float)
    out, notes = normalise(rounded, block("tetra10", nodes), float(np.spacing(np.float32(1e4))))
    assert np.array_equal(out, nodes) and not notes


def test_results_do_not_depend_on_how_cells_fall_into_chunks(monkeypatch):
    points, nodes = cells("wedge15", 7)
    given = nodes[:, mirrored(ELEMENTS["wedge15"])]
    whole, _ = normalise(points, block("wedge15", given), 0.0)
    monkeypatch.setattr("front3d.reading.normalise._CHUNK", 3)
    parts, _ = normalise(points, block("wedge15", given), 0.0)
    assert np.array_equal(whole, parts)
