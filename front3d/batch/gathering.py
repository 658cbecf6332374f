"""One table of a study: the points of every case below each other, and a row for each case."""

import csv
import io
from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from dataclasses import fields
from pathlib import Path
from typing import TYPE_CHECKING, Any

from front3d.batch.finished import Largest, Outcome
from front3d.errors import ReadError
from front3d.output.files import whole_files

if TYPE_CHECKING:
    import pyarrow

TABLES = ("cases.csv", "points.csv", "points.parquet")

_LARGEST = tuple(f.name for f in fields(Largest))
CASE_COLUMNS = ("case", "state", "message", *_LARGEST, "warnings", "seconds", "folder")
"""Columns of cases.csv: `mode` and what follows are those of the largest K and its station."""

_TEXTS = {"case", "step", "flag", "K_from"}
_WHOLE_NUMBERS = {"front", "station"}


def gather(
    out: Path, names: Sequence[str], outcomes: Sequence[Outcome], folders: Sequence[Path]
) -> None:
    """Write the tables of a study, all of them or none.

    Parameters
    ----------
    names : of all its cases, in their order
    outcomes : of those that were run, in any order
    folders : of the cases, one for each name
    """
    by_name = {outcome.name: outcome for outcome in outcomes}
    done = [
        (name, folder / "points.csv")
        for name, folder in zip(names, folders, strict=True)
        if name in by_name and by_name[name].done
    ]
    with whole_files(*(out / name for name in TABLES)) as (cases, points, parquet):
        cases.write_bytes(cases_csv(out, names, by_name, folders))
        _write_points(points, done)
        _write_parquet(points, parquet)


def cases_csv(
    out: Path, names: Sequence[str], outcomes: dict[str, Outcome], folders: Sequence[Path]
) -> bytes:
    """A row per case: done, failed or not run, why, the largest K and where, and how long."""
    text = io.StringIO(newline="")
    writer = csv.DictWriter(text, CASE_COLUMNS, lineterminator="\n")
    writer.writeheader()
    for name, folder in zip(names, folders, strict=True):
        row: dict[str, Any] = {"case": name, "state": "not run"}
        outcome = outcomes.get(name)
        if outcome is not None:
            row |= {"state": "done" if outcome.done else "failed", "message": outcome.message}
            row["seconds"] = round(outcome.seconds, 3)
        if outcome is not None and outcome.done:
            row |= {"warnings": outcome.warnings, "folder": folder.relative_to(out).as_posix()}
            if outcome.largest is not None:
                row |= {column: getattr(outcome.largest, column) for column in _LARGEST}
        writer.writerow(row)
    return text.getvalue().encode()


def _write_points(path: Path, cases: Sequence[tuple[str, Path]]) -> None:
    """The tables of the cases below each other, cell by cell as they are; what a case lacks is
    nan, or no text.
    """
    columns: dict[str, None] = {}
    headers = {_header(source): None for _, source in cases}
    for names in sorted(headers, key=len, reverse=True):
        columns |= dict.fromkeys(names)
    if not columns:
        from front3d.output.tables import FIRST_COLUMNS

        columns = dict.fromkeys(FIRST_COLUMNS)
    absent = ["" if name in _TEXTS else "nan" for name in columns]
    with path.open("w", encoding="utf-8", newline="") as stream:
        writer = csv.writer(stream, lineterminator="\n")
        writer.writerow(["case", *columns])
        for name, source in cases:
            with _rows_of(source) as rows:
                header = next(rows)
                if header == [*columns]:
                    writer.writerows([name, *row] for row in rows)
                    continue
                places = [header.index(c) if c in header else None for c in columns]
                for row in rows:
                    cells = zip(places, absent, strict=True)
                    writer.writerow([name, *(a if p is None else row[p] for p, a in cells)])


def _write_parquet(points: Path, path: Path) -> None:
    """points.csv as Parquet: texts, whole numbers, and numbers of double precision."""
    import pyarrow as pa
    import pyarrow.csv as arrow_csv
    import pyarrow.parquet as pq

    schema = pa.schema([(name, _type_of(name)) for name in _header(points)])
    options = arrow_csv.ConvertOptions(
        column_types=schema, null_values=[], strings_can_be_null=False
    )
    reading = arrow_csv.ReadOptions(block_size=1 << 24)
    try:
        with (
            arrow_csv.open_csv(points, read_options=reading, convert_options=options) as batches,
            pq.ParquetWriter(path, schema) as writer,
        ):
            for batch in batches:
                writer.write_batch(batch)
    except pa.ArrowInvalid as error:
        raise ReadError(f"points.csv of the study cannot be written as Parquet: {error}") from error


@contextmanager
def _rows_of(path: Path) -> "Iterator[Iterator[list[str]]]":
    with path.open(encoding="utf-8", newline="") as stream:
        yield csv.reader(stream)


def _header(path: Path) -> tuple[str, ...]:
    with _rows_of(path) as rows:
        names: list[str] = next(rows)
    return tuple(names)


def _type_of(column: str) -> "pyarrow.DataType":
    import pyarrow as pa

    if column in _TEXTS:
        return pa.string()
    return pa.int64() if column in _WHOLE_NUMBERS else pa.float64()
