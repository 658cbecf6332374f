"""The processes of this machine as workers of a study, and their shares of its cores."""

import os
from collections.abc import Callable, Iterator
from concurrent.futures import BrokenExecutor, Executor, Future
from contextlib import AbstractContextManager, contextmanager
from functools import partial
from pathlib import Path
from typing import Any

import front3d


class Processes(AbstractContextManager["Processes"]):
    """Processes of this machine, started when they are needed.

    Each is an executor of its own, so that the death of one is that of one case, which is known,
    and the others go on.
    """

    gave_up: tuple[type[BaseException], ...] = ()

    def __init__(self, count: int, threads: int) -> None:
        from multiprocessing import get_context

        self._context = get_context("spawn")
        self._begin = partial(begin_worker, threads)
        # Workers end when the other end closes, on purpose or because this process was killed.
        self._leash, self._held = self._context.Pipe(duplex=False)
        self._idle = [self._executor() for _ in range(count)]
        self._busy: dict[Future[Any], Executor] = {}

    def _executor(self) -> Executor:
        from concurrent.futures import ProcessPoolExecutor

        return ProcessPoolExecutor(1, self._context, self._begin, (self._leash,))

    @property
    def room(self) -> bool:
        return bool(self._idle)

    def submit(self, call: Callable[[], Any]) -> "Future[Any]":
        executor = self._idle.pop()
        with _interrupts_wait():
            try:
                future = executor.submit(call)
            except BrokenExecutor:  # its process died, with its last case or idle since
                executor.shutdown(wait=False)
                executor = self._executor()
                future = executor.submit(call)
        self._busy[future] = executor
        return future

    def ended(self, future: "Future[Any]") -> None:
        self._idle.append(self._busy.pop(future))

    def __exit__(self, *_: object) -> None:
        self._held.close()
        for executor in (*self._idle, *self._busy.values()):
            executor.shutdown(wait=True, cancel_futures=True)
        self._leash.close()


@contextmanager
def _interrupts_wait() -> Iterator[None]:
    """A process started meanwhile never sees Ctrl-C, not even before `begin_worker`."""
    import signal

    if not hasattr(signal, "pthread_sigmask"):
        yield
        return
    before = signal.pthread_sigmask(signal.SIG_BLOCK, {signal.SIGINT})
    try:
        yield
    finally:
        signal.pthread_sigmask(signal.SIG_SETMASK, before)


def begin_worker(threads: int, leash: Any) -> None:
    """What a process does before its first case: its share of the cores, its end with the study.

    Runs before any numerical library is imported: they look at these names once.
    """
    import signal
    import threading

    signal.signal(signal.SIGINT, signal.SIG_IGN)  # the study ends its workers itself
    threading.Thread(target=_end_with, args=(leash,), daemon=True).start()
    use_threads(threads)


def _end_with(leash: Any) -> None:
    import signal

    try:
        leash.recv()
    except (EOFError, OSError):
        os.kill(os.getpid(), signal.SIGTERM)


def use_threads(count: int) -> None:
    """Have libraries that are imported later use `count` threads, or fewer where it was said so."""
    for name in ("NUMBA", "OMP", "OPENBLAS", "MKL"):
        variable = f"{name}_NUM_THREADS"
        given = os.environ.get(variable, "")
        os.environ[variable] = str(min(count, int(given)) if given.isdigit() else count)


def kernels_compiled() -> bool:
    """Whether kernels compiled earlier lie where numba keeps them: in a folder that was named, in
    the package, or, where that cannot be written, in the user's cache.
    """
    chosen = os.environ.get("NUMBA_CACHE_DIR")
    package = Path(front3d.__file__).parent
    folders = [Path(chosen)] if chosen else [package, Path("~/.cache/numba").expanduser()]
    return any(any(folder.rglob("*.nbi")) for folder in folders)


def cores() -> int:
    """Cores that this process may use."""
    if hasattr(os, "sched_getaffinity"):
        return len(os.sched_getaffinity(0))
    return os.cpu_count() or 1
