"""Who does the work: this machine's processes, or a cluster; one loop over both."""

import logging
import os
import socket
from collections import Counter, deque
from collections.abc import Callable, Iterator, Sequence
from concurrent.futures import BrokenExecutor, CancelledError, Executor, Future
from contextlib import ExitStack, contextmanager
from functools import partial
from pathlib import Path
from queue import SimpleQueue
from types import TracebackType
from typing import Any, Protocol, Self, TypeVar
from urllib.parse import urlsplit

import front3d
from front3d.batch.worker import TRIES, killed
from front3d.errors import Front3DError

Work = TypeVar("Work")
Found = TypeVar("Found")


class Pool(Protocol):
    """Workers that take a call each."""

    gave_up: tuple[type[BaseException], ...]
    """What a future raises that the pool itself gave up, because its workers died."""

    @property
    def room(self) -> bool:
        """Whether a further call can be taken now."""

    def submit(self, call: Callable[[], Any]) -> "Future[Any]":
        """Hand a call to a worker."""

    def ended(self, future: "Future[Any]") -> None:
        """Take notice that a call has ended."""


class LostError(Front3DError):
    """The workers of a call died."""


def run(
    work: Callable[[Work], Found], items: Sequence[Work], pool: Pool, *, first_alone: bool = False
) -> Iterator[tuple[Work, Found | LostError]]:
    """`work` of every item by the workers of `pool`, as they come; LostError in place of what an
    item gives whose workers died `TRIES` times.

    `first_alone` has one worker compile the kernels that all others then find compiled.
    """
    waiting, running = deque(items), dict[Future[Any], Work]()
    ended: SimpleQueue[Future[Any]] = SimpleQueue()
    deaths: Counter[int] = Counter()
    while waiting or running:
        while waiting and pool.room and not (first_alone and running):
            item = waiting.popleft()
            future = pool.submit(partial(work, item))
            running[future] = item
            future.add_done_callback(ended.put)
        future = ended.get()
        item = running.pop(future)
        pool.ended(future)
        try:
            found = future.result()
        except BrokenExecutor:
            deaths[id(item)] += 1
            if deaths[id(item)] < TRIES:
                waiting.appendleft(item)
            else:
                yield item, LostError(killed(TRIES))
        except pool.gave_up as error:
            yield item, LostError(killed(getattr(error, "allowed_failures", 0) + 1))
        except CancelledError as error:
            raise Front3DError(
                "the scheduler went away; the same command goes on from where it stopped"
            ) from error
        except Exception as error:  # what came back is not an answer of ours
            yield item, LostError(f"a worker could not take it: {type(error).__name__}: {error}")
        else:
            first_alone = False
            yield item, found


class Processes:
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
            except BrokenExecutor:  # it died while it had nothing to do
                executor = self._executor()
                future = executor.submit(call)
        self._busy[future] = executor
        return future

    def ended(self, future: "Future[Any]") -> None:
        executor = self._busy.pop(future)
        if isinstance(future.exception(), BrokenExecutor):
            executor.shutdown(wait=False)
            executor = self._executor()
        self._idle.append(executor)

    def __enter__(self) -> Self:
        return self

    def __exit__(
        self,
        kind: type[BaseException] | None,
        error: BaseException | None,
        trace: TracebackType | None,
    ) -> None:
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


class Cluster:
    """The workers of a Dask cluster that is there already."""

    room = True

    def __init__(self, address: str) -> None:
        try:
            from distributed import Client
            from distributed.scheduler import KilledWorker
        except ImportError as error:
            raise Front3DError(
                "a scheduler needs the package distributed, which is not installed; "
                "pip install 'front3d[cluster]' installs it"
            ) from error
        self.gave_up: tuple[type[BaseException], ...] = (KilledWorker,)
        _knock(address)
        # What its log tells of lost connections is said here in a sentence.
        logging.getLogger("distributed").setLevel(logging.CRITICAL)
        with ExitStack() as opened:
            try:
                connect: Any = Client  # has no types
                client = opened.enter_context(connect(address, timeout=20, set_as_default=False))
            except (OSError, ValueError, TimeoutError) as error:
                raise _no_scheduler(address, error) from error
            self._client = client
            # Not pure: the same call again is meant to be carried out again.
            self._executor = client.get_executor(pure=False)
            self._opened = opened.pop_all()

    @property
    def workers(self) -> int:
        """How many workers the cluster has now."""
        return len(self._client.scheduler_info(n_workers=-1)["workers"])

    def submit(self, call: Callable[[], Any]) -> "Future[Any]":
        return self._executor.submit(_in_cluster, call)

    def ended(self, future: "Future[Any]") -> None:
        """Nothing: the scheduler knows."""

    def __enter__(self) -> Self:
        return self

    def __exit__(
        self,
        kind: type[BaseException] | None,
        error: BaseException | None,
        trace: TracebackType | None,
    ) -> None:
        self._executor.shutdown(wait=False)
        self._opened.close()


def _knock(address: str) -> None:
    """Front3DError where nobody listens: a client that does not come about ends after long waits."""
    place = urlsplit(address if "//" in address else f"//{address}")
    if place.scheme not in ("", "tcp", "tls"):
        return
    try:
        if place.hostname is None or place.port is None:
            raise ValueError("no host and port in it")
        socket.create_connection((place.hostname, place.port), timeout=10).close()
    except (OSError, ValueError) as error:
        raise _no_scheduler(address, error) from error


def _no_scheduler(address: str, error: Exception) -> Front3DError:
    return Front3DError(
        f"{address}: no scheduler answers ({error}); expected the address that `dask scheduler` "
        "shows, such as tcp://host:8786"
    )


def _in_cluster(call: Callable[[], Any]) -> Any:
    """A call on the threads that its worker was given."""
    from distributed import get_worker

    use_threads(get_worker().state.nthreads)
    return call()


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
