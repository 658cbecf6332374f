"""How long a newcomer waits: `front3d --help`, the first `front3d demo`, and the next one.

    python benchmarks/first_run.py [--json FILE]

The first demo starts without compiled kernels (an empty NUMBA_CACHE_DIR), as after a fresh
install; the second finds them. Bars: help under 0.5 s, first demo under 90 s on two cores.
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

BARS = {"help": 0.5, "demo, first run": 90.0, "demo, later run": None}
HELP_RUNS = 5


def seconds(words: list[str], environment: dict[str, str], folder: Path) -> float:
    start = time.perf_counter()
    subprocess.run(
        [sys.executable, "-m", "front3d", *words],
        check=True,
        cwd=folder,
        env=environment,
        stdout=subprocess.DEVNULL,
    )
    return time.perf_counter() - start


def measure() -> dict[str, float]:
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        environment = os.environ | {"NUMBA_CACHE_DIR": str(folder / "kernels"), "DISPLAY": ""}
        times = sorted(seconds(["--help"], environment, folder) for _ in range(HELP_RUNS))
        return {
            "help": times[HELP_RUNS // 2],
            "demo, first run": seconds(["demo", "--out", "first"], environment, folder),
            "demo, later run": seconds(["demo", "--out", "later"], environment, folder),
        }


def main() -> int:
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("--json", type=Path, help="write the figures to this file")
    arguments = parser.parse_args()
    figures = measure()
    print(f"{'':18}{'seconds':>8}{'bar':>7}")
    for name, value in figures.items():
        bar = BARS[name]
        print(f"{name:18}{value:8.2f}{'' if bar is None else f'{bar:g}':>7}")
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
