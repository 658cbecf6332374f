"""Comparing a front with a published solution: the text, the place on the ellipse, the signs."""

import numpy as np
import pytest

from front3d import handbook
from front3d.handbook.catalogue import parse
from front3d.handbook.comparing import compare
from front3d.handbook.placing import FREE, SYMMETRY, FrontMismatch, FrontShape
from tests.front_shapes import NU, SHIFT, TURNS, A, C, elliptic, flipped, moved, shaped, straight


@pytest.mark.parametrize("turn", TURNS)
@pytest.mark.parametrize("other_face", [False, True])
def test_angle_of_a_surface_crack_anywhere(turn, other_face):
    """Phi = 0 and 180 at the surface, 90 at the deepest point, whichever way the front runs."""
    shape, _ = elliptic(0, 180)
    shape = flipped(shape) if other_face else shape
    local = shape.positions
    expected = np.degrees(np.arctan2(local[:, 1] / A, np.abs(local[:, 0]) / C))
    request = parse("newman-raju-surface:a=6,c=10,t=15,tension=100")
    found = compare(request, moved(shape, turn, SHIFT), NU)
    # Which of the two ends is 0 is a matter of taste: the solution is symmetric.
    np.testing.assert_allclose(90 - np.abs(found.angle - 90), expected, atol=1e-6)
    phi = np.radians(expected)
    K = handbook.surface_crack(phi, A, C, 15.0, tension=100.0)
    np.testing.assert_allclose(found.K[:, 0], K, rtol=1e-8)
    assert np.isnan(found.K[:, 1:]).all()


@pytest.mark.parametrize("turn", TURNS)
@pytest.mark.parametrize("a", [A, 14.0])
@pytest.mark.parametrize("runs_back", [False, True])
def test_angle_of_a_corner_crack_anywhere(turn, a, runs_back):
    """The ends tell the axes: phi = 0 on the c axis, 90 on the a axis."""
    shape, _ = elliptic(0, 90, a=a)
    shape = flipped(shape) if runs_back else shape
    expected = np.degrees(np.arctan2(shape.positions[:, 1] / a, shape.positions[:, 0] / C))
    request = parse(f"newman-raju-corner:a={a},c=10,t=40,tension=1")
    found = compare(request, moved(shape, turn, SHIFT), NU)
    np.testing.assert_allclose(found.angle, expected, atol=1e-6)


@pytest.mark.parametrize("turn", TURNS)
def test_a_half_model_of_a_surface_crack(turn):
    """From the free surface to the symmetry plane at the deepest point."""
    shape, _ = elliptic(0, 90, ends=(FREE, SYMMETRY))
    expected = np.degrees(np.arctan2(shape.positions[:, 1] / A, shape.positions[:, 0] / C))
    for model in (shape, flipped(shape)):
        found = compare(
            parse("computed-surface:a=6,c=10,t=15,tension=1"), moved(model, turn, SHIFT), NU
        )
        expected = np.degrees(np.arctan2(model.positions[:, 1] / A, model.positions[:, 0] / C))
        np.testing.assert_allclose(found.angle, expected, atol=1e-6)
        near = expected < 0.125 * 90 - 1e-9
        np.testing.assert_array_equal(found.judged, ~near)


@pytest.mark.parametrize("turn", TURNS)
@pytest.mark.parametrize(("a", "c"), [(6.0, 10.0), (10.0, 6.0), (9.0, 10.0)])
def test_an_embedded_ellipse_anywhere(turn, a, c):
    """K_I of Irwin (1962) at the stations, for uneven stations, too."""
    shape, _ = elliptic(20, 380, 60, a=a, c=c, closed=True)
    keep = np.flatnonzero((np.arange(60) % 3 == 0) | (np.arange(60) < 30))
    shape = shaped(shape.positions[keep], shape.frames[keep, 0], (0, 0, 1.0), closed=True)
    expected = np.arctan2(shape.positions[:, 1] / a, shape.positions[:, 0] / c)
    found = compare(parse(f"ellipse:a={a},c={c},tension=2"), moved(shape, turn, SHIFT), NU)
    K = handbook.ellipse_tension(2.0, a, c, expected)
    np.testing.assert_allclose(found.K[:, 0], K, rtol=1e-6)
    assert found.judged.all()


@pytest.mark.parametrize(("start", "stop"), [(0, 90), (90, 180), (0, 180), (90, 270), (-90, 0)])
def test_parts_of_an_embedded_ellipse_between_symmetry_planes(start, stop):
    shape, _ = elliptic(start, stop, ends=(SYMMETRY, SYMMETRY))
    expected = np.arctan2(shape.positions[:, 1] / A, shape.positions[:, 0] / C)
    found = compare(parse("ellipse:a=6,c=10,tension=2"), moved(shape, TURNS[1], SHIFT), NU)
    np.testing.assert_allclose(
        found.K[:, 0], handbook.ellipse_tension(2.0, A, C, expected), rtol=1e-9
    )


def test_stations_near_free_ends_are_not_judged():
    """2 phi/pi below 0.125 from either end, the ends themselves included."""
    shape, _ = elliptic(0, 180, 33)  # 5.625 degrees apart: 0, 5.6 are too near, 11.25 is not
    found = compare(parse("newman-raju-surface:a=6,c=10,t=15,tension=1"), shape, NU)
    assert np.flatnonzero(~found.judged).tolist() == [0, 1, 31, 32]
    assert "leave out" in found.notes[-1]


def test_alike_axes_of_a_corner_want_a_direction():
    """A quarter circle does not tell its axes; the equation does (a/t, bending)."""
    shape, _ = elliptic(0, 90, a=C)
    text = "newman-raju-corner:a=10,c=10,t=20,bending=1"
    with pytest.raises(FrontMismatch, match=r"alike.*depth=y"):
        compare(parse(text), shape, NU)
    expected = np.degrees(np.arctan2(shape.positions[:, 1], shape.positions[:, 0]))
    np.testing.assert_allclose(
        compare(parse(text + ",depth=y"), shape, NU).angle, expected, atol=1e-6
    )
    np.testing.assert_allclose(
        compare(parse(text + ",depth=x"), shape, NU).angle, 90 - expected, atol=1e-6
    )


def test_a_circle_in_a_plate_wants_a_direction():
    shape, _ = elliptic(0, 360, a=C, closed=True)
    text = "newman-raju-embedded:a=10,c=10,t=16,tension=1"
    with pytest.raises(FrontMismatch, match="alike"):
        compare(parse(text), shape, NU)
    found = compare(parse(text + ",depth=0.6/0.8/0"), shape, NU)
    towards = np.abs(shape.positions @ [0.6, 0.8, 0.0]) / C
    np.testing.assert_allclose(np.abs(np.sin(np.radians(found.angle))), towards, atol=1e-6)


def test_a_direction_against_the_ends_is_refused():
    shape, _ = elliptic(0, 90)
    text = "newman-raju-corner:a=6,c=10,t=20,tension=1,depth=x"
    with pytest.raises(FrontMismatch, match="found along 0/1/0"):
        compare(parse(text), shape, NU)


@pytest.mark.parametrize(
    ("front", "text", "reason"),
    [
        (elliptic(0, 180)[0], "newman-raju-surface:a=5,c=10,t=15,tension=1",
         r"off by up to 1, .*about c = 10 and a = 6"),
        (elliptic(0, 180)[0], "newman-raju-surface:a=6,c=9,t=15,tension=1", "off by up to 1,"),
        (elliptic(0, 180)[0], "penny:a=6,tension=1", "meets no free surface"),
        (elliptic(0, 180)[0], "newman-raju-corner:a=6,c=10,t=15,tension=1", "off by up to"),
        (elliptic(0, 360, closed=True)[0], "newman-raju-surface:a=6,c=10,t=15,tension=1",
         "this one is closed"),
        (elliptic(0, 360, closed=True)[0], "penny:a=6,tension=1", "about 6.01 and 9.994"),
        (elliptic(0, 360, closed=True)[0], "through-crack:a=6,tension=1", "straight"),
        (elliptic(0, 180)[0], "through-crack:a=6,tension=1", "leaves its chord by 6"),
        (elliptic(0, 90, a=C)[0], "newman-raju-surface:a=10,c=10,t=15,tension=1", "off by up to"),
        (elliptic(0, 360, a=C, closed=True)[0], "round-bar-tension:a=10,b=20,force=1",
         "away from the centre"),
        (elliptic(0, 360, a=C, closed=True, inward=True)[0], "penny:a=10,tension=1",
         "towards the centre"),
    ],
)  # fmt: skip
def test_a_front_of_another_shape_is_refused_with_the_reason(front, text, reason):
    with pytest.raises(FrontMismatch, match=reason):
        compare(parse(text), front, NU)


def test_a_warped_front_is_refused():
    shape, _ = elliptic(0, 360, closed=True)
    bent = shape.positions + np.outer(0.5 * np.cos(2 * np.arange(33) / 33 * 2 * np.pi), [0, 0, 1.0])
    warped = FrontShape(bent, shape.frames, shape.s, shape.length, True, ())
    with pytest.raises(FrontMismatch, match="not plane"):
        compare(parse("ellipse:a=6,c=10,tension=1"), warped, NU)


# --- signs of the shear modes -----------------------------------------------------------------


def remote(stress, shape):
    """s22, s12, s23 in the frames of the stations, (n,) each."""
    e1, e2, e3 = np.moveaxis(shape.frames, 1, 0)
    return tuple(np.einsum("ni,ij,nj->n", e2, stress, v) for v in (e2, e1, e3))


@pytest.mark.parametrize("turn", TURNS)
@pytest.mark.parametrize("other_face", [False, True])
def test_an_inclined_penny_anywhere(turn, other_face):
    """K_I = 2 s22 sqrt(a/pi), K_II = 4 s12 sqrt(a/pi)/(2 - nu), K_III = (1 - nu) 4 s23 sqrt(a/pi)/
    (2 - nu): Sneddon (1946), Kassir and Sih (1966), from the remote stress in the local frames.
    """
    shape, _ = elliptic(10, 370, a=C, closed=True)
    shape = moved(flipped(shape) if other_face else shape, turn, SHIFT)
    load = np.array([0.3, -0.5, 0.8]) / np.sqrt(0.98)
    s22, s12, s23 = remote(7.0 * np.outer(load, load), shape)
    K = compare(parse("penny-inclined:a=10,tension=7,load=0.3/-0.5/0.8"), shape, NU).K
    unit = np.sqrt(C / np.pi)
    np.testing.assert_allclose(K[:, 0], 2 * s22 * unit, rtol=1e-6)
    np.testing.assert_allclose(K[:, 1], 4 * s12 * unit / (2 - NU), atol=1e-6 * 7 * unit)
    np.testing.assert_allclose(K[:, 2], (1 - NU) * 4 * s23 * unit / (2 - NU), atol=1e-6 * 7 * unit)


@pytest.mark.parametrize("turn", TURNS)
@pytest.mark.parametrize("other_face", [False, True])
@pytest.mark.parametrize(("a", "c"), [(6.0, 10.0), (10.0, 6.0)])
def test_an_ellipse_under_shear_anywhere(turn, other_face, a, c):
    """K_II and K_III as the handbook has them in its own axes, for any place and either face."""
    shape, _ = elliptic(10, 370, a=a, c=c, closed=True)
    shape = flipped(shape) if other_face else shape
    along = np.array([0.8, 0.6, 0.0])
    phi = np.arctan2(shape.positions[:, 1] / a, shape.positions[:, 0] / c)
    k2, k3 = handbook.ellipse_shear(0.8 * 3, 0.6 * 3, a, c, phi, NU)  # upper side at +z
    # With the other face as the upper one the same pull is a shear of the other sign, and e3 turns:
    # K_II of the traction along `along` on that side keeps e1.  K_III changes with e3.
    sign = -1.0 if other_face else 1.0
    there = turn @ along
    text = f"ellipse-shear:a={a},c={c},shear=3,along={'/'.join(f'{v:.15g}' for v in there)}"
    K = compare(parse(text), moved(shape, turn, SHIFT), NU).K
    assert np.isnan(K[:, 0]).all()
    np.testing.assert_allclose(K[:, 1], k2, atol=1e-5)
    np.testing.assert_allclose(K[:, 2], sign * k3, atol=1e-5)


@pytest.mark.parametrize("turn", TURNS)
@pytest.mark.parametrize("other_face", [False, True])
@pytest.mark.parametrize("start", [0, 90, 180, 270])
def test_half_an_ellipse_under_shear(turn, other_face, start):
    """Half of it between symmetry planes, on either side of either axis: K of the whole."""
    shape, _ = elliptic(start, start + 180, ends=(SYMMETRY, SYMMETRY))
    shape = flipped(shape) if other_face else shape
    along = np.array([1.0, 0.0, 0.0] if start % 180 == 0 else [0.0, 1.0, 0.0])
    phi = np.arctan2(shape.positions[:, 1] / A, shape.positions[:, 0] / C)
    k2, k3 = handbook.ellipse_shear(*(3 * along[:2]), A, C, phi, NU)
    text = f"ellipse-shear:a=6,c=10,shear=3,along={'/'.join(f'{v:.15g}' for v in turn @ along)}"
    K = compare(parse(text), moved(shape, turn, SHIFT), NU).K
    np.testing.assert_allclose(K[:, 1], k2, atol=1e-8)
    np.testing.assert_allclose(K[:, 2], (-1.0 if other_face else 1.0) * k3, atol=1e-8)


@pytest.mark.parametrize("e1", [1.0, -1.0])
def test_both_tips_of_an_inclined_through_crack(e1):
    """From the remote stress in the local frames: K = sqrt(pi a) (s22, s12, s23)."""
    load = np.array([0.48, 0.36, 0.8])
    shape = straight(e1)
    K = compare(parse("inclined-through-crack:a=4,tension=5,load=0.48/0.36/0.8"), shape, NU).K
    expected = np.stack(remote(5 * np.outer(load, load), shape), axis=1) * np.sqrt(4 * np.pi)
    np.testing.assert_allclose(K, expected, rtol=1e-12)
    antiplane = compare(parse("antiplane-centre-crack:a=4,shear=5,along=y"), shape, NU).K
    e3 = shape.frames[0, 2]
    np.testing.assert_allclose(antiplane[:, 2], 5 * e3[1] * np.sqrt(4 * np.pi), rtol=1e-12)


def test_a_twisted_bar_has_one_sign_whichever_face_is_upper():
    """Remote s_theta,z = 2 T r/(pi b^4) of a right-handed twist: s23 > 0 in every frame."""
    shape, _ = elliptic(0, 360, a=C, closed=True, inward=True)
    x, y, _ = shape.positions.T
    for one in (shape, flipped(shape)):
        e2, e3 = one.frames[:, 1], one.frames[:, 2]
        x, y, _ = one.positions.T
        swirl = np.stack([-y, x, 0 * x], axis=1) / C  # s_iz = tau swirl_i
        s23 = e2[:, 2] * (e3 * swirl).sum(axis=1)
        K = compare(parse("round-bar-torsion:a=10,b=20,torque=3"), one, NU).K
        np.testing.assert_allclose(np.sign(K[:, 2]), np.sign(s23))
        np.testing.assert_allclose(K[:, 2], handbook.round_bar_torsion(3.0, C, 20.0))


# --- the text ---------------------------------------------------------------------------------
