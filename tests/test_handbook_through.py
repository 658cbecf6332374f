"""Through cracks, specimens and bars of the handbook against limits and independent values.

The finite-element values here come from two-dimensional and axisymmetric elements of high order,
computed for this project and accurate to 0.1 %; they are not published.
"""

import numpy as np
import pytest

from front3d import handbook
from front3d.errors import CaseError

ALPHA = np.arange(1, 10) / 10

# Kaya and Erdogan, Quart. Appl. Math. 45 (1987) 105: K/(sigma sqrt(pi a)) of an edge-cracked strip
# at a/b = 0.1 .. 0.9.  From memory; finite elements of high order agree within 0.03 %.
STRIP_TENSION = [1.1892, 1.3673, 1.6599, 2.1114, 2.8246, 4.0332, 6.3549, 11.955, 34.633]
STRIP_BENDING = [1.0472, 1.0553, 1.1241, 1.2606, 1.4972, 1.9140]


def test_through_crack_is_the_limit_of_the_strips():
    """Sigma sqrt(pi a), Griffith (1921), Irwin (1957)."""
    plate = handbook.through_crack(2.0, 1.0)
    assert plate == pytest.approx(2.0 * np.sqrt(np.pi), rel=1e-15)
    assert handbook.centre_crack(2.0, 1.0, 1e5) == pytest.approx(plate, rel=1e-8)
    assert handbook.antiplane_through_crack(2.0, 1.0, 1e5) == pytest.approx(plate, rel=1e-8)
    assert handbook.antiplane_through_crack(2.0, 1.0) == pytest.approx(plate, rel=1e-15)


@pytest.mark.parametrize("crack", [handbook.edge_crack, handbook.double_edge_crack])
def test_a_shallow_edge_crack(crack):
    """1.1215 sigma sqrt(pi a) of a half-plane (Koiter 1956)."""
    assert crack(1.0, 1.0, 1e6) / np.sqrt(np.pi) == pytest.approx(1.1215, rel=1e-3)


def test_edge_crack_in_tension_against_the_integral_equation():
    found = handbook.edge_crack(1.0, ALPHA, 1.0) / np.sqrt(np.pi * ALPHA)
    np.testing.assert_allclose(found, STRIP_TENSION, rtol=0.006)  # claimed 0.5 %, found 0.55 %


def test_edge_crack_in_bending_against_the_integral_equation():
    alpha = ALPHA[:6]
    found = handbook.edge_crack_bending(1.0, alpha, 1.0) / np.sqrt(np.pi * alpha)
    np.testing.assert_allclose(found, STRIP_BENDING, rtol=0.004)  # claimed 0.2 %, found 0.36 %


def test_deep_double_edge_crack_keeps_the_rigid_punch_limit():
    """F sqrt(1 - a/b) tends to 2/pi: two half-planes joined over a strip."""
    gap = 1e-6
    F = handbook.double_edge_crack(1.0, 1.0 - gap, 1.0) / np.sqrt(np.pi)
    assert F * np.sqrt(gap) == pytest.approx(2 / np.pi, rel=1e-4)


def test_deep_bending_limit_of_the_specimens():
    """K c^1.5 / M tends to 3.975, c the ligament and M its moment per thickness (Tada et al.)."""
    c = 1e-7
    x = 1 - c
    assert handbook.compact_specimen(1, 1, 1, x) * c**1.5 == pytest.approx(3.975, rel=2e-3)
    # Three-point bending, span 4 W: M = P S/4 = P W.
    assert handbook.bend_specimen(1, 1, 1, x) * c**1.5 == pytest.approx(3.975, rel=2e-3)


def test_specimens_scale():
    """K goes with P/(B sqrt W) at the same a/W."""
    for K in (handbook.compact_specimen, handbook.bend_specimen):
        assert K(8, 4, 9, 4.5) == pytest.approx(2 / 3 * K(1, 1, 1, 0.5), rel=1e-14)


def test_compact_specimen_has_the_printed_factor():
    """f(0.5) = 9.66: the table of f(a/W) in ASTM E399, from memory."""
    assert handbook.compact_specimen(1, 1, 1, 0.5) == pytest.approx(9.66, abs=0.005)


def test_bend_specimen_has_the_printed_factor():
    """f(0.5) = 2.66 with K = P S/(B W^1.5) f: the table in ASTM E399, from memory."""
    assert handbook.bend_specimen(1, 1, 1, 0.5) / 4 == pytest.approx(2.66, abs=0.005)


FE = {
    handbook.centre_crack: ({0.1: 1.0055, 0.3: 1.0575, 0.5: 1.1864, 0.7: 1.4878}, 0.002),
    handbook.double_edge_crack: (
        {0.1: 1.1163, 0.3: 1.1148, 0.5: 1.1691, 0.7: 1.3526},
        0.009,
    ),  # claimed 0.5 %, found 0.7 %
}


@pytest.mark.parametrize("crack", FE)
def test_strips_against_two_dimensional_elements(crack):
    values, allowed = FE[crack]
    for alpha, F in values.items():
        found = crack(1.0, alpha, 1.0) / np.sqrt(np.pi * alpha)
        assert found == pytest.approx(F, rel=allowed), alpha


def test_specimens_against_two_dimensional_elements():
    """Loaded at points, without holes.  Claimed 0.5 %; 0.7 % was found in bending."""
    for x, f in {0.45: 8.3446, 0.5: 9.6315, 0.55: 11.3244, 0.7: 21.5518}.items():
        assert handbook.compact_specimen(1, 1, 1, x) == pytest.approx(f, rel=0.006), x
    for x, f in {0.3: 1.5137, 0.5: 2.6432, 0.7: 5.8401}.items():
        assert handbook.bend_specimen(1, 1, 1, x) / 4 == pytest.approx(f, rel=0.009), x


def test_inclined_through_crack_is_the_rotated_stress():
    beta, sigma, lateral = 0.5, 1.3, 0.4
    load = np.array([np.sin(beta), np.cos(beta)])  # in the tip's axes e1, e2
    across = np.array([np.cos(beta), -np.sin(beta)])
    stress = sigma * np.outer(load, load) + lateral * np.outer(across, across)
    k1, k2 = handbook.inclined_through_crack(sigma, 2.0, beta, lateral)
    assert k1 == pytest.approx(stress[1, 1] * np.sqrt(2 * np.pi), rel=1e-14)
    assert k2 == pytest.approx(stress[0, 1] * np.sqrt(2 * np.pi), rel=1e-14)


def test_antiplane_row_is_the_tension_row():
    """Both are Westergaard's row: the same tangent formula."""
    expected = handbook.collinear_row(1.5, 0.6, 1.0)
    assert handbook.antiplane_through_crack(1.5, 0.6, 1.0) == pytest.approx(expected, rel=1e-14)


def test_through_crack_t_stress_on_westergaards_field():
    """Z = sigma z/sqrt(z^2 - a^2), uniaxial: s_xx = Re Z - y Im Z' - sigma on the faces."""
    x = np.linspace(-0.9, 0.9, 7) + 1e-12j
    root = np.sqrt(x - 1) * np.sqrt(x + 1)
    Z, slope = x / root, -1 / root**3
    s_xx = Z.real - x.imag * slope.imag - 1
    np.testing.assert_allclose(handbook.through_crack_t_stress(1.0), s_xx, atol=1e-8)
    assert handbook.through_crack_t_stress(1.0, 1.0) == 0


# --- bars -------------------------------------------------------------------------------------


def test_external_crack_against_its_net_stress():
    """P/(2 pi a sqrt(a^2 - r^2)) and 3 T r/(4 pi a^3 sqrt(a^2 - r^2)) on the circle: the flat punch
    and its twist (Sneddon; from memory).
    """
    P, T, a, gap = 2.0, 3.0, 1.3, 1e-9
    root = np.sqrt(2 * a * gap)
    pull, twist = P / (2 * np.pi * a * root), 3 * T * a / (4 * np.pi * a**3 * root)
    tip = np.sqrt(2 * np.pi * gap)
    assert handbook.external_crack_tension(P, a) == pytest.approx(tip * pull, rel=1e-8)
    assert handbook.external_crack_torsion(T, a) == pytest.approx(tip * twist, rel=1e-8)


def test_a_slender_ligament_is_the_external_crack():
    a = 1e-6
    for bar, external in (
        (handbook.round_bar_tension, handbook.external_crack_tension),
        (handbook.round_bar_torsion, handbook.external_crack_torsion),
    ):
        assert bar(1.0, a, 1.0) == pytest.approx(external(1.0, a), rel=1e-5)


def test_a_shallow_crack_around_a_bar():
    """Of depth d: 1.1215 sigma sqrt(pi d), in torsion tau sqrt(pi d), stress at the surface."""
    d = 1e-5
    a = 1 - d
    unit = np.sqrt(np.pi * d)
    assert handbook.round_bar_tension(np.pi, a, 1) == pytest.approx(1.1215 * unit, rel=3e-3)
    assert handbook.round_bar_bending(np.pi / 4, a, 1) == pytest.approx(1.1215 * unit, rel=3e-3)
    assert handbook.round_bar_torsion(np.pi / 2, a, 1) == pytest.approx(unit, rel=3e-3)
    assert handbook.round_bar_bending(1, 0.5, 1, np.pi / 2) == pytest.approx(0, abs=1e-15)


BAR_TENSION = {0.3: 0.4969, 0.5: 0.4846, 0.7: 0.4467, 0.8: 0.4038, 0.9: 0.3188}
BAR_TORSION = {0.3: 0.3745, 0.5: 0.3714, 0.7: 0.3530, 0.8: 0.3261, 0.9: 0.2659}


def test_bar_in_tension_against_axisymmetric_elements():
    """Poisson's ratio 0.3.  Claimed 1 %; the formula was found up to 2.9 % low, near a/b = 0.8."""
    for x, G in BAR_TENSION.items():
        found = handbook.round_bar_tension(np.pi * x**2, x, 1) / np.sqrt(np.pi * x)
        assert -0.031 < found / G - 1 < 0.001, x


def test_bar_in_torsion_against_axisymmetric_elements():
    """Claimed 1 %; the formula was found up to 1.9 % high, and within 0.5 % for a/b <= 0.5."""
    for x, G in BAR_TORSION.items():
        found = handbook.round_bar_torsion(np.pi * x**3 / 2, x, 1) / np.sqrt(np.pi * x)
        assert abs(found / G - 1) < (0.005 if x <= 0.5 else 0.02), x


@pytest.mark.parametrize(
    ("call", "named"),
    [
        (lambda: handbook.through_crack(1, 0), "a: found 0"),
        (lambda: handbook.centre_crack(1, 2, 2), "a/b: found 1"),
        (lambda: handbook.edge_crack_bending(1, 0.7, 1), "a/b: found 0.7"),
        (lambda: handbook.antiplane_through_crack(1, 2, 1), "a/b: found 2"),
        (lambda: handbook.compact_specimen(1, 1, 1, 0.1), "a/W: found 0.1"),
        (lambda: handbook.bend_specimen(1, 1, 1, 1), "a/W: found 1"),
        (lambda: handbook.round_bar_tension(1, 1, 1), "a/b: found 1"),
        (lambda: handbook.round_bar_torsion(1, 1, -1), "b: found -1"),
        (lambda: handbook.external_crack_tension(1, 0), "a: found 0"),
    ],
)
def test_outside_its_range_a_solution_is_refused(call, named):
    with pytest.raises(CaseError, match=named):
        call()
