"""The command line: the only place that prints or exits.

Numerical libraries are imported inside the commands, so that `front3d --help` answers at once.
"""

from front3d.cli.main import main

__all__ = ["main"]
