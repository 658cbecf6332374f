"""An evaluation written and read back is the same one; a folder of two runs is refused."""

import csv
import io
import json
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from front3d.errors import ReadError
from front3d.output.files import write_whole
from front3d.output.saved import read_saved
from front3d.output.summary import summary_json
from front3d.output.tables import points_csv
from front3d.output.trust import agreement
from front3d.results import Evaluation
from tests.output_models import corner_front, elliptic_front, evaluation_of, through_front

SEVERAL = evaluation_of(
    elliptic_front(1.6, 1.2, closed=False, flags={0: "free surface, 1st"}),
    elliptic_front(1.0, 0.8, closed=True, front=1, rings=False),
    replace(corner_front(), step='bending, "2"\nand more', front=0),
)


def written(evaluation: Evaluation, folder: Path) -> Path:
    write_whole(folder / "points.csv", points_csv(evaluation))
    write_whole(folder / "summary.json", summary_json(evaluation, [], ["points.csv"]))
    return folder


def test_everything_reads_back(tmp_path: Path) -> None:
    saved = read_saved(written(SEVERAL, tmp_path))
    found = saved.evaluation
    assert (found.source, found.units) == (SEVERAL.source, SEVERAL.units)
    assert (found.material, found.warnings) == (SEVERAL.material, SEVERAL.warnings)
    assert saved.files == ("points.csv",)
    for back, front in zip(found.fronts, SEVERAL.fronts, strict=True):
        for name in (
            "step",
            "front",
            "closed",
            "ends",
            "length",
            "flags",
            "warnings",
            "sources",
            "notes",
        ):
            assert getattr(back, name) == getattr(front, name), name
        for name in ("s", "positions", "frames", "K", "G"):
            assert np.array_equal(getattr(back, name), getattr(front, name)), name
        assert list(back.methods) == list(front.methods)
        for name, method in front.methods.items():
            assert np.array_equal(back.methods[name].K, method.K)
        rings, expected = (f.methods["interaction"].rings for f in (back, front))
        assert (rings is None) == (expected is None)
        if rings is not None and expected is not None:
            for name in ("radii", "K", "J"):
                assert np.array_equal(getattr(rings, name), getattr(expected, name))
        assert agreement(back) == agreement(front)


def test_values_that_are_missing_stay_missing(tmp_path: Path) -> None:
    front = through_front()
    K = np.array(front.K)
    K[3] = np.nan
    saved = read_saved(written(evaluation_of(replace(front, K=K)), tmp_path))
    assert np.array_equal(saved.evaluation.fronts[0].K, K, equal_nan=True)


def without_last_row(text: str) -> str:
    return text[: text.rstrip("\n").rindex("\n") + 1]


def another_peak(text: str) -> str:
    rows = list(csv.DictReader(io.StringIO(text)))
    peak = max(float(row["K_I"]) for row in rows)
    return text.replace(repr(peak), repr(1.001 * peak))


@pytest.mark.parametrize("change", [without_last_row, another_peak, lambda text: text * 2])
def test_a_table_of_another_run_is_refused(tmp_path: Path, change) -> None:
    table = written(evaluation_of(through_front()), tmp_path) / "points.csv"
    table.write_text(change(table.read_text()))
    with pytest.raises(ReadError, match="evaluate again"):
        read_saved(tmp_path)


def test_what_is_missing_or_broken_is_said(tmp_path: Path) -> None:
    with pytest.raises(ReadError, match="expected a folder that `front3d evaluate` wrote"):
        read_saved(tmp_path)
    folder = written(SEVERAL, tmp_path)
    about = json.loads((folder / "summary.json").read_text())
    for content, words in (
        ("{", "not a JSON file"),
        ("[]", "found list, expected an object"),
        (json.dumps({k: v for k, v in about.items() if k != "fronts"}), "KeyError: 'fronts'"),
        (json.dumps(about | {"material": {"young": "soft"}}), "lacks something"),
    ):
        (folder / "summary.json").write_text(content)
        with pytest.raises(ReadError, match=words):
            read_saved(folder)
    (folder / "points.csv").unlink()
    (folder / "summary.json").write_text(json.dumps(about))
    with pytest.raises(ReadError, match=r"points\.csv: cannot be read"):
        read_saved(folder)
