"""Studies from end to end: real processes and a real cluster, killed and interrupted on the way."""

import json
import os
import signal
import subprocess
import sys
import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import Any

import psutil
import pytest

from front3d.cli import main
from tests.whole_models import whole_grid

pytestmark = pytest.mark.slow

CASES = 6
FILES = ("points.csv", "summary.json", "front.vtp")
LIMIT = 120.0
"""Seconds after which a wait is given up."""


@pytest.fixture(scope="module")
def study(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Case files over one small model, which differ in Poisson's ratio and in a pressure."""
    folder = tmp_path_factory.mktemp("study")
    whole_grid().save(folder / "block.vtu")
    for k in range(CASES):
        (folder / f"case{k}.toml").write_text(
            f'result = "block.vtu"\n[material]\nyoung = 200e3\npoisson = {0.2 + k / 50}\n'
            f"[options]\nface_pressure = {k}.0\n"
        )
    return folder


@pytest.fixture(scope="module")
def single(study: Path, tmp_path_factory: pytest.TempPathFactory) -> dict[str, dict[str, bytes]]:
    """What `front3d evaluate` writes for each case."""
    out = tmp_path_factory.mktemp("single")
    for path in study.glob("*.toml"):
        words = ["evaluate", str(path), "--no-pictures", "--out", str(out / path.stem)]
        assert main(words) == 0
    return {
        path.name: {name: (path / name).read_bytes() for name in FILES} for path in out.iterdir()
    }


@contextmanager
def command(*words: str, module: str = "front3d", **how: Any) -> Iterator[subprocess.Popen[str]]:
    """A command in a group of its own, as on a terminal; nothing of it is left at the end."""
    with subprocess.Popen(
        [sys.executable, "-m", module, *words],
        start_new_session=True,
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
        **how,
    ) as process:
        try:
            yield process
        finally:
            if process.poll() is None:
                os.killpg(process.pid, signal.SIGKILL)


def wait_until(condition: Callable[[], bool]) -> None:
    end = time.monotonic() + LIMIT
    while not condition():
        assert time.monotonic() < end, "nothing happened"
        time.sleep(0.01)


def ready(out: Path) -> int:
    return len(list(out.glob("cases/[!.]*/case.json")))


def begun(out: Path) -> int:
    return len(list(out.glob("cases/.*.started")))


def workers(process: "subprocess.Popen[str]") -> list[psutil.Process]:
    children = psutil.Process(process.pid).children()
    return [child for child in children if "spawn_main" in " ".join(child.cmdline())]


def assert_equal(out: Path, single: dict[str, dict[str, bytes]]) -> None:
    """Every case of the study is there, bit by bit as evaluated alone, and so is the one table."""
    assert sorted(path.name for path in (out / "cases").iterdir()) == sorted(single)
    rows = []
    for name in sorted(single):
        for file, content in single[name].items():
            assert (out / "cases" / name / file).read_bytes() == content, (name, file)
        header, *own = single[name]["points.csv"].decode().splitlines()
        rows += [f"{name},{row}" for row in own]
    assert (out / "points.csv").read_text().splitlines() == [f"case,{header}", *rows]


def test_a_study_is_stopped_killed_and_finished(
    study: Path, single: dict[str, dict[str, bytes]], tmp_path: Path
) -> None:
    out = tmp_path / "out"
    words = ("batch", str(study), "--out", str(out), "--processes", "2")
    with command(*words) as process:
        wait_until(lambda: ready(out) >= 1 and begun(out) > 0)
        started = workers(process)
        os.killpg(process.pid, signal.SIGINT)  # Ctrl-C
        _, said = process.communicate(timeout=LIMIT)
        assert process.returncode == 130
        assert "goes on from there" in said
        assert "Traceback" not in said
        wait_until(lambda: not any(w.is_running() for w in started))
    there = ready(out)
    assert 0 < there < CASES
    times = {path: path.stat().st_mtime_ns for path in out.glob("cases/*/points.csv")}
    with command(*words) as process:
        wait_until(lambda: ready(out) >= there + 1 and begun(out) > 0)
        workers(process)[0].kill()
        said, _ = process.communicate(timeout=LIMIT)
        assert process.returncode == 0
    assert f"{CASES} done ({there} by an earlier run), 0 failed" in said
    assert_equal(out, single)
    assert all(path.stat().st_mtime_ns == when for path, when in times.items())


def test_a_cluster_gives_the_same_and_survives_a_worker(
    study: Path, single: dict[str, dict[str, bytes]], tmp_path: Path
) -> None:
    out, address = tmp_path / "out", tmp_path / "scheduler.json"
    place = ("--scheduler-file", str(address), "--no-dashboard")
    worker = (*place, "--nthreads", "1", "--no-nanny", "--local-directory", str(tmp_path))
    with (
        command(
            "--host", "127.0.0.1", "--port", "0", *place, module="distributed.cli.dask_scheduler"
        ),
        command(*worker, module="distributed.cli.dask_worker") as first,
        command(*worker, module="distributed.cli.dask_worker"),
    ):
        wait_until(lambda: address.exists() and address.stat().st_size > 0)
        tcp = json.loads(address.read_text())["address"]
        with command("batch", str(study), "--out", str(out), "--scheduler", tcp) as process:
            wait_until(lambda: ready(out) >= 1)
            first.kill()
            said, _ = process.communicate(timeout=LIMIT)
            assert process.returncode == 0, said
    assert f"{CASES} done, 0 failed" in said
    assert_equal(out, single)
