"""Progress on a terminal, on stderr; nothing in a pipe."""

import os
import sys
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from pathlib import Path

import front3d

FIRST_RUN = "first run: kernels are being compiled, about a minute; later runs start at once"


@contextmanager
def progress_bar() -> Iterator[Callable[[str, float], None] | None]:
    """A callback (stage, fraction done) that moves a bar on stderr; None when nobody watches."""
    if not sys.stderr.isatty():
        yield None
        return
    from rich.console import Console
    from rich.progress import BarColumn, Progress, TextColumn, TimeElapsedColumn

    console = Console(stderr=True)
    if not kernels_compiled():
        console.print(FIRST_RUN, style="dim")
    with Progress(
        TextColumn("{task.description}"),
        BarColumn(),
        TimeElapsedColumn(),
        console=console,
        transient=True,
    ) as bar:
        task = bar.add_task("starting", total=1.0)

        def show(stage: str, fraction: float) -> None:
            bar.update(task, description=stage, completed=fraction)

        yield show


def kernels_compiled() -> bool:
    """Whether a cache of compiled kernels is there already, where numba keeps it."""
    package = Path(front3d.__file__).parent
    chosen = os.environ.get("NUMBA_CACHE_DIR")
    return any((Path(chosen) if chosen else package).rglob("*.nbi"))
