"""Sections and ellipses recognised from the front alone, against the curves they were made of."""

from dataclasses import replace

import numpy as np
import pytest

from front3d.output.shape import ellipse_of, section_of
from front3d.results import FrontResult
from tests.output_models import corner_front, elliptic_front, through_front

SURFACE = elliptic_front(1.6, 1.2, closed=False, ends=("free surface", "free surface"))


def turned(front: FrontResult) -> FrontResult:
    """The same front elsewhere in space: nothing may depend on coordinate axes."""
    axis = np.linalg.qr(np.random.default_rng(3).normal(size=(3, 3)))[0]
    axis *= np.sign(np.linalg.det(axis))
    return replace(
        front, positions=front.positions @ axis.T + (5, -7, 9), frames=front.frames @ axis.T
    )


@pytest.mark.parametrize("place", [lambda f: f, turned], ids=["here", "turned"])
def test_depth_of_a_surface_crack(place) -> None:
    section = section_of(place(SURFACE))
    assert section is not None and section.kind == "surface"
    assert section.depth == pytest.approx(SURFACE.positions[:, 1], abs=1e-9)
    assert np.abs(section.across) == pytest.approx(np.abs(SURFACE.positions[:, 0]), abs=1e-9)


@pytest.mark.parametrize("place", [lambda f: f, turned], ids=["here", "turned"])
def test_depth_of_a_corner_crack_counts_from_the_surface_of_its_start(place) -> None:
    front = corner_front()
    section = section_of(place(front))
    assert section is not None and section.kind == "corner"
    assert section.depth == pytest.approx(front.positions[:, 1], abs=0.01)
    assert section.across == pytest.approx(front.positions[:, 0], abs=0.01)
    assert section.outline[-1] == pytest.approx([0, 0], abs=1e-9)  # the corner of the solid


@pytest.mark.parametrize("place", [lambda f: f, turned], ids=["here", "turned"])
def test_position_through_the_thickness(place) -> None:
    front = through_front()
    section = section_of(place(front))
    assert section is not None and section.kind == "through"
    assert section.depth == pytest.approx(front.positions[:, 2], abs=1e-9)
    # The crack lies behind the front: its outline reaches to smaller x.
    assert section.outline[:, 0].min() < section.across.min()
    assert section.across == pytest.approx(front.positions[:, 0] - 3, abs=1e-9)


def test_half_of_a_symmetric_crack() -> None:
    for front, kind in (
        (corner_front(("free surface", "symmetry plane")), "surface"),
        (corner_front(("symmetry plane", "free surface")), "surface"),
        (through_front(("symmetry plane", "free surface")), "through"),
    ):
        section = section_of(front)
        assert section is not None and section.kind == kind
        free = front.ends.index("free surface") * -1
        assert section.depth[free] == pytest.approx(0, abs=1e-9)
        assert section.depth.min() == pytest.approx(0, abs=1e-9)
        assert section.depth.max() > 1


def test_fronts_without_a_depth() -> None:
    planes = ("symmetry plane", "symmetry plane")
    assert section_of(elliptic_front(1.6, 1.2, closed=True)) is None
    assert section_of(through_front(planes)) is None
    bent = SURFACE.positions + np.outer(SURFACE.positions[:, 0] ** 2, (0, 0, 0.3))
    assert section_of(replace(SURFACE, positions=bent)) is None


@pytest.mark.parametrize(
    ("front", "a", "c", "span"),
    [
        (SURFACE, 1.2, 1.6, 180),
        (corner_front(), 4, 6, 90),
        (elliptic_front(1.6, 1.2, closed=True, n=40), 1.2, 1.6, 360 * 39 / 40),
    ],
    ids=["half", "quarter", "whole"],
)
def test_ellipse(front: FrontResult, a: float, c: float, span: float) -> None:
    ellipse = ellipse_of(turned(front))
    assert ellipse is not None
    assert (ellipse.a, ellipse.c) == pytest.approx((a, c), rel=1e-3)
    angle = np.radians(ellipse.angle)
    x, y, _ = np.abs(front.positions.T)
    assert np.abs(c * np.cos(angle)) == pytest.approx(x, abs=0.02)
    assert np.abs(a * np.sin(angle)) == pytest.approx(y, abs=0.02)
    assert abs(ellipse.angle[-1] - ellipse.angle[0]) == pytest.approx(span, abs=0.5)


def test_what_is_no_ellipse() -> None:
    circle = elliptic_front(1.0, 1.0, closed=True)
    assert ellipse_of(circle) is None  # no longer axis to count an angle from
    assert ellipse_of(through_front()) is None
    wavy = SURFACE.positions * (1 + 0.05 * np.sin(12 * SURFACE.s_rel))[:, None]
    assert ellipse_of(replace(SURFACE, positions=wavy)) is None
