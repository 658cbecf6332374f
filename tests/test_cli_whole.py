"""The commands from end to end: a solved model, read, evaluated, drawn, compared."""

import csv
import json
from pathlib import Path

import matplotlib.image
import pytest

from front3d.cli import main

pytestmark = pytest.mark.slow


def test_demo_agrees_with_the_published_solution(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    assert main(["demo", "--out", str(tmp_path)]) == 0
    said, complained = capsys.readouterr()
    assert complained == ""
    table = [line.split() for line in said.splitlines() if line.rstrip().endswith(" %")]
    assert len(table) == 12  # six angles, tension and bending
    for angle, K, published, difference, _ in table[:6]:
        assert float(difference) == pytest.approx(
            100 * (float(K) / float(published) - 1), abs=0.02
        ), angle
        # Newman and Raju (1981) under tension for this shape; the project's bar is 4 %.
        assert abs(float(difference)) < 4.0, angle
    written = json.loads((tmp_path / "summary.json").read_text())["files"]
    assert {"points.csv", "front.vtp", "summary.json"} <= set(written)
    for name in written:
        if name.endswith(".png"):
            assert matplotlib.image.imread(tmp_path / name).shape[1] == 1200
    assert sum(name.startswith("scene") for name in written) == 2


def test_a_sample_goes_through_inspect_and_evaluate(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    out = str(tmp_path)
    words = ["sample", "penny", "--refine", "0", "--radius", "2", "--out", out]
    assert main(words) == 0
    (case,) = tmp_path.glob("*.toml")
    assert main(["inspect", str(case)]) == 0
    assert "closed" in capsys.readouterr().out
    assert main(["evaluate", str(case), "--no-pictures", "--out", out]) == 0
    with (tmp_path / "points.csv").open(newline="") as stream:
        rows = list(csv.DictReader(stream))
    # 2 sigma sqrt(a/pi), Sneddon (1946), with the sample's stress of 100 and radius 2; the coarse
    # mesh and the finite body are allowed 3 %.
    K = [float(row["K_I"]) for row in rows]
    assert pytest.approx([2 * 100 * (2 / 3.141592653589793) ** 0.5] * len(K), rel=0.03) == K
