"""What `front3d batch` costs over a plain loop: by processes, and on a local Dask cluster.

    python benchmarks/batch.py [--cases 200] [--refine 1] [--json FILE]

The cases are one small penny crack under pressures and Poisson's ratios of their own. The plain
loop is one process for each core, everything imported and one case done before the clock starts,
each with an equal share of the cases. The time of `front3d batch` is that of the whole command,
from its start to its last table; the cluster's workers are there before, and know nothing of
front3d. Bar: 15 % over the plain loop; a missed bar gives exit code 1. Tables must be equal.
"""

import argparse
import json
import multiprocessing
import os
import subprocess
import sys
import tempfile
import time
from pathlib import Path
from typing import Any

BAR = 0.15


def make_cases(folder: Path, count: int, refine: float) -> list[Path]:
    from front3d.samples import build
    from front3d.samples.writing import write_sample

    write_sample(build("penny", cells="bricks", refine=refine), folder)
    (result,) = folder.glob("*.vtu")
    for path in folder.glob("*.toml"):
        path.unlink()
    cases = []
    for k in range(count):
        cases.append(folder / f"case{k:04}.toml")
        cases[-1].write_text(
            f'result = "{result.name}"\n'
            f"[material]\nyoung = 200e3\npoisson = {0.2 + 0.2 * k / count}\n"
            f"[options]\nface_pressure = {float(k)}\n",
            encoding="utf-8",
        )
    return cases


def loop(cases: list[Path], out: Path, start: Any, times: Any) -> None:
    """One process of the plain loop."""
    os.environ |= {f"{name}_NUM_THREADS": "1" for name in ("NUMBA", "OMP", "OPENBLAS")}
    from front3d.case import read_case
    from front3d.job import run_case

    def one(path: Path) -> None:
        folder = out / path.stem
        folder.mkdir(exist_ok=True, parents=True)
        run_case(read_case(path), folder, pictures=False)

    one(cases[0])
    start.wait()
    begin = time.perf_counter()
    for path in cases:
        one(path)
    times.put(time.perf_counter() - begin)


def plain(cases: list[Path], out: Path, workers: int) -> float:
    """Seconds of the slowest of `workers` processes."""
    context = multiprocessing.get_context("spawn")
    start, times = context.Barrier(workers), context.Queue()
    processes = [
        context.Process(target=loop, args=(cases[k::workers], out, start, times))
        for k in range(workers)
    ]
    for process in processes:
        process.start()
    seconds = max(times.get() for _ in processes)
    for process in processes:
        process.join()
    return seconds


def batch(folder: Path, out: Path, *words: str) -> float:
    begin = time.perf_counter()
    subprocess.run(
        [sys.executable, "-m", "front3d", "batch", str(folder), "--out", str(out), *words],
        check=True,
        stdout=subprocess.DEVNULL,
        stderr=subprocess.DEVNULL,
    )
    return time.perf_counter() - begin


def on_cluster(folder: Path, out: Path, workers: int) -> float:
    from distributed import LocalCluster

    with LocalCluster(
        n_workers=workers, threads_per_worker=1, processes=True, dashboard_address=None
    ) as cluster:
        return batch(folder, out, "--scheduler", cluster.scheduler_address)


def measure(count: int, refine: float, workers: int) -> dict[str, float]:
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        cases = make_cases(folder / "cases", count, refine)
        ways = {
            "plain loop": lambda: plain(cases, folder / "plain", workers),
            "processes": lambda: batch(
                folder / "cases", folder / "own", "--processes", str(workers)
            ),
            "Dask cluster": lambda: on_cluster(folder / "cases", folder / "dask", workers),
        }
        seconds = {}
        for way, measured in ways.items():
            seconds[way] = measured()
            print(f"{way}: {seconds[way]:.1f} s, load {os.getloadavg()[0]:.1f}", file=sys.stderr)
        for path in cases:
            single = (folder / "plain" / path.stem / "points.csv").read_bytes()
            for way in ("own", "dask"):
                found = (folder / way / "cases" / path.stem / "points.csv").read_bytes()
                if found != single:
                    raise SystemExit(f"{path.stem} by {way} differs from the plain loop's")
        return seconds


def main() -> int:
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("--cases", type=int, default=200)
    parser.add_argument("--refine", type=float, default=1, help="fineness of the penny sample")
    parser.add_argument("--json", type=Path, help="write the figures to this file")
    arguments = parser.parse_args()
    workers = os.cpu_count() or 1
    seconds = measure(arguments.cases, arguments.refine, workers)
    over = {way: seconds[way] / seconds["plain loop"] - 1 for way in list(seconds)[1:]}
    print(f"{arguments.cases} cases on {workers} cores, load {os.getloadavg()[0]:.1f}")
    print(f"{'':14}{'seconds':>9}{'overhead':>10}{'bar':>7}")
    for way in seconds:
        cost = f"{over[way]:10.1%}{BAR:7.0%}" if way in over else ""
        print(f"{way:14}{seconds[way]:9.1f}{cost}")
    if arguments.json:
        record = {"cases": arguments.cases, "workers": workers, "seconds": seconds, "over": over}
        arguments.json.write_text(json.dumps(record, indent=2) + "\n", encoding="utf-8")
    return int(any(cost > BAR for cost in over.values()))


if __name__ == "__main__":
    sys.exit(main())
