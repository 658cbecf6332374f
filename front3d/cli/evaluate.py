"""`front3d evaluate`: K along every front of a result, written into a folder."""

import argparse
from pathlib import Path
from typing import TYPE_CHECKING

from front3d.case import Case
from front3d.cli.command import Command
from front3d.cli.flags import add_evaluation_flags, add_result, case_of, require_constants
from front3d.cli.progress import progress_bar
from front3d.cli.words import describe_evaluation, describe_written
from front3d.errors import ReadError
from front3d.job import check_constants, run_case

if TYPE_CHECKING:
    from front3d.output.folder import Written
    from front3d.results import Evaluation


def add_flags(parser: argparse.ArgumentParser) -> None:
    add_result(parser)
    add_evaluation_flags(parser)
    add_output_flags(parser)


def add_output_flags(parser: argparse.ArgumentParser) -> None:
    parser.add_argument(
        "--out", type=Path, default=Path("out"), metavar="DIR", help="folder (default: %(default)s)"
    )
    parser.add_argument("--no-pictures", action="store_true", help="write tables only")


def run(arguments: argparse.Namespace) -> int:
    case = case_of(arguments)
    if case.source is None and not case.own_constants:
        for flag in ("young", "poisson"):
            if getattr(case, flag) is None:
                _check_there(case)
                arguments.parser.error(
                    f"--{flag} is missing; a result file does not hold the elastic constants"
                )
    require_constants(arguments)
    evaluation, written = evaluate_case(case, arguments.out, pictures=not arguments.no_pictures)
    print("\n".join([*describe_evaluation(evaluation), "", *describe_written(written)]))
    return 0


def _check_there(case: Case) -> None:
    """ReadError for a file that is not there: to be said before what else is missing."""
    for path in case.results:
        if not path.exists():
            raise ReadError(f"{path}: no such file; check the name and the directory")


def evaluate_case(case: Case, out: Path, *, pictures: bool) -> "tuple[Evaluation, Written]":
    """Read, evaluate and write what was found into the folder `out`, under a bar of progress."""
    check_constants(case)  # before a folder is made
    from front3d.output.files import results_folder

    with results_folder(out), progress_bar() as progress:
        return run_case(case, out, pictures=pictures, progress=progress)


COMMAND = Command(
    "evaluate", "compute K_I, K_II, K_III along every crack front of a result", add_flags, run
)
