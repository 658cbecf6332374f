"""Times of the stages of an evaluation, and its peak memory, in a process of its own.

    python -m benchmarks.stages build KIND CELLS STATIONS FILE
    python -m benchmarks.stages FILE [REPEATS]

The first makes a file; the second prints JSON.  Cold is the first call in the process: it loads
libraries and compiled kernels (which an earlier run has saved).  Warm is the shortest of the rest.
"""

import json
import resource
import sys
import tempfile
import time
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path
from typing import Any

from benchmarks.mesh import K_EXACT, POISSON, YOUNG, build, size_of, write_pvtu, write_vtu


def peak() -> int:
    """Largest resident memory of this process so far, bytes."""
    return 1024 * resource.getrusage(resource.RUSAGE_SELF).ru_maxrss


class Clock:
    """Collects times by the name of the stage."""

    def __init__(self, repeats: int) -> None:
        self.repeats = repeats
        self.found: dict[str, dict[str, float]] = {}

    def time(self, name: str, work: Callable[[], Any], repeats: int | None = None) -> Any:
        result, walls, cpus = None, [], []
        for _ in range(1 + (self.repeats if repeats is None else repeats)):
            result = None  # one result at a time is held
            wall, cpu = time.perf_counter(), time.process_time()
            result = work()
            walls.append(time.perf_counter() - wall)
            cpus.append(time.process_time() - cpu)
        self.found[name] = {
            "cold": walls[0],
            "warm": min(walls[1:], default=walls[0]),
            "warm cpu": min(cpus[1:], default=cpus[0]),
        }
        return result


def _bare_vtk(path: Path) -> int:
    from vtkmodules.vtkIOXML import vtkXMLUnstructuredGridReader

    reader = vtkXMLUnstructuredGridReader()
    reader.SetFileName(str(path))
    reader.Update()
    return int(reader.GetOutput().GetNumberOfCells())


def measure(path: Path, repeats: int = 2) -> dict[str, Any]:
    """Times in seconds by stage, memory in bytes, and how far K_I is from the exact one."""
    import front3d

    clock = Clock(repeats)
    start = peak()
    once = repeats < 2  # of large files, whose libraries load in no time against them
    solid = clock.time("reading", lambda: front3d.load(path), 0 if once else repeats)
    arrays = solid.points.nbytes + sum(block.nodes.nbytes for block in solid.blocks)
    arrays += sum(step.displacement.nbytes for step in solid.steps)
    record: dict[str, Any] = {
        "cells": solid.n_cells,
        "nodes": len(solid.points),
        "array bytes": arrays,
        "peak of start": start,
        "peak of reading": peak(),
    }
    model = clock.time("detection", lambda: front3d.find_fronts(solid))
    record |= _methods(clock, solid, model)
    del model
    methods = ("closure",)  # besides the integral
    result = clock.time(
        "all after reading",
        lambda: front3d.evaluate(solid, young=YOUNG, poisson=POISSON, methods=methods),
    )
    clock.time("output", lambda: _write(result, solid, path))
    record["peak"] = peak()
    front = result.fronts[0]
    record["stations"] = len(front.s)
    record["error of K_I"] = float(abs(front.K[:, 0] / K_EXACT - 1.0).max())
    if path.suffix == ".vtu":
        clock.time("reading by VTK alone", lambda: _bare_vtk(path))
    return record | {"seconds": clock.found}


def _methods(clock: Clock, solid: Any, model: Any) -> dict[str, Any]:
    """Geometry, integral and closure of the first front."""
    from front3d.methods import METHODS, FrontContext
    from front3d.methods.hats import build_hats, default_widths
    from front3d.methods.rings import N_RINGS, ring_radii
    from front3d.methods.surfaces import surroundings
    from front3d.methods.tube import build_tube, layer_reaches
    from front3d.options import Options
    from front3d.solid import Material

    front, material = model.fronts[0][0], Material(YOUNG, POISSON)

    def geometry() -> tuple[FrontContext, int]:
        context = FrontContext(
            solid, model, model.patches[0], front, material, Options(),
            solid.steps[0].displacement[None],
        )  # fmt: skip
        structured = context.cells.structured
        reaches = layer_reaches(context, 1 + N_RINGS if structured else 1)
        radii, _ = ring_radii(front, reaches, [], structured, None, solid.source)
        tube = build_tube(context, float(radii.max()))
        surroundings(context, tube)
        build_hats(solid, front, default_widths(front, structured, reaches[0]))
        return context, sum(len(cells) for cells in tube.cells)

    context, in_tube = clock.time("geometry", geometry)
    # A context keeps its tubes: each call has one of its own, as in an evaluation.
    clock.time("interaction", lambda: METHODS["interaction"](replace(context)))
    clock.time("closure", lambda: METHODS["closure"](replace(context)))
    return {"cells in tube": in_tube}


def _write(result: Any, solid: Any, path: Path) -> None:
    from front3d.output.folder import write_results

    with tempfile.TemporaryDirectory() as folder:
        write_results(result, solid, Path(folder) / "out", pictures=False)


def main(words: list[str]) -> None:
    if words[0] == "build":
        kind, cells, stations, path = words[1], int(words[2]), int(words[3]), Path(words[4])
        mesh = build(size_of(kind, cells, stations))
        if path.suffix == ".pvtu":
            write_pvtu(mesh, path, 8)
        else:
            write_vtu(mesh, path)
    else:
        print(json.dumps(measure(Path(words[0]), *map(int, words[1:2]))))


if __name__ == "__main__":
    main(sys.argv[1:])
