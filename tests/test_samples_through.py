"""Samples with a straight through crack against exact and published plane solutions."""

from functools import cache

import numpy as np
import pytest

from front3d.errors import CaseError
from front3d.handbook.rows import collinear_row
from front3d.handbook.through import centre_crack, edge_crack, inclined_through_crack
from front3d.options import Options
from front3d.pipeline import evaluate_solid
from front3d.results import FrontResult
from front3d.samples import SAMPLES, build
from tests.test_samples_mesh import jacobian_ratio

NAMES = ("through-crack", "collinear-row", "slanted-crack")
ALLOWED = {"bricks": 0.001, "tetra10": 0.0035}


@cache
def fronts(name: str, cells: str = "bricks", **parameters: float) -> tuple[FrontResult, ...]:
    sample = build(name, cells=cells, **parameters)
    return evaluate_solid(sample.solid, sample.material, Options()).fronts


def average(front: FrontResult, values: np.ndarray) -> float:
    return float(np.trapezoid(values, front.s)) / front.length


@pytest.mark.parametrize("cells", ["bricks", "tetra10"])
@pytest.mark.parametrize("name", NAMES)
def test_meshes_are_valid(name: str, cells: str) -> None:
    spec = SAMPLES[name]
    model = spec.mesh(spec.values({"refine": 0}), cells)
    assert jacobian_ratio(model.part) > 0.02  # common practice
    width = {"through-crack": 50.0, "collinear-row": 20.0, "slanted-crack": 400.0}[name]
    assert np.abs(model.solid.points[:, 0]).max() == width


@pytest.mark.slow
def test_meshes_are_valid_over_the_whole_range() -> None:
    for refine in (0, 2):
        for edge in (0, 1):
            for crack, height, thickness in ((0.01, 1.0, 0.2), (0.9, 20.0, 0.05), (0.3, 1.0, 6.0)):
                given = {"crack": crack, "width": 1.0, "half_height": height, "edge": edge}
                for free in (0, 1):
                    spec = SAMPLES["through-crack"]
                    more = {"thickness": thickness, "free_sides": free, "refine": refine}
                    for cells in ("bricks", "tetra10"):
                        part = spec.mesh(spec.values({**given, **more}), cells).part
                        assert jacobian_ratio(part) > 0.02, (given, more, cells)


def test_ratios_are_refused_outside_their_range() -> None:
    with pytest.raises(CaseError, match=r"crack / width = 0.95, expected 0.01 to 0.9"):
        SAMPLES["through-crack"].values({"crack": 9.5, "width": 10.0})
    with pytest.raises(CaseError, match=r"half_length / half_period = 0.02, expected 0.05 to 0.9"):
        SAMPLES["collinear-row"].values({"half_length": 1.0, "half_period": 50.0})
    with pytest.raises(CaseError, match=r"body / half_length = 1.5, expected 2 to 100"):
        SAMPLES["slanted-crack"].values({"half_length": 10.0, "body": 15.0})
    with pytest.raises(CaseError, match=r"free_sides: found 0.5, expected a whole number"):
        SAMPLES["through-crack"].values({"free_sides": 0.5})


@pytest.mark.slow
@pytest.mark.parametrize("cells", ["bricks", "tetra10"])
def test_row_of_cracks_by_the_tangent_formula(cells: str) -> None:
    # Exact: Westergaard (1939), Irwin (1957).
    for a in (2.0, 10.0, 16.0):
        for front in fronts("collinear-row", cells, half_length=a, half_period=20.0):
            expected = float(collinear_row(100.0, a, 20.0))
            assert np.abs(front.K[:, 0] / expected - 1).max() < ALLOWED[cells], a
            assert np.abs(front.K[:, 1:]).max() < ALLOWED[cells] * expected


@pytest.mark.slow
@pytest.mark.parametrize("cells", ["bricks", "tetra10"])
def test_slanted_crack_by_the_exact_solution(cells: str) -> None:
    # Rotation of the stress: K_II > 0 at the tip whose e1 points along the load axis.
    for angle in (30.0, 60.0):
        K_I, K_II = (float(K) for K in inclined_through_crack(100.0, 10.0, np.radians(angle)))
        for front in fronts("slanted-crack", cells, angle=angle):
            tip = np.sign(front.frames[0, 0, 0])
            expected = np.array([K_I, tip * K_II, 0.0])
            assert np.abs(front.K - expected).max() < ALLOWED[cells] * np.hypot(K_I, K_II)


@pytest.mark.slow
def test_the_plate_around_a_slanted_crack_is_large_enough() -> None:
    # What a finite body adds goes with (a / body)^2: Saint-Venant, the crack as a dipole.
    size = 100.0 * np.sqrt(np.pi * 10.0) / 2
    excess = [
        fronts("slanted-crack", body=body)[0].K[0, 0] / size - 1 for body in (100.0, 200.0, 400.0)
    ]
    assert 3.5 < excess[0] / excess[1] < 4.5 and excess[2] < 1e-3


@pytest.mark.slow
@pytest.mark.parametrize("cells", ["bricks", "tetra10"])
def test_plane_strain_plates_by_the_published_formulas(cells: str) -> None:
    # Tada, Paris and Irwin (1985): claimed within 0.1 % in the middle and 0.5 % at an edge.
    for x in (0.1, 0.5, 0.8):
        a, b = 50.0 * x, 50.0
        for front in fronts("through-crack", cells, crack=a, width=b):
            deviation = np.abs(front.K[:, 0] / centre_crack(100.0, a, b) - 1).max()
            assert deviation < ALLOWED[cells], x
        (front,) = fronts("through-crack", cells, crack=a, width=b, edge=1)
        deviation = np.abs(front.K[:, 0] / edge_crack(100.0, a, b) - 1).max()
        # Up to 0.6 % are the formula's: so far from it are the bricks.
        assert deviation < {"bricks": 0.0065, "tetra10": 0.015}[cells], x


@pytest.mark.slow
def test_free_sides_lie_between_plane_strain_and_plane_stress() -> None:
    # The mean energy release rate of a plate is its compliance's derivative, which lies between
    # K^2 (1 - nu^2) / E (held sides) and K^2 / E (no stress across), and tends to the second as the
    # plate gets thin.  K falls at the free faces; in plates thinner than the crack it is largest in
    # the middle.
    K = float(centre_crack(100.0, 10.0, 50.0))
    ratios = []
    for thickness in (5.0, 15.0, 40.0):
        front, _ = fronts("through-crack", thickness=thickness, free_sides=1, refine=0)
        ratios.append(200e3 * average(front, front.G) / K**2)
        mean = average(front, front.K[:, 0])
        middle = front.K[len(front.s) // 2, 0]
        assert mean > front.K[[0, -1], 0].max()
        if thickness < 10.0:
            assert front.K[:, 0].max() < 1.001 * middle and middle > mean
        assert front.ends == ("free surface", "free surface")
    assert 1.0 > ratios[0] > ratios[1] > ratios[2] > 0.91
    assert ratios[0] == pytest.approx(1.0, abs=0.015)
