"""The workers of a Dask cluster as workers of a study."""

import logging
import socket
from collections.abc import Callable
from concurrent.futures import Future
from contextlib import AbstractContextManager, ExitStack
from typing import Any
from urllib.parse import urlsplit

from front3d.batch.processes import use_threads
from front3d.errors import Front3DError


class Cluster(AbstractContextManager["Cluster"]):
    """The workers of a Dask cluster that is there already."""

    room = True

    def __init__(self, address: str) -> None:
        _knock(address)
        try:
            from distributed import Client
            from distributed.scheduler import KilledWorker
        except ImportError as error:
            raise Front3DError(
                "a scheduler needs the package distributed, which is not installed; "
                "pip install 'front3d[cluster]' installs it"
            ) from error
        self.gave_up: tuple[type[BaseException], ...] = (KilledWorker,)
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

    def __exit__(self, *_: object) -> None:
        self._executor.shutdown(wait=False)
        self._opened.close()


def _knock(address: str) -> None:
    """Front3DError where nobody listens: a client that fails to connect ends after long waits."""
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
