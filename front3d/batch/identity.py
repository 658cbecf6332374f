"""What makes two runs of a case the same: its files, what was asked for, and the program."""

import hashlib
import json
from dataclasses import dataclass
from functools import cache, lru_cache
from pathlib import Path

import front3d
from front3d.case import Case, as_toml
from front3d.errors import ReadError
from front3d.job import inputs_of


@dataclass(frozen=True, slots=True)
class Identity:
    """The inputs of a case as hashes.

    Attributes
    ----------
    files : (name, SHA-256) of every file that is read: results with the files they name, tables
        of displacements, the case file
    key : SHA-256 over the files and their names, the case as it is evaluated, and the version
    """

    files: tuple[tuple[str, str], ...]
    key: str


def identity_of(case: Case, *, pictures: bool) -> Identity:
    """The identity of `case` with its files as they are now; ReadError where one cannot be read."""
    from front3d.output.summary import companions

    files = tuple(
        (path.name, file_hash(path))
        for given in inputs_of(case)
        for path in (given, *(companions(given) if given.is_file() else ()))
    )
    content = {
        "files": files,
        "case": as_toml(case),
        "pictures": pictures,
        "version": program_version(),
    }
    text = json.dumps(content, sort_keys=True)
    return Identity(files, hashlib.sha256(text.encode()).hexdigest())


def file_hash(path: Path) -> str:
    """SHA-256 of a file, kept while its size and time of change stay: many cases read one file."""
    try:
        about = path.stat()
        return _hash(path, about.st_size, about.st_mtime_ns, about.st_ino)
    except OSError as error:
        raise ReadError(f"{path}: cannot be read ({error.strerror})") from error


@lru_cache(maxsize=4096)
def _hash(path: Path, size: int, time: int, number: int) -> str:
    with path.open("rb") as stream:
        return hashlib.file_digest(stream, "sha256").hexdigest()


@cache
def program_version() -> str:
    """The version of front3d with a hash of its sources: a changed checkout is another program."""
    package = Path(front3d.__file__).parent
    digest = hashlib.sha256()
    for path in sorted(package.rglob("*.py")):
        digest.update(path.relative_to(package).as_posix().encode())
        digest.update(path.read_bytes())
    return f"{front3d.__version__}+{digest.hexdigest()[:12]}"
