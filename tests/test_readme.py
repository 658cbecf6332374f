"""The README says what is true: its Python block runs, its commands are those that are checked."""

import re
import shlex
import shutil
import tomllib
from pathlib import Path

import pytest

import front3d
from front3d.case import _KEYS, read_case
from front3d.cli.parser import build_parser
from front3d.output.tables import FIRST_COLUMNS
from front3d.results import CAUTION

ROOT = Path(__file__).parent.parent
README = (ROOT / "README.md").read_text(encoding="utf-8")


def blocks(language: str) -> list[str]:
    return re.findall(rf"```{language}\n(.*?)```", README, flags=re.DOTALL)


def test_opens_with_the_job_then_two_commands() -> None:
    demo, tests, *_ = blocks("sh")
    assert demo.count("\n") == tests.count("\n") == 1
    assert "front3d demo" in demo
    assert tests.strip().endswith("pytest")
    assert "```" not in README[: README.index(demo)].removesuffix("```sh\n")


def test_the_test_command_is_the_one_that_the_check_runs() -> None:
    _, tests, *_ = blocks("sh")
    assert tests.strip() in (ROOT / ".ci" / "run").read_text(encoding="utf-8").splitlines()


def test_every_command_line_is_understood() -> None:
    lines = [line.split("#")[0] for line in "".join(blocks("sh")).splitlines()]
    calls = [line.rpartition("&&")[2].strip() for line in lines if "front3d " in line]
    assert len(calls) >= 5
    for line in calls:
        words = shlex.split(line)[1:]
        build_parser(words).parse_args(words)


def test_the_python_block_runs(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    (code,) = blocks("python")
    assert len([line for line in code.splitlines() if line]) == 5
    shutil.copy(ROOT / "tests" / "data" / "row.vtu", tmp_path / "result.vtu")
    monkeypatch.chdir(tmp_path)
    exec(compile(code, "README.md", "exec"), {})
    lines = capsys.readouterr().out.splitlines()
    assert len(lines) >= 1
    for line in lines:
        step, length, K = line.rsplit(" ", 2)
        assert step
        assert float(length) > 0
        assert float(K) > 0


def test_the_case_file_shown_is_read_and_shows_every_key(tmp_path: Path) -> None:
    (text,) = blocks("toml")
    path = tmp_path / "case.toml"
    path.write_text(text)
    read_case(path)
    shown = tomllib.loads(text)
    for section in ("material", "units", "options", "load", "temperature", "materials"):
        assert set(shown[section]) == set(_KEYS[section])


def test_columns_and_caution_are_stated() -> None:
    assert ", ".join(FIRST_COLUMNS) in README
    section = README[README.index("## Caution") :]
    assert "engineering aid" in section
    assert "engineering aid" in CAUTION
    assert "qualified engineers" in section.replace("\n", " ")


def test_pictures_shown_are_there() -> None:
    names = re.findall(r"!\[.*?\]\((.*?)\)", README)
    assert names
    for name in names:
        size = (ROOT / name).stat().st_size
        assert 5_000 < size < 300_000


def test_version_is_the_packages() -> None:
    project = tomllib.loads((ROOT / "pyproject.toml").read_text())["project"]
    assert project["version"] == front3d.__version__
