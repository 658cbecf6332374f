"""A study in its folder: which cases are finished there, which are to be done, and the tables."""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from pathlib import Path

from front3d.batch.finished import Outcome, discard, finished
from front3d.batch.gathering import gather
from front3d.batch.identity import identity_of, program_version
from front3d.batch.running import LostError, Pool, run
from front3d.batch.study import Member, by_step
from front3d.batch.worker import Task, evaluate, step_names
from front3d.errors import Front3DError
from front3d.output.files import file_names

CASES = "cases"
"""The folder that holds a folder for each case."""


@dataclass(frozen=True, slots=True)
class Plan:
    """The cases of a study, each with its folder below `out`."""

    out: Path
    members: tuple[Member, ...]
    pictures: bool

    @property
    def names(self) -> list[str]:
        return [member.name for member in self.members]

    @property
    def folders(self) -> list[Path]:
        """A folder for each case, in their order."""
        names = file_names(self.names)
        return [self.out / CASES / names[name] for name in self.names]

    def tasks(self) -> list[Task]:
        """What workers are to do, if nothing was done before."""
        return [
            Task(member.name, member.case, folder.absolute(), self.pictures, program_version())
            for member, folder in zip(self.members, self.folders, strict=True)
            if member.case is not None
        ]

    def known(self) -> list[Outcome]:
        """Outcomes that need no worker: of cases that cannot be read, and of those finished by an
        earlier run, of the same inputs.
        """
        known = []
        for member, folder in zip(self.members, self.folders, strict=True):
            if member.case is None:
                discard(folder)
                known.append(Outcome(member.name, member.problem))
            elif folder.is_dir() and (found := self._finished(member, folder)):
                known.append(found)
        return known

    def _finished(self, member: Member, folder: Path) -> Outcome | None:
        assert member.case is not None
        try:
            key = identity_of(member.case, pictures=self.pictures).key
        except Front3DError:  # a file is not there: the evaluation will say so
            return None
        return finished(folder, key)

    def outcomes(
        self, known: Sequence[Outcome], pool: Pool, *, first_alone: bool = False
    ) -> Iterator[Outcome]:
        """Outcomes of all other cases, by the workers of `pool`, as they come."""
        names = {outcome.name for outcome in known}
        tasks = [task for task in self.tasks() if task.name not in names]
        for task, found in run(evaluate, tasks, pool, first_alone=first_alone):
            if isinstance(found, LostError):
                discard(task.folder)
                yield Outcome(task.name, str(found))
            else:
                yield found

    def gather(self, outcomes: Sequence[Outcome]) -> None:
        """Write the tables."""
        gather(self.out, self.names, outcomes, self.folders)


def each_step(plan: Plan, pool: Pool) -> Plan:
    """The plan with a case for each step of each case; workers read which steps there are."""
    steps: dict[str, tuple[str, ...]] = {member.name: () for member in plan.members}
    for task, found in run(step_names, plan.tasks(), pool):
        if not isinstance(found, LostError):
            steps[task.name] = found
    members = by_step(plan.members, [steps[name] for name in plan.names])
    return Plan(plan.out, tuple(members), plan.pictures)
