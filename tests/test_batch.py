"""The parts of a study: its cases, what makes two runs the same, restart, the loop, the tables."""

import json
import os
import subprocess
import sys
from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np
import pytest

import front3d.batch.identity
from front3d.batch import worker
from front3d.batch.finished import (
    RECORD,
    Outcome,
    alone,
    clear_unfinished,
    finished,
    largest_of,
    started,
    unfinished,
)
from front3d.batch.identity import identity_of, program_version
from front3d.batch.plan import CASES, Plan
from front3d.batch.running import LostError, run
from front3d.batch.study import Member, by_step, files_of, members_of, names_of
from front3d.batch.worker import Task
from front3d.case import Case
from front3d.cli import main
from front3d.cli.flags import check_case
from front3d.errors import CaseError, CrackError, ReadError
from front3d.output.files import WriteError
from tests.batch_models import case_file, placed
from tests.output_models import elliptic_front, evaluation_of

# --- which cases ------------------------------------------------------------------------------


def test_names_tell_cases_apart_and_stay_when_others_join(tmp_path: Path) -> None:
    a, b = tmp_path / "one" / "run.vtu", tmp_path / "two" / "run.vtu"
    lone = tmp_path / "two" / "other.toml"
    assert names_of([lone]) == ["other"]
    assert names_of([a, lone, b]) == ["one/run", "other", "two/run"]
    assert names_of([a, a.with_suffix(".toml")]) == ["one/run.vtu", "one/run.toml"]
    deep = [tmp_path / x / "s" / "run.vtu" for x in "pq"]
    assert names_of([*deep, a]) == ["p/s/run", "q/s/run", "one/run"]


def test_a_folder_stands_for_its_case_files_or_for_its_results(tmp_path: Path) -> None:
    for name in ("b.vtu", "a.vtu", "t0.vtu", "notes.txt"):
        (tmp_path / name).write_text("x")
    (tmp_path / "all.pvd").write_text('<DataSet timestep="0" file="t0.vtu"/>')
    found = [path.name for path in files_of([str(tmp_path)])]
    assert found == ["a.vtu", "all.pvd", "b.vtu"]  # t0.vtu is a time of all.pvd
    case = case_file(tmp_path / "c.toml")
    assert files_of([str(tmp_path), str(case)]) == [case]  # once
    assert files_of([str(tmp_path / "[ab].v*")]) == [tmp_path / "a.vtu", tmp_path / "b.vtu"]


@pytest.mark.parametrize("word", ["none.vtu", "*.none", "empty"])
def test_a_word_that_names_nothing_is_said(tmp_path: Path, word: str) -> None:
    (tmp_path / "empty").mkdir()
    with pytest.raises(CaseError, match=r"no such file|found no case file"):
        files_of([str(tmp_path / word)])


def test_a_wrong_case_file_is_a_case_that_fails_and_wrong_flags_stop(tmp_path: Path) -> None:
    case_file(tmp_path / "good.toml")
    (tmp_path / "bad.toml").write_text("result = 3")
    bad, good = members_of([str(tmp_path)], Case(poisson=0.25), check_case)
    assert bad.case is None
    assert "found 3" in bad.problem
    assert good.case is not None
    assert (good.case.poisson, good.case.young) == (0.25, 1e5)
    assert good.case.result == tmp_path / "r.vtu"
    (tmp_path / "r.vtu").write_text("x")
    with pytest.raises(CaseError, match="no elastic constants"):
        members_of([str(tmp_path / "r.vtu")], Case(young=1.0), check_case)
    with pytest.raises(CaseError, match=r"good\.toml with the flags: hat"):
        members_of([str(tmp_path)], Case(hat=0.5), check_case)


def test_a_constant_out_of_range_is_a_wrong_call_that_costs_no_result(tmp_path: Path) -> None:
    result, kept = tmp_path / "r.vtu", tmp_path / "out" / CASES / "r" / "points.csv"
    result.write_text("x")
    kept.parent.mkdir(parents=True)
    kept.write_text("finished")
    words = [
        "batch",
        str(result),
        "--young",
        "1",
        "--poisson",
        "0.7",
        "--out",
        str(tmp_path / "out"),
    ]
    assert main(words) == 2
    assert kept.read_text() == "finished"


def test_each_step_is_a_case_with_its_own_comparison() -> None:
    compare = ("penny:a=1,tension=1,step=s", "penny:a=1,tension=2,step=t", "penny:a=1,tension=3")
    case = Case(result=Path("/r.vtu"), young=1.0, poisson=0.3, compare=compare)
    members = [Member("a", case), Member("bad", None, "why")]
    one, two, bad = by_step(members, [("s", "t"), ()])
    assert (one.name, two.name, bad.name) == ("a:s", "a:t", "bad")
    assert one.case == replace(case, steps=("s",), compare=(compare[0], compare[2]))
    assert two.case is not None
    assert two.case.compare == compare[1:]


# --- what makes two runs the same -------------------------------------------------------------


def test_the_identity_is_that_of_contents(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    result = tmp_path / "r.pvd"
    result.write_text('<DataSet file="t.vtu"/>')
    (tmp_path / "t.vtu").write_text("one")
    case = Case(result=result, young=1.0, poisson=0.3)

    def key(case: Case = case, *, pictures: bool = False) -> str:
        return identity_of(case, pictures=pictures).key

    first = key()
    os.utime(result, (1, 1))
    moved = tmp_path / "elsewhere"
    moved.mkdir()
    for name in ("r.pvd", "t.vtu"):
        (moved / name).write_bytes((tmp_path / name).read_bytes())
    assert key() == first == key(replace(case, result=moved / "r.pvd"))
    others = [key(replace(case, poisson=0.31)), key(pictures=True)]
    (tmp_path / "t.vtu").write_text("two!")  # the numbers stand here, not in the index
    others.append(key())
    monkeypatch.setattr(front3d.batch.identity, "program_version", lambda: "another")
    others.append(key(replace(case, result=moved / "r.pvd")))
    assert len({first, *others}) == 5
    (tmp_path / "r.pvd").unlink()
    with pytest.raises(ReadError, match=r"r\.pvd"):
        key()


# --- the folder of a case ---------------------------------------------------------------------


def test_a_finished_case_is_found_again_until_anything_differs(tmp_path: Path) -> None:
    folder = tmp_path / "c"
    assert finished(folder, "k") is None
    outcome = placed(folder)
    assert finished(folder, "k") == replace(outcome, earlier=True)
    assert finished(folder, "other") is None
    placed(folder, "other", "a\n2\n")  # takes the place of the first
    assert finished(folder, "k") is None
    assert finished(folder, "other") is not None
    assert [path.name for path in tmp_path.iterdir()] == ["c"]
    (folder / "points.csv").write_text("a\n3\n")
    assert finished(folder, "other") is None
    (folder / RECORD).write_text("{")
    assert finished(folder, "other") is None


def test_what_is_cut_short_leaves_no_folder(tmp_path: Path) -> None:
    with pytest.raises(CrackError), unfinished(tmp_path / "c") as part:
        (part / "points.csv").write_text("half")
        raise CrackError("no crack")
    assert list(tmp_path.iterdir()) == []
    for name in (".c.1.part", ".c.2.old"):
        (tmp_path / name).mkdir()
    (tmp_path / ".c.started").write_text(".")
    placed(tmp_path / "c")
    clear_unfinished(tmp_path)
    assert [path.name for path in tmp_path.iterdir()] == ["c"]


def test_a_start_is_remembered_until_its_end(tmp_path: Path) -> None:
    with started(tmp_path / "c") as before:
        assert before == 0
        with started(tmp_path / "c") as again:  # as after a death: the note is still there
            assert again == 1
    with started(tmp_path / "c") as before:
        assert before == 0


def test_two_runs_never_share_a_folder(tmp_path: Path) -> None:
    with alone(tmp_path), pytest.raises(WriteError, match="another run"), alone(tmp_path):
        pass
    with alone(tmp_path):
        assert list(tmp_path.iterdir()) == []


def test_the_largest_K_is_that_of_the_largest_magnitude() -> None:
    front = elliptic_front(1.6, 1.2, closed=False)
    K = front.K.copy()
    K[2] = [np.nan, -2 * np.nanmax(np.abs(K)), 0.0]
    found = largest_of(evaluation_of(replace(front, K=K)))
    assert found is not None
    assert (found.mode, found.station, found.K) == ("K_II", 2, K[2, 1])
    assert [found.x, found.y, found.z] == front.positions[2].tolist()


# --- what a worker does -----------------------------------------------------------------------


@pytest.fixture
def task(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Task:
    """A case whose evaluation is stood in for by invented figures."""
    result = tmp_path / "r.vtu"
    result.write_text("x")

    def stand_in(case: Case, out: Path, **_: Any) -> Any:
        if case.poisson == 0.0:
            raise CrackError("found no crack")
        (out / "points.csv").write_text(f"step,K_I\ns,{case.poisson}\n")
        return evaluation_of(elliptic_front(1.6, 1.2, closed=False)), None

    monkeypatch.setattr(worker, "read_solid", lambda case: None)
    monkeypatch.setattr(worker, "run_case", stand_in)
    case = Case(result=result, young=1.0, poisson=0.3)
    return Task("c", case, tmp_path / "cases" / "c", False, program_version())


def test_a_worker_writes_a_case_once(task: Task) -> None:
    task.folder.parent.mkdir()
    first = worker.evaluate(task)
    assert first.done
    assert first.largest is not None
    when = (task.folder / RECORD).stat().st_mtime_ns
    assert worker.evaluate(task) == first
    assert (task.folder / RECORD).stat().st_mtime_ns == when
    other = worker.evaluate(replace(task, case=replace(task.case, poisson=0.2)))
    assert not other.earlier
    assert "0.2" in (task.folder / "points.csv").read_text()
    assert [path.name for path in task.folder.parent.iterdir()] == ["c"]


def test_a_worker_given_up_takes_no_result_of_its_successor_away(
    task: Task, monkeypatch: pytest.MonkeyPatch
) -> None:
    task.folder.parent.mkdir()

    def overtaken(*_: Any, **__: Any) -> Any:
        placed(task.folder, identity_of(task.case, pictures=False).key, "K_I\n0.3\n")
        raise WriteError("the unfinished folder is gone")

    monkeypatch.setattr(worker, "run_case", overtaken)
    assert worker.evaluate(task).done
    assert (task.folder / "points.csv").read_text() == "K_I\n0.3\n"


def test_a_failure_is_an_outcome_and_takes_old_results_away(task: Task) -> None:
    task.folder.parent.mkdir()
    worker.evaluate(task)
    failed = worker.evaluate(replace(task, case=replace(task.case, poisson=0.0)))
    assert failed == Outcome("c", "found no crack")
    assert list(task.folder.parent.iterdir()) == []
    assert "found front3d" in worker.evaluate(replace(task, version="0.0")).message


def test_a_case_that_killed_two_workers_is_not_tried_again(task: Task) -> None:
    task.folder.parent.mkdir()
    (task.folder.parent / ".c.started").write_text(".")
    assert worker.evaluate(task).done
    (task.folder.parent / ".c.started").write_text("..")
    assert "ended 2 times" in worker.evaluate(task).message


def test_known_outcomes_need_no_worker(task: Task, tmp_path: Path) -> None:
    members = (Member("bad", None, "why"), Member("c", task.case), Member("d", task.case))
    plan = Plan(tmp_path, members, False)
    assert [t.folder for t in plan.tasks()] == [tmp_path / "cases" / name for name in "cd"]
    task.folder.parent.mkdir()
    worker.evaluate(task)
    bad, c = plan.known()
    assert (bad.message, c.name, c.earlier) == ("why", "c", True)


# --- the loop over workers --------------------------------------------------------------------


STUDY_OF_NUMBERS = """
import json, sys
from front3d.batch.processes import Processes
from front3d.batch.running import run
from tests.batch_work import square

if __name__ == "__main__":
    items = [(number, sys.argv[1]) for number in (1, -1, 2, -2, 3, 4, 5)]
    with Processes(2, threads=1) as pool:
        found = {item[0]: result for item, result in run(square, items, pool)}
    print(json.dumps({n: r if isinstance(r, tuple) else [type(r).__name__, str(r)]
                      for n, r in found.items()}))
"""


def test_a_killed_worker_costs_its_case_and_no_other(tmp_path: Path) -> None:
    """In a program of its own, as a study is: its processes are nobody else's."""
    script, where = tmp_path / "study.py", tmp_path / "begun"
    script.write_text(STUDY_OF_NUMBERS)
    where.mkdir()
    ran = subprocess.run(
        [sys.executable, str(script), str(where)],
        env=os.environ | {"PYTHONPATH": str(Path(__file__).parents[1])},
        capture_output=True,
        text=True,
        check=True,
        timeout=120,
    )
    found = {int(number): result for number, result in json.loads(ran.stdout).items()}
    assert [found[number][0] for number in (1, 2, 3, 4, 5)] == [1, 4, 9, 16, 25]
    assert {found[number][2] for number in (1, 2, 3, 4, 5)} == {"1"}
    assert found[-1][0] == found[-2][0] == LostError.__name__
    assert "ended 2 times" in found[-1][1]
    assert "no number" in found[-2][1]
    # Each was begun once, and what killed its process twice.
    begun = {int(path.name): len(path.read_text()) for path in where.iterdir()}
    assert begun == dict.fromkeys(found, 1) | {-1: 2}


class Immediate:
    """A pool that does the work at once, and counts how many calls it had at a time."""

    gave_up: tuple[type[BaseException], ...] = ()

    def __init__(self) -> None:
        self.running, self.most = 0, []
        self.room = True

    def submit(self, call: Any) -> Any:
        from concurrent.futures import Future

        self.running += 1
        self.most.append(self.running)
        future: Future[Any] = Future()
        future.set_result(call())
        return future

    def ended(self, future: Any) -> None:
        self.running -= 1


def test_the_first_runs_alone_where_kernels_are_not_compiled() -> None:
    for alone_first, expected in ((False, [1, 2, 3]), (True, [1, 1, 2])):
        pool = Immediate()
        found = [result for _, result in run(abs, [-1, -2, -3], pool, first_alone=alone_first)]
        assert found == [1, 2, 3]
        assert pool.most == expected
