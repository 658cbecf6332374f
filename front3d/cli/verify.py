"""`front3d verify`: known answers on this machine, written down for a quality file."""

import argparse
from pathlib import Path
from typing import TYPE_CHECKING

from front3d.cli.command import Command
from front3d.cli.progress import progress_bar
from front3d.cli.words import table
from front3d.errors import CaseError

if TYPE_CHECKING:
    from front3d.verification import Case, Row

NAMES = ("verification.md", "verification.json")


def add_flags(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("--quick", action="store_true", help="a part of the cases, in minutes")
    parser.add_argument(
        "--case",
        action="append",
        default=[],
        metavar="WORDS",
        help="only cases whose name contains these words (may be repeated)",
    )
    parser.add_argument("--list", action="store_true", help="list the cases and end")
    parser.add_argument(
        "--out",
        type=Path,
        default=Path("verification"),
        metavar="DIR",
        help="folder for the record (default: %(default)s)",
    )


def run(arguments: argparse.Namespace) -> int:
    from front3d.output.files import results_folder, whole_set
    from front3d.results import CAUTION
    from front3d.verification import verify
    from front3d.verification.record import as_json, markdown, now, verdict

    cases = _chosen(arguments)
    if arguments.list:
        print("\n".join(table([{"case": c.name, "source": c.source} for c in cases])))
        return 0
    with results_folder(arguments.out):
        with progress_bar() as progress:
            rows = list(verify(cases, progress))
        when = now()
        with whole_set() as write:
            for name, make in zip(NAMES, (markdown, as_json), strict=True):
                write(arguments.out / name, make(rows, when))
    print("\n".join([*table([_short(row) for row in rows]), "", verdict(rows)]))
    print(f"written to {arguments.out}: {', '.join(NAMES)}\n\n{CAUTION}")
    return 0 if all(row.within for row in rows) else 1


def _chosen(arguments: argparse.Namespace) -> "list[Case]":
    from front3d.verification import CASES

    chosen = [case for case in CASES if case.quick or not arguments.quick]
    if arguments.case:
        named = [c for c in CASES if any(words in c.name for words in arguments.case)]
        chosen = [c for c in chosen if c in named]
        if named and not chosen:
            raise CaseError(
                f"verify: --quick leaves out {', '.join(c.name for c in named)}; ask for "
                f"{'it' if len(named) == 1 else 'them'} without --quick"
            )
    if not chosen:
        raise CaseError(
            f"verify: found no case with {' or '.join(map(repr, arguments.case))} in its name "
            "(--list shows them)"
        )
    return chosen


def _short(row: "Row") -> dict[str, str]:
    """The row for a screen: the source is in the files."""
    from front3d.verification.record import HEADINGS, cells_of

    texts = dict(zip(HEADINGS, cells_of(row), strict=True))
    del texts["source"]
    return texts


COMMAND = Command(
    "verify",
    "build, solve and evaluate models with known answers, and write a record of the deviations",
    add_flags,
    run,
)
