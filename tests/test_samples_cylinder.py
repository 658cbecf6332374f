"""The crack at the bore of a cylinder, and pressures on crack faces and on the surface at its ends.

Pressures on bore and faces are told apart by superposition; the evaluation is told of both.
"""

from dataclasses import replace
from functools import cache

import numpy as np
import pytest

from front3d.errors import CaseError
from front3d.handbook.plates import surface_crack
from front3d.options import Options
from front3d.pipeline import evaluate_solid
from front3d.results import FrontResult
from front3d.samples import SAMPLES, Sample, build
from front3d.solid import Material, Solid, Step
from tests.test_samples_mesh import crack_faces, jacobian_ratio, volume

P = 100.0


@cache
def solved(inside: float, faces: float, refine: int = 0, **parameters: float) -> Sample:
    return build(
        "cylinder-crack", bore_pressure=inside, face_pressure=faces, refine=refine, **parameters
    )


def evaluated(sample: Sample, **changes: float) -> FrontResult:
    options = replace(Options(**sample.case["options"]), methods=(), **changes)
    (front,) = evaluate_solid(sample.solid, sample.material, options).fronts
    return front


def angles(front: FrontResult, sample: Sample) -> np.ndarray:
    """Parametric angle of the ellipse, 0 at the bore."""
    p = sample.parameters
    return np.arctan2(
        front.positions[:, 1] / p["depth"], np.abs(front.positions[:, 0]) / p["half_length"]
    )


@pytest.mark.parametrize("cells", ["bricks", "tetra10"])
@pytest.mark.parametrize(("bore", "depth"), [(11.25, 12.0), (375.0, 1.5), (20.0, 6.0)])
def test_mesh_is_a_cylinder_cracked_at_its_bore(cells: str, bore: float, depth: float) -> None:
    spec = SAMPLES["cylinder-crack"]
    given = {"bore": bore, "depth": depth, "half_length": max(6.0, depth / 2), "half_height": 60.0}
    model = spec.mesh(spec.values({**given, "refine": 0}), cells)
    assert jacobian_ratio(model.part) > 0.02  # common practice
    section = np.pi * ((bore + 15.0) ** 2 - bore**2)
    assert volume(model.solid) == pytest.approx(section * 120.0, rel=1e-4)
    points = model.solid.points
    crack = np.concatenate([points[nodes].reshape(-1, 3) for _, nodes in crack_faces(model.solid)])
    assert crack[:, 1].min() == 0.0 and crack[:, 1].max() == pytest.approx(depth)


def test_wrong_parameters_are_refused() -> None:
    spec = SAMPLES["cylinder-crack"]
    with pytest.raises(CaseError, match=r"bore / thickness = 0.5, expected 0.75 to 25"):
        spec.values({"bore": 7.5})
    with pytest.raises(CaseError, match="found no load, expected bore_pressure or face_pressure"):
        build("cylinder-crack", bore_pressure=0)


def test_case_file_carries_the_pressures() -> None:
    spec = SAMPLES["cylinder-crack"]
    assert spec.options(spec.values({})) == {"surface_pressure": P}
    assert spec.options(spec.values({"bore_pressure": 0, "face_pressure": -3})) == {
        "face_pressure": -3.0
    }


@pytest.mark.parametrize("cells", ["bricks", "tetra10"])
def test_a_solid_under_pressure_all_around_has_no_K(cells: str) -> None:
    # Exact: u = - p (1 - 2 nu) x / E, with p on every surface, the crack's faces and the bore, too.
    # A rotation, which adds nothing, keeps the bore from looking like a symmetry plane.
    spec, material = SAMPLES["cylinder-crack"], Material(200e3, 0.3)
    mesh = spec.mesh(spec.values({"refine": 0}), cells).solid
    x = mesh.points
    turn = 1e-3 * np.stack([-x[:, 1], x[:, 0], np.zeros(len(x))], axis=1)
    squeezed = Step("all around", turn - P * (1 - 2 * 0.3) / 200e3 * x)
    solid = Solid(x, mesh.blocks, (squeezed,))
    size = P * np.sqrt(np.pi * 6.0)

    def ends(surface: float) -> tuple[FrontResult, np.ndarray, np.ndarray]:
        options = Options(
            face_pressure=P, surface_pressure=surface, unopened=True, methods=("interaction",)
        )
        (front,) = evaluate_solid(solid, material, options).fronts
        rings = front.methods["interaction"]
        return front, rings.columns["J_interaction"], rings.columns["ring_spread"][[0, -1]]

    front, J, spread = ends(P)
    assert np.abs(front.K[1:-1]).max() < 0.005 * size  # the coarse mesh; a third with refine = 1
    assert np.abs(front.K[[0, -1]]).max() < 0.015 * size
    assert spread.max() < 0.001 * size
    assert np.abs(J).max() < 1e-12 * size**2 / material.plane_strain_modulus
    front, J, spread = ends(0.0)
    assert np.abs(front.K[[0, -1]]).max() > 0.02 * size and spread.max() > 0.008 * size


@pytest.mark.slow
def test_face_pressure_is_the_difference_of_the_runs() -> None:
    # Superposition: three solves, each evaluated with the pressures that act in it.
    bore, both, faces = (evaluated(solved(*loads)) for loads in ((P, 0.0), (P, P), (0.0, P)))
    largest = faces.K[:, 0].max()
    np.testing.assert_allclose(both.K - bore.K, faces.K, atol=0.005 * largest)
    untold = evaluated(solved(P, P), face_pressure=0.0)
    assert (both.K[:, 0] - untold.K[:, 0]).min() > 0.2 * largest


@pytest.mark.slow
def test_the_cylinder_grows_as_lame_says() -> None:
    # Lame (1852), open ends: the outer radius grows by 2 p R_i^2 R_o / (E (R_o^2 - R_i^2)).  Far
    # from the crack, at the ends; a movement of the whole along y is taken out.
    sample = solved(P, 0.0)
    p, x = sample.parameters, sample.solid.points
    inner, outer = p["bore"], p["bore"] + p["thickness"]
    y = x[:, 1] + inner
    there = (np.abs(x[:, 0]) > p["half_height"] - 1e-6) & (np.hypot(y, x[:, 2]) > outer - 1e-6)
    u = sample.solid.steps[0].displacement[there]
    cosine, sine = y[there] / outer, x[there, 2] / outer
    shape = np.stack([np.ones_like(cosine), cosine], axis=1)
    growth, _ = np.linalg.lstsq(shape, u[:, 1] * cosine + u[:, 2] * sine, rcond=None)[0]
    expected = 2 * P * inner**2 * outer / (200e3 * (outer**2 - inner**2))
    assert growth == pytest.approx(expected, rel=2e-3)


@pytest.mark.slow
def test_pressurised_crack_by_the_equation_of_newman_and_raju() -> None:
    # Newman and Raju, J. Pressure Vessel Technol. 102 (1980) 342 and NASA TM-83200 (1981), from
    # memory: bore and crack faces under p, 4 <= R_i / t <= 10, claimed 5 %:
    #   K = p R_i / t sqrt(pi a / Q) 0.97 F_plate f_c,
    #   f_c = ((R_o^2 + R_i^2) / (R_o^2 - R_i^2) + 1 - 0.5 sqrt(a / t)) t / R_i.
    inner, t, a, c = 75.0, 15.0, 6.0, 10.0
    sample = solved(P, P, bore=inner)
    front = evaluated(sample)
    phi = angles(front, sample)
    away = (phi > np.pi / 16) & (phi < np.pi - np.pi / 16)
    outer = inner + t
    hoop = (outer**2 + inner**2) / (outer**2 - inner**2)
    f_c = (hoop + 1 - 0.5 * np.sqrt(a / t)) * t / inner
    plate = surface_crack(phi[away], a, c, t, tension=1.0)
    expected = P * inner / t * 0.97 * f_c * plate
    np.testing.assert_allclose(front.K[away, 0], expected, rtol=0.05)


@pytest.mark.slow
def test_pressure_at_the_ends_of_the_front_is_accounted_for() -> None:
    # Without it the rings of the end stations disagree by 2 % and J there is far off G.
    sample = solved(P, 0.0)
    told, untold = evaluated(sample), evaluated(sample, surface_pressure=0.0)
    largest = told.K[:, 0].max()
    spread = [f.methods["interaction"].columns["ring_spread"][0] for f in (told, untold)]
    assert spread[0] < 0.007 * largest < spread[1]
    np.testing.assert_allclose(told.K[1:-1], untold.K[1:-1], atol=1e-9 * largest)
    J = told.methods["interaction"].columns["J_interaction"]
    np.testing.assert_allclose(J, told.G, rtol=0.02)
