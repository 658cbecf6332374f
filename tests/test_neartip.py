"""The auxiliary fields on a straight and on a curved, twisted front.

On the curved front every quantity that the kernel gives in closed form is compared with finite
differences of the field itself, u = U_i(x1, x2) e_i(s), evaluated through the nearest point.
"""

import numpy as np
import pytest

from front3d.crack.curve import fit_curve
from front3d.fields.neartip import auxiliary, near_tip, polar

SHEAR, POISSON = 1.3, 0.27
LAME = 2 * SHEAR * POISSON / (1 - 2 * POISSON)
YOUNG = 2 * SHEAR * (1 + POISSON)


def planar_field(x1, x2, side=0):
    u, first, second = np.empty((3, 3)), np.empty((3, 3, 2)), np.empty((3, 3, 3))
    near_tip(*polar(x1, x2, side), SHEAR, POISSON, u, first, second)
    return u, first, second


def test_opening_behind_the_front_gives_unit_intensities():
    """K = E'/8 sqrt(2 pi/r) Du (modes I, II) and mu/4 sqrt(2 pi/r) Du_3 (Irwin 1957)."""
    r = 0.01
    jump = planar_field(-r, 0.0, 1)[0] - planar_field(-r, -0.0, -1)[0]
    modulus = YOUNG / (1 - POISSON**2)
    root = np.sqrt(2 * np.pi / r)
    expected = np.zeros((3, 3))
    expected[0, 1] = expected[1, 0] = 8 / modulus / root
    expected[2, 2] = 4 / SHEAR / root
    np.testing.assert_allclose(jump, expected, atol=1e-14)


def test_stress_ahead_of_the_front_is_the_definition_of_K():
    """sqrt(2 pi r) (sigma_22, sigma_12, sigma_23) = (K_I, K_II, K_III) straight ahead."""
    r = 0.3
    _, first, _ = planar_field(r, 0.0)
    trace = LAME * (first[:, 0, 0] + first[:, 1, 1])
    stress = np.stack(
        [
            trace + 2 * SHEAR * first[:, 1, 1],
            SHEAR * (first[:, 0, 1] + first[:, 1, 0]),
            SHEAR * first[:, 2, 1],
        ]
    )
    np.testing.assert_allclose(np.sqrt(2 * np.pi * r) * stress, np.eye(3), atol=1e-13)


def test_derivatives_are_those_of_the_displacement():
    x, step = np.array([-0.3, 0.5]), 1e-6
    _, first, second = planar_field(*x)
    for axis, e in enumerate(np.eye(2) * step):
        plus, minus = planar_field(*(x + e)), planar_field(*(x - e))
        np.testing.assert_allclose(first[..., axis], (plus[0] - minus[0]) / (2 * step), atol=1e-9)
        np.testing.assert_allclose(
            second[..., axis : axis + 2], (plus[1] - minus[1]) / (2 * step), atol=1e-9
        )


def test_the_angle_follows_the_side_of_the_crack():
    below_but_upper = polar(-1.0, -0.01, 1)[1]
    above_but_lower = polar(-1.0, 0.01, -1)[1]
    assert below_but_upper == pytest.approx(np.pi + 0.01, abs=1e-5)
    assert above_but_lower == pytest.approx(-np.pi - 0.01, abs=1e-5)
    assert polar(-1.0, 0.01, 1)[1] == pytest.approx(np.pi - 0.01, abs=1e-5)


@pytest.fixture(scope="module")
def helix():
    """A curved, twisted front: a helix whose crack normal turns as well, on fine knots."""
    t = np.linspace(0.0, 2.0, 400)
    nodes = np.stack([2 * np.cos(t), 2 * np.sin(t), 0.5 * t], axis=1)
    radial = np.stack([np.cos(t), np.sin(t), 0 * t], axis=1)
    axial = np.stack([0 * t, 0 * t, 1 + 0 * t], axis=1)
    tilt = (0.3 * t)[:, None]
    return fit_curve(nodes, np.cos(tilt) * axial + np.sin(tilt) * radial, closed=False)


class AuxiliaryAt:
    """Auxiliary fields at a point of space, turned to global axes."""

    def __init__(self, curve, x):
        s, _ = curve.project(x[None], np.array([curve.length / 2]))
        place, frame, turning = curve.frames(s)
        self.frame, self.turning = frame[0], turning[0]
        self.local = self.frame @ (x - place[0])
        r, angle = polar(self.local[0], self.local[1], 0)
        shapes = [(3, 3, 3), (3, 3, 3), (3, 3), (3, 3, 2), (3, 3, 9)]
        arrays = [np.zeros(shape) for shape in shapes]
        auxiliary(r, angle, self.turning, SHEAR, POISSON, *arrays)
        self.gradient, self.stress, self.divergence, self.incompatibility, _ = arrays
        self.u = planar_field(self.local[0], self.local[1])[0]

    def turned(self, tensors):
        return np.einsum("ia,mij,jb->mab", self.frame, tensors, self.frame)


def differences(curve, x, value, step=1e-5):
    """[d value / dx_k] for k = 1, 2, 3 along global axes."""
    out = []
    for e in np.eye(3) * step:
        out.append(
            (value(AuxiliaryAt(curve, x + e)) - value(AuxiliaryAt(curve, x - e))) / (2 * step)
        )
    return np.stack(out, axis=-1)


@pytest.mark.parametrize("offset", [(0.2, 0.1), (-0.15, 0.2), (-0.1, -0.25)])
def test_gradients_on_a_curved_front(helix, offset):
    place, frame, _ = helix.frames(np.array([helix.length / 2]))
    x = place[0] + np.array([*offset, 0.0]) @ frame[0]
    here = AuxiliaryAt(helix, x)
    numeric = differences(helix, x, lambda f: f.u @ f.frame)  # [mode, i, k]
    np.testing.assert_allclose(here.turned(here.gradient), numeric, atol=1e-7)


@pytest.mark.parametrize("offset", [(0.2, 0.1), (-0.15, 0.2), (-0.1, -0.25)])
def test_divergence_of_the_stress_on_a_curved_front(helix, offset):
    place, frame, _ = helix.frames(np.array([helix.length / 2]))
    x = place[0] + np.array([*offset, 0.0]) @ frame[0]
    here = AuxiliaryAt(helix, x)
    numeric = differences(helix, x, lambda f: f.turned(f.stress))  # [mode, i, j, k]
    divergence = np.einsum("mijj->mi", numeric)
    assert np.abs(here.divergence).max() > 0.1  # there is something to compare
    np.testing.assert_allclose(here.divergence @ here.frame, divergence, atol=1e-6)


@pytest.mark.parametrize("offset", [(0.2, 0.1), (-0.15, 0.2), (-0.1, -0.25)])
def test_incompatibility_of_the_strain_on_a_curved_front(helix, offset):
    """sigma_ij (u_i,jk - eps_ij,k) along e1 and e2, for an arbitrary constant sigma."""
    place, frame, _ = helix.frames(np.array([helix.length / 2]))
    x = place[0] + np.array([*offset, 0.0]) @ frame[0]
    here = AuxiliaryAt(helix, x)
    sigma = np.array([[1.0, 0.4, -0.3], [0.4, -0.7, 0.6], [-0.3, 0.6, 0.5]])

    def mismatch(f):
        stress = f.turned(f.stress)
        trace = np.einsum("mii->m", stress)
        strain = (1 + POISSON) / YOUNG * stress - POISSON / YOUNG * np.einsum(
            "m,ij->mij", trace, np.eye(3)
        )
        return np.einsum("ij,mij->m", sigma, f.turned(f.gradient) - strain)

    numeric = differences(helix, x, mismatch) @ here.frame.T  # [mode, k], along the frame
    local = here.frame @ sigma @ here.frame.T
    expected = np.einsum("i,mik->mk", local[:, 2], here.incompatibility)
    np.testing.assert_allclose(expected, numeric[:, :2], atol=1e-6)
