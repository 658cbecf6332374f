"""The loop over the cases of a study, whoever works on them."""

from collections import Counter, deque
from collections.abc import Callable, Iterator, Sequence
from concurrent.futures import BrokenExecutor, CancelledError, Future
from functools import partial
from queue import SimpleQueue
from typing import Any, Protocol, TypeVar

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
