"""The weights of stations along the front: what they reproduce exactly, and where."""

from dataclasses import replace

import numpy as np
import pytest

import front3d
from front3d.crack.front import FREE_SURFACE, SYMMETRY_PLANE
from front3d.methods.hats import build_hats, default_widths, swept_areas
from tests.meshes.structured import curved, impose, straight

LENGTH = 3.0


def front_of(mesh, ends=None):
    solid = impose(mesh.solid, mesh.side, lambda x, side: np.outer(side, [0.0, 0.1, 0.0]))
    ((front,),) = front3d.find_fronts(solid).fronts
    return solid, front if ends is None else replace(front, ends=ends)


def averages(solid, front, width, function, odd=False):
    """What each station's weight makes of a function along the front."""
    hats = build_hats(solid, front, np.full(len(front.corners), float(width)))
    s, area = swept_areas(solid, front)
    return (area * function(s)) @ hats.weights(s, odd=odd)


@pytest.fixture(scope="module", params=["hexahedron", "hexahedron20"])
def bar(request):
    return straight(request.param, 2, along=12, length=LENGTH)


def test_swept_areas_are_the_length_of_a_straight_front(bar):
    solid, front = front_of(bar)
    assert swept_areas(solid, front)[1].sum() == pytest.approx(LENGTH, rel=1e-12)


def test_swept_areas_follow_the_edges_of_the_mesh():
    """A circle cut into chords sweeps its polygon; true arcs sweep the circle."""
    n = 12
    chords = front_of(curved("hexahedron", 2, around=n))
    arcs = front_of(curved("hexahedron20", 2, around=n))
    # Each corner advances along its own radius, which makes an angle of half a chord's turn.
    polygon = 2 * n * np.sin(np.pi / n) * np.cos(np.pi / n)
    assert swept_areas(*chords)[1].sum() == pytest.approx(polygon, rel=1e-3)
    assert swept_areas(*arcs)[1].sum() == pytest.approx(2 * np.pi, rel=1e-2)


@pytest.mark.parametrize("width", [1, 2, 3.5])
@pytest.mark.parametrize("end", [FREE_SURFACE, SYMMETRY_PLANE])
def test_a_constant_is_reproduced(bar, width, end):
    solid, front = front_of(bar, (end, end))
    np.testing.assert_allclose(averages(solid, front, width, np.ones_like), 1.0, rtol=1e-12)


@pytest.mark.parametrize("width", [2, 3.5])
def test_a_linear_function_is_reproduced_up_to_free_ends(bar, width):
    solid, front = front_of(bar, (FREE_SURFACE, FREE_SURFACE))
    found = averages(solid, front, width, lambda s: 2.0 + 3.0 * s)
    np.testing.assert_allclose(found, 2.0 + 3.0 * front.corner_s, rtol=1e-9)


@pytest.mark.parametrize("width", [1, 2, 3])
def test_beyond_a_symmetry_plane_K_I_goes_on_evenly_and_K_III_oddly(bar, width):
    """Both ends are symmetry planes: cos and sin of the same wave are averaged by the same factor
    at every station, as on a front that goes on for ever; the odd one vanishes at the planes.
    """
    solid, front = front_of(bar, (SYMMETRY_PLANE, SYMMETRY_PLANE))
    wave = np.pi / LENGTH
    even = averages(solid, front, width, lambda s: np.cos(wave * s))
    odd = averages(solid, front, width, lambda s: np.sin(wave * s), odd=True)
    factor = even[0]
    assert 0.8 < factor <= 1.0
    tolerance = 2e-3 if width > 1 else 1e-2  # q is interpolated within edges
    np.testing.assert_allclose(even, factor * np.cos(wave * front.corner_s), atol=tolerance)
    np.testing.assert_allclose(odd, factor * np.sin(wave * front.corner_s), atol=tolerance)
    np.testing.assert_allclose(odd[[0, -1]], 0.0, atol=1e-12)


def test_half_widths_are_given_as_lengths(bar):
    solid, front = front_of(bar)
    hats = build_hats(solid, front, np.full(len(front.corners), 2.0))
    np.testing.assert_allclose(hats.half_lengths, 2.0 * LENGTH / 12, rtol=1e-12)


def test_a_wave_around_a_closed_front_is_only_damped():
    """No station is special on a circle: cos and sin are averaged by one factor."""
    solid, front = front_of(curved("hexahedron20", 2, around=24))
    angle = 2 * np.pi / front.length
    found = averages(solid, front, 2, lambda s: np.cos(angle * s))
    factor = found[0]
    # The tent of half-width w damps a wave by (sin(x)/x)^2, x = half its phase over w.
    half_phase = 2 * np.pi / 24
    assert factor == pytest.approx((np.sin(half_phase) / half_phase) ** 2, rel=1e-3)
    np.testing.assert_allclose(found, factor * np.cos(angle * front.corner_s), atol=1e-6)


def test_default_hats_are_wide_on_straight_fronts_and_narrow_where_the_front_turns():
    _, line = front_of(straight("tetra10", 2, along=12, length=LENGTH))
    _, circle = front_of(curved("tetra10", 2, around=24))
    edge = np.full(len(line.corners), LENGTH / 12)
    np.testing.assert_array_equal(default_widths(line, structured=True, reach=edge), 1.0)
    np.testing.assert_array_equal(default_widths(line, structured=False, reach=edge), 3.0)
    around = np.full(len(circle.corners), circle.length / 24)
    np.testing.assert_array_equal(default_widths(circle, structured=False, reach=around), 1.0)


def test_default_hats_are_no_wider_than_three_cells_across_a_curved_front():
    """Cells drawn long along a front would blunt a K that changes over their length."""
    _, circle = front_of(curved("tetra10", 2, around=96))
    edge = circle.length / 96
    for reach, width in ((edge, 2.9), (edge / 2, 1.5), (edge / 10, 1.0)):
        reaches = np.full(len(circle.corners), reach)
        found = default_widths(circle, structured=False, reach=reaches)
        np.testing.assert_allclose(found, width, atol=0.05)
    _, line = front_of(straight("tetra10", 2, along=12, length=LENGTH))
    thin = np.full(len(line.corners), LENGTH / 120)
    np.testing.assert_array_equal(default_widths(line, structured=False, reach=thin), 3.0)
