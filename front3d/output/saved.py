"""The folder of an earlier evaluation, read back: the same records, from the files alone."""

import csv
import json
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np

from front3d.arrays import FloatArray
from front3d.errors import Front3DError, ReadError
from front3d.evidence import REPORTED
from front3d.results import MODES, Comparison, Evaluation, FrontResult, MethodResult, Rings
from front3d.solid import LocalMaterial, Material
from front3d.units import Units

Rows = list[dict[str, str]]


@dataclass(frozen=True, slots=True, eq=False)
class Saved:
    """An earlier evaluation.

    Attributes
    ----------
    folder : where it was written
    evaluation : its results; of the methods' further columns those that charts and checks use
    summary : the content of summary.json
    """

    folder: Path
    evaluation: Evaluation
    summary: Mapping[str, Any]

    @property
    def files(self) -> tuple[str, ...]:
        """Names of the files that the evaluation wrote and that are still there."""
        return tuple(name for name in self.summary["files"] if (self.folder / name).is_file())


def read_saved(folder: Path) -> Saved:
    """Read points.csv and summary.json of `folder`.

    Raises ReadError where one of them is missing, broken, or of another run than the other.
    """
    summary = _summary(folder)
    rows = _rows(folder / "points.csv")
    try:
        units = Units(summary["units"]["length"], summary["units"]["stress"])
        material = Material(summary["material"]["young"], summary["material"]["poisson"])
        fronts = []
        start = 0
        for about in summary["fronts"]:
            mine = rows[start : start + about["stations"]]
            start += about["stations"]
            fronts.append(_front(about, mine, folder))
        if start != len(rows):
            raise _other_run(folder, f"found {len(rows)} rows, expected {start}")
        evaluation = Evaluation(
            summary["source"],
            material,
            units,
            tuple(fronts),
            summary["options"],
            tuple(summary["warnings"]),
        )
    except (KeyError, AttributeError, TypeError, ValueError, IndexError) as error:
        raise ReadError(
            f"{folder}: points.csv or summary.json lacks something that an evaluation writes "
            f"({type(error).__name__}: {error}); evaluate again into this folder"
        ) from error
    return Saved(folder, evaluation, summary)


def _summary(folder: Path) -> dict[str, Any]:
    path = folder / "summary.json"
    try:
        content = json.loads(path.read_text(encoding="utf-8"))
    except OSError as error:
        raise ReadError(
            f"{path}: cannot be read ({error.strerror}); expected a folder that "
            "`front3d evaluate` wrote"
        ) from error
    except ValueError as error:
        raise ReadError(f"{path}: not a JSON file: {error}") from error
    if not isinstance(content, dict):
        raise ReadError(f"{path}: found {type(content).__name__}, expected an object of names")
    return content


def _rows(path: Path) -> Rows:
    try:
        with path.open(encoding="utf-8", newline="") as stream:
            return list(csv.DictReader(stream))
    except (OSError, UnicodeDecodeError, csv.Error) as error:
        raise ReadError(f"{path}: cannot be read ({error})") from error


def _front(about: Mapping[str, Any], rows: Rows, folder: Path) -> FrontResult:
    keys = {(row["step"], row["front"]) for row in rows}
    if keys != {(about["step"], str(about["front"]))}:
        raise _other_run(folder, f"expected step {about['step']}, front {about['front']}")
    K = _modes(rows, "")
    for k, mode in enumerate(MODES):
        largest = about["K"][mode].get("max", {}).get("value")
        if largest is not None and not np.nanmax(K[:, k]) == largest:
            raise _other_run(folder, f"the largest {mode} of front {about['front']} differs")
    interaction: dict[str, FloatArray] = {
        str(name): _column(rows, name)
        for name in ("J_interaction", "ring_spread", "hat_interaction")
        if name in rows[0]
    }
    methods = {
        name: MethodResult(
            name,
            _modes(rows, f"_{name}"),
            interaction if name == "interaction" else {},
            _rings(rows) if name == "interaction" else None,
            variant,
        )
        for name, variant in about["methods"].items()
    }
    frames = np.stack(
        [[_column(rows, f"e{i}{axis}") for axis in "xyz"] for i in (1, 2, 3)]
    ).transpose(2, 0, 1)
    try:
        return FrontResult(
            step=about["step"],
            front=int(about["front"]),
            closed=bool(about["closed"]),
            ends=tuple(about["ends"]),
            length=float(about["length"]),
            s=_column(rows, "s"),
            positions=np.stack([_column(rows, axis) for axis in "xyz"], axis=1),
            frames=frames,
            material=_constants(rows),
            K=K,
            G=_column(rows, "G"),
            flags=tuple(row["flag"] for row in rows),
            methods=methods,
            sources=tuple(row.get("K_from") or REPORTED for row in rows),
            warnings=tuple(about["warnings"]),
            notes=tuple(about["notes"]),
            comparisons=tuple(_comparison(c, rows) for c in about.get("comparisons", ())),
            time=float("nan") if about.get("time") is None else float(about["time"]),
        )
    except Front3DError as error:
        raise ReadError(f"{folder}: {error}") from error


def _constants(rows: Rows) -> LocalMaterial | None:
    """Those of the front's own, where the table has them."""
    if "young" not in rows[0]:
        return None
    return LocalMaterial(_column(rows, "young"), _column(rows, "poisson"))


def _rings(rows: Rows) -> Rings | None:
    # The table has as many columns as the front with most rings: the others are empty here.
    columns = sum(name.startswith("radius_ring_") for name in rows[0])
    numbers = [n for n in range(1, columns + 1) if rows[0][f"radius_ring_{n}"] != "nan"]
    if not numbers:
        return None
    return Rings(
        np.stack([_column(rows, f"radius_ring_{ring}") for ring in numbers]),
        np.stack([_modes(rows, f"_ring_{ring}") for ring in numbers]),
        np.stack([_column(rows, f"J_ring_{ring}") for ring in numbers]),
    )


def _comparison(about: Mapping[str, Any], rows: Rows) -> Comparison:
    name = about["solution"]
    nothing = np.full(len(rows), np.nan)
    judged = np.ones(len(rows), dtype=bool)
    judged[about["stations_left_out"]] = False
    return Comparison(
        solution=name,
        arguments=about["arguments"],
        source=about["source"],
        claim=about["claim"],
        K=np.stack([_column(rows, f"{mode}_{name}", nothing) for mode in MODES], axis=1),
        angle=_column(rows, "phi_deg", nothing),
        notes=tuple(about["notes"]),
        judged=judged,
        average=about["average"],
    )


def _modes(rows: Rows, suffix: str) -> FloatArray:
    return np.stack([_column(rows, f"{mode}{suffix}") for mode in MODES], axis=1)


def _column(rows: Rows, name: str, otherwise: FloatArray | None = None) -> FloatArray:
    if otherwise is not None and name not in rows[0]:
        return otherwise
    return np.array([float(row[name]) for row in rows])


def _other_run(folder: Path, what: str) -> ReadError:
    return ReadError(
        f"{folder}: points.csv is not of the run that wrote summary.json: {what}; evaluate again "
        "into this folder"
    )
