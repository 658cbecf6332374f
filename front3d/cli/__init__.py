"""The command line: the only place that prints or exits.

Numerical libraries are imported inside the commands, so that `front3d --help` answers at once.
"""

import gc

from front3d.cli.main import main

_ALLOCATIONS = 200_000


def process() -> int:
    """`front3d` as a process of its own.

    Hundreds of thousands of objects come with the libraries and stay: to look through them for
    garbage again and again, and once more at the end, costs a tenth of a short run.
    """
    gc.set_threshold(_ALLOCATIONS, 20, 20)
    try:
        return main()
    finally:
        gc.freeze()


__all__ = ["main", "process"]
