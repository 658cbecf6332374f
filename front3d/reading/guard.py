"""Keeping libraries quiet: their errors become one ReadError, and nothing spills on the terminal.

meshio prints and may call sys.exit; VTK writes to its own output window and log; the HDF5 and
Exodus libraries write to file descriptor 2 behind Python's back.
"""

import os
import re
import tempfile
import warnings
from collections.abc import Iterator
from contextlib import ExitStack, contextmanager, redirect_stderr, redirect_stdout
from io import StringIO
from pathlib import Path
from typing import Any

from front3d.errors import Front3DError, ReadError

_ADVICE = "check that the file was written to the end and transferred whole, or export it again"


@contextmanager
def python_library(path: Path, what: str) -> Iterator[None]:
    """Turn anything that a Python library raises or prints into one ReadError about `path`."""
    printed = StringIO()
    try:
        with warnings.catch_warnings(), redirect_stdout(printed), redirect_stderr(printed):
            warnings.simplefilter("ignore")
            yield
    except Front3DError:
        raise
    except (Exception, SystemExit) as error:
        said = " ".join(str(error).split()) if not isinstance(error, SystemExit) else ""
        said = said or " ".join(printed.getvalue().split())
        kind = "" if isinstance(error, SystemExit) else f" ({type(error).__name__})"
        raise ReadError(
            f"{path}: cannot be read as {what}: {said[:300] or 'no reason given'}{kind}; {_ADVICE}"
        ) from error


@contextmanager
def quiet_vtk() -> Iterator[Any]:
    """Keep what VTK has to say in an output window of its own, which is given."""
    from vtkmodules.vtkCommonCore import vtkLogger, vtkOutputWindow, vtkStringOutputWindow

    window = vtkStringOutputWindow()
    before = vtkOutputWindow.GetInstance()
    verbosity = vtkLogger.GetCurrentVerbosityCutoff()
    vtkOutputWindow.SetInstance(window)
    vtkLogger.SetStderrVerbosity(vtkLogger.VERBOSITY_OFF)
    try:
        yield window
    finally:
        vtkOutputWindow.SetInstance(before)
        vtkLogger.SetStderrVerbosity(verbosity)


@contextmanager
def vtk_library(path: Path, what: str, *, native: bool = False) -> Iterator[None]:
    """Turn errors that VTK reports, instead of raising them, into one ReadError about `path`.

    `native` captures file descriptor 2 too, for the libraries that VTK calls in turn.
    """
    with python_library(path, what), quiet_vtk() as window:
        native_text: list[str] = []
        refusal: Front3DError | None = None
        try:
            with ExitStack() as stack:
                if native:
                    stack.enter_context(_descriptor_2(native_text))
                yield
        except Front3DError as error:
            refusal = error  # often the consequence of what VTK has to say
        said = _vtk_errors(window.GetOutput())
        if refusal is not None and native_text:
            said = said or native_text[0]
        if said:
            raise ReadError(f"{path}: cannot be read as {what}: {said}; {_ADVICE}")
        if refusal is not None:
            raise refusal


def _vtk_errors(text: str) -> str:
    """The first error message of a VTK log that counts; mere warnings do not."""
    # Binary data that end too early are only warned of.
    pattern = (
        r"(?:ERROR: In [^\n]*\n|Generic Warning: In [^\n]*\n(?=Error reading))(.*?)(?:\n\n|\Z)"
    )
    for found in re.finditer(pattern, text or "", re.DOTALL):
        message = re.sub(r"^\w+ \((?:0x)?[0-9a-fA-F]+\): ", "", found[1].strip())
        # Metadata such as the range of an array; VTK cannot read back an infinite one.
        if not message.startswith("Error reading InformationKey"):
            return " ".join(message.split())[:300] or "no reason given"
    return ""


@contextmanager
def _descriptor_2(said: list[str]) -> Iterator[None]:
    """Append to `said` what is written to file descriptor 2, if anything is."""
    try:
        kept = os.dup(2)
    except OSError:  # a process without standard error has nothing to spill on
        yield
        return
    with tempfile.TemporaryFile() as file:
        os.dup2(file.fileno(), 2)
        try:
            yield
        finally:
            os.dup2(kept, 2)
            os.close(kept)
            file.seek(0)
            text = " ".join(file.read(2000).decode(errors="replace").split())[:300]
            if text:
                said.append(text)
