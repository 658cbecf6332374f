"""`front3d report`: one HTML page from the folder of an earlier evaluation."""

import argparse
from pathlib import Path

from front3d.cli.command import Command


def add_flags(parser: argparse.ArgumentParser) -> None:
    parser.add_argument(
        "folder", metavar="OUT", type=Path, help="folder that an evaluation was written to"
    )


def run(arguments: argparse.Namespace) -> int:
    from front3d.output.report import write_report
    from front3d.output.saved import read_saved
    from front3d.results import CAUTION

    path, notes = write_report(read_saved(arguments.folder))
    print("\n".join([*(f"note: {note}" for note in notes), f"written: {path}", CAUTION]))
    return 0


COMMAND = Command(
    "report",
    "write one HTML page to send on, from the folder of an earlier evaluation",
    add_flags,
    run,
)
