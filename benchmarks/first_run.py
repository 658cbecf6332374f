"""How long one waits: `--help`, an evaluation, what compilation adds to the first, and the demo.

    python -m benchmarks.first_run [--json FILE]

The evaluation is of a penny-shaped crack among 55,296 tetrahedra of 10 nodes, the whole process,
without pictures unless it is said. The first one starts without compiled kernels (an empty
NUMBA_CACHE_DIR), as after a fresh install; what it takes longer than the next is compilation.
Each figure is printed with its bar; a missed bar gives exit code 1.
"""

import argparse
import json
import os
import platform
import subprocess
import sys
import tempfile
import time
from pathlib import Path

from benchmarks.mesh import POISSON, YOUNG, build, size_of, write_vtu

BARS = {
    "help": 0.3,
    "evaluate": 3.0,
    "evaluate, with pictures": None,
    "compilation": 30.0,
    "demo, without compilation": None,
}
RUNS = 5


def seconds(words: list[str], environment: dict[str, str], folder: Path) -> float:
    start = time.perf_counter()
    subprocess.run(
        [sys.executable, "-m", "front3d", *words],
        check=True,
        cwd=folder,
        env=environment,
        stdout=subprocess.DEVNULL,
        stderr=subprocess.DEVNULL,
    )
    return time.perf_counter() - start


def measure() -> dict[str, float]:
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        write_vtu(build(size_of("tetra10", 50_000, stations=32)), folder / "penny.vtu")
        environment = os.environ | {
            "NUMBA_CACHE_DIR": str(folder / "kernels"),
            "DISPLAY": "",
            "PYTHONPATH": str(Path(__file__).parents[1]),
        }

        def typical(*words: str) -> float:
            return sorted(seconds([*words], environment, folder) for _ in range(RUNS))[RUNS // 2]

        evaluate = ("evaluate", "penny.vtu", "--young", str(YOUNG), "--poisson", str(POISSON))
        first = seconds([*evaluate, "--no-pictures"], environment, folder)
        later = typical(*evaluate, "--no-pictures")
        return {
            "help": typical("--help"),
            "evaluate": later,
            "evaluate, with pictures": typical(*evaluate),
            "compilation": first - later,
            "demo, without compilation": seconds(["demo", "--out", "demo"], environment, folder),
        }


def main() -> int:
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("--json", type=Path, help="write the figures to this file")
    arguments = parser.parse_args()
    figures = measure()
    print(f"{'':26}{'seconds':>8}{'bar':>7}")
    for name, value in figures.items():
        bar = BARS[name]
        print(f"{name:26}{value:8.2f}{'' if bar is None else f'{bar:g}':>7}")
    record = {
        "seconds": figures,
        "bars": BARS,
        "python": platform.python_version(),
        "processors": os.cpu_count(),
        "load": os.getloadavg()[0],
    }
    text = json.dumps(record, indent=2)
    print(text)
    if arguments.json:
        arguments.json.write_text(text + "\n", encoding="utf-8")
    return int(any(bar is not None and figures[name] > bar for name, bar in BARS.items()))


if __name__ == "__main__":
    sys.exit(main())
