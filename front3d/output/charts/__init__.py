"""The charts, one kind a file; and which of them an evaluation gets, under which names."""

from collections.abc import Callable
from functools import partial
from typing import TYPE_CHECKING

import numpy as np

from front3d.output.charts.along import along_front
from front3d.output.charts.mix import mode_mix
from front3d.output.charts.stations import at_stations
from front3d.output.charts.steps import over_steps
from front3d.output.charts.through import through_thickness
from front3d.output.files import file_names
from front3d.output.history import chosen_stations, places_asked, rows_of
from front3d.output.shape import section_of
from front3d.results import Evaluation, FrontResult

if TYPE_CHECKING:
    from matplotlib.figure import Figure

MOST_STEPS = 6
"""Steps up to which each has charts of its own; with more, only the one with the largest K has, and
all share the chart of steps."""


def charts_of(evaluation: Evaluation) -> dict[str, Callable[[], "Figure"]]:
    """Makers of all charts by file name without suffix.

    One front in one step gives plain names; otherwise front and step are part of them.
    """
    fronts, units, material = evaluation.fronts, evaluation.units, evaluation.material
    tails = _tails(fronts)
    makers: dict[str, Callable[[], Figure]] = {}
    rows = rows_of(fronts)
    for front in fronts:
        row = rows[front.front]
        if len(row) > MOST_STEPS and front is not max(row, key=_largest):
            continue
        tail = tails[front.front, front.step]
        makers[f"chart{tail}"] = partial(along_front, front, units)
        section = section_of(front)
        if section is not None:
            makers[f"through_thickness{tail}"] = partial(through_thickness, front, section, units)
        makers[f"mode_mix{tail}"] = partial(mode_mix, front, units, front.material or material)
    for number, row in rows.items():
        if len(row) > 1:
            tail = "" if len(rows) == 1 else f"_front{number}"
            makers[f"steps{tail}"] = partial(over_steps, row, units)
            stations = chosen_stations(row, places_asked(evaluation))
            makers[f"stations{tail}"] = partial(at_stations, row, stations, units)
    return makers


def heads(evaluation: Evaluation) -> dict[str, str]:
    """What the charts of one front, in one step or in all, are about: by the end of their names."""
    fronts = evaluation.fronts
    if len(fronts) == 1:
        return {}
    numbers = dict.fromkeys(front.front for front in fronts)
    found = {
        f"_front{number}" if len(numbers) > 1 else "": f"Front {number}, all steps"
        for number in numbers
    }
    for (number, step), tail in _tails(fronts).items():
        found[tail] = f"Front {number}, step {step}"
    return found


def _tails(fronts: tuple[FrontResult, ...]) -> dict[tuple[int, str], str]:
    """How the names of the charts of a front in a step end."""
    names = file_names([front.step for front in fronts])
    if len(fronts) == 1:
        return {(fronts[0].front, fronts[0].step): ""}
    return {(f.front, f.step): f"_front{f.front}_{names[f.step]}" for f in fronts}


def _largest(front: FrontResult) -> float:
    return float(np.nanmax(np.abs(front.K), initial=0.0))
