"""The tables of a study, and what is said while it runs."""

import csv
from pathlib import Path

import pyarrow.parquet as pq
import pytest

from front3d.batch.finished import Outcome
from front3d.batch.gathering import gather
from front3d.cli import main
from front3d.cli.batch_progress import Count, study_progress
from front3d.output.files import WriteError, whole_files
from tests.batch_models import LARGEST, case_file, placed

# --- the tables -------------------------------------------------------------------------------


def test_tables_hold_every_case_in_order_with_all_columns(tmp_path: Path) -> None:
    folders = [tmp_path / "cases" / name for name in "abcd"]
    tables = {
        "a": "step,front,station,K_I,flag,K_from\n1,0,0,0.1,,closure\n",
        "b": 'step,front,station,K_I,flag,K_I_closure\n"x,y",0,1,nan,"rings, bad",-1e-300\n',
    }
    for folder in folders[:2]:
        placed(folder, points=tables[folder.name])
    outcomes = [
        Outcome("c", "found no crack"),
        Outcome("b", warnings=1, seconds=0.25),
        Outcome("a", largest=LARGEST, seconds=2.0),
    ]
    gather(tmp_path, list("abcd"), outcomes, folders)
    with (tmp_path / "points.csv").open(newline="") as stream:
        rows = list(csv.DictReader(stream))
    assert [row["case"] for row in rows] == ["a", "b"]
    assert [row["K_from"] for row in rows] == ["closure", ""]
    assert [row["K_I_closure"] for row in rows] == ["nan", "-1e-300"]
    assert [row["K_I"] for row in rows] == ["0.1", "nan"]
    assert rows[1]["flag"] == "rings, bad"
    table = pq.read_table(tmp_path / "points.parquet")
    assert table.column_names == list(rows[0])
    for name in table.column_names:
        for found, row in zip(table[name].to_pylist(), rows, strict=True):
            expected = type(found)(row[name])
            assert found == expected or (found != found and expected != expected), name
    with (tmp_path / "cases.csv").open(newline="") as stream:
        cases = list(csv.DictReader(stream))
    assert [row["state"] for row in cases] == ["done", "done", "failed", "not run"]
    assert (cases[0]["mode"], cases[0]["K"], cases[0]["station"]) == ("K_II", "-3.5", "7")
    assert [row["message"] for row in cases] == ["", "", "found no crack", ""]
    assert cases[1]["folder"] == "cases/b"


def test_a_study_without_a_finished_case_has_tables_without_rows(tmp_path: Path) -> None:
    gather(tmp_path, ["a"], [Outcome("a", "why")], [tmp_path / "cases" / "a"])
    assert (tmp_path / "points.csv").read_text().startswith("case,step,front,station,s,")
    assert pq.read_table(tmp_path / "points.parquet").num_rows == 0


def test_tables_appear_together_or_not_at_all(tmp_path: Path) -> None:
    paths = (tmp_path / "a", tmp_path / "b")
    paths[0].write_text("old")
    with pytest.raises(WriteError, match="nothing is left"), whole_files(*paths) as parts:
        parts[0].write_text("new")  # the second is never written
    assert paths[0].read_text() == "old"
    with whole_files(*paths) as parts:
        for part in parts:
            part.write_text("new")
    assert sorted(path.read_text() for path in tmp_path.iterdir()) == ["new", "new"]


# --- what is said -----------------------------------------------------------------------------


def test_the_time_left_is_that_of_the_cases_so_far() -> None:
    clock = iter([0.0, 30.0, 40.0])
    count = Count(5, now=lambda: next(clock))
    count.add(Outcome("a"))
    count.add(Outcome("b", "why"))
    assert str(count) == "2 of 5 cases, 1 done, 1 failed, about 45 s left"
    for _ in range(3):
        count.add(Outcome("c"))
    assert str(count) == "5 of 5 cases, 4 done, 1 failed"


def test_progress_is_lines_where_there_is_no_terminal(capsys: pytest.CaptureFixture[str]) -> None:
    with study_progress(3) as show:
        for outcome in (Outcome("a"), Outcome("b", "found no crack"), Outcome("c")):
            show(outcome)
    out, err = capsys.readouterr()
    assert out == ""
    assert err.splitlines() == [
        "failed: b: found no crack",
        "3 of 3 cases, 2 done, 1 failed",
    ]


@pytest.mark.parametrize(
    ("words", "code", "said"),
    [
        (["--processes", "0"], 2, "expected 1 or more"),
        (["--processes", "2", "--scheduler", "tcp://h:1"], 2, "its own workers"),
        (["--method", "none"], 1, "c.toml with the flags: method: found 'none'"),
        (["--each-step", "--combine", "s = 2*t"], 1, "with --each-step"),
        (["--scheduler", "tcp://127.0.0.1:1"], 1, "no scheduler answers"),
        (["--scheduler", "somewhere"], 1, "no host and port"),
    ],
)
def test_wrong_calls(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], words: list[str], code: int, said: str
) -> None:
    path = case_file(tmp_path / "c.toml")
    assert main(["batch", str(path), "--out", str(tmp_path / "out"), *words]) == code
    assert said in capsys.readouterr().err
    assert not (tmp_path / "out").exists()
