"""What a command is."""

import argparse
from collections.abc import Callable
from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Command:
    """A command: its name, one line of help, how its flags are added, and what it does.

    `run` prints its answer and returns the exit code.
    """

    name: str
    help: str
    add_flags: Callable[[argparse.ArgumentParser], None]
    run: Callable[[argparse.Namespace], int]
