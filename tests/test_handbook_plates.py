"""Embedded and corner cracks of the handbook, its tables, and what is said against its equations.

The tables fe3d_*.csv were computed for this project with high-order finite elements; they are not
published.  Printed factors: Dowling, Mechanical Behavior of Materials, Figs 8.17 and 8.19.
"""

import numpy as np
import pytest
from scipy.special import ellipe

from front3d import handbook
from front3d.errors import CaseError
from front3d.handbook.catalogue import parse
from front3d.handbook.doubts import worst_difference
from front3d.handbook.entries_plates import _FREE, _LOADS, _at_case
from front3d.handbook.tabulated import find_case, interpolate, table, tabulated

QUARTER = np.linspace(0, np.pi / 2, 31)


@pytest.mark.parametrize("a_c", [0.2, 0.5, 1.0, 2.0])
def test_a_small_embedded_crack_is_the_exact_ellipse(a_c):
    """Irwin (1962); the fitted Q is within 0.07 % in K."""
    found = handbook.embedded_crack(QUARTER, 1.0, 1 / a_c, 1e5, tension=1.0)
    exact = handbook.ellipse_tension(1.0, 1.0, 1 / a_c, QUARTER)
    np.testing.assert_allclose(found, exact, rtol=0.0015)


def test_quarter_circle_has_the_printed_factor():
    """Small quarter-circular corner crack: 0.722 S sqrt(pi a)."""
    K = handbook.corner_crack(QUARTER, 1.0, 1.0, 1e6, tension=1.0) / np.sqrt(np.pi)
    assert K.max() == pytest.approx(0.722, abs=1e-3)


@pytest.mark.parametrize("load", ["tension", "bending"])
def test_both_branches_of_the_corner_meet(load):
    """At a/c = 1: within 1.2 % of the largest K."""
    below = handbook.corner_crack(QUARTER, 1.0, 1.0, 3.0, **{load: 1.0})
    above = handbook.corner_crack(QUARTER, 1.0 + 1e-9, 1.0, 3.0, **{load: 1.0})
    np.testing.assert_allclose(above, below, atol=0.012 * below.max())


def test_width_factor_of_the_corner_is_that_of_the_strip():
    """A corner crack through the thickness is an edge crack: its width factor within 1.5 %."""
    t, a = 1.0, 1.0 - 1e-9
    for alpha in (0.1, 0.3, 0.45):
        c = 1.0
        wide = handbook.corner_crack(0.3, a, c, t, tension=1.0)
        narrow = handbook.corner_crack(0.3, a, c, t, c / alpha, tension=1.0)
        strip = handbook.edge_crack(1.0, alpha, 1.0) / np.sqrt(np.pi * alpha) / 1.1215
        assert narrow / wide == pytest.approx(strip, rel=0.015)


def test_a_tiny_crack_at_a_hole_feels_three_times_the_stress():
    """Kirsch (1898); the equation is within 10 % of a corner crack under 3 S at 45 degrees."""
    hole = handbook.corner_crack_at_hole(np.pi / 4, 0.01, 0.01, 1.0, 1.0, tension=1.0)
    plate = handbook.corner_crack(np.pi / 4, 0.01, 0.01, 1.0, tension=3.0)
    assert hole == pytest.approx(plate, rel=0.10)


def test_a_single_crack_at_a_hole_has_less():
    two, one = (
        handbook.corner_crack_at_hole(QUARTER, 1, 1, 2, 1, tension=1.0, cracks=n) for n in (2, 1)
    )
    # sqrt((4/pi + u/2)/(4/pi + u)), u = a c/(t r); a conversion attributed to Shah.
    np.testing.assert_allclose(one / two, np.sqrt((4 / np.pi + 0.25) / (4 / np.pi + 0.5)))


@pytest.mark.parametrize("a_t", [0.2, 0.5])
@pytest.mark.parametrize("a_c", [0.4, 1.0, 2.0])
def test_corner_crack_in_tension_against_high_order_elements(a_c, a_t):
    """The project's bar is 4 %; measured up to 4.03 % (a/c = 0.4, a/t = 0.5), which misses it."""
    case = find_case("fe3d_corner", "tension", (a_c, a_t))
    worst, _ = worst_difference(case, _at_case("corner"), _FREE["corner"])
    assert abs(worst) < 0.041


def test_a_corner_crack_longer_in_depth_against_high_order_elements():
    """a/c = 2, a/t = 0.8 in tension: measured 4.46 %, the worst but for long deep cracks."""
    case = find_case("fe3d_corner", "tension", (2.0, 0.8))
    worst, _ = worst_difference(case, _at_case("corner"), _FREE["corner"])
    assert abs(worst) < 0.045


@pytest.mark.parametrize("case", table("fe3d_embedded"), ids=lambda case: str(case.ratios))
def test_embedded_crack_against_high_order_elements(case):
    """Claimed 3 % for a/t < 0.8; measured up to 2 % below and 4.4 % at a/t = 0.8."""
    worst, _ = worst_difference(case, _at_case("embedded"), ())
    assert abs(worst) < (0.045 if case.ratios[1] == 0.8 else 0.021)


@pytest.mark.parametrize("case", table("fe3d_hole"), ids=lambda case: str(case.ratios))
def test_corner_crack_at_a_hole_against_high_order_elements(case):
    """Claimed 5 %; measured up to 5.01 % for a/c >= 1 and 8.4 % low for a/c = 0.5."""
    worst, _ = worst_difference(case, _at_case("hole"), _FREE["hole"])
    assert abs(worst) < (0.084 if case.ratios[0] < 1 else 0.051)


# --- what is said against them ----------------------------------------------------------------


@pytest.mark.parametrize(
    ("text", "said"),
    [
        ("newman-raju-surface:a=1,c=2.5,t=1.25,tension=1", ["-8.8 %", "a/t = 0.8, 2 phi/pi = 1"]),
        ("newman-raju-surface:a=1,c=5,t=1.25,bending=1", ["+16.2 %", "under bending"]),
        ("newman-raju-surface:a=1,c=2,t=1.4,tension=1", ["-8.8 %"]),  # between the cases
        ("newman-raju-corner:a=1,c=5,t=1.25,tension=1", ["-16.2 %", "2 phi/pi = 0.875"]),
        ("newman-raju-corner:a=1,c=5,t=1.25,bending=1", ["-17.5 %"]),
        ("newman-raju-embedded:a=1,c=5,t=1.25,tension=1", ["-4.4 %"]),
        ("newman-raju-hole:a=1,c=2,t=5,r=5,tension=1", ["+8.3 %", "r/t = 1"]),
    ],
)
def test_equations_are_doubted_where_they_are_off(text, said):
    """The worst figures, as they were found when the tables were computed."""
    request = parse(text)
    (note,) = request.solution.doubts(request.values)
    assert "known to be off" in note
    assert "elements less the equation" in note  # the signs are those of K less the equation
    for words in [*said, "not published"]:
        assert words in note


def test_an_equation_is_not_called_off_where_it_is_within_4_per_cent():
    """Bending at a/c = 0.6, a/t = 0.4: its claim is not confirmed there, but it is not off."""
    request = parse("newman-raju-surface:a=6,c=10,t=15,bending=1")
    (note,) = request.solution.doubts(request.values)
    assert "known to be off" not in note
    assert abs(float(note.split("up to ")[1].split(" %")[0])) <= 4.0


@pytest.mark.parametrize(
    "text",
    [
        "newman-raju-surface:a=6,c=10,t=15,tension=1",
        "newman-raju-corner:a=1,c=1,t=2,tension=1",
        "newman-raju-embedded:a=1,c=2,t=2,tension=1",
    ],
)
def test_nothing_is_said_where_they_hold(text):
    request = parse(text)
    assert request.solution.doubts(request.values) == ()


def test_the_tables_hold_what_was_computed():
    """Cases, stations, and signs: shapes and loads of the computations behind the tables."""
    counts = {name: len(table(f"fe3d_{name}")) for name in _LOADS}
    assert counts == {"surface": 40, "corner": 24, "embedded": 12, "hole": 11}
    for name in _LOADS:
        for case in table(f"fe3d_{name}"):
            np.testing.assert_allclose(case.phi, np.arange(9) * np.pi / 16)
    assert len(table("raju_newman_1979")) == 20


@pytest.mark.parametrize("a_c", [0.4, 1.0, 2.0])
def test_the_embedded_table_tends_to_the_exact_ellipse(a_c):
    """At a/t = 0.2 the faces add little: within 1 % of Irwin (1962)."""
    t = 5.0
    K = tabulated("fe3d_embedded", QUARTER, 1.0, 1 / a_c, t, free_at=(), tension=2.0)
    exact = handbook.ellipse_tension(2.0, 1.0, 1 / a_c, QUARTER)
    np.testing.assert_allclose(K, exact, rtol=0.01)


def test_a_table_gives_its_own_values_at_its_stations():
    case = find_case("fe3d_surface", "bending", (0.6, 0.4))
    K = tabulated("fe3d_surface", case.phi, 6.0, 10.0, 15.0, bending=3.0)
    expected = 3 * case.factor * np.sqrt(np.pi * 6) / ellipe(1 - 0.36)
    np.testing.assert_allclose(K, expected, rtol=1e-12)


@pytest.mark.parametrize("name", ["fe3d_surface", "fe3d_embedded", "raju_newman_1979"])
def test_interpolation_is_even_about_the_deepest_point(name):
    """By the symmetry of the ellipse: no slope at pi/2."""
    step = 1e-5
    free = () if name == "fe3d_embedded" else (0.0,)
    for case in table(name):
        near = np.array([np.pi / 2 - step, np.pi / 2])
        one, other = interpolate(near, case.phi, case.factor, free)
        assert abs(other - one) / step < 1e-3


@pytest.mark.parametrize("name", ["surface", "corner", "embedded", "hole"])
def test_stations_left_out_are_found_by_interpolation(name):
    """Every second one left out: within 1.3 % of the largest K, so far less at the full spacing."""
    keep, out = [0, 1, 3, 5, 7, 8], [2, 4, 6]
    for case in table(f"fe3d_{name}"):
        found = interpolate(case.phi[out], case.phi[keep], case.factor[keep], _FREE[name])
        assert np.abs(found - case.factor[out]).max() < 0.013 * np.abs(case.factor).max()


def test_between_its_cases_a_table_is_silent():
    with pytest.raises(CaseError, match=r"a/c = 0.5, a/t = 0.4.*nearest is a/c = 0.6, a/t = 0.4"):
        tabulated("fe3d_surface", QUARTER, 6.0, 12.0, 15.0, tension=1.0)
    with pytest.raises(CaseError, match="holds no bending, only tension"):
        tabulated("fe3d_embedded", QUARTER, 6.0, 15.0, 30.0, bending=1.0)


def test_the_recalled_table_against_the_equation_of_its_authors():
    """Raju and Newman (1979), all from memory, against their equation of 1981: 2.5 % root mean
    square, 9 of 180 entries beyond the 5 % claimed, those flagged in the file.
    """
    off = []
    for case in table("raju_newman_1979"):
        c, t = 1 / case.ratios[0], 1 / case.ratios[1]
        expected = tabulated("raju_newman_1979", case.phi, 1.0, c, t, tension=1.0)
        values = handbook.surface_crack(case.phi, 1.0, c, t, tension=1.0) / expected - 1
        off += list(values)
        for value, flag in zip(values, case.flags, strict=True):
            assert ("equation" in flag) == (abs(value) > 0.05)
    assert np.sqrt(np.mean(np.square(off))) < 0.026
    assert np.abs(off).max() < 0.076
    assert (np.abs(off) > 0.05).sum() == 9


@pytest.mark.parametrize(
    ("call", "named"),
    [
        (lambda: handbook.embedded_crack(0, 1, 1, 1), "a/t: found 1"),
        (lambda: handbook.embedded_crack(0, 1, 1, 3, 2), "c/b: found 0.5"),
        (lambda: handbook.corner_crack(0, 1, 10, 3), "a/c: found 0.1"),
        (lambda: handbook.corner_crack(2, 1, 1, 3), "phi: found 2"),
        (lambda: handbook.corner_crack(0, 1, 1, 3, 2), "c/b: found 0.5"),
        (lambda: handbook.corner_crack_at_hole(0, 1, 1, 3, 1), "r/t: found 0.333"),
        (lambda: handbook.corner_crack_at_hole(0, 1, 1, 3, 2, 6), r"\(r \+ c\)/b: found 0.5"),
        (lambda: handbook.corner_crack_at_hole(0, 1, 1, 3, 2, cracks=3), "cracks: found 3"),
    ],
)
def test_outside_its_range_a_solution_is_refused(call, named):
    with pytest.raises(CaseError, match=named):
        call()


# --- pennies: pressure and T ------------------------------------------------------------------


def test_pressure_on_a_penny():
    """Uniform pressure is remote tension; p0 (r/a)^2 gives 4/3 p0 sqrt(a/pi) (Sneddon 1946)."""
    uniform = handbook.penny_pressure(lambda r: 3.0 + 0 * r, 2.0)
    assert uniform == pytest.approx(float(handbook.penny_tension(3.0, 2.0)), rel=1e-12)
    parabola = handbook.penny_pressure(lambda r: 3.0 * (r / 2.0) ** 2, 2.0)
    assert parabola == pytest.approx(4 / 3 * 3.0 * np.sqrt(2 / np.pi), rel=1e-12)


def test_t_stress_of_a_penny_on_the_exact_field():
    """The radial stress on the faces, by differences of the exact displacements of a penny."""
    from tests.reference.exact import Elastic, penny_tension

    nu, h = 0.3, 1e-4
    elastic = Elastic.from_young(1.0, nu)
    field = penny_tension(elastic, 2.0)
    r = 0.4
    points = np.array([[r - h, 0, 0], [r + h, 0, 0], [r, 0, 0]])
    u = field(points, np.ones(3))
    e_rr, e_tt = (u[1, 0] - u[0, 0]) / (2 * h), u[2, 0] / r
    s_rr = (e_rr + nu * e_tt) / (1 - nu**2)  # s_zz = 0 on the face
    assert s_rr == pytest.approx(float(handbook.penny_t_stress(2.0, nu)[0]), rel=1e-5)
