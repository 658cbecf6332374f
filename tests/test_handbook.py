"""The handbook against limits, independent numerical solutions and printed factors."""

import numpy as np
import pytest

from front3d import handbook
from front3d.errors import CaseError
from tests.reference import tables

PHI = np.linspace(0, 2 * np.pi, 25)
NU = 0.3


def ellipse_by_quadrature(sigma, a, c, phi, nu):
    """K_I, K_II, K_III of an ellipse from the transform of the crack operator.

    A jump D sqrt(1 - x^2/c^2 - y^2/a^2) needs on the crack the uniform traction
    mu/8 oint q M dt . D, q = sqrt(cos^2 t/c^2 + sin^2 t/a^2), with M = 1/(1-nu) for opening and
    kk/(1-nu) + (I - kk) for sliding, k the direction of (cos t/c, sin t/a).  K follows from the
    jump next to the front.  Derived for these tests; no elliptic integral is used.
    """
    t = np.linspace(0, 2 * np.pi, 4000, endpoint=False)
    k = np.stack([np.cos(t) / c, np.sin(t) / a])
    q = np.hypot(*k)
    k = k / q
    kk = np.einsum("it,jt->tij", k, k)
    sliding = kk / (1 - nu) + np.eye(2) - kk
    weight = 2 * np.pi / len(t) / 8
    opening = sigma[2] / (weight * q.sum() / (1 - nu))
    slide = np.linalg.solve(weight * np.einsum("t,tij->ij", q, sliding), sigma[:2])
    normal = np.stack([np.cos(phi) / c, np.sin(phi) / a])
    h = np.hypot(*normal)
    normal = normal / h
    tangent = np.stack([normal[1], -normal[0]])
    in_plane = 2 / (1 - nu) / 8 * np.sqrt(4 * np.pi * h)
    across = 1 / 4 * np.sqrt(4 * np.pi * h)
    return in_plane * opening, in_plane * (slide @ normal), across * (slide @ tangent)


@pytest.mark.parametrize("a", [0.1, 0.5, 1.0, 3.0])
def test_ellipse_against_quadrature(a):
    k1, k2, k3 = ellipse_by_quadrature(np.array([0.7, -0.4, 1.2]), a, 1.0, PHI, NU)
    np.testing.assert_allclose(handbook.ellipse_tension(1.2, a, 1.0, PHI), k1, rtol=1e-12)
    found = handbook.ellipse_shear(0.7, -0.4, a, 1.0, PHI, NU)
    np.testing.assert_allclose(found[0], k2, atol=1e-12)
    np.testing.assert_allclose(found[1], k3, atol=1e-12)


def test_penny_is_the_round_ellipse():
    np.testing.assert_allclose(
        handbook.ellipse_tension(1.5, 2.0, 2.0, PHI), handbook.penny_tension(1.5, 2.0), rtol=1e-14
    )
    for found, expected in zip(
        handbook.ellipse_shear(0.7, 0.0, 2.0, 2.0, PHI, NU),
        handbook.penny_shear(0.7, 2.0, PHI, NU),
        strict=True,
    ):
        np.testing.assert_allclose(found, expected, atol=1e-14)


def test_embedded_circle_has_the_printed_factor():
    """0.637 sigma sqrt(pi a): Dowling, Mechanical Behavior of Materials, Fig. 8.17."""
    assert handbook.penny_tension(1, 1) / np.sqrt(np.pi) == pytest.approx(0.637, abs=5e-4)


def test_a_long_ellipse_is_a_through_crack():
    """Sigma sqrt(pi a), tau sqrt(pi a) at the middle of the long side (Griffith crack)."""
    through = np.sqrt(np.pi)
    middle = np.pi / 2
    assert handbook.ellipse_tension(1, 1, 1e5, middle) == pytest.approx(through, rel=1e-8)
    assert handbook.ellipse_shear(0, 1, 1, 1e5, middle, NU)[0] == pytest.approx(through, rel=1e-8)
    assert handbook.ellipse_shear(1, 0, 1, 1e5, middle, NU)[1] == pytest.approx(through, rel=1e-8)


def test_inclined_penny_is_the_rotated_stress():
    """Against the stress on the crack plane by rotating the stress tensor."""
    beta = 0.6
    turn = np.array([[np.cos(beta), 0, -np.sin(beta)], [0, 1, 0], [np.sin(beta), 0, np.cos(beta)]])
    load = np.array([np.sin(beta), 0, np.cos(beta)])  # the load in crack axes
    stress = 1.4 * np.outer(load, load)
    np.testing.assert_allclose(turn @ load, [0, 0, 1], atol=1e-15)
    k1, k2, k3 = ellipse_by_quadrature(stress[:, 2], 1.0, 1.0, PHI, NU)
    found = handbook.penny_inclined(1.4, 1.0, beta, PHI, NU)
    np.testing.assert_allclose(found[0], k1, rtol=1e-12)
    np.testing.assert_allclose(found[1], k2, atol=1e-12)
    np.testing.assert_allclose(found[2], k3, atol=1e-12)


@pytest.mark.parametrize("ratio", [0.1, 0.5, 0.8])
def test_row_against_its_integral_equation(ratio):
    """Dislocations of the periodic kernel, Gauss-Chebyshev rule (Erdogan and Gupta 1972)."""
    b, n = 1.7, 80
    a = ratio * b
    i = 2 * np.arange(1, n + 1) - 1
    s = a * np.cos(i * np.pi / (2 * n))
    x = a * np.cos(np.arange(1, n) * np.pi / n)
    kernel = np.pi / (2 * b) / np.tan(np.pi * (s - x[:, None]) / (2 * b))
    matrix = np.vstack([kernel * np.pi / n, np.ones(n)])
    density = np.linalg.solve(matrix, np.append(np.full(n - 1, -4 * np.pi), 0.0))
    end = np.sin(i * np.pi * (2 * n - 1) / (4 * n)) / np.sin(i * np.pi / (4 * n)) @ density / n
    expected = abs(end) / 4 * np.sqrt(np.pi / a)
    assert handbook.collinear_row(1, a, b) == pytest.approx(expected, rel=1e-10)


def test_a_sparse_row_is_a_lone_crack():
    assert handbook.collinear_row(2, 1, 1e4) == pytest.approx(2 * np.sqrt(np.pi), rel=1e-7)


def test_half_circle_has_the_printed_factor():
    """Small half-circular surface crack: 0.728 S sqrt(pi a), Dowling, Fig. 8.17; at the surface."""
    phi = np.linspace(0, np.pi, 181)
    k = handbook.surface_crack(phi, 1.0, 1.0, 1e6, tension=1.0) / np.sqrt(np.pi)
    assert k.max() == pytest.approx(0.728, abs=1e-3)
    assert k.argmax() in (0, 180)
    np.testing.assert_allclose(k, k[::-1], rtol=1e-12)


def test_a_long_shallow_crack_is_an_edge_crack():
    """1.1215 S sqrt(pi a), edge of a half-plane (Koiter 1956, from memory); here 1.13."""
    k = handbook.surface_crack(np.pi / 2, 1.0, 1e5, 1e6, tension=1.0) / np.sqrt(np.pi)
    assert k == pytest.approx(1.1215, rel=0.01)


@pytest.mark.parametrize("load", [{"tension": 1.0}, {"bending": 1.0}])
def test_both_branches_meet_at_the_half_circle(load):
    """a/c <= 1 and a/c > 1 have their own coefficients: equal within 1 % of the largest K."""
    phi = np.linspace(0, np.pi / 2, 10)
    below = handbook.surface_crack(phi, 1.0, 1.0, 2.5, **load)
    above = handbook.surface_crack(phi, 1.0 + 1e-9, 1.0, 2.5, **load)
    np.testing.assert_allclose(above, below, atol=0.01 * below.max())


@pytest.mark.parametrize("a_t", [0.2, 0.4, 0.6])
@pytest.mark.parametrize("a_c", [0.4, 0.6, 1.0, 2.0])
def test_surface_crack_in_tension_against_high_order_elements(a_c, a_t):
    """Claimed: 5 % of the fitted values.  The table is computed here, not published; the largest
    difference, over the largest K of the front, was measured as 3.6 %.
    """
    assert surface_crack_difference("tension", a_c, a_t) < 0.04


@pytest.mark.parametrize("a_t", [0.2, 0.4, 0.6])
@pytest.mark.parametrize("a_c", [0.6, 1.0])
def test_surface_crack_in_bending_against_high_order_elements(a_c, a_t):
    """As in tension; measured up to 4.1 % here.  Outside these shapes the claimed 5 % does not
    hold: 8.5 % at a/c = 0.4, a/t = 0.6 and 6.1 % at a/c = 2, a/t = 0.6.
    """
    assert surface_crack_difference("bending", a_c, a_t) < 0.05


def surface_crack_difference(load, a_c, a_t):
    phi, expected = tables.surface_crack(load, a_c, a_t)
    width = 10 * max(1.0, 1 / a_c)
    found = handbook.surface_crack(phi, 1.0, 1 / a_c, 1 / a_t, width, **{load: 1.0})
    return np.abs(found - expected).max() / expected.max()


def test_bending_vanishes_into_tension_for_a_tiny_crack():
    phi = np.linspace(0, np.pi / 2, 7)
    both = [handbook.surface_crack(phi, 1, 2, 1e7, **{k: 1.0}) for k in ("tension", "bending")]
    np.testing.assert_allclose(both[0], both[1], rtol=1e-6)


@pytest.mark.parametrize(
    ("call", "named"),
    [
        (lambda: handbook.penny_tension(1, -1), "a: found -1"),
        (lambda: handbook.penny_shear(1, 1, 0, 0.6), "Poisson"),
        (lambda: handbook.ellipse_tension(1, [1, 0], 1, 0), "a: found 0"),
        (lambda: handbook.collinear_row(1, 2, 1), "a/b: found 2"),
        (lambda: handbook.surface_crack(0, 2.1, 1, 10), "a/c: found 2.1"),
        (lambda: handbook.surface_crack(0, 1, 1, 1), "a/t: found 1"),
        (lambda: handbook.surface_crack(0, 0.9, 9, 1), "1.25"),
        (lambda: handbook.surface_crack(0, 1, 1, 3, 2), "c/b: found 0.5"),
        (lambda: handbook.surface_crack(4, 1, 1, 3), "phi: found 4"),
        (lambda: handbook.penny_tension(1, np.nan), "a: found nan"),
    ],
)
def test_outside_its_range_a_solution_is_refused(call, named):
    with pytest.raises(CaseError, match=named):
        call()
