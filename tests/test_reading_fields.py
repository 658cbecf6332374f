"""How the displacement is found among the point arrays, and what the steps are called."""

import numpy as np
import pytest

from front3d.errors import ReadError
from front3d.reading.fields import DisplacementFinder

U = np.arange(12.0).reshape(4, 3)
SCALAR, TENSOR = np.ones(4), np.ones((4, 6))
OTHERS = {"temperature": SCALAR, "stress": TENSOR, "velocity": -U, "normals": -U}


def steps(arrays, wanted=None, needed=True):
    finder = DisplacementFinder(wanted)
    finder.offer(arrays)
    return {step.name: step.displacement for step in finder.steps(needed)}, finder.notes


@pytest.mark.parametrize(
    "name",
    [
        "displacement", "Displacement", "DISPLACEMENT", "displacements", "Displacements", "disp",
        "Disp", "DISPL", "displ", "U", "u", "DEPL", "depl", "deplacement", "Displacement Vector",
        "Displacement_Vector", "nodal displacement", "Total Displacement",
    ],
)  # fmt: skip
def test_usual_names_are_found_among_other_arrays(name):
    found, notes = steps({**OTHERS, name: U})
    assert list(found) == ["1"] and not notes
    assert np.array_equal(found["1"], U)


@pytest.mark.parametrize(
    "names",
    [
        ("u_x", "u_y", "u_z"), ("UX", "UY", "UZ"), ("ux", "uy", "uz"), ("U1", "U2", "U3"),
        ("U:U1", "U:U2", "U:U3"), ("disp_x", "disp_y", "disp_z"), ("DISPLX", "DISPLY", "DISPLZ"),
        ("displacement_0", "displacement_1", "displacement_2"), ("DX", "DY", "DZ"),
        ("Displacement X", "Displacement Y", "Displacement Z"), ("U.X", "U.Y", "U.Z"),
        ("displacement:x", "displacement:y", "displacement:z"),
    ],
    ids=lambda names: names[0],
)  # fmt: skip
def test_three_scalars_are_joined_in_their_order(names):
    arrays = {**OTHERS, names[2]: U[:, 2], names[0]: U[:, 0], names[1]: U[:, 1]}
    found, _ = steps(arrays)
    assert np.array_equal(found["1"], U)


@pytest.mark.parametrize(
    "names, cases",
    [
        (["displacement_tension", "displacement_bending"], ["tension", "bending"]),
        (["displacement_0001", "displacement_0002"], ["0001", "0002"]),
        (["U_Case-A", "U_Case-B"], ["Case-A", "Case-B"]),
        (["Displacement Load 1", "Displacement Load 2"], ["Load 1", "Load 2"]),
        (["disp1", "disp2", "disp10"], ["1", "2", "10"]),
        (["shear displacement", "twist displacement"], ["shear", "twist"]),
        (["displacement_tension"], ["tension"]),
    ],
    ids=lambda v: v[0],
)
def test_several_arrays_are_load_cases_named_by_what_distinguishes_them(names, cases):
    found, _ = steps(OTHERS | {name: (k + 1.0) * U for k, name in enumerate(names)})
    assert list(found) == cases
    for k, case in enumerate(cases):
        assert np.array_equal(found[case], (k + 1.0) * U)


def test_magnitudes_and_rates_are_no_load_cases():
    arrays = {"displacement_tension": U, "displacement_velocity": U, "displacement_magnitude": U}
    assert list(steps(arrays)[0]) == ["tension"]


def test_the_plain_name_wins_and_the_rest_is_noted():
    found, notes = steps({"U": 2 * U, "displacement": U, "displacement_bending": 3 * U})
    assert np.array_equal(found["1"], U)
    assert len(notes) == 1 and "U" in notes[0] and "bending" in notes[0]


@pytest.mark.parametrize("wanted", ["shift", "SHIFT", "a,b,c", "a, b, c", "move"])
def test_a_given_name_is_taken(wanted):
    arrays = {"displacement": -U, "shift": U, "a": U[:, 0], "b": U[:, 1], "c": U[:, 2]}
    arrays |= {f"move_{axis}": U[:, k] for k, axis in enumerate("xyz")}
    assert np.array_equal(steps(arrays, wanted)[0]["1"], U)


def test_a_given_name_may_stand_for_several_cases():
    assert list(steps({"shift_a": U, "shift_b": U, "displacement": U}, "shift")[0]) == ["a", "b"]


@pytest.mark.parametrize("wanted", [None, "nothing"])
def test_a_missing_displacement_lists_what_there_is_and_how_to_choose(wanted):
    with pytest.raises(ReadError) as caught:
        steps(OTHERS, wanted)
    message = str(caught.value)
    for part in ("temperature (1 component)", "stress (6 components)", "displacement=NAME"):
        assert part in message
    assert wanted is None or repr(wanted) in message


def test_without_any_array_the_message_says_so():
    with pytest.raises(ReadError, match="holds no point arrays"):
        steps({})
    assert steps({}, needed=False) == ({}, [])


@pytest.mark.parametrize(
    "arrays, wanted, words",
    [
        ({"u": U[:, :2]}, None, "two components"),
        ({"ux": SCALAR, "uy": SCALAR}, None, "uz"),
        ({"u": TENSOR}, None, r"\(4, 6\)"),
        ({"shift": SCALAR}, "shift", "expected"),
        ({"a": SCALAR, "b": SCALAR, "c": U}, "a,b,c", "three scalars"),
        ({"a": SCALAR, "b": SCALAR}, "a,b,c", "a,b,c"),
    ],
)
def test_arrays_of_another_shape_are_refused(arrays, wanted, words):
    with pytest.raises(ReadError, match=words):
        steps(arrays, wanted)


def test_integers_and_single_precision_become_double():
    for dtype in (np.int32, np.float32):
        assert steps({"u": U.astype(dtype)})[0]["1"].dtype == np.float64


def test_times_name_the_steps_and_a_time_without_displacement_is_noted():
    finder = DisplacementFinder()
    finder.offer({"temperature": SCALAR}, 0.0)
    for time in (0.5, 1.0, 1.0):
        finder.offer({"u_hot": time * U}, time)
    found = finder.steps(True)
    assert [(s.name, s.time) for s in found] == [("0.5", 0.5), ("1", 1.0), ("1 #2", 1.0)]
    assert finder.notes == ["1 of 4 times hold no displacement"]


def test_cases_at_several_times_carry_both_names():
    finder = DisplacementFinder()
    for time in (0.5, 1.0):
        finder.offer({"u_hot": U, "u_cold": U}, time)
    assert [s.name for s in finder.steps(True)] == ["hot 0.5", "cold 0.5", "hot 1", "cold 1"]
