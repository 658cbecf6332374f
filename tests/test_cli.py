"""The command line: exit codes, words, silence in a pipe; the evaluation itself is stood in for."""

import csv
import io
import json
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path
from typing import Any

import numba
import pytest
import pyvista as pv

import front3d.pipeline
from front3d.cli import main
from front3d.cli.progress import progress_bar
from front3d.errors import CrackError
from front3d.methods import METHODS
from front3d.options import METHOD_NAMES, Options, Plane
from front3d.results import CAUTION
from front3d.samples import SAMPLES
from tests.output_models import cracked_block, elliptic_front, evaluation_of

SOLID = cracked_block(1.6, 1.2, n=4)
CONSTANTS = ("--young", "200e3", "--poisson", "0.3")

Call = Callable[..., tuple[int, str, str]]


@pytest.fixture
def call(capsys: pytest.CaptureFixture[str]) -> Call:
    """Run a command: exit code, stdout, stderr."""

    def run(*words: str) -> tuple[int, str, str]:
        code = main(words)
        out, err = capsys.readouterr()
        return code, out, err

    return run


@pytest.fixture
def result(tmp_path: Path) -> Path:
    """A small result file."""
    grid = pv.UnstructuredGrid({12: SOLID.blocks[0].nodes}, SOLID.points)
    grid.point_data["displacement"] = SOLID.steps[0].displacement
    path = tmp_path / "block.vtu"
    grid.save(path)
    return path


@pytest.fixture
def asked(monkeypatch: pytest.MonkeyPatch) -> list[Any]:
    """The evaluation stood in for by invented figures; a list of what it was asked."""
    asked: list[Any] = []

    def evaluate(solid: Any, material: Any, options: Any, units: Any, progress: Any) -> Any:
        asked.append((solid, material, options, units))
        return evaluation_of(elliptic_front(1.6, 1.2, closed=False), units=units)

    monkeypatch.setattr(front3d.pipeline, "evaluate_solid", evaluate)
    return asked


def case_file(result: Path, text: str = "") -> Path:
    path = result.with_suffix(".toml")
    path.write_text(f'result = "{result.name}"\n[material]\nyoung = 1\npoisson = 0.25\n{text}')
    return path


# --- what a command does ---------------------------------------------------------------------


def test_evaluate_writes_and_says_what_matters(call: Call, result: Path, asked: Any) -> None:
    out = result.parent / "out"
    code, said, complained = call(
        "evaluate", str(result), *CONSTANTS, "--length-unit", "mm", "--stress-unit", "MPa",
        "--no-pictures", "--out", str(out),
    )  # fmt: skip
    assert (code, complained) == (0, "")
    assert CAUTION in said
    assert "largest 420 (13.28 MPa sqrt(m)) at s/L 0.500, (0, 1.2, 0)" in said
    assert "rings agree within 1 % of the largest K" in said
    assert "warning: the front is coarse" in said
    assert "points.csv, front.vtp, summary.json" in said
    rows = list(csv.DictReader(io.StringIO((out / "points.csv").read_text())))
    assert len(rows) == 41
    summary = json.loads((out / "summary.json").read_text())
    assert [item["file"] for item in summary["inputs"]] == ["block.vtu"]
    (solid, material, options, units) = asked[0]
    assert solid.n_cells == SOLID.n_cells
    assert (material.young, material.poisson) == (200e3, 0.3)
    assert (options, units.length) == (Options(), "mm")


def test_flags_override_the_case_file(call: Call, result: Path, asked: Any) -> None:
    case = case_file(result, '[options]\nface_pressure = 3\ncrack_plane = "z=0"\nhat = 2')
    code, _, _ = call(
        "evaluate", str(case), "--poisson", "0.2", "--face-pressure", "-1e1", "--up", "-1,0,0",
        "--surface-pressure", "-2", "--rings", "0.1,0.2", "--step", "displacement",
        "--method", "closure", "--unopened", "--no-pictures", "--out", str(result.parent / "out"),
    )  # fmt: skip
    assert code == 0
    _, material, options, _ = asked[0]
    assert (material.young, material.poisson) == (1.0, 0.2)
    assert options == Options(
        crack_plane=Plane((0, 0, 1), 0.0),
        face_pressure=-10.0,
        surface_pressure=-2.0,
        hat=2.0,
        up=(-1.0, 0.0, 0.0),
        methods=("closure",),
        radii=(0.1, 0.2),
        steps=("displacement",),
        unopened=True,
    )
    summary = json.loads((result.parent / "out" / "summary.json").read_text())
    assert [item["file"] for item in summary["inputs"]] == ["block.vtu", "block.toml"]


def test_inspect_says_what_is_there(
    call: Call, result: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(
        "front3d.crack.describe",
        lambda solid, options: {
            "cracks": [{"faces": 12, "largest opening": 1e-3}],
            "fronts": [],
        },
    )
    code, said, _ = call("inspect", str(result))
    assert code == 0
    assert f"{SOLID.n_cells} hexahedron" in said
    assert "  steps   1\n" in said
    assert "0    12     0.001" in said
    assert "fronts: none" in said


def test_samples_and_their_flags_come_from_the_registry(call: Call) -> None:
    for words in (("sample",), ("sample", "--list")):
        code, said, _ = call(*words)
        assert code == 0
        assert all(name in said for name in SAMPLES)
    for name, spec in SAMPLES.items():
        code, said, _ = call("sample", name, "--help")
        assert code == 0
        assert all(f"--{parameter.replace('_', '-')}" in said for parameter in spec.parameters)


# --- exit codes ------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("words", "message"),
    [
        ((), "required: COMMAND"),
        (("divine",), "invalid choice: 'divine'"),
        (("evaluate",), "required: RESULT|CASE"),
        (("evaluate", "a.vtu", *CONSTANTS, "--method", "clousre"), "did you mean 'closure'?"),
        (("evaluate", "a.vtu", *CONSTANTS, "--colour", "red"), "unrecognized arguments"),
        (("evaluate", "a.vtu", "--young", "1", "--poisson", "0.7"), "Poisson's ratio: found 0.7"),
        (("evaluate", "a.vtu", "--young", "-1", "--poisson", "0.3"), "Young's modulus: found -1"),
        (("evaluate", "a.vtu", *CONSTANTS, "--crack-plane", "w=1"), "plane: found 'w=1'"),
        (("evaluate", "a.vtu", *CONSTANTS, "--up", "1,2"), "three numbers"),
        (("evaluate", "a.vtu", *CONSTANTS, "--up", "0,0,0"), "zero vector"),
        (("evaluate", "a.vtu", *CONSTANTS, "--rings", "a"), "numbers with commas"),
        (("evaluate", "a.vtu", *CONSTANTS, "--rings=-1"), "ring radii"),
        (("evaluate", "a.vtu", *CONSTANTS, "--length-unit", "ell"), "unit of length: found 'ell'"),
        (("sample", "castle"), "invalid choice: 'castle'"),
        (("sample", "penny", "--radius", "-1"), "parameter radius: found -1"),
        (("sample", "penny", "--cells", "sand"), "invalid choice: 'sand'"),
    ],
)
def test_a_wrong_call_is_2(call: Call, words: tuple[str, ...], message: str) -> None:
    code, said, complained = call(*words)
    assert (code, said) == (2, "")
    assert message in complained


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("[options]\nhut = 1", "unknown key 'hut'; did you mean 'hat'?"),
        ("[options]\nhat = 0.5", "hat half-width: found 0.5 cells, expected 1 or more"),
        ('[units]\nlength = "ell"', "unit of length: found 'ell'"),
        ('displacement = "none such"', "belongs before the first section"),
    ],
)
def test_a_wrong_case_file_is_1(call: Call, result: Path, text: str, message: str) -> None:
    code, said, complained = call("evaluate", str(case_file(result, text)))
    assert (code, said) == (1, "")
    assert complained.startswith("front3d: ")
    assert message in complained


def test_a_case_without_constants_is_1(call: Call, result: Path) -> None:
    case = result.with_suffix(".toml")
    case.write_text(f'result = "{result.name}"')
    code, _, complained = call("evaluate", str(case))
    assert code == 1
    assert "found no elastic constants, expected young and poisson" in complained


def test_missing_constants_are_a_wrong_call_unless_the_file_is_missing(
    call: Call, result: Path
) -> None:
    for words, flag in (((), "--young"), (("--young", "1"), "--poisson")):
        code, _, complained = call("evaluate", str(result), *words)
        assert code == 2
        assert f"{flag} is missing" in complained
        code, _, complained = call("evaluate", f"{result}x", *words)
        assert code == 1
        assert "no such file" in complained
        assert flag not in complained


def test_the_names_of_the_methods_are_those_of_the_registry() -> None:
    assert tuple(METHODS) == METHOD_NAMES


def test_a_missing_or_broken_file_is_1(call: Call, tmp_path: Path) -> None:
    broken = tmp_path / "broken.vtu"
    broken.write_text("not a mesh")
    for path in (tmp_path / "none.vtu", broken, tmp_path / "none.toml", tmp_path / "a.strange"):
        code, said, complained = call(
            "evaluate", str(path), *CONSTANTS, "--out", str(tmp_path / "out")
        )
        assert (code, said) == (1, "")
        assert path.name in complained
        assert "Traceback" not in complained
        assert not (tmp_path / "out").exists()


def test_a_place_that_cannot_be_written_is_said_before_the_work(
    call: Call, result: Path, asked: Any
) -> None:
    code, _, complained = call("evaluate", str(result), *CONSTANTS, "--out", str(result))
    assert code == 1
    assert "found a file, expected a folder" in complained
    assert asked == []


def raising(error: BaseException) -> Callable[..., Any]:
    def evaluate(*_: object) -> Any:
        raise error

    return evaluate


@pytest.mark.parametrize(
    ("error", "code", "message"),
    [
        (CrackError("no crack: found no coincident faces"), 1, "front3d: no crack: found no"),
        (ZeroDivisionError("by\nzero"), 1, "unexpected ZeroDivisionError: by zero; run again with"),
        (MemoryError(), 1, "not enough memory"),
        (KeyboardInterrupt(), 130, ""),
    ],
)
def test_no_error_shows_a_traceback(
    call: Call,
    result: Path,
    monkeypatch: pytest.MonkeyPatch,
    error: BaseException,
    code: int,
    message: str,
) -> None:
    monkeypatch.setattr(front3d.pipeline, "evaluate_solid", raising(error))
    words = ("evaluate", str(result), *CONSTANTS, "--out", str(result.parent / "out"))
    found, said, complained = call(*words)
    assert (found, said) == (code, "")
    assert message in complained
    assert complained.count("\n") == bool(message)
    _, _, debugged = call(*words, "--debug")
    assert ("Traceback" in debugged) == bool(message)


def test_a_wrong_call_is_answered_in_two_lines(call: Call, result: Path) -> None:
    """The list of all flags would hide what is wrong."""
    for words in (("evaluate", str(result), "--young", "abc"), ("evaluate", str(result)), ("x",)):
        code, said, complained = call(*words)
        assert (code, said) == (2, "")
        assert "error: " in complained.splitlines()[0]
        assert complained.count("\n") == 2 and "--help" in complained


# --- terminals and pipes ---------------------------------------------------------------------


def run_python(code: str, **more: Any) -> subprocess.CompletedProcess[str]:
    return subprocess.run(
        [sys.executable, "-c", code], text=True, check=False, stderr=subprocess.PIPE, **more
    )


def test_help_loads_no_numerical_library() -> None:
    # Hence its speed, which benchmarks/first_run.py measures.
    ran = run_python(
        "import sys; from front3d.cli import main; code = main(['--help']);"
        "heavy = {'numpy', 'scipy', 'numba', 'pyvista', 'meshio', 'matplotlib', 'rich'};"
        "sys.exit(code or sorted(heavy & set(sys.modules)) or 0)",
        stdout=subprocess.PIPE,
    )
    assert (ran.returncode, ran.stderr) == (0, "")
    assert "engineering aid" in ran.stdout.replace("\n", " ")


def test_a_closed_pipe_is_no_error() -> None:
    ran = run_python(
        "import os, sys; read, write = os.pipe(); os.close(read); os.dup2(write, 1);"
        "from front3d.cli import main; sys.exit(main(['sample', '--list']))"
    )
    assert (ran.returncode, ran.stderr) == (0, "")


class Terminal(io.StringIO):
    def isatty(self) -> bool:
        return True


def on_a_terminal(monkeypatch: pytest.MonkeyPatch) -> Terminal:
    """A terminal in place of stderr."""
    screen = Terminal()
    monkeypatch.setenv("TERM", "xterm")
    monkeypatch.setattr(sys, "stderr", screen)
    return screen


def test_progress_is_shown_on_a_terminal_only(monkeypatch: pytest.MonkeyPatch) -> None:
    screen = on_a_terminal(monkeypatch)
    with progress_bar() as show:
        assert show is not None
        show("finding the crack", 0.5)
    assert "finding the crack" in screen.getvalue()
    assert "compiled" not in screen.getvalue()
    pipe = io.StringIO()
    monkeypatch.setattr(sys, "stderr", pipe)
    with progress_bar() as show:
        assert show is None
    assert pipe.getvalue() == ""


def test_compilation_is_said_while_it_happens(monkeypatch: pytest.MonkeyPatch) -> None:
    screen = on_a_terminal(monkeypatch)
    with progress_bar() as show:
        assert show is not None
        show("looking", 0.5)
        numba.njit(quick_to_compile)(1.0)
    assert "kernels are being compiled" in screen.getvalue()
    assert "looking: compiling quick_to_compile" in screen.getvalue()
    pipe = io.StringIO()
    monkeypatch.setattr(sys, "stderr", pipe)
    with progress_bar():
        numba.njit(quick_to_compile)(1.0)
        numba.njit(quick_to_compile)(1)
    assert pipe.getvalue().count("kernels are being compiled") == 1


def quick_to_compile(x: float) -> float:
    return x + 1.0
