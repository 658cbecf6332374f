"""A full disk and folders without permission: one message, exit code 1, nothing left behind.

The disk is played by a limit to the size of files (setrlimit), which a write meets as it meets a
full disk: with an error from the system.  The limit and the other user hold in processes of their
own.
"""

import os
import resource
import subprocess
import sys
from pathlib import Path

import pytest

from front3d.cli import main
from tests.whole_models import POISSON, YOUNG, whole_grid

CONSTANTS = ("--young", f"{YOUNG:g}", "--poisson", f"{POISSON:g}", "--no-pictures")
SAMPLE = ("sample", "through-crack", "--refine", "0")


def in_a_process(words, before, folder, stdout=subprocess.PIPE):
    code = "import sys\nfrom front3d.cli import main\nsys.exit(main(sys.argv[1:]))"
    return subprocess.run(
        [sys.executable, "-c", code, *map(str, words)],
        stdout=stdout, stderr=subprocess.PIPE, text=True, check=False,
        preexec_fn=before, cwd=folder,
    )  # fmt: skip


def limit(size):
    return lambda: resource.setrlimit(resource.RLIMIT_FSIZE, (size, size))


def assert_refused(ran, *words):
    assert ran.returncode == 1, ran.stderr
    assert ran.stderr.startswith("front3d: ") and ran.stderr.count("\n") == 1, ran.stderr
    for word in words:
        assert word in ran.stderr


@pytest.mark.slow
@pytest.mark.parametrize("size", [300, 20_000])
def test_a_sample_on_a_full_disk(tmp_path, size):
    """The disk is full at once, or within the result."""
    ran = in_a_process([*SAMPLE, "--out", tmp_path / "new" / "deep"], limit(size), tmp_path)
    assert_refused(ran, "cannot be written", "nothing is left half-written")
    assert list(tmp_path.iterdir()) == []


@pytest.mark.slow
def test_an_evaluation_on_a_full_disk(tmp_path):
    """What stood in the folder before stays as it was."""
    whole_grid().save(tmp_path / "a.vtu")
    out = tmp_path / "out"
    out.mkdir()
    (out / "points.csv").write_text("earlier")
    ran = in_a_process(["evaluate", "a.vtu", *CONSTANTS, "--out", out], limit(2000), tmp_path)
    assert_refused(ran, "cannot be written")
    assert [path.name for path in out.iterdir()] == ["points.csv"]
    assert (out / "points.csv").read_text() == "earlier"


@pytest.mark.slow
def test_words_that_cannot_be_printed(tmp_path):
    with Path("/dev/full").open("w") as full:
        ran = in_a_process([*SAMPLE, "--out", "new"], None, tmp_path, stdout=full)
    assert_refused(ran, "standard output: no space left on device")
    assert len(list((tmp_path / "new").iterdir())) == 2  # whole: they were written before


@pytest.mark.slow
@pytest.mark.skipif(os.geteuid() != 0, reason="only root can become another user")
def test_another_users_files(tmp_path, capsys):
    """A result that may not be read, and a folder that may not be written to."""
    path, out = tmp_path / "a.vtu", tmp_path / "out"
    words = ["evaluate", str(path), *CONSTANTS, "--out", str(out)]
    whole_grid().save(path)
    assert main([*words[:-1], str(tmp_path / "good")]) == 0  # all modules are loaded by then
    capsys.readouterr()
    for folder in (tmp_path, *tmp_path.parents[:-2]):
        folder.chmod(0o755)
    for mode, open_to, word in ((0o600, 0o777, "no permission to read"), (0o644, 0o755, "denied")):
        path.chmod(mode)
        tmp_path.chmod(open_to)
        os.seteuid(65534)
        try:
            code = main(words)
        finally:
            os.seteuid(0)
        said = capsys.readouterr()
        assert (code, said.out, said.err.count("\n")) == (1, "", 1)
        assert word in said.err
        assert not out.exists()


def test_a_folder_that_is_a_file(tmp_path, capsys):
    (tmp_path / "out").write_text("a file")
    assert main([*SAMPLE, "--out", str(tmp_path / "out")]) == 1
    assert "found a file, expected a folder" in capsys.readouterr().err
    assert main([*SAMPLE, "--out", str(tmp_path / "out" / "deeper")]) == 1
    assert (tmp_path / "out").read_text() == "a file"


def test_a_failure_takes_its_folders_with_it(tmp_path, capsys, monkeypatch):
    """What goes wrong after the folder was made: building a sample, running the verification."""

    def fail(*arguments, **options):
        raise KeyboardInterrupt

    monkeypatch.setattr("front3d.samples.build", fail)
    monkeypatch.setattr("front3d.verification.verify", fail)
    for words in (SAMPLE, ("verify", "--quick")):
        assert main([*words, "--out", str(tmp_path / "new" / "deep")]) == 130
        assert list(tmp_path.iterdir()) == []
