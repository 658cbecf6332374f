"""One picture of an evaluation by name, for scripts."""

from pathlib import Path
from typing import Any

import numpy as np

from front3d.errors import CaseError, MethodError
from front3d.output.charts import charts_of
from front3d.output.charts.style import png
from front3d.output.files import KINDS, write_whole
from front3d.output.rendering import why_no_pictures
from front3d.output.scene import scene_png
from front3d.results import Evaluation
from front3d.solid import Solid
from front3d.steps import with_combinations

NAMES = (*KINDS, "scene")


def save_picture(
    evaluation: Evaluation, solid: Solid, name: str, path: Path, *, step: str | None = None
) -> Path:
    """Draw one picture of the first front, 1200 pixels wide, into a PNG file.

    Parameters
    ----------
    name : one of NAMES, as they are called in the folder of `front3d evaluate`
    step : the step it shows; None takes the one with the largest K

    Raises
    ------
    CaseError where there is no such picture, as of the steps where there is one only; MethodError
    where nothing can be drawn on this machine; WriteError.
    """
    chosen = step or max(evaluation.fronts, key=lambda front: np.nanmax(np.abs(front.K))).step
    fronts = tuple(front for front in evaluation.fronts if front.step == chosen)
    if not fronts:
        raise CaseError(f"picture {name}: found no step {chosen!r}")
    if name == "scene":
        reason = why_no_pictures()
        if reason is not None:
            raise MethodError(reason)
        combine: Any = evaluation.options.get("combine") or ()
        whole = with_combinations(solid, combine)
        return write_whole(path, scene_png(whole, fronts, evaluation.units))
    whole_row = name in ("steps", "stations")
    shown = evaluation.fronts if whole_row else fronts[:1]
    charts = charts_of(
        Evaluation(
            evaluation.source, evaluation.material, evaluation.units, shown, evaluation.options
        )
    )
    found = next((key for key in charts if key == name or key.startswith(f"{name}_")), None)
    if found is None:
        raise CaseError(f"picture {name}: expected one of {', '.join((*charts, 'scene'))}")
    return write_whole(path, png(charts[found]()))
