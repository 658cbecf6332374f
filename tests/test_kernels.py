"""Kernels as a whole: how often they are compiled, where they are kept, how threads share them."""

import subprocess
import sys
from collections.abc import Iterator
from pathlib import Path

import numba
import numpy as np
import pytest
from numba.core import caching

import front3d
from front3d import jit, threads

DATA = Path(__file__).parent / "data"


@pytest.mark.parametrize("count", [1, 2, 3])
def test_parts_come_back_in_their_order(monkeypatch: pytest.MonkeyPatch, count: int) -> None:
    monkeypatch.setattr(threads, "thread_count", lambda: count)
    assert list(threads.in_order(lambda k: k * k, range(50))) == [k * k for k in range(50)]
    with pytest.raises(ZeroDivisionError):
        list(threads.in_order(lambda k: 1 / (k - 20), range(50)))


def test_few_parts_are_handed_out_ahead_of_their_results(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(threads, "thread_count", lambda: 2)
    drawn: list[int] = []

    class Parts(list[int]):
        def __iter__(self) -> Iterator[int]:
            for part in range(100):
                drawn.append(part)
                yield part

    results = threads.in_order(lambda k: k, Parts(range(100)))
    assert next(results) == 0
    assert len(drawn) < 10
    assert list(results) == list(range(1, 100))


def test_results_do_not_depend_on_the_number_of_threads(monkeypatch: pytest.MonkeyPatch) -> None:
    solid = front3d.load(DATA / "row.vtu")
    found = []
    for count in (1, 2, 3):
        monkeypatch.setattr(threads, "thread_count", lambda count=count: count)
        result = front3d.evaluate(solid, young=1.0, poisson=0.3, methods="interaction")
        found.append(result.fronts[0].K)
    np.testing.assert_array_equal(found[0], found[1])
    np.testing.assert_array_equal(found[0], found[2])


def test_without_a_place_for_the_cache_kernels_still_run(monkeypatch: pytest.MonkeyPatch) -> None:
    for cache in (caching.CompileResultCacheImpl, caching.CacheImpl):
        monkeypatch.setattr(cache, "_locator_classes", [])
    with pytest.raises(RuntimeError, match="locator"):
        numba.njit(halved, cache=True)
    assert jit.kernel(halved)(3.0) == 1.5


def halved(x: float) -> float:
    return x / 2.0


@pytest.mark.slow
def test_every_kernel_is_compiled_for_one_type_of_arrays_only() -> None:
    """Whatever the loads: a second specialisation would cost its seconds again."""
    code = """
import sys, front3d
from numba.core.registry import CPUDispatcher
solid = front3d.load(sys.argv[1])
front3d.evaluate(solid, young=1.0, poisson=0.3)
loads = dict(face_pressure=0.1, gravity=(0.0, 0.0, 1.0), density=1.0)
front3d.evaluate(solid, young=1.0, poisson=0.3, **loads)
kernels = {k for name, module in list(sys.modules.items()) if name.startswith("front3d")
           for k in vars(module).values() if isinstance(k, CPUDispatcher)}
for k in kernels:
    print(k.py_func.__name__, len(k.signatures))
"""
    ran = subprocess.run(
        [sys.executable, "-c", code, str(DATA / "row.vtu")],
        capture_output=True, text=True, check=True,
    )  # fmt: skip
    counts = {name: int(n) for name, n in (line.split() for line in ran.stdout.splitlines())}
    assert counts["cell_forces"] == counts["face_forces"] == 1
    assert {name for name, n in counts.items() if n > 1} == set()
