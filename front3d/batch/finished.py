"""The folder of one case of a study: it appears whole, and says what it was made from."""

import json
import os
import shutil
from collections.abc import Iterator
from contextlib import contextmanager, suppress
from dataclasses import asdict, dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Any
from uuid import uuid4

from front3d.batch.identity import file_hash
from front3d.errors import Front3DError
from front3d.output.files import WriteError, write_whole

if TYPE_CHECKING:
    from front3d.results import Evaluation

RECORD = "case.json"
"""The file of a case's folder that stands for the whole: written last."""

_UNFINISHED = (".part", ".old", ".started")


@dataclass(frozen=True, slots=True)
class Largest:
    """The K of largest magnitude of any mode, and the station where it is."""

    mode: str
    K: float
    step: str
    front: int
    station: int
    s_rel: float
    x: float
    y: float
    z: float
    flag: str


@dataclass(frozen=True, slots=True)
class Outcome:
    """What became of a case.

    Attributes
    ----------
    name : of the case
    message : why it failed; empty where it is done
    largest : None where it failed, or no station has a K
    warnings : how many the evaluation gave
    seconds : that the case took
    earlier : whether an earlier run of the study finished it
    """

    name: str
    message: str = ""
    largest: Largest | None = None
    warnings: int = 0
    seconds: float = 0.0
    earlier: bool = False

    @property
    def done(self) -> bool:
        return not self.message


def largest_of(evaluation: "Evaluation") -> Largest | None:
    """The largest K in all steps and fronts."""
    import numpy as np

    from front3d.results import MODES

    best: Largest | None = None
    for front in evaluation.fronts:
        size = np.abs(front.K)
        if not np.isfinite(size).any():
            continue
        i, mode = divmod(int(np.nanargmax(size)), len(MODES))
        if best is None or size[i, mode] > abs(best.K):
            K, s_rel = float(front.K[i, mode]), float(front.s_rel[i])
            x, y, z = front.positions[i].tolist()
            best = Largest(
                MODES[mode], K, front.step, front.front, i, s_rel, x, y, z, front.flags[i]
            )
    return best


@contextmanager
def unfinished(folder: Path) -> Iterator[Path]:
    """A folder beside `folder` to write in; removed at the end unless it was put into place.

    Its name is met nowhere else: a worker that was given up may still be writing.
    """
    part = folder.with_name(f".{folder.name}.{uuid4().hex}.part")
    try:
        part.mkdir(parents=True)
    except OSError as error:
        raise _cannot(part, error) from error
    try:
        yield part
    finally:
        shutil.rmtree(part, ignore_errors=True)


def put_in_place(part: Path, folder: Path, key: str, outcome: Outcome) -> None:
    """Give the written `part` the name `folder`, with a record of what it is made from."""
    hashes = {path.name: file_hash(path) for path in sorted(part.iterdir())}
    record = {"identity": key, "outcome": asdict(outcome), "files": hashes}
    write_whole(part / RECORD, (json.dumps(record, indent=2) + "\n").encode())
    old = folder.with_name(f".{folder.name}.{uuid4().hex}.old")
    with suppress(FileNotFoundError):
        folder.rename(old)
    try:
        part.rename(folder)
    except OSError as error:
        # Another worker that was given up, but went on, was first.
        if finished(folder, key) is None:
            raise _cannot(folder, error) from error
    finally:
        shutil.rmtree(old, ignore_errors=True)


def finished(folder: Path, key: str) -> Outcome | None:
    """The outcome in `folder` if it is of the identity `key` and its files are as written."""
    try:
        record: dict[str, Any] = json.loads((folder / RECORD).read_text(encoding="utf-8"))
        if record["identity"] != key:
            return None
        if any(file_hash(folder / name) != found for name, found in record["files"].items()):
            return None
        told = dict(record["outcome"])
        largest = Largest(**told.pop("largest")) if told["largest"] else told.pop("largest")
        return Outcome(**told | {"largest": largest, "earlier": True})
    except (OSError, ValueError, KeyError, TypeError, AttributeError, Front3DError):
        return None


def discard(folder: Path) -> None:
    """Remove what an earlier run left for a case that fails now: it is of other inputs."""
    shutil.rmtree(folder, ignore_errors=True)


def clear_unfinished(cases: Path) -> None:
    """Remove what workers that were killed left behind."""
    for path in cases.glob(".*"):
        if path.suffix not in _UNFINISHED:
            continue
        if path.is_dir():
            shutil.rmtree(path, ignore_errors=True)
        else:
            path.unlink(missing_ok=True)


@contextmanager
def started(folder: Path) -> Iterator[int]:
    """How often work on the case was begun before and not ended; it is noted until it ends.

    The note stays where a worker is killed, so that the next one knows, on whichever machine.
    """
    note = folder.with_name(f".{folder.name}.started")
    try:
        before = note.stat().st_size if note.exists() else 0
        with note.open("ab") as stream:
            stream.write(b".")
    except OSError as error:
        raise _cannot(note, error) from error
    try:
        yield before
    finally:
        note.unlink(missing_ok=True)


@contextmanager
def alone(out: Path) -> Iterator[None]:
    """Holds the folder of a study; WriteError where another run holds it.

    The system lets go of it when the process ends, however it ends.
    """
    try:
        import fcntl
    except ImportError:  # no such lock on this system
        yield
        return
    held = os.open(out, os.O_RDONLY)
    try:
        try:
            fcntl.flock(held, fcntl.LOCK_EX | fcntl.LOCK_NB)
        except BlockingIOError as error:
            raise WriteError(
                f"{out}: another run of `front3d batch` writes into it; wait for its end, or name "
                "another folder"
            ) from error
        except OSError:  # a network's file system that locks no folders
            pass
        yield
    finally:
        os.close(held)


def _cannot(path: Path, error: OSError) -> WriteError:
    return WriteError(f"{path}: cannot be written ({error.strerror or type(error).__name__})")
