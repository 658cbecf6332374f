"""The volume kernel of the interaction integral by numba, by numpy and in C, on the same tube.

All three take the same arrays, in the same parts, over the same threads.
"""

import ctypes
import json
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass, replace
from functools import partial
from pathlib import Path

import numpy as np

from benchmarks import numpy_twin
from benchmarks.mesh import POISSON, YOUNG, build, size_of
from front3d.arrays import FloatArray, IntArray
from front3d.crack import find_cracks
from front3d.crack.curve import CurveArrays
from front3d.methods import nodal_forces
from front3d.methods.assembly import CELL_RULE, Assembly, _rule
from front3d.methods.context import FrontContext
from front3d.methods.nodal_forces import N_MODES, Rule
from front3d.methods.rings import N_RINGS, ring_radii
from front3d.methods.tube import build_tube, layer_reaches
from front3d.options import Options
from front3d.solid import CellBlock, Material, Solid, Step

PART = 512
"""Cells per call, as the evaluation has them."""

Kernel = Callable[["Inputs", slice], FloatArray]


@dataclass(frozen=True, slots=True, eq=False)
class Inputs:
    """What the kernel is given: the tube of one front, its cells of one kind."""

    points: FloatArray
    cells: IntArray
    side: IntArray
    seed: FloatArray
    displacement: FloatArray
    state: FloatArray
    rule: Rule
    curve: CurveArrays
    constants: tuple[float, float, float, float]

    @classmethod
    def of(cls, solid: Solid, material: Material) -> "Inputs":
        """Those of the first front of a solid, as the interaction integral makes them."""
        model = find_cracks(solid)
        front, options = model.fronts[0][0], Options()
        displacement = np.stack([step.displacement for step in solid.steps])
        context = FrontContext(
            solid, model, model.patches[0], front, material, options, displacement
        )
        reaches = layer_reaches(context, 1 + N_RINGS)
        radii, _ = ring_radii(front, reaches, [], context.cells.structured, None, solid.source)
        tube = build_tube(context, float(radii.max()))
        ready = Assembly(context, tube, np.zeros((0, 3)))
        element = solid.blocks[0].element
        cells = ready._local(solid.blocks[0].nodes[tube.cells[0]])
        return cls(
            ready._points, cells, *ready._beside(cells), ready._displacement, ready._state,
            _rule(element, *element.quadrature(CELL_RULE)), ready._curve, ready._constants,
        )  # fmt: skip

    @property
    def gauss_points(self) -> int:
        return len(self.cells) * len(self.rule[1])

    def room(self, cells: int) -> FloatArray:
        return np.empty((cells, len(self.displacement), self.cells.shape[1], 3 * N_MODES))


def by_numba(given: Inputs, part: slice) -> FloatArray:
    """The one place where the benchmarks call the kernel."""
    cells = given.cells[part]
    out = given.room(len(cells))
    nodal_forces.cell_forces(
        given.points, cells, given.side[part], given.seed[part], given.displacement, given.state,
        given.rule, given.curve, given.constants, out, np.zeros(len(cells), np.int64),
    )  # fmt: skip
    return out


def by_numpy(given: Inputs, part: slice) -> FloatArray:
    shear, poisson, _, _ = given.constants
    forces = numpy_twin.cell_forces(
        given.points, given.cells[part], given.side[part], given.seed[part], given.displacement,
        given.rule, given.curve, shear, poisson,
    )  # fmt: skip
    return np.moveaxis(forces, 2, 3).reshape(*forces.shape[:2], forces.shape[3], -1)


def by_c(library: ctypes.CDLL, given: Inputs, part: slice) -> FloatArray:
    cells = given.cells[part]
    out, status = given.room(len(cells)), np.empty(len(cells), np.int64)
    side, seed = given.side[part], given.seed[part]
    shapes, weights = given.rule
    knots, position, normal, closed = given.curve
    shear, poisson, turn, _ = given.constants
    many = ctypes.c_long

    def at(array: np.ndarray) -> ctypes.c_void_p:
        return ctypes.c_void_p(array.ctypes.data)

    library.cell_forces(
        at(given.points), many(len(given.points)), at(cells), many(len(cells)),
        many(cells.shape[1]), at(side), at(seed), at(given.displacement),
        many(len(given.displacement)), at(shapes), at(weights),
        many(len(weights)), at(knots), at(position), at(normal), many(len(position)),
        ctypes.c_int(closed), ctypes.c_double(shear), ctypes.c_double(poisson),
        ctypes.c_double(turn), at(out), at(status),
    )  # fmt: skip
    return out


def compiled(folder: Path, *flags: str) -> Kernel:
    """The C kernel, compiled by the system's compiler."""
    library = folder / f"kernel{len(flags)}.so"
    source = Path(__file__).with_name("kernel.c")
    subprocess.run(
        ["cc", "-O3", *flags, "-shared", "-fPIC", "-o", str(library), str(source), "-lm"],
        check=True,
    )
    return partial(by_c, ctypes.CDLL(str(library)))


def by_parts(kernels: dict[str, Kernel], given: Inputs, repeats: int) -> dict[str, float]:
    """Processor seconds per million Gauss points on one thread.

    Taken part by part, the kernels in turn, the shortest of each: other work on the machine counts
    as little as it can.
    """
    parts = _parts(len(given.cells))
    shortest = {name: np.full(len(parts), np.inf) for name in kernels}
    for _ in range(repeats):
        for k, part in enumerate(parts):
            for name, kernel in kernels.items():
                start = time.thread_time()
                kernel(given, part)
                shortest[name][k] = min(shortest[name][k], time.thread_time() - start)
    million = given.gauss_points / 1e6
    return {name: float(times.sum()) / million for name, times in shortest.items()}


def by_threads(kernel: Kernel, given: Inputs, repeats: int) -> dict[str, float]:
    """Seconds per million Gauss points on one thread and on two, in turn, the shortest of each; and
    processor seconds, whose growth says what threads cost each other whatever else runs.
    """
    parts = _parts(len(given.cells))
    shortest, spent = {1: np.inf, 2: np.inf}, {1: np.inf, 2: np.inf}
    for _ in range(repeats):
        for threads in shortest:
            with ThreadPoolExecutor(threads) as pool:
                start, cpu = time.perf_counter(), time.process_time()
                for _ in pool.map(lambda part: kernel(given, part) is None, parts):
                    pass
                shortest[threads] = min(shortest[threads], time.perf_counter() - start)
                spent[threads] = min(spent[threads], time.process_time() - cpu)
    million = given.gauss_points / 1e6
    found = {f"{n} threads": time / million for n, time in shortest.items()}
    return found | {f"{n} threads, processor": time / million for n, time in spent.items()}


def _parts(count: int) -> list[slice]:
    return [slice(k, min(k + PART, count)) for k in range(0, count, PART)]


def measure(given: Inputs, repeats: int = 4) -> dict[str, float]:
    """Seconds per million Gauss points, and how far the results are apart, over the largest."""
    some = slice(0, min(PART, len(given.cells)))
    with tempfile.TemporaryDirectory() as folder:
        kernels = {
            "numba": by_numba,
            "C -O3": compiled(Path(folder)),
            "C -O3 -march=native": compiled(Path(folder), "-march=native"),
        }
        expected = by_numba(given, some)
        largest = float(np.abs(expected).max())
        found: dict[str, float] = {
            f"difference of {name}": float(np.abs(kernel(given, some) - expected).max()) / largest
            for name, kernel in {**kernels, "numpy": by_numpy}.items()
        }
        found |= by_parts(kernels, given, repeats)
        # numpy takes long.  "At once" is without parts, as one would first write it.
        fewer = replace(given, cells=given.cells[: 2 * repeats * PART])
        found |= by_parts({"numpy": by_numpy}, fewer, repeats)
        start = time.thread_time()
        by_numpy(given, slice(0, len(given.cells)))
        found["numpy at once"] = (time.thread_time() - start) / (given.gauss_points / 1e6)
        threads = by_threads(by_numba, given, repeats)
    return found | {f"numba, {name}": seconds for name, seconds in threads.items()}


def main(kind: str, cells: str, stations: str, repeats: str = "4") -> None:
    mesh = build(size_of(kind, int(cells), int(stations)))
    blocks, steps = (CellBlock(kind, mesh.cells),), (Step("1", mesh.displacement),)
    solid = Solid(mesh.points, blocks, steps)
    print(json.dumps(measure(Inputs.of(solid, Material(YOUNG, POISSON)), int(repeats))))


if __name__ == "__main__":
    main(*sys.argv[1:])
