"""Files that are written whole or not at all."""

import os
import re
from collections.abc import Callable, Iterator, Mapping, Sequence
from contextlib import ExitStack, contextmanager
from pathlib import Path

from front3d.errors import Front3DError

KINDS = ("chart", "through_thickness", "mode_mix", "steps", "stations")
"""How the files of each kind of chart begin."""


class WriteError(Front3DError):
    """A folder or file of results cannot be written."""


@contextmanager
def explained(path: Path) -> Iterator[None]:
    """WriteError in place of the OSError of something that writes to `path`."""
    try:
        yield
    except OSError as error:
        raise WriteError(_explain(path, error)) from error


def write_whole(path: Path, content: bytes) -> Path:
    """Write `content` to `path` so that a reader finds the whole of it or what stood there before.

    The bytes go to a file beside the target, which then takes its name in one step; when that
    fails (a full disk, no permission) the unfinished file is removed and WriteError is raised.
    """
    with whole_set() as write:
        write(path, content)
    return path


@contextmanager
def whole_set() -> Iterator[Callable[[Path, bytes], None]]:
    """Gives a function that writes files, which take their names together when all are written.

    Where one cannot be written, and where the block ends with any error, none of them appears.
    """
    parts: dict[Path, Path] = {}
    with ExitStack() as stack:

        def write(path: Path, content: bytes) -> None:
            part = _beside(path)
            with explained(path), part.open("xb") as stream:
                stack.callback(part.unlink, missing_ok=True)
                stream.write(content)
                stream.flush()
                os.fsync(stream.fileno())
            parts[path] = part

        yield write
        _take_names(parts)


@contextmanager
def whole_files(*paths: Path) -> Iterator[tuple[Path, ...]]:
    """Gives a place for each of `paths` to be written piece by piece, where its content is too
    large for memory; they take their names together at the end of the block.

    Where the block ends with any error none of them appears; an OSError becomes WriteError.
    """
    parts = {path: _beside(path) for path in paths}
    try:
        with explained(paths[0]):
            yield tuple(parts.values())
        for path, part in parts.items():
            with explained(path), part.open("rb+") as stream:
                os.fsync(stream.fileno())
        _take_names(parts)
    finally:
        for part in parts.values():
            part.unlink(missing_ok=True)


def _beside(path: Path) -> Path:
    """Where a file is written before it takes its name.

    Not tempfile: its files are readable by their owner only, and would stay so.
    """
    return path.with_name(f".{path.name}.{os.getpid()}.part")


def _take_names(parts: Mapping[Path, Path]) -> None:
    for path, part in parts.items():
        with explained(path):
            part.replace(path)


@contextmanager
def results_folder(folder: Path) -> Iterator[Path]:
    """`prepare_folder`; when the work ends with an error, the folders it made go again."""
    made = [f for f in (folder, *folder.parents) if not f.exists()]
    try:
        yield prepare_folder(folder)
    except BaseException:
        for path in made:
            try:
                path.rmdir()  # fails, as it should, where something stands in it by now
            except OSError:
                break
        raise


def prepare_folder(folder: Path) -> Path:
    """Make `folder` with its parents and try that it can be written to, before any long work."""
    try:
        folder.mkdir(parents=True, exist_ok=True)
        trial = folder / f".front3d.{os.getpid()}.part"
        try:
            trial.touch()
        finally:
            trial.unlink(missing_ok=True)
    except FileExistsError as error:
        raise WriteError(
            f"{folder}: found a file, expected a folder for the results; name another one"
        ) from error
    except OSError as error:
        raise WriteError(_explain(folder, error)) from error
    return folder


def file_names(steps: Sequence[str]) -> dict[str, str]:
    """Step names as parts of file names: letters, digits and .+- only, and none twice."""
    names: dict[str, str] = {}
    for number, step in enumerate(dict.fromkeys(steps)):
        name = re.sub(r"[^\w.+-]+", "_", step)[:60].strip("_.") or f"step{number}"
        # Compared without case: some file systems take "A.png" and "a.png" for one file.
        taken = {other.lower() for other in names.values()}
        names[step] = f"{name}_{number}" if name.lower() in taken else name
    return names


def _explain(path: Path, error: OSError) -> str:
    reason = error.strerror or type(error).__name__
    return (
        f"{path}: cannot be written ({reason.lower()}); nothing is left half-written. "
        "Free some space, or name a folder that you may write to"
    )
