"""Which cases a study has, and what they are called."""

from collections import Counter
from collections.abc import Callable, Iterable, Iterator, Sequence
from dataclasses import dataclass, replace
from glob import glob, has_magic
from pathlib import Path

from front3d.case import Case, read_case
from front3d.errors import CaseError
from front3d.job import check_constants

_CASE_FILE = ".toml"

Check = Callable[[Case], None]


@dataclass(frozen=True, slots=True)
class Member:
    """One case of a study.

    Attributes
    ----------
    name : as it stands in the tables; no two of a study are alike
    case : what to evaluate, paths absolute; None where it cannot be read
    problem : why it cannot be read; empty where it can
    """

    name: str
    case: Case | None
    problem: str = ""


def members_of(words: Sequence[str], flags: Case, check: Check) -> list[Member]:
    """The cases named by `words`: case files, results, folders and patterns of either.

    `flags` are said of every case, over what its case file says; `check` raises CaseError for a
    case that says something wrong. A case file that is wrong becomes a member with a problem.
    CaseError where a word names nothing, or the flags are wrong.
    """
    paths = files_of(words)
    pairs = zip(paths, names_of(paths), strict=True)
    return [_member(name, path, flags, check) for path, name in pairs]


def _member(name: str, path: Path, flags: Case, check: Check) -> Member:
    if path.suffix.lower() != _CASE_FILE:
        case = Case(result=path).overridden_by(flags)
        check(case)
        check_constants(case)
        return Member(name, _absolute(case))
    try:
        own = read_case(path)
    except CaseError as error:
        return Member(name, None, str(error))
    case = own.overridden_by(flags)
    try:
        check(case)
    except CaseError as error:
        try:
            check(own)
        except CaseError as wrong:
            return Member(name, None, f"{path.name}: {wrong}")
        raise CaseError(f"{path.name} with the flags: {error}") from None
    try:
        check_constants(case)
    except CaseError as error:
        return Member(name, None, str(error))
    return Member(name, _absolute(case))


def _absolute(case: Case) -> Case:
    """Workers may stand in another folder."""
    return replace(
        case,
        result=case.result and case.result.absolute(),
        more=case.more and tuple(path.absolute() for path in case.more),
        displacement_file=case.displacement_file and case.displacement_file.absolute(),
        source=case.source and case.source.absolute(),
    )


def files_of(words: Sequence[str]) -> list[Path]:
    """The files that `words` name, each once, in the order of the words.

    A folder stands for the case files in it, or, if it has none, for the results in it; files that
    belong to another one (the pieces of a PVTU, the times of a PVD) are no results of their own.
    """
    found: dict[Path, None] = {}
    for word in words:
        path = Path(word)
        if path.is_dir():
            files = _in_folder(path)
        elif path.exists() or not has_magic(word):
            files = [path]
        else:
            found_there = sorted(glob(word, recursive=True))  # noqa: PTH207 (absolute ones, too)
            files = [file for file in map(Path, found_there) if file.is_file()]
        if not files or not all(file.exists() for file in files):
            what = "found no case file and no result in it" if path.is_dir() else "no such file"
            raise CaseError(f"{word}: {what}; expected a case file, a result, or a folder of them")
        found |= dict.fromkeys(file.absolute() for file in files)
    return list(found)


def _in_folder(folder: Path) -> list[Path]:
    files = sorted(path for path in folder.iterdir() if path.is_file())
    cases = [path for path in files if path.suffix.lower() == _CASE_FILE]
    if cases:
        return cases
    from front3d.reading.files import FORMATS

    suffixes = {suffix for form in FORMATS for suffix in form.suffixes}
    results = [path for path in files if path.suffix.lower() in suffixes]
    if len({path.suffix.lower() for path in results}) < 2:
        return results
    from front3d.output.summary import companions

    parts = {part.absolute() for path in results for part in companions(path)}
    return [path for path in results if path.absolute() not in parts]


def names_of(paths: Sequence[Path]) -> list[str]:
    """A name for each file: without its suffix, and with as many folders before it, or its suffix
    after it, as tell it from the others.

    Only files that are called alike get longer names, so that a study can be extended without
    new names for the cases it has.
    """
    names = [path.stem for path in paths]
    for depth in range(2, max((len(path.parts) for path in paths), default=0)):
        if not (twice := _twice(names)):
            return names
        names = [
            "/".join((*path.parts[-depth:-1], path.stem)) if name in twice else name
            for path, name in zip(paths, names, strict=True)
        ]
    twice = _twice(names)
    return [
        f"{path.parent.name}/{path.name}" if name in twice else name
        for path, name in zip(paths, names, strict=True)
    ]


def _twice(names: Iterable[str]) -> set[str]:
    return {name for name, count in Counter(names).items() if count > 1}


def by_step(members: Sequence[Member], steps: Sequence[Sequence[str]]) -> list[Member]:
    """A member for each of its steps in place of each member; `steps` are their names."""
    pairs = zip(members, steps, strict=True)
    return [one for member, names in pairs for one in _split(member, names)]


def _split(member: Member, names: Sequence[str]) -> Iterator[Member]:
    if member.case is None or not names:
        yield member
        return
    for name in names:
        case = replace(member.case, steps=(name,), compare=_of_step(member.case.compare, name))
        yield Member(f"{member.name}:{name}", case)


def _of_step(compare: tuple[str, ...] | None, step: str) -> tuple[str, ...] | None:
    """The published solutions asked for that are not of another step; all where one is wrong,
    which the evaluation will say.
    """
    if not compare:
        return compare
    from front3d.handbook.catalogue import parse

    try:
        return tuple(text for text in compare if parse(text).step in (None, step)) or None
    except CaseError:
        return compare
