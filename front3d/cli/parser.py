"""The commands and their flags."""

import argparse
from collections.abc import Sequence
from typing import NoReturn

from front3d import __version__
from front3d.cli.batch import COMMAND as BATCH
from front3d.cli.command import Command
from front3d.cli.demo import COMMAND as DEMO
from front3d.cli.evaluate import COMMAND as EVALUATE
from front3d.cli.inspect import COMMAND as INSPECT
from front3d.cli.report import COMMAND as REPORT
from front3d.cli.sample import COMMAND as SAMPLE
from front3d.cli.verify import COMMAND as VERIFY
from front3d.cli.view import COMMAND as VIEW

COMMANDS: tuple[Command, ...] = (BATCH, DEMO, EVALUATE, INSPECT, REPORT, SAMPLE, VERIFY, VIEW)

_DESCRIPTION = (
    "Stress intensity factors K_I, K_II, K_III along the crack fronts of a finite-element result. "
    "The crack is found in the mesh."
)

_EPILOG = (
    "Results are an engineering aid: qualified engineers and the governing code decide. "
    "Exit code: 0 done, 1 wrong input, 2 wrong call."
)


class _Parser(argparse.ArgumentParser):
    """A parser whose errors are one sentence: the list of all flags would hide it."""

    def error(self, message: str) -> NoReturn:
        self.exit(2, f"{self.prog}: error: {message}\nall flags: {self.prog} --help\n")


def build_parser(words: Sequence[str]) -> argparse.ArgumentParser:
    """The parser for a call of `words`; the samples' own flags only where `sample` is called."""
    parser = _Parser(
        prog="front3d",
        description=_DESCRIPTION,
        epilog=_EPILOG,
        allow_abbrev=False,
    )
    parser.add_argument("--version", action="version", version=f"front3d {__version__}")
    common = _Parser(add_help=False, allow_abbrev=False)
    common.add_argument("--debug", action="store_true", help="show the traceback of an error")
    commands = parser.add_subparsers(title="commands", metavar="COMMAND", required=True)
    for command in COMMANDS:
        sub = commands.add_parser(
            command.name,
            help=command.help,
            description=command.help,
            parents=[common],
            allow_abbrev=False,
        )
        sub.set_defaults(run=command.run, parser=sub)
        if command is not SAMPLE or SAMPLE.name in words:
            command.add_flags(sub)
    return parser
