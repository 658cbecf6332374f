"""Files are written whole or not at all; old pictures do not stand beside new numbers."""

import errno
import json
import os
import re
from pathlib import Path
from typing import Any, Never

import pytest

from front3d.output import charts, rendering
from front3d.output.charts import style
from front3d.output.files import WriteError, prepare_folder, results_folder, write_whole
from front3d.output.folder import write_results
from tests.output_models import cracked_block, elliptic_front, evaluation_of

FRONT = elliptic_front(1.6, 1.2, closed=False)
SOLID = cracked_block(1.6, 1.2, n=4)


def fail_with(number: int) -> Any:
    def fail(*_: object) -> Never:
        raise OSError(number, os.strerror(number))

    return fail


def test_a_full_disk_leaves_the_old_file_and_nothing_else(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    target = tmp_path / "points.csv"
    write_whole(target, b"old")
    monkeypatch.setattr(os, "fsync", fail_with(errno.ENOSPC))
    with pytest.raises(WriteError, match="no space left"):
        write_whole(target, b"new")
    assert target.read_bytes() == b"old"
    assert list(tmp_path.iterdir()) == [target]


def test_an_interrupt_leaves_nothing_half_written(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def interrupt(_: int) -> Never:
        raise KeyboardInterrupt

    monkeypatch.setattr(os, "fsync", interrupt)
    with pytest.raises(KeyboardInterrupt):
        write_whole(tmp_path / "points.csv", b"new")
    assert list(tmp_path.iterdir()) == []


def test_a_disk_that_fills_up_midway_leaves_the_earlier_results(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Tables of two runs never stand side by side: either all are new or all are old."""
    write_results(evaluation_of(FRONT), SOLID, tmp_path, pictures=False)
    before = {path.name: path.read_bytes() for path in tmp_path.iterdir()}
    real, calls = os.fsync, []

    def third_fails(number: int) -> None:
        calls.append(number)
        if len(calls) == 3:
            raise OSError(errno.ENOSPC, os.strerror(errno.ENOSPC))
        real(number)

    monkeypatch.setattr(os, "fsync", third_fails)
    other = elliptic_front(1.7, 1.3, closed=False)
    with pytest.raises(WriteError, match="no space left"):
        write_results(evaluation_of(other), SOLID, tmp_path, pictures=False)
    assert {path.name: path.read_bytes() for path in tmp_path.iterdir()} == before


@pytest.mark.parametrize("error", [WriteError("no"), KeyboardInterrupt()])
def test_a_folder_made_for_nothing_goes_again(tmp_path: Path, error: BaseException) -> None:
    (tmp_path / "a").mkdir()
    with pytest.raises(type(error)), results_folder(tmp_path / "a" / "b" / "c") as folder:
        assert folder.is_dir()
        raise error
    assert list((tmp_path / "a").iterdir()) == []
    with pytest.raises(type(error)), results_folder(tmp_path / "b" / "c") as folder:
        (folder / "kept").touch()
        raise error
    assert (tmp_path / "b" / "c" / "kept").exists()
    with results_folder(tmp_path / "d"):
        pass
    assert (tmp_path / "d").is_dir()


def test_permissions_are_those_of_any_new_file(tmp_path: Path) -> None:
    plain = tmp_path / "plain"
    plain.write_bytes(b"")
    written = write_whole(tmp_path / "written", b"")
    assert written.stat().st_mode == plain.stat().st_mode


def test_a_file_in_place_of_the_folder(tmp_path: Path) -> None:
    (tmp_path / "out").write_text("a file")
    with pytest.raises(WriteError, match="found a file, expected a folder"):
        prepare_folder(tmp_path / "out")
    with pytest.raises(WriteError, match="cannot be written"):
        prepare_folder(tmp_path / "out" / "below")


def test_a_folder_without_permission(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(Path, "touch", fail_with(errno.EACCES))
    with pytest.raises(WriteError, match="permission denied"):
        prepare_folder(tmp_path)


def test_tables_alone(tmp_path: Path) -> None:
    written = write_results(evaluation_of(FRONT), SOLID, tmp_path / "a" / "b", pictures=False)
    assert written.files == ("points.csv", "front.vtp", "summary.json")
    assert {path.name for path in written.folder.iterdir()} == set(written.files)


@pytest.fixture
def without_graphics(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(rendering, "why_no_pictures", lambda: "left out: apt-get install egl")
    names = charts.charts_of
    monkeypatch.setattr(charts, "charts_of", lambda e: dict.fromkeys(names(e), object))
    monkeypatch.setattr(style, "png", lambda _: b"png")
    monkeypatch.setattr(style, "svg", lambda _: b"svg")


@pytest.mark.usefixtures("without_graphics")
def test_without_graphics_everything_else_is_written_and_it_is_said(tmp_path: Path) -> None:
    written = write_results(evaluation_of(FRONT), SOLID, tmp_path)
    charts = [f"{name}.{kind}" for name in ("chart", "mode_mix") for kind in ("png", "svg")]
    assert written.files == ("points.csv", "front.vtp", *charts, "skin.vtp", "summary.json")
    assert written.notes == ("left out: apt-get install egl",)


@pytest.mark.usefixtures("without_graphics")
def test_charts_of_an_earlier_run_do_not_stay(tmp_path: Path) -> None:
    other = tmp_path / "chart_of_mine.png"
    other.write_bytes(b"not ours")
    steps = ["a/b", "A b", "a:b"]  # three names that one file system may take for one
    fronts = [elliptic_front(1.6, 1.2, closed=False, step=step) for step in steps]
    first = write_results(evaluation_of(*fronts), SOLID, tmp_path)
    charts = [name for name in first.files if re.fullmatch("chart.*png", name)]
    assert {"steps.png", "mode_mix_front0_a_b.svg"} <= set(first.files)
    assert charts == ["chart_front0_a_b.png", "chart_front0_A_b_1.png", "chart_front0_a_b_2.png"]
    second = write_results(evaluation_of(FRONT), SOLID, tmp_path)
    assert {path.name for path in tmp_path.iterdir()} == {*second.files, other.name}
    assert json.loads((tmp_path / "summary.json").read_text())["files"] == list(second.files)
