"""The volume kernel of the interaction integral by numba, by numpy and in C, on the same tube.

All three take the same arrays, in the same parts, over the same threads.
"""

import ctypes
import subprocess
import tempfile
import time
from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass
from functools import partial
from pathlib import Path

import numpy as np

from benchmarks import numpy_twin
from front3d.arrays import FloatArray, IntArray
from front3d.crack import find_cracks
from front3d.crack.curve import CurveArrays
from front3d.methods import nodal_forces
from front3d.methods.assembly import CELL_RULE, Assembly
from front3d.methods.context import FrontContext
from front3d.methods.nodal_forces import N_MODES, Rule
from front3d.methods.rings import N_RINGS, ring_radii
from front3d.methods.tube import build_tube, layer_reaches
from front3d.options import Options
from front3d.solid import Material, Solid

PART = 512
"""Cells per call, as the evaluation has them."""

REPEATS = 5

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
        xi, weights = element.quadrature(CELL_RULE)
        cells = ready._local(solid.blocks[0].nodes[tube.cells[0]])
        return cls(
            ready._points, cells, *ready._beside(cells), ready._displacement, ready._state,
            (element.values(xi), element.gradients(xi), weights), ready._curve, ready._constants,
        )  # fmt: skip

    @property
    def gauss_points(self) -> int:
        return len(self.cells) * len(self.rule[2])

    def room(self, cells: int) -> FloatArray:
        return np.empty((cells, len(self.displacement), N_MODES, self.cells.shape[1], 3))


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
    return numpy_twin.cell_forces(
        given.points, given.cells[part], given.side[part], given.seed[part], given.displacement,
        given.rule, given.curve, shear, poisson,
    )  # fmt: skip


def by_c(library: ctypes.CDLL, given: Inputs, part: slice) -> FloatArray:
    cells = given.cells[part]
    out, status = given.room(len(cells)), np.empty(len(cells), np.int64)
    side, seed = given.side[part], given.seed[part]
    values, gradients, weights = given.rule
    knots, position, normal, closed = given.curve
    shear, poisson, turn, _ = given.constants
    many = ctypes.c_long

    def at(array: np.ndarray) -> ctypes.c_void_p:
        return ctypes.c_void_p(array.ctypes.data)

    library.cell_forces(
        at(given.points), many(len(given.points)), at(cells), many(len(cells)),
        many(cells.shape[1]), at(side), at(seed), at(given.displacement),
        many(len(given.displacement)), at(values), at(gradients), at(weights),
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


def seconds(kernel: Kernel, given: Inputs, threads: int, cells: int | None = None) -> float:
    """Shortest of some runs over the cells, or the first of them."""
    count = len(given.cells) if cells is None else min(cells, len(given.cells))
    parts = [slice(k, min(k + PART, count)) for k in range(0, count, PART)]
    shortest = np.inf
    with ThreadPoolExecutor(threads) as pool:
        for _ in range(REPEATS):
            start = time.perf_counter()
            for _ in pool.map(lambda part: kernel(given, part) is None, parts):
                pass
            shortest = min(shortest, time.perf_counter() - start)
    return shortest


def measure(given: Inputs) -> dict[str, float]:
    """Seconds per million Gauss points, and how far the results are apart, over the largest."""
    million = given.gauss_points / 1e6
    some = slice(0, min(PART, len(given.cells)))
    with tempfile.TemporaryDirectory() as folder:
        plain = compiled(Path(folder))
        native = compiled(Path(folder), "-march=native")
        expected = by_numba(given, some)
        largest = float(np.abs(expected).max())
        apart = {
            f"{name} difference": float(np.abs(f(given, some) - expected).max()) / largest
            for name, f in (("numpy", by_numpy), ("C", plain))
        }
        fewer = min(16 * PART, len(given.cells))  # numpy takes long
        found: dict[str, float] = {}
        for threads in (1, 2):
            found[f"numba {threads}"] = seconds(by_numba, given, threads) / million
            found[f"C -O3 {threads}"] = seconds(plain, given, threads) / million
            found[f"C -O3 -march=native {threads}"] = seconds(native, given, threads) / million
        part = million * fewer / len(given.cells)
        found["numpy 1"] = seconds(by_numpy, given, 1, fewer) / part
        return found | apart
