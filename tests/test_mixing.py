"""The split of G and the directions of growth, against published limits and direct maximisation."""

import numpy as np
import pytest

from front3d.mixing import energy_by_mode, mix_columns, principal, tangential
from front3d.results import energy_release_rate
from front3d.solid import Material

STEEL = Material(200e3, 0.3)
RANDOM = np.random.default_rng(5)
MIXED = RANDOM.normal(size=(60, 3))
MIXED[:, 0] = np.abs(MIXED[:, 0])
ANGLES = np.linspace(-np.pi, np.pi, 40_001)


def one(*K: float) -> np.ndarray:
    return np.array([K], float)


def test_pure_mode_II_turns_by_the_published_angle() -> None:
    # Erdogan and Sih (1963): -70.5 degrees for positive K_II; exactly arccos(1/3), at which
    # s = K_II 3/2 sin(phi) cos(phi/2) = 2/sqrt(3) K_II.
    kink, K_eq = tangential(one(0, 2, 0))
    assert kink[0] == pytest.approx(-np.degrees(np.arccos(1 / 3)), abs=1e-9)
    assert kink[0] == pytest.approx(-70.53, abs=0.005)
    assert K_eq[0] == pytest.approx(2 * 2 / 3**0.5, rel=1e-12)
    assert tangential(one(0, -2, 0))[0][0] == pytest.approx(70.53, abs=0.005)


def test_pure_mode_I_goes_straight_on() -> None:
    assert [v[0] for v in tangential(one(3, 0, 0))] == [0.0, 3.0]
    assert [v[0] for v in principal(one(3, 0, 0))] == pytest.approx([0.0, 0.0, 3.0], abs=1e-8)


def test_pure_mode_III_twists_by_45_degrees() -> None:
    # Schollmann et al. (2002): principal stress of pure shear.
    kink, twist, K_eq = principal(np.array([[0, 0, 5.0], [0, 0, -5.0]]))
    assert kink == pytest.approx([0, 0], abs=1e-6)
    assert twist == pytest.approx([45, -45])
    assert K_eq == pytest.approx([5, 5])
    assert np.isnan(tangential(one(0, 0, 5.0))).all()  # a criterion without K_III says nothing


def test_scatter_under_mode_III_has_no_kink_by_a_criterion_without_it() -> None:
    noise = np.random.default_rng(6).normal(size=(20, 2)) * 1e-3
    kink, K_eq = tangential(np.column_stack([np.abs(noise[:, 0]), noise[:, 1], np.ones(20)]))
    assert np.isnan(kink).all() and np.isnan(K_eq).all()


def test_both_criteria_agree_without_mode_III() -> None:
    K = MIXED * (1, 1, 0)
    kink, twist, K_eq = principal(K)
    expected_kink, expected_K = tangential(K)
    assert kink == pytest.approx(expected_kink, abs=1e-5)
    assert K_eq == pytest.approx(expected_K, rel=1e-12)
    assert twist == pytest.approx(np.zeros(len(K)), abs=1e-12)


def stresses_on_a_cylinder(K: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """sqrt(2 pi r) times the tangential and the along-front shear stress at ANGLES, turned from the
    Cartesian stresses of the near-tip field (Williams 1957, as in any textbook).
    """
    k1, k2, k3 = K
    s, c = np.sin(ANGLES / 2), np.cos(ANGLES / 2)
    s3, c3 = np.sin(1.5 * ANGLES), np.cos(1.5 * ANGLES)
    s11 = k1 * c * (1 - s * s3) - k2 * s * (2 + c * c3)
    s22 = k1 * c * (1 + s * s3) + k2 * s * c * c3
    s12 = k1 * c * s * c3 + k2 * c * (1 - s * s3)
    s13, s23 = -k3 * s, k3 * c
    stress = np.array([[s11, s12, s13], [s12, s22, s23], [s13, s23, 0 * s]])
    tangential_way = np.array([-np.sin(ANGLES), np.cos(ANGLES), 0 * ANGLES])
    traction = np.einsum("ijn,jn->in", stress, tangential_way)
    return np.einsum("in,in->n", traction, tangential_way), traction[2]


@pytest.mark.parametrize("K", MIXED[:12])
def test_directions_are_those_of_the_largest_stress_of_the_exact_field(K: np.ndarray) -> None:
    s, t = stresses_on_a_cylinder(K)
    kink, K_eq = tangential(K[None])
    assert kink[0] == pytest.approx(np.degrees(ANGLES[s.argmax()]), abs=0.02)
    assert K_eq[0] == pytest.approx(s.max(), rel=1e-6)
    # The largest eigenvalue of [[s, t], [t, 0]]: the stress along the front is neglected.
    tensors = np.stack([np.stack([s, t], -1), np.stack([t, 0 * s], -1)], -2)
    values, vectors = np.linalg.eigh(tensors)
    best = int(values[:, 1].argmax())
    kink, twist, K_eq = principal(K[None])
    assert kink[0] == pytest.approx(np.degrees(ANGLES[best]), abs=0.02)
    assert K_eq[0] == pytest.approx(values[best, 1], rel=1e-6)
    along = vectors[best, :, 1] * np.sign(vectors[best, 0, 1])
    assert twist[0] == pytest.approx(np.degrees(np.arctan2(along[1], along[0])), abs=0.02)


def test_the_published_condition_of_the_largest_principal_stress_holds() -> None:
    """Where the derivative vanishes, after the Crack Paths 2012 proceedings, p. 224, eq. 15."""
    kink, _, _ = principal(MIXED)
    k1, k2, k3 = MIXED.T
    t = np.tan(np.radians(kink) / 2)
    A, B = 4 * k1 - 12 * k2 * t, -6 * k1 * t - k2 * (6 - 12 * t * t)
    root = np.sqrt(A * A + 64 * k3**2 * (1 + t * t) ** 2)
    residual = B + (A * B - 32 * k3**2 * t * (1 + t * t) ** 2) / root
    assert np.abs(residual / np.linalg.norm(MIXED, axis=1)).max() < 1e-5


def test_closed_faces_have_no_direction() -> None:
    """K_I below nought by more than scatter: NaN, by the rule in `mixing`; the split of G stays."""
    columns = mix_columns(np.array([[-1.0, 0.5, 0.2], [0, 0, 0]]), STEEL)
    for name, values in columns.items():
        assert np.isnan(values[0]) == (not name.startswith("G_")), name
        assert np.isnan(values[1]) == (not name.startswith("G_")), name


def test_scatter_of_K_I_around_nought_is_no_closure() -> None:
    noisy = tangential(one(-0.005, 1, 0))
    assert [v[0] for v in noisy] == [v[0] for v in tangential(one(0, 1, 0))]
    assert np.isnan(tangential(one(-0.02, 1, 0))).all()


def test_parts_of_G_sum_to_G() -> None:
    split = energy_by_mode(MIXED, STEEL)
    assert split.sum(axis=1) == pytest.approx(energy_release_rate(MIXED, STEEL), rel=1e-12)
    # Irwin: K_III^2 (1 + nu)/E.
    assert split[:, 2] == pytest.approx(MIXED[:, 2] ** 2 * 1.3 / 200e3, rel=1e-12)


def test_criteria_do_not_depend_on_the_unit_of_K() -> None:
    for criterion in (tangential, principal):
        *angles, K_eq = criterion(MIXED)
        *scaled_angles, scaled_K = criterion(1e4 * MIXED)
        assert np.allclose(angles, scaled_angles, atol=1e-5)
        assert scaled_K == pytest.approx(1e4 * K_eq)
