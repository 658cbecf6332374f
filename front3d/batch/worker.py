"""What is done with one case, in whichever process."""

import threading
from dataclasses import dataclass, replace
from pathlib import Path
from time import perf_counter
from typing import TYPE_CHECKING, Any

from front3d.batch.finished import (
    Outcome,
    discard,
    finished,
    largest_of,
    put_in_place,
    started,
    unfinished,
)
from front3d.batch.identity import Identity, identity_of, program_version
from front3d.case import Case
from front3d.errors import CaseError, Front3DError
from front3d.job import read_solid, run_case

if TYPE_CHECKING:
    from front3d.solid import Solid

TRIES = 2
"""Workers that a case may kill before it is given up."""

_one_at_a_time = threading.Lock()
"""A worker of a cluster may have several threads; the libraries that read and draw have one."""

_last_read: "tuple[Any, Solid] | None" = None


@dataclass(frozen=True, slots=True)
class Task:
    """A case to evaluate: its name, its folder, and the version of front3d that must do it."""

    name: str
    case: Case
    folder: Path
    pictures: bool
    version: str


def evaluate(task: Task) -> Outcome:
    """Evaluate a case into its folder; errors become an outcome with a message."""
    with _one_at_a_time:
        try:
            _same_program(task)
            with started(task.folder) as before:
                if before >= TRIES:
                    raise Front3DError(killed(before))
                return _evaluate(task)
        except Exception as error:
            discard(task.folder)
            return Outcome(task.name, _said(error))


def step_names(task: Task) -> tuple[str, ...]:
    """The steps of a case that it asks for; none where it cannot be read, which its evaluation
    will say.
    """
    with _one_at_a_time:
        try:
            solid = _read(task.case, identity_of(task.case, pictures=False).files)
        except Exception:
            return ()
        wanted = task.case.steps
        return wanted or tuple(step.name for step in solid.steps)


def killed(times: int) -> str:
    """What is said of a case whose workers die."""
    return (
        f"the process that worked on it was ended {times} times (too little memory, or a library "
        "that crashed); evaluate it alone to see why"
    )


def _evaluate(task: Task) -> Outcome:
    start = perf_counter()
    # Before reading: where a file changes meanwhile, the next run notices.
    identity = identity_of(task.case, pictures=task.pictures)
    ready = finished(task.folder, identity.key)
    if ready is not None:  # by a worker that died before it could say so
        return replace(ready, earlier=False)
    try:
        return _made(task, start, identity)
    except Exception:
        # By a worker of a later run, while this one, given up, went on: its folder must stay.
        ready = finished(task.folder, identity.key)
        if ready is None:
            raise
        return replace(ready, earlier=False)


def _made(task: Task, start: float, identity: Identity) -> Outcome:
    solid = _read(task.case, identity.files)
    with unfinished(task.folder) as part:
        evaluation, _ = run_case(task.case, part, pictures=task.pictures, solid=solid)
        warnings = len(evaluation.warnings) + sum(len(f.warnings) for f in evaluation.fronts)
        outcome = Outcome(
            task.name,
            largest=largest_of(evaluation),
            warnings=warnings,
            seconds=perf_counter() - start,
        )
        put_in_place(part, task.folder, identity.key, outcome)
    return outcome


def _read(case: Case, hashes: tuple[tuple[str, str], ...]) -> "Solid":
    """The solid of a case; the last one again where the files and what is read of them are alike,
    as in studies of one model, or of its steps.
    """
    global _last_read
    files = tuple(pair for pair in hashes if case.source is None or pair[0] != case.source.name)
    key = (files, case.results, case.displacement, case.displacement_file, case.arrays)
    if _last_read is None or _last_read[0] != key:
        _last_read = None  # its memory is wanted
        _last_read = (key, read_solid(case))
    return _last_read[1]


def _same_program(task: Task) -> None:
    if program_version() != task.version:
        raise CaseError(
            f"found front3d {program_version()} in a worker, expected {task.version} as where the "
            "study was started; install the same on all machines"
        )


def _said(error: Exception) -> str:
    if isinstance(error, Front3DError):
        return str(error)
    if isinstance(error, MemoryError):
        return "not enough memory for this model; try fewer processes, or a machine with more of it"
    return f"unexpected {type(error).__name__}: {' '.join(str(error).split())}"
