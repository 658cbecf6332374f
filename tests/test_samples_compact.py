"""The compact specimen against the formula of ASTM E399 and its own compliance."""

from functools import cache

import numpy as np
import pytest

from front3d.errors import CaseError
from front3d.handbook.specimens import compact_specimen
from front3d.options import Options
from front3d.pipeline import evaluate_solid
from front3d.results import FrontResult
from front3d.samples import SAMPLES, Sample, build
from front3d.samples.elasticity import boundary_faces, traction_load
from tests.test_samples_mesh import jacobian_ratio, volume

W, FORCE, E = 50.0, 10e3, 200e3


@cache
def specimen(**parameters: float) -> tuple[Sample, FrontResult]:
    sample = build("compact-specimen", **parameters)
    (front,) = evaluate_solid(sample.solid, sample.material, Options()).fronts
    return sample, front


def standard(a: float, thickness: float) -> float:
    """K of ASTM E399, Srawley (1976); claimed within 0.5 %."""
    return float(compact_specimen(FORCE, thickness, W, a))


def mean_J(front: FrontResult) -> float:
    J = front.methods["interaction"].columns["J_interaction"]
    return float(np.trapezoid(J, front.s)) / front.length


def pin_forces(sample: Sample) -> np.ndarray:
    solid, (load,) = sample.solid, SAMPLES["compact-specimen"].loads(dict(sample.parameters))
    faces = [(k, f[load.on(solid.points[f])]) for k, f in boundary_faces(solid)]
    return traction_load(solid.points, faces, load.traction)


@pytest.mark.parametrize(("x", "cells"), [(0.3, "bricks"), (0.75, "bricks"), (0.5, "tetra10")])
def test_mesh_is_the_specimen_of_the_standard(x: float, cells: str) -> None:
    spec = SAMPLES["compact-specimen"]
    model = spec.mesh(spec.values({"crack": x * W, "refine": 0}), cells)
    assert jacobian_ratio(model.part) > 0.02  # common practice
    face = 1.25 * 1.2 - 2 * np.pi * 0.125**2  # 1.25 W by 1.2 W and two holes of 0.25 W
    assert volume(model.solid) == pytest.approx(face * W**2 * W / 2, rel=1e-3)


def test_pins_pull_with_the_force() -> None:
    spec = SAMPLES["compact-specimen"]
    values = spec.values({"refine": 0})
    solid = spec.mesh(values, "bricks").solid
    (load,) = spec.loads(values)
    faces = [(k, f[load.on(solid.points[f])]) for k, f in boundary_faces(solid)]
    force = traction_load(solid.points, faces, load.traction)
    upper = force[solid.points[:, 2] > 0].sum(axis=0)
    np.testing.assert_allclose(upper, [0, 0, FORCE], atol=2e-3 * FORCE)
    np.testing.assert_allclose(force.sum(axis=0), 0, atol=1e-9 * FORCE)


def test_ratios_are_refused_outside_their_range() -> None:
    with pytest.raises(CaseError, match=r"crack / width = 0.8, expected 0.3 to 0.75"):
        SAMPLES["compact-specimen"].values({"crack": 40.0})


@pytest.mark.slow
def test_plane_strain_specimen_by_the_standard() -> None:
    for x in (0.45, 0.55, 0.7):
        _, front = specimen(crack=x * W, free_sides=0)
        K = standard(x * W, W / 2)
        assert np.abs(front.K[:, 0] / K - 1).max() < 0.006
        assert mean_J(front) * E / (1 - 0.3**2) / K**2 == pytest.approx(1, abs=0.015)


@pytest.mark.slow
def test_mean_J_by_the_standard_where_E_is_one_number() -> None:
    # Without Poisson's ratio plane stress and plane strain are the same, and so is the mean of J.
    _, front = specimen(poisson=0.0, refine=0)
    assert mean_J(front) * E / standard(W / 2, W / 2) ** 2 == pytest.approx(1, abs=0.015)


@pytest.mark.slow
def test_mean_J_is_what_the_compliance_says() -> None:
    # Irwin and Kies: at constant force the mean of J is dU/da / B, U the strain energy; here by a
    # central difference, with no integral around the front.
    step, energies = 1.0, []
    for a in (W / 2 - step, W / 2 + step):
        sample, _ = specimen(crack=a, refine=0)
        energies.append(0.5 * (pin_forces(sample) * sample.solid.steps[0].displacement).sum())
    rate = (energies[1] - energies[0]) / (2 * step) / (W / 2)
    _, front = specimen(refine=0)
    assert mean_J(front) == pytest.approx(rate, rel=0.015)


@pytest.mark.slow
def test_J_with_free_faces_lies_between_plane_strain_and_plane_stress() -> None:
    # K^2 (1 - nu^2) / E is reached as the specimen gets thick, K^2 / E as it gets thin: at the
    # usual B = W / 2 the mean of J is some 6 % above the first.  K is largest in the middle.
    ratios = []
    for thickness in (W / 2, 2 * W):
        _, front = specimen(thickness=thickness, refine=0)
        ratios.append(mean_J(front) * E / (1 - 0.3**2) / standard(W / 2, thickness) ** 2)
        K = front.K[:, 0]
        middle = K[len(K) // 2]
        assert K.max() < 1.001 * middle
        assert middle > 1.02 * np.trapezoid(K, front.s) / front.length
        assert K[[0, -1]].max() < 0.85 * middle
    assert 1 / (1 - 0.3**2) > ratios[0] > ratios[1] > 1.0
    assert ratios[1] == pytest.approx(1.0, abs=0.02)
