"""Work over threads, its results in the order of the parts.

Kernels let go of the interpreter's lock, so parts run side by side; the number of threads never
changes a result, since every part is worked on alone and the caller takes them in their order.
"""

from collections import deque
from collections.abc import Callable, Iterator, Sequence
from concurrent.futures import Future, ThreadPoolExecutor
from typing import TypeVar

import numba

Part = TypeVar("Part")
Result = TypeVar("Result")

_AHEAD = 2
"""Parts that wait for each thread, so that none idles and few results are held."""


def thread_count() -> int:
    """Threads to use: the cores this process may run on, or NUMBA_NUM_THREADS."""
    return int(numba.config.NUMBA_NUM_THREADS)  # type: ignore[attr-defined]


def in_order(work: Callable[[Part], Result], parts: Sequence[Part]) -> Iterator[Result]:
    """work(part) of every part, over threads, in the order of the parts; few are held at a time."""
    threads = min(thread_count(), len(parts))
    if threads < 2:
        yield from map(work, parts)
        return
    with ThreadPoolExecutor(threads) as pool:
        waiting: deque[Future[Result]] = deque()
        try:
            for part in parts:
                waiting.append(pool.submit(work, part))
                if len(waiting) > _AHEAD * threads:
                    yield waiting.popleft().result()
            while waiting:
                yield waiting.popleft().result()
        finally:
            for future in waiting:
                future.cancel()
