"""How fast, how large.

    python -m benchmarks [--small] [--largest CELLS] [--out FILE] [--readme FILE]

Makes meshes with an exact field, evaluates each in a process of its own, measures the kernel beside
numpy and C, prints the tables and writes the figures as JSON.  With --readme FILE the table between
the marks `benchmarks` in FILE is replaced.  The largest mesh needs 10 GB of memory and disk.
"""

import argparse
import json
import os
import platform
import subprocess
import sys
import tempfile
from pathlib import Path
from typing import Any

from benchmarks.table import MARKS, growth, markdown, text

SIZES = (100_000, 1_000_000, 10_000_000)
STATIONS = (36, 72, 144, 288)
USUAL = 72
BRICKS = 200_000
AROUND = 16 * 16 * 6
"""Cells by station of the meshes that differ by their stations only."""


def run(module: str, *words: object) -> dict[str, Any]:
    """What a module prints as JSON, run in a process of its own, on one thread of BLAS."""
    done = subprocess.run(
        [sys.executable, "-m", module, *map(str, words)],
        check=True,
        stdout=subprocess.PIPE,
        env=os.environ | {"OPENBLAS_NUM_THREADS": "1"},
    )
    found: dict[str, Any] = json.loads(done.stdout or "{}")
    return found


def stages(kind: str, cells: int, stations: int, suffix: str = ".vtu") -> dict[str, Any]:
    """Times and memory of one mesh, made for it."""
    print(f"{cells} {kind} cells, {stations} stations, {suffix}", file=sys.stderr, flush=True)
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / f"penny{suffix}"
        run("benchmarks.stages", "build", kind, cells, stations, path)
        repeats = 2 if 60_000 < cells < 5_000_000 else 1
        return {"kind": kind, "file": suffix} | run("benchmarks.stages", path, repeats)


def measure(
    sizes: tuple[int, ...], stations: tuple[int, ...], bricks: int, usual: int
) -> dict[str, Any]:
    """All figures; `usual` is the number of stations where cells are varied."""
    record: dict[str, Any] = {
        "machine": {
            "processors": os.cpu_count(),
            "memory": os.sysconf("SC_PAGE_SIZE") * os.sysconf("SC_PHYS_PAGES"),
            "python": platform.python_version(),
            "load": os.getloadavg()[0],
        },
        "kernel": {
            kind: run("benchmarks.kernel", kind, cells, usual, 4 if usual == USUAL else 1)
            for kind, cells in (("tetra10", sizes[0]), ("hexahedron20", bricks // 10))
        },
        "by cells": [stages("tetra10", cells, usual) for cells in sizes],
        "bricks": stages("hexahedron20", bricks, usual),
        "pieces": [stages("tetra10", cells, usual, ".pvtu") for cells in sizes[-1:]],
        "by stations": [stages("tetra10", AROUND * n, n) for n in stations],
    }
    return record | {"growth": growth(record)}


def main() -> None:
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("--small", action="store_true", help="small meshes, to see that it works")
    parser.add_argument("--largest", type=float, default=SIZES[-1], help="leave out larger meshes")
    parser.add_argument("--out", type=Path, default=Path("benchmarks.json"), help="JSON to write")
    parser.add_argument("--readme", type=Path, help="file whose table is replaced")
    parser.add_argument("--given", type=Path, help="JSON of an earlier run, not to measure anew")
    given = parser.parse_args()
    if given.given:
        record = json.loads(given.given.read_text())
    elif given.small:
        record = measure((24 * AROUND,), (), 4 * AROUND, 24)
    else:
        sizes = tuple(cells for cells in SIZES if cells <= given.largest)
        record = measure(sizes, STATIONS, BRICKS, USUAL)
    given.out.write_text(json.dumps(record, indent=1) + "\n")
    print(text(record))
    if given.readme:
        before, _, rest = given.readme.read_text().partition(MARKS[0])
        _, _, after = rest.partition(MARKS[1])
        given.readme.write_text(f"{before}{MARKS[0]}\n{markdown(record)}\n{MARKS[1]}{after}")


if __name__ == "__main__":
    main()
