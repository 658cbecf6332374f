"""K at chosen stations against the steps: which stations, and the table `steps.csv`."""

import csv
import io
from collections.abc import Sequence
from typing import Any

import numpy as np

from front3d.results import MODES, Evaluation, FrontResult, free_surface_layer

COLUMNS = (
    *("front", "station", "s", "s_rel", "x", "y", "z", "step", "time"),
    *("K_I", "K_II", "K_III", "G", "flag"),
)


def rows_of(fronts: Sequence[FrontResult]) -> dict[int, list[FrontResult]]:
    """Results by front, steps in order."""
    rows: dict[int, list[FrontResult]] = {}
    for front in fronts:
        rows.setdefault(front.front, []).append(front)
    return rows


def chosen_stations(row: Sequence[FrontResult], places: Sequence[float] | None) -> list[int]:
    """Numbers of the stations nearest to `places` (parts of the length), in their order.

    Without places: where |K| is largest over all steps away from free surfaces, and the ends and
    the middle of an open front, the quarters of a closed one.
    """
    first = row[0]
    if places is None:
        largest = np.max([np.linalg.norm(np.nan_to_num(f.K), axis=1) for f in row], axis=0)
        largest[free_surface_layer(first.s, first.length, first.ends)] = 0.0
        quarters = (0.0, 0.25, 0.5, 0.75) if first.closed else (0.0, 0.5, 1.0)
        places = [*quarters, float(first.s_rel[int(np.argmax(largest))])]
    away = np.abs(first.s_rel[:, None] - np.asarray(places, dtype=float))
    if first.closed:  # s/L = 1 is the first station again
        away = np.minimum(away, 1.0 - away)
    return sorted(set(away.argmin(axis=0).tolist()))


def places_asked(evaluation: Evaluation) -> Sequence[float] | None:
    """The option `stations` of an evaluation."""
    places: Any = evaluation.options.get("stations")
    return places


def steps_csv(evaluation: Evaluation) -> bytes:
    """`steps.csv`: a row per front, chosen station and step; numbers keep their full precision."""
    text = io.StringIO(newline="")
    writer = csv.writer(text, lineterminator="\n")
    writer.writerow(COLUMNS)
    for number, row in rows_of(evaluation.fronts).items():
        for i in chosen_stations(row, places_asked(evaluation)):
            for front in row:
                where = [float(front.s[i]), float(front.s_rel[i]), *front.positions[i].tolist()]
                K = [float(front.K[i, k]) for k in range(len(MODES))]
                what = [*K, float(front.G[i]), front.flags[i]]
                writer.writerow([number, i, *where, front.step, front.time, *what])
    return text.getvalue().encode()
