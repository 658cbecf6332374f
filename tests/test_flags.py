"""What a reader is told about stations and fronts, and when."""

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

import front3d
from front3d.errors import CaseError, CrackError, MethodError
from front3d.solid import CellBlock, Solid, Step
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


@pytest.mark.slow
@pytest.mark.parametrize("poisson", [0.2, 0.4])
def test_a_wrong_poisson_ratio_shows_in_J_against_G(poisson):
    solid = front3d.load(Path(__file__).parent / "data" / "surface_06_04.vtu")
    for wrong, said in ((0.3, False), (poisson, True)):
        front = front3d.evaluate(solid, young=1.0, poisson=wrong, steps=("tension",)).fronts[0]
        assert any("Poisson" in text for text in front.warnings) == said


def test_rings_that_cut_a_surface_are_named_and_take_its_traction_from_the_stresses(penny):
    """The mesh ends 0.4 from the front: a ring to 0.5 passes its cut faces, which carry load:
    measured 0.3 % off.
    """
    front = front3d.evaluate(
        penny, young=1.0, poisson=0.3, radii=(0.3, 0.36, 0.5), steps=("pull",)
    ).fronts[0]
    assert any("reach a surface" in text for text in front.warnings)
    rings = front.methods["interaction"].rings
    np.testing.assert_allclose(rings.K[2, :, 0], rings.K[0, :, 0], rtol=5e-3)


def test_a_single_ring_vouches_for_nothing(penny):
    """Its spread is unknown, not zero."""
    front = front3d.evaluate(penny, young=1.0, poisson=0.3, radii=(0.3,), steps=("pull",)).fronts[0]
    assert np.isnan(front.methods["interaction"].columns["ring_spread"]).all()
    assert any("single ring" in text for text in front.warnings)


def test_one_bad_front_does_not_stop_the_others(penny):
    """A second crack on so coarse a mesh that no ring fits is left out, and said to be."""
    far = np.array([10.0, 0.0, 0.0])
    mesh = curved("hexahedron", 2, around=12, half=0.45)
    field = exact.moved(exact.penny_tension(ELASTIC, 1.0), np.eye(3), far)
    coarse = impose(
        replace(mesh, solid=replace(mesh.solid, points=mesh.solid.points + far)).solid,
        mesh.side,
        field,
    )
    count = len(penny.points)
    both = Solid(
        np.vstack([penny.points, coarse.points]),
        (*penny.blocks, *(CellBlock(b.kind, b.nodes + count) for b in coarse.blocks)),
        (Step("pull", np.vstack([penny.steps[0].displacement, coarse.steps[0].displacement])),),
    )
    result = front3d.evaluate(both, young=1.0, poisson=0.3)
    assert len(result.fronts) == 1
    assert any("left out" in text and "refine" in text for text in result.warnings)
    with pytest.raises(MethodError, match="refine"):
        front3d.evaluate(coarse, young=1.0, poisson=0.3)


def test_options_are_taken_in_plain_words(penny):
    """A plane as text, one radius as a number, one step as its name."""
    assert [
        f.step
        for f in front3d.evaluate(penny, young=1.0, poisson=0.3, radii=0.3, steps="pull").fronts
    ] == ["pull"]
    with pytest.raises(CrackError, match="the plane z=5 holds no outer face"):
        front3d.find_fronts(penny, crack_plane="z=5")
    with pytest.raises(CaseError, match="unknown option 'ring'"):
        front3d.find_fronts(penny, ring=3)


def test_steps_are_chosen_by_name(penny):
    assert list(evaluate(penny, steps=("shear", "pull"))) == ["shear", "pull"]
    with pytest.raises(CaseError, match="found no step 'twist'; the steps are pull, press, shear"):
        evaluate(penny, steps=("twist",))
    for sum_ in ("both = pull-shear", "both = 2*(pull + shear)"):
        with pytest.raises(CaseError, match="blanks stand around a minus, and brackets are not"):
            evaluate(penny, combine=(sum_,))
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
