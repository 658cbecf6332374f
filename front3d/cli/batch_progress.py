"""Progress of a study on stderr: a bar on a terminal, a line now and then elsewhere."""

import sys
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from time import monotonic
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from front3d.batch.finished import Outcome

Show = Callable[["Outcome"], None]

EVERY = 5.0
"""Seconds between two lines, at least."""


class Count:
    """How many cases are done and failed, and how long the others will take.

    `to_do` is the number of cases that are not finished from earlier runs.
    """

    def __init__(self, to_do: int, now: Callable[[], float] = monotonic) -> None:
        self.to_do, self.done, self.failed = to_do, 0, 0
        self._now, self._start = now, now()

    def add(self, outcome: "Outcome") -> None:
        self.done += outcome.done
        self.failed += not outcome.done

    def __str__(self) -> str:
        ended = self.done + self.failed
        words = f"{ended} of {self.to_do} cases, {self.done} done, {self.failed} failed"
        left = (self.to_do - ended) * (self._now() - self._start) / max(1, ended)
        return f"{words}, about {duration(left)} left" if ended < self.to_do else words


def duration(seconds: float) -> str:
    if seconds < 90:
        return f"{seconds:.0f} s"
    if seconds < 5400:
        return f"{seconds / 60:.0f} min"
    return f"{seconds / 3600:.1f} h"


@contextmanager
def study_progress(to_do: int) -> Iterator[Show]:
    """A function to be told of every case that ends."""
    if sys.stderr.isatty():
        yield from _bar(to_do)
    else:
        yield _lines(to_do)


def _lines(to_do: int) -> Show:
    count, last = Count(to_do), monotonic()

    def show(outcome: "Outcome") -> None:
        nonlocal last
        count.add(outcome)
        if not outcome.done:
            print(_failure(outcome), file=sys.stderr, flush=True)
        ended = count.done + count.failed
        if ended == to_do or monotonic() - last >= EVERY:
            last = monotonic()
            print(count, file=sys.stderr, flush=True)

    return show


def _bar(to_do: int) -> Iterator[Show]:
    from rich.console import Console
    from rich.progress import BarColumn, Progress, TextColumn
    from rich.text import Text

    count = Count(to_do)
    console = Console(stderr=True)
    with Progress(
        BarColumn(), TextColumn("{task.description}"), console=console, transient=True
    ) as bar:
        task = bar.add_task(str(count), total=to_do)

        def show(outcome: "Outcome") -> None:
            count.add(outcome)
            if not outcome.done:
                console.print(Text(_failure(outcome)))
            bar.update(task, description=str(count), completed=count.done + count.failed)

        yield show


def _failure(outcome: "Outcome") -> str:
    return f"failed: {outcome.name}: {outcome.message}"
