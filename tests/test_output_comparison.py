"""Published solutions beside a front: deviations, columns, summary, words, flags of the command."""

import csv
import io
import json
from dataclasses import replace

import numpy as np
import pytest

from front3d.cli import main
from front3d.cli.words import describe_evaluation
from front3d.output.deviation import deviation
from front3d.output.report.checks import checks
from front3d.output.saved import read_saved
from front3d.output.summary import summary_json
from front3d.output.tables import points_csv
from front3d.results import Comparison
from tests.output_models import elliptic_front, evaluation_of

FRONT = elliptic_front(1.6, 1.2, closed=False)
ANGLE = np.linspace(0, 180, len(FRONT))


def beside(front, name="newman-raju-surface", scale=0.98, judged=None):
    """The front with a solution that is `scale` times its own K_I, and silent on the others."""
    K = np.full((len(front), 3), np.nan)
    K[:, 0] = scale * front.K[:, 0]
    comparison = Comparison(
        name, {"a": 1.2, "load": (0.0, 0.0, 1.0)}, "Newman and Raju (1981)", "within 5 %", K, ANGLE,
        ("the equation itself is off",), np.ones(len(front), bool) if judged is None else judged,
    )  # fmt: skip
    return replace(front, comparisons=(*front.comparisons, comparison))


def test_deviation_is_counted_in_parts_of_the_solutions_largest():
    """K = 300 + 120 sin^2; 0.02 K over 0.98 * 420, worst at the middle, mean over the stations."""
    front = beside(FRONT)
    found = deviation(front, front.comparisons[0])
    expected = 100 * 0.02 * FRONT.K[:, 0] / (0.98 * 420)
    np.testing.assert_allclose(found.percent[:, 0], expected)
    assert np.isnan(found.percent[:, 1:]).all()
    assert (found.mode, found.station) == ("K_I", 20)
    assert found.worst == pytest.approx(100 * 0.02 / 0.98)
    assert found.mean == pytest.approx(expected.mean())
    assert found.judged == len(FRONT)


def test_worst_and_mean_leave_out_what_is_not_judged():
    judged = np.ones(len(FRONT), dtype=bool)
    judged[15:26] = False
    front = beside(FRONT, judged=judged)
    found = deviation(front, front.comparisons[0])
    expected = 100 * 0.02 * FRONT.K[:, 0] / (0.98 * 420)
    assert found.station in (14, 26)
    assert found.worst == pytest.approx(expected[14])
    assert found.mean == pytest.approx(expected[judged].mean())
    assert found.judged == judged.sum()
    assert np.isfinite(found.percent[:, 0]).all()  # the columns keep every station


def test_the_mean_with_its_sign_weighs_by_length():
    """Of s - L/2 over an open front with uneven stations: zero within the trapezoidal rule."""
    K = np.full((len(FRONT), 3), np.nan)
    K[:, 0] = FRONT.K[:, 0] - (FRONT.s - FRONT.length / 2)
    front = replace(
        FRONT, comparisons=(Comparison("x", {}, "", "", K, np.full(len(FRONT), np.nan)),)
    )
    found = deviation(front, front.comparisons[0])
    assert found.balance["K_I"] == pytest.approx(0, abs=1e-3 * found.mean)
    assert found.mean > 0


def test_an_average_is_that_of_the_squares():
    """K^2 = s/L over the front has the mean 1/2, by hand: 1/sqrt(2) against a solution of 0.7."""
    K = np.zeros((len(FRONT), 3))
    K[:, 0] = np.sqrt(FRONT.s_rel)
    published = np.full((len(FRONT), 3), np.nan)
    published[:, 0] = 0.7
    nowhere = np.full(len(FRONT), np.nan)
    one = Comparison("compact-specimen", {}, "", "", published, nowhere, average=True)
    front = replace(FRONT, K=K, comparisons=(one,))
    expected = 100 * (np.sqrt(0.5) / 0.7 - 1)
    assert deviation(front, one).average == pytest.approx(expected, rel=1e-9)
    assert f"front {expected:+.2f} %" in "\n".join(describe_evaluation(evaluation_of(front)))
    assert deviation(front, replace(one, average=False)).average is None


def test_nothing_judged_gives_no_figure():
    front = beside(FRONT, judged=np.zeros(len(FRONT), dtype=bool))
    found = deviation(front, front.comparisons[0])
    assert np.isnan(found.worst)
    assert found.judged == 0
    assert "no station can be compared" in "\n".join(describe_evaluation(evaluation_of(front)))
    written = json.loads(summary_json(evaluation_of(front), [], []))
    assert written["fronts"][0]["comparisons"][0]["worst"] is None


def test_columns_of_the_solutions():
    front = beside(beside(FRONT), "computed-surface", 1.01)
    other = elliptic_front(1.0, 1.0, closed=True, front=1)
    table = list(csv.DictReader(io.StringIO(points_csv(evaluation_of(front, other)).decode())))
    mine, others = table[: len(front)], table[len(front) :]
    assert [float(row["phi_deg"]) for row in mine] == ANGLE.tolist()
    for name, scale in (("newman-raju-surface", 0.98), ("computed-surface", 1.01)):
        K = np.array([float(row[f"K_I_{name}"]) for row in mine])
        np.testing.assert_array_equal(K, scale * FRONT.K[:, 0])
        percent = np.array([float(row[f"K_I_{name}_deviation_pct"]) for row in mine])
        np.testing.assert_allclose(percent, 100 * (FRONT.K[:, 0] - K) / K.max())
        assert f"K_II_{name}" not in table[0]
        assert {row[f"K_I_{name}"] for row in others} == {"nan"}


def test_summary_of_the_solutions():
    written = json.loads(summary_json(evaluation_of(beside(FRONT)), [], []))
    (one,) = written["fronts"][0]["comparisons"]
    assert one["solution"] == "newman-raju-surface"
    assert one["arguments"] == {"a": 1.2, "load": [0, 0, 1]}
    assert one["worst"]["percent"] == pytest.approx(100 * 0.02 / 0.98)
    assert one["worst"]["phi_deg"] == 90
    assert (one["source"], one["claim"]) == ("Newman and Raju (1981)", "within 5 %")
    assert one["notes"] == ["the equation itself is off"]
    assert one["stations_judged"] == len(FRONT)


def test_a_solution_reads_back_from_the_folder(tmp_path):
    judged = np.ones(len(FRONT), dtype=bool)
    judged[[0, 1, -1]] = False
    evaluation = evaluation_of(beside(FRONT, judged=judged))
    (tmp_path / "points.csv").write_bytes(points_csv(evaluation))
    (tmp_path / "summary.json").write_bytes(summary_json(evaluation, [], []))
    (front,) = read_saved(tmp_path).evaluation.fronts
    (back,) = front.comparisons
    np.testing.assert_array_equal(back.judged, judged)
    np.testing.assert_array_equal(back.K, evaluation.fronts[0].comparisons[0].K)
    np.testing.assert_array_equal(back.angle, ANGLE)
    assert deviation(front, back).worst == pytest.approx(100 * 0.02 / 0.98)
    assert "a = 1.2, load = 0/0/1" in str(checks(read_saved(tmp_path)))


def test_words_about_the_solutions():
    said = "\n".join(describe_evaluation(evaluation_of(beside(beside(FRONT), "other", 1.0))))
    assert "beside newman-raju-surface (Newman and Raju (1981); claimed: within 5 %):" in said
    assert "worst +2.04 % of its largest K (K_I, phi = 90 degrees)" in said
    assert said.count("note: the equation itself is off") == 1


# --- the command ------------------------------------------------------------------------------


def test_compare_help_lists_the_solutions(capsys):
    assert main(["evaluate", "--compare", "help"]) == 0
    said = capsys.readouterr().out
    for words in ("newman-raju-surface: ", "half-length on the surface [length]", "Sneddon (1946)"):
        assert words in said


def test_a_wrong_solution_is_a_wrong_call(capsys):
    words = ["evaluate", "x.vtu", "--young", "1", "--poisson", "0.3", "--compare", "peny:a=1"]
    assert main(words) == 2
    assert "did you mean 'penny'" in capsys.readouterr().err


def test_a_wrong_solution_in_the_case_file_is_a_wrong_input(capsys, tmp_path):
    case = tmp_path / "case.toml"
    case.write_text(
        'result = "x.vtu"\n[material]\nyoung = 1\npoisson = 0.3\n[options]\n'
        'compare = ["penny:a=1"]\n'
    )
    assert main(["evaluate", str(case)]) == 1
    assert "case.toml: comparison with penny: found no load" in capsys.readouterr().err
