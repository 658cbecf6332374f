"""The round bar with a crack all around it, against exact limits and the published formulas."""

from functools import cache

import numpy as np
import pytest

from front3d.errors import CaseError
from front3d.handbook.bars import round_bar_tension, round_bar_torsion
from front3d.options import Options
from front3d.pipeline import evaluate_solid
from front3d.results import FrontResult
from front3d.samples import SAMPLES, build
from tests.test_samples_mesh import crack_faces, jacobian_ratio, volume

B = 20.0
FORCE, TORQUE = 100.0 * np.pi * B**2, 100.0 * np.pi * B**3 / 2


@cache
def fronts(ratio: float, cells: str = "bricks", **parameters: float) -> dict[str, FrontResult]:
    sample = build("round-bar", cells=cells, ligament=ratio * B, radius=B, **parameters)
    return {f.step: f for f in evaluate_solid(sample.solid, sample.material, Options()).fronts}


def published(x: float) -> tuple[float, float]:
    """K_I in tension and K_III in torsion for a = x b: Tada, Paris and Irwin (1985)."""
    a = x * B
    return float(round_bar_tension(FORCE, a, B)), float(round_bar_torsion(TORQUE, a, B))


@pytest.mark.parametrize(("x", "cells"), [(0.2, "bricks"), (0.9, "bricks"), (0.5, "tetra10")])
def test_mesh_is_a_bar_cracked_outside_the_ligament(x: float, cells: str) -> None:
    spec = SAMPLES["round-bar"]
    model = spec.mesh(spec.values({"ligament": x * B, "refine": 0}), cells)
    assert jacobian_ratio(model.part) > 0.02  # common practice
    assert volume(model.solid) == pytest.approx(np.pi * B**2 * 8 * B, rel=2e-4)
    points = model.solid.points
    radii = np.concatenate(
        [np.hypot(*points[f].T[:2]).ravel() for _, f in crack_faces(model.solid)]
    )
    assert radii.min() > 0.99 * x * B and radii.max() == pytest.approx(B)


def test_ratios_are_refused_outside_their_range() -> None:
    with pytest.raises(CaseError, match=r"ligament / radius = 0.95, expected 0.2 to 0.9"):
        SAMPLES["round-bar"].values({"ligament": 19.0})


@pytest.mark.slow
@pytest.mark.parametrize(
    ("cells", "x", "allowed"),
    [("bricks", 0.2, 0.001), ("bricks", 0.5, 0.0045), ("tetra10", 0.5, 0.0115)],
)
def test_torsion_is_pure_mode_III_by_the_published_formula(
    cells: str, x: float, allowed: float
) -> None:
    front = fronts(x, cells)["torsion"]
    expected = published(x)[1]
    assert front.closed
    assert np.abs(np.abs(front.K[:, 2]) / expected - 1).max() < allowed
    assert np.abs(front.K[:, :2]).max() < 1e-3 * expected
    # The upper half turns with +z: with e2 = +z and e1 towards the axis, e3 = e1 x e2 runs with the
    # shear s_z,theta, so that K_III > 0.
    assert (front.K[:, 2] > 0).all()


@pytest.mark.slow
def test_tension_by_the_published_formula() -> None:
    # 1 % claimed; at x = 0.2 the formula is that good (its limit x -> 0 is exact).
    front = fronts(0.2)["tension"]
    assert np.abs(front.K[:, 0] / published(0.2)[0] - 1).max() < 0.01
    assert np.abs(front.K[:, 1:]).max() < 1e-3 * published(0.2)[0]


@pytest.mark.slow
def test_a_shallow_crack_deviates_as_the_formulas_do() -> None:
    # Axisymmetric finite elements: torsion 1.9 % below the formula near x = 0.85, tension 2.9 %
    # above it near x = 0.8.  Half a per cent for the two meshes and for "near".
    at, (tension, torsion) = fronts(0.8), published(0.8)
    assert at["tension"].K[:, 0].mean() / tension == pytest.approx(1.029, abs=0.005)
    assert at["torsion"].K[:, 2].mean() / torsion == pytest.approx(0.981, abs=0.005)


@pytest.mark.slow
def test_the_bar_is_long_enough() -> None:
    # Saint-Venant: what the ends do dies out within a diameter.
    short, long = (fronts(0.5, refine=0, half_length=length * B) for length in (3, 6))
    for step, mode in (("tension", 0), ("torsion", 2)):
        assert short[step].K[0, mode] == pytest.approx(long[step].K[0, mode], rel=2e-3)
