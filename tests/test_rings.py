"""The room a front has for rings, and the radii chosen from it."""

import numpy as np
import pytest

from front3d.crack.curve import fit_curve
from front3d.crack.front import Front
from front3d.errors import MethodError
from front3d.methods.rings import RATIOS, gap_to_others, own_room, ring_radii


def closed_front(a, c, n=120, centre=(0.0, 0.0, 0.0)):
    """An elliptical front with semi-axes c along x and a along y, walked along e3."""
    angle = -2 * np.pi * np.arange(n) / n
    nodes = np.stack([c * np.cos(angle), a * np.sin(angle), 0 * angle], axis=1) + centre
    curve = fit_curve(nodes, np.tile([0.0, 0.0, 1.0], (n, 1)), closed=True)
    edges = np.stack([np.arange(n), (np.arange(n) + 1) % n, np.full(n, -1)], axis=1)
    return Front(edges, True, curve, curve.knots[:-1], half=False)


def layers(front, *reaches):
    return np.outer(reaches, np.ones(len(front.corners)))


def test_a_circle_has_its_radius_as_room():
    np.testing.assert_allclose(own_room(closed_front(2.0, 2.0)), 2.0, rtol=1e-6)


def test_a_slender_ellipse_has_half_its_width_at_the_sides_and_its_curvature_at_the_tips():
    a, c = 1.0, 5.0
    room = own_room(closed_front(a, c, n=400))
    assert room.max() == pytest.approx(a, rel=1e-3)
    assert room[0] == pytest.approx(a**2 / c, rel=0.02)


def test_a_neighbouring_front_limits_the_rings():
    one, two = closed_front(1.0, 1.0), closed_front(1.0, 1.0, centre=(2.5, 0.0, 0.0))
    gap = gap_to_others(one, [two])
    assert gap.min() == pytest.approx(0.5, rel=1e-3)
    reaches = layers(one, 0.1, 0.2, 0.3, 0.4, 0.5)
    alone, _ = ring_radii(one, reaches, [], True, None, "test")
    beside, _ = ring_radii(one, reaches, [two], True, None, "test")
    assert alone.max() == pytest.approx(0.5)
    assert beside.max() == pytest.approx(0.3)


def test_rings_are_layers_of_a_structured_mesh_and_ratios_elsewhere():
    front = closed_front(1.0, 1.0)
    reaches = layers(front, 0.1, 0.15, 0.25, 0.4, 0.7)
    structured, notes = ring_radii(front, reaches, [], True, None, "test")
    np.testing.assert_allclose(structured[:, 0], [0.15, 0.25, 0.4])  # 0.7 is beyond 0.6 a
    assert notes == ()
    ragged, _ = ring_radii(front, reaches, [], False, None, "test")
    np.testing.assert_allclose(ragged[:, 0], 0.1 * np.array(RATIOS))


def test_a_coarse_mesh_is_said_to_be_coarse_and_a_hopeless_one_is_refused():
    front = closed_front(1.0, 1.0)
    radii, notes = ring_radii(front, layers(front, 0.35, 0.7), [], False, None, "test")
    assert radii.max() == pytest.approx(0.6)
    assert "35 %" in notes[0]
    with pytest.raises(MethodError, match="refine the mesh around the front"):
        ring_radii(front, layers(front, 0.5, 1.0), [], False, None, "test")


@pytest.mark.parametrize(
    ("radii", "message"), [((0.05, 0.3), r"more than 0\.1"), ((0.3, 1.2), r"less than 0\.8")]
)
def test_given_radii_must_fit(radii, message):
    front = closed_front(1.0, 1.0)
    with pytest.raises(MethodError, match=message):
        ring_radii(front, layers(front, 0.1, 0.2), [], True, radii, "test")
