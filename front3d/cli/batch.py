"""`front3d batch`: many cases, by several processes or a cluster, into one table."""

import argparse
import sys
from dataclasses import dataclass, field
from pathlib import Path
from time import monotonic
from typing import TYPE_CHECKING

from front3d.caution import CAUTION
from front3d.cli.batch_progress import duration, study_progress
from front3d.cli.command import Command
from front3d.cli.flags import add_evaluation_flags, check_case, flags_said, require_constants
from front3d.cli.progress import FIRST_RUN
from front3d.cli.words import number
from front3d.errors import CaseError, Front3DError

if TYPE_CHECKING:
    from front3d.batch.cluster import Cluster
    from front3d.batch.finished import Outcome
    from front3d.batch.plan import Plan
    from front3d.batch.processes import Processes

_SHOWN = 10
"""Failed cases that are listed at the end; cases.csv has all of them."""


def add_flags(parser: argparse.ArgumentParser) -> None:
    parser.add_argument(
        "cases",
        nargs="+",
        metavar="CASES",
        help="case files, results, folders of them, or patterns in quotes such as 'runs/*.vtu'; "
        "a folder stands for the case files in it, or for the results where it has no case file",
    )
    parser.add_argument(
        "--out",
        type=Path,
        default=Path("out"),
        metavar="DIR",
        help="folder; the same command with the same folder goes on where it stopped "
        "(default: %(default)s)",
    )
    parser.add_argument(
        "--scheduler",
        metavar="ADDRESS",
        help="work on the Dask cluster of this scheduler, e.g. tcp://host:8786, instead of on "
        "this machine; its workers must see the same files and have the same front3d",
    )
    parser.add_argument(
        "--processes",
        type=int,
        metavar="N",
        help="processes on this machine; they share its cores (default: one for each core)",
    )
    parser.add_argument(
        "--each-step",
        action="store_true",
        help="make every step of every result a case of its own",
    )
    parser.add_argument("--pictures", action="store_true", help="draw each case's pictures, too")
    add_evaluation_flags(parser)


@dataclass(slots=True)
class _Study:
    """What is known of a study while it runs."""

    plan: "Plan"
    outcomes: "list[Outcome]" = field(default_factory=list)
    start: float = field(default_factory=monotonic)


def run(arguments: argparse.Namespace) -> int:
    flags = flags_said(arguments)
    _check_call(arguments)
    from front3d.batch.finished import alone, clear_unfinished
    from front3d.batch.plan import CASES, Plan
    from front3d.batch.study import members_of
    from front3d.output.files import results_folder

    members = members_of(arguments.cases, flags, check_case)
    require_constants(arguments)  # before a case is done again with them, and its results go
    if arguments.each_step and any(m.case is not None and m.case.combine for m in members):
        raise CaseError(
            "found combinations of steps with --each-step, expected one of them; a combination "
            "needs all its steps in one case"
        )
    out: Path = arguments.out
    study = _Study(Plan(out, tuple(members), arguments.pictures))
    with results_folder(out / CASES), alone(out):
        clear_unfinished(out / CASES)
        try:
            _carry_out(study, arguments)
        except (KeyboardInterrupt, Front3DError) as reason:
            if study.outcomes:
                study.plan.gather(study.outcomes)
            if study.outcomes or isinstance(reason, KeyboardInterrupt):
                _say(_stopped(study))
            raise
        finally:
            clear_unfinished(out / CASES)
        study.plan.gather(study.outcomes)
    print("\n".join(_summary(study)))
    return 0 if all(outcome.done for outcome in study.outcomes) else 1


def _check_call(arguments: argparse.Namespace) -> None:
    if arguments.processes is not None and arguments.processes < 1:
        arguments.parser.error(f"--processes: found {arguments.processes}, expected 1 or more")
    if arguments.processes is not None and arguments.scheduler is not None:
        arguments.parser.error("--processes is about this machine; a scheduler has its own workers")


def _carry_out(study: _Study, arguments: argparse.Namespace) -> None:
    """Run what is to be run; outcomes are in `study` as they come."""
    from front3d.batch.plan import each_step
    from front3d.batch.processes import kernels_compiled

    if not arguments.each_step:
        study.outcomes += study.plan.known()
        if len(study.outcomes) == len(study.plan.members):
            return
    with _pool(study, arguments) as pool:
        if arguments.each_step:
            study.plan = each_step(study.plan, pool)
            study.outcomes += study.plan.known()
        to_do = len(study.plan.members) - len(study.outcomes)
        earlier = sum(outcome.earlier for outcome in study.outcomes)
        _say(f"{to_do} cases to do" + (f", {earlier} are there already" if earlier else ""))
        # Workers of a cluster keep the kernels they compile in places of their own.
        first_alone = arguments.scheduler is None and not kernels_compiled()
        if first_alone:
            _say(FIRST_RUN)
        with study_progress(to_do) as show:
            for outcome in study.plan.outcomes(study.outcomes, pool, first_alone=first_alone):
                study.outcomes.append(outcome)
                show(outcome)


def _pool(study: _Study, arguments: argparse.Namespace) -> "Processes | Cluster":
    from front3d.batch.cluster import Cluster
    from front3d.batch.processes import Processes, cores

    if arguments.scheduler is not None:
        cluster = Cluster(arguments.scheduler)
        if not cluster.workers:
            _say(f"{arguments.scheduler} has no workers yet; waiting for the first")
        return cluster
    count = arguments.processes or cores()
    if not arguments.each_step:
        count = min(count, len(study.plan.members) - len(study.outcomes))
    return Processes(count, threads=max(1, cores() // count))


def _say(line: str) -> None:
    print(line, file=sys.stderr, flush=True)


def _stopped(study: _Study) -> str:
    done = sum(outcome.done for outcome in study.outcomes)
    return (
        f"stopped with {done} of {len(study.plan.members)} cases done; the same command goes on "
        "from there"
    )


def _summary(study: _Study) -> list[str]:
    from front3d.batch.gathering import TABLES
    from front3d.batch.plan import CASES

    done = [outcome for outcome in study.outcomes if outcome.done]
    failed = [outcome for outcome in study.outcomes if not outcome.done]
    earlier = sum(outcome.earlier for outcome in done)
    lines = [
        f"{len(study.plan.members)} cases: {len(done)} done"
        + (f" ({earlier} by an earlier run)" if earlier else "")
        + f", {len(failed)} failed, in {duration(monotonic() - study.start)}"
    ]
    order = {name: number for number, name in enumerate(study.plan.names)}
    found = [(one.name, one.largest) for one in done if one.largest is not None]
    found.sort(key=lambda pair: (-abs(pair[1].K), order[pair[0]]))
    for name, largest in found[:1]:
        flag = f" [{largest.flag}]" if largest.flag else ""
        lines.append(
            f"  largest {largest.mode} {number(largest.K)} in {name}: step {largest.step}, front "
            f"{largest.front}, s/L {largest.s_rel:.3f}{flag}"
        )
    warned = sum(bool(outcome.warnings) for outcome in done)
    if warned:
        lines.append(f"  {warned} cases have warnings, see summary.json in their folders")
    lines += [f"  failed: {outcome.name}: {outcome.message}" for outcome in failed[:_SHOWN]]
    if len(failed) > _SHOWN:
        lines.append(f"  and {len(failed) - _SHOWN} more, see cases.csv")
    where = f"written to {study.plan.out}: {', '.join(TABLES)}, and a folder per case in {CASES}"
    return [*lines, where, "", CAUTION]


COMMAND = Command(
    "batch",
    "evaluate many cases by several processes or a cluster, into one table; goes on where it "
    "stopped",
    add_flags,
    run,
)
