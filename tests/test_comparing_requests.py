"""What is asked of a comparison: the text, its refusals, and which fronts and steps it is for."""

import numpy as np
import pytest

from front3d.errors import CaseError
from front3d.handbook.catalogue import SOLUTIONS, described, parse
from front3d.handbook.comparing import compare, compare_fronts
from front3d.handbook.placing import FREE, SYMMETRY, FrontMismatch
from front3d.solid import Step
from tests.front_shapes import NU, elliptic, straight


def test_a_request_is_read():
    request = parse('newman-raju-surface: a=6, c = 10,t=15,bending=2e2, step="pull, then bend"')
    assert request.solution is SOLUTIONS["newman-raju-surface"]
    assert request.step == "pull, then bend"
    assert request.numbers == {"a": 6, "c": 10, "t": 15, "tension": 0, "bending": 200}
    assert parse("penny-inclined:a=1,tension=2,load=-z").numbers["load"] == (0, 0, -1)


@pytest.mark.parametrize(
    ("text", "said"),
    [
        ("penny:a=1,bending=2", "no argument 'bending'; it takes"),
        ("newman-raju-surfaces:a=1", "did you mean 'newman-raju-surface'"),
        ("", "--compare help"),
        ("penny:a=1,tensoin=2", "no argument 'tensoin', did you mean 'tension'"),
        ("penny:a=1,tension", "found 'tension', expected name=value"),
        ("penny:a=1,a=2,tension=1", "found a twice"),
        ("penny:a=one,tension=1", r"a: found 'one', expected a number \(radius\)"),
        ("penny:a=nan,tension=1", "found 'nan'"),
        ("newman-raju-surface:c=10,tension=1", r"found no a \(depth\), t \(thickness"),
        ("newman-raju-surface:a=6,c=10,t=15", "found no load, expected tension or bending"),
        ("penny-inclined:a=1,tension=2,load=1/2", "expected a direction"),
        ("penny-inclined:a=1,tension=2", "found no load"),
    ],
)
def test_a_wrong_request_says_what_is_wrong(text, said):
    with pytest.raises(CaseError, match=said):
        parse(text)


def test_the_list_names_every_solution_and_argument():
    lines = described()
    for name, solution in SOLUTIONS.items():
        start = next(i for i, line in enumerate(lines) if line.startswith(f"{name}:"))
        listed = lines[start + 2 : start + 2 + len(solution.arguments)]
        assert [line.split()[0] for line in listed] == list(solution.arguments)
        assert solution.source in lines[start + 1]


def test_out_of_range_is_an_error_and_no_mismatch():
    shape, _ = elliptic(0, 180)
    with pytest.raises(CaseError, match="comparison with newman-raju-surface: a/t: found 1") as e:
        compare(parse("newman-raju-surface:a=6,c=10,t=6,tension=1"), shape, NU)
    assert not isinstance(e.value, FrontMismatch)


@pytest.mark.parametrize(
    ("text", "front"),
    [
        ("inclined-through-crack:a=1,tension=1,load=0.7071/0.7071/0", "straight"),
        ("antiplane-centre-crack:a=1,shear=1,along=1/0/0", "straight"),
        ("penny-shear:a=10,shear=1,along=0/0/1", "penny"),
        ("penny-inclined:a=10,tension=1,load=1/0/0", "penny"),
    ],
)
def test_a_load_that_leaves_the_crack_alone_is_refused(text, front):
    """A traction of zero on the crack gives no K by any of the solutions: nothing to divide by."""
    penny, _ = elliptic(0, 360, a=10, c=10, closed=True)
    shape = straight(1.0) if front == "straight" else penny
    with pytest.raises(FrontMismatch, match="does not act on this crack"):
        compare(parse(text), shape, NU)


def test_the_thickness_of_a_specimen_is_that_of_its_front():
    """ASTM E399: B is the length of the front; a half model has half of it."""
    text = "compact-specimen:force=1,W=50,a=25,B={}"
    for ends, share in (((FREE, FREE), 1.0), ((FREE, SYMMETRY), 0.5), ((SYMMETRY, SYMMETRY), 0.5)):
        front = straight(1.0, ends)
        whole = front.length / share
        found = compare(parse(text.format(1.01 * whole)), front, NU)
        assert any("free" in note for note in found.notes) == (FREE in ends)
        assert not any("thickness are taken" in note for note in found.notes)
        with pytest.raises(FrontMismatch, match="% of B"):
            compare(parse(text.format(1.1 * whole)), front, NU)


def test_another_poissons_ratio_is_said():
    shape, _ = elliptic(0, 180)
    notes = compare(parse("newman-raju-surface:a=6,c=10,t=15,tension=1"), shape, 0.2).notes
    assert any("Poisson's ratio 0.3; the material has 0.2" in note for note in notes)


# --- several fronts and steps -----------------------------------------------------------------

STEPS = [Step(name, np.zeros((1, 3)), 0.0) for name in ("tension", "bending")]


def test_fronts_that_do_not_suit_are_told_why_and_the_others_are_compared():
    fronts = [elliptic(0, 180)[0], elliptic(0, 360, closed=True)[0]]
    asked = [parse("ellipse:a=6,c=10,tension=1,step=tension")]
    found, reasons = compare_fronts(asked, STEPS, fronts, NU)
    assert list(found) == [("tension", 1)]
    assert list(reasons) == [("tension", 0)]
    assert "no comparison with ellipse: the solution is of a front that" in reasons["tension", 0][0]


def test_a_solution_that_suits_no_front_is_an_error():
    asked = [parse("penny:a=3,tension=1")]
    with pytest.raises(CaseError, match=r"suits no front: front 0: .*; front 1: "):
        compare_fronts(asked, STEPS, [elliptic(0, 180)[0]] * 2, NU)


def test_steps():
    """One step by its name; every step, with a remark, where none is named."""
    shape = elliptic(0, 360, closed=True)[0]
    one, every = "ellipse:a=6,c=10,tension=1,step=bending", "ellipse:a=6,c=10,tension=2"
    found, _ = compare_fronts([parse(one), parse(every)], STEPS, [shape], NU)
    assert [c.solution for c in found["tension", 0]] == ["ellipse"]
    assert [c.solution for c in found["bending", 0]] == ["ellipse", "ellipse-2"]
    assert any("every step" in note for note in found["tension", 0][0].notes)
    with pytest.raises(CaseError, match=r"found step 'pull', expected one .*: tension, bending"):
        compare_fronts([parse("ellipse:a=6,c=10,tension=1,step=pull")], STEPS, [shape], NU)
