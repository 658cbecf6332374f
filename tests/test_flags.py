"""What a reader is told about stations and fronts, and when."""

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

import front3d
from front3d.errors import CaseError
from tests.meshes.structured import curved, impose
from tests.reference import exact

ELASTIC = exact.Elastic.from_young(1.0, 0.3)
RADII = (0.3, 0.36)


@pytest.fixture(scope="module")
def penny():
    mesh = curved("quarter_wedge", 6)
    solid = impose(mesh.solid, mesh.side, exact.penny_tension(ELASTIC, 1.0), "pull")
    solid = impose(solid, mesh.side, exact.penny_tension(ELASTIC, -1.0), "press")
    return impose(solid, mesh.side, exact.penny_shear(ELASTIC, 1.0), "shear")


def evaluate(solid, poisson=0.3, **options):
    result = front3d.evaluate(solid, young=1.0, poisson=poisson, radii=RADII, **options)
    return {front.step: front for front in result.fronts}


def test_nothing_is_said_about_a_sound_result(penny):
    for name in ("pull", "shear"):
        front = evaluate(penny)[name]
        assert front.warnings == ()
        assert set(front.flags) == {""}


def test_overlapping_faces_are_reported_flagged_and_not_hidden(penny):
    front = evaluate(penny)["press"]
    np.testing.assert_allclose(front.K[:, 0], -2 * np.sqrt(1 / np.pi), rtol=1e-3)
    assert set(front.flags) == {"faces overlap (K_I < 0)"}
    assert "overlap" in front.warnings[0]


@pytest.mark.parametrize("poisson", [0.2, 0.4])
def test_a_wrong_poisson_ratio_shows_in_J_against_G(poisson):
    solid = front3d.load(Path(__file__).parent / "data" / "surface_06_04.vtu")
    for wrong, said in ((0.3, False), (poisson, True)):
        front = front3d.evaluate(solid, young=1.0, poisson=wrong, steps=("tension",)).fronts[0]
        assert any("Poisson" in text for text in front.warnings) == said


def test_rings_that_reach_a_loaded_cut_are_flagged(penny):
    """The mesh ends 0.4 from the front: a ring to 0.5 passes its cut faces, which carry load."""
    front = front3d.evaluate(
        penny, young=1.0, poisson=0.3, radii=(0.3, 0.36, 0.5), steps=("pull",)
    ).fronts[0]
    assert any("reach a surface" in text for text in front.warnings)
    assert any("rings disagree" in flag for flag in front.flags)


def test_steps_are_chosen_by_name(penny):
    assert list(evaluate(penny, steps=("shear", "pull"))) == ["shear", "pull"]
    with pytest.raises(CaseError, match="found no step 'twist'; the file has pull, press, shear"):
        evaluate(penny, steps=("twist",))
    with pytest.raises(CaseError, match="no displacements"):
        evaluate(replace(penny, steps=()))


def test_progress_is_told_from_start_to_end(penny):
    told = []
    front3d.evaluate(
        penny, young=1.0, poisson=0.3, radii=RADII, progress=lambda *what: told.append(what)
    )
    fractions = [fraction for _, fraction in told]
    assert fractions == sorted(fractions)
    assert fractions[-1] == 1.0
