"""The commands and their flags."""

import argparse
from collections.abc import Sequence

from front3d import __version__
from front3d.cli import demo, evaluate, inspect, sample

_DESCRIPTION = (
    "Stress intensity factors K_I, K_II, K_III along the crack fronts of a finite-element result. "
    "The crack is found in the mesh."
)

_EPILOG = (
    "Results are an engineering aid: qualified engineers and the governing code decide. "
    "Exit code: 0 done, 1 wrong input, 2 wrong call."
)


def build_parser(words: Sequence[str]) -> argparse.ArgumentParser:
    """The parser for a call of `words`; the samples' own flags only where `sample` is called."""
    parser = argparse.ArgumentParser(
        prog="front3d",
        description=_DESCRIPTION,
        epilog=_EPILOG,
        allow_abbrev=False,
    )
    parser.add_argument("--version", action="version", version=f"front3d {__version__}")
    common = argparse.ArgumentParser(add_help=False, allow_abbrev=False)
    common.add_argument("--debug", action="store_true", help="show the traceback of an error")
    commands = parser.add_subparsers(title="commands", metavar="COMMAND", required=True)
    for module in (demo, evaluate, inspect, sample):
        command = commands.add_parser(
            module.NAME,
            help=module.HELP,
            description=module.HELP,
            parents=[common],
            allow_abbrev=False,
        )
        command.set_defaults(run=module.run, parser=command)
        if module is not sample or sample.NAME in words:
            module.add_flags(command)
    return parser
