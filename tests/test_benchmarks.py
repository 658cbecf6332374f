"""The benchmarks run, and measure the kernel beside others that give the same."""

import json
import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest

from benchmarks.kernel import Inputs, by_numba, by_numpy
from benchmarks.mesh import POISSON, YOUNG, Size, build
from benchmarks.table import MARKS, bars, growth
from front3d.solid import CellBlock, Material, Solid, Step

ROOT = Path(__file__).parent.parent


@pytest.mark.parametrize("kind", ["tetra10", "hexahedron20"])
def test_the_kernel_gives_what_plain_numpy_gives(kind):
    mesh = build(Size(kind, stations=24, outside=8, beside=8))
    solid = Solid(mesh.points, (CellBlock(kind, mesh.cells),), (Step("1", mesh.displacement),))
    given = Inputs.of(solid, Material(YOUNG, POISSON))
    part = slice(0, len(given.cells), 7)
    expected = by_numpy(given, part)
    assert np.abs(by_numba(given, part) - expected).max() <= 1e-10 * np.abs(expected).max()


def test_growth_is_the_exponent_of_a_power_law():
    def run(cells, stations):
        times = {stage: {"warm cpu": t} for stage, t in (
            ("detection", 1e-6 * cells), ("geometry", 1e-3 * stations**2),
            ("interaction", 1.0), ("closure", 1.0), ("all after reading", 1e-6 * cells + 3.0),
        )}  # fmt: skip
        return {"cells": cells, "stations": stations, "seconds": times}

    found = growth(
        {"by cells": [run(10**k, 50) for k in (5, 6, 7)],
         "by stations": [run(1000, n) for n in (10, 40, 80)]}
    )  # fmt: skip
    assert found["detection, by cells"] == pytest.approx(1.0)
    assert found["integral and closure, by cells"] == pytest.approx(0.0, abs=1e-9)
    assert found["geometry, by stations"] == pytest.approx(2.0)


@pytest.mark.slow
def test_the_command_measures_small_meshes_and_fills_in_the_table(tmp_path):
    readme, out = tmp_path / "README.md", tmp_path / "found.json"
    readme.write_text(f"before\n{MARKS[0]}\nold\n{MARKS[1]}\nafter\n")
    subprocess.run(
        [sys.executable, "-m", "benchmarks", "--small", "--out", out, "--readme", readme],
        cwd=ROOT, check=True, stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL,
    )  # fmt: skip
    record = json.loads(out.read_text())
    assert record["by cells"][0]["error of K_I"] < 0.01  # Sneddon (1946)
    for times in record["kernel"].values():
        assert max(v for name, v in times.items() if name.startswith("difference")) < 1e-10
    text = readme.read_text()
    assert text.startswith("before\n") and text.endswith("\nafter\n") and "old" not in text
    assert all(name in text for name, _, _ in bars(record))
