"""Progress on a terminal, on stderr; in a pipe only that kernels are being compiled."""

import sys
from collections.abc import Callable, Iterator
from contextlib import contextmanager

FIRST_RUN = (
    "kernels are being compiled, about half a minute in all; later runs find them on this machine"
)


@contextmanager
def progress_bar() -> Iterator[Callable[[str, float], None] | None]:
    """A callback (stage, fraction done) that moves a bar on stderr; None where it is no terminal.

    While kernels are compiled the bar says which; without one a line says once that they are.
    """
    from front3d.jit import compilations

    if not sys.stderr.isatty():
        with compilations(_first(lambda: print(FIRST_RUN, file=sys.stderr, flush=True))):
            yield None
        return
    from rich.console import Console
    from rich.progress import BarColumn, Progress, TextColumn, TimeElapsedColumn

    console = Console(stderr=True)
    stage = "starting"
    tell = _first(lambda: console.print(FIRST_RUN, style="dim"))
    with Progress(
        TextColumn("{task.description}"),
        BarColumn(),
        TimeElapsedColumn(),
        console=console,
        transient=True,
    ) as bar:
        task = bar.add_task(stage, total=1.0)

        def show(now: str, fraction: float) -> None:
            nonlocal stage
            stage = now
            bar.update(task, description=stage, completed=fraction)

        def say(kernel: str | None) -> None:
            tell(kernel)
            words = f"{stage}: compiling {kernel}" if kernel else stage
            bar.update(task, description=words, refresh=True)

        with compilations(say):
            yield show


def _first(tell: Callable[[], None]) -> Callable[[str | None], None]:
    """Calls `tell` at the first kernel that is compiled."""
    told = False

    def say(kernel: str | None) -> None:
        nonlocal told
        if kernel and not told:
            tell()
            told = True

    return say
