"""The further methods beside the interaction integral: asked for by name, refused with a reason."""

import sys
from pathlib import Path

import numpy as np
import pytest

import front3d
from front3d.errors import CaseError
from front3d.samples import build

ROOT = Path(__file__).parent.parent
DATA = ROOT / "tests" / "data"


def test_an_unknown_method_is_refused_by_name():
    solid = front3d.load(DATA / "row.vtu")
    with pytest.raises(CaseError, match=r"found 'guess' \(expected one of interaction, closure"):
        front3d.evaluate(solid, young=1.0, poisson=0.3, methods="guess")


def test_a_method_that_does_not_apply_says_why_and_leaves_the_others():
    """The row's mesh holds no faces ahead of the fronts: closure has no upper side there."""
    solid = front3d.load(DATA / "row.vtu")
    result = front3d.evaluate(solid, young=1.0, poisson=0.3)
    plain = front3d.evaluate(solid, young=1.0, poisson=0.3, methods="interaction")
    for front, alone in zip(result.fronts, plain.fronts, strict=True):
        assert list(front.methods) == ["interaction", "opening"]
        assert any("closure does not apply" in text for text in front.notes)
        assert list(alone.methods) == ["interaction"]
        np.testing.assert_array_equal(front.K, alone.K)


@pytest.mark.slow
def test_three_methods_agree_on_quarter_point_bricks():
    """No exact value is used: each vouches for the others.  Measured: 0.4 % of the largest K."""
    sample = build("penny", tilt=30.0)
    (front,) = front3d.evaluate(
        sample.solid, young=sample.material.young, poisson=sample.material.poisson
    ).fronts
    assert list(front.methods) == ["interaction", "closure", "opening"]
    for result in front.methods.values():
        assert np.abs(result.K - front.K).max() < 0.01 * np.abs(front.K).max()


@pytest.mark.slow
def test_the_readme_states_how_the_methods_agree_on_embedded_models():
    """Its table is printed by a script; one model of each kind of cells is printed again here."""
    sys.path.insert(0, str(ROOT / "benchmarks"))
    try:
        from methods_agree import rows
    finally:
        sys.path.pop(0)
    readme = (ROOT / "README.md").read_text(encoding="utf-8")
    printed = list(rows(["penny"], ["bricks", "tetra10", "brick8"]))
    assert len(printed) == 3
    for row in printed:
        *head, closure, opening, rings = (part.strip() for part in row.strip("| ").split("|"))
        (line,) = [line for line in readme.splitlines() if line.startswith("| " + " | ".join(head))]
        stated = [float(part.strip(" %")) for part in line.strip("| ").split("|")[-3:]]
        found = [float(part.strip(" %")) for part in (closure, opening, rings)]
        np.testing.assert_allclose(found, stated, rtol=0.2)
