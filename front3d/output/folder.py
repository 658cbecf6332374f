"""The folder of results: which files it gets, under which names, in which order."""

import json
import re
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from functools import cache, partial
from pathlib import Path
from typing import TYPE_CHECKING, Any

from front3d.output.files import KINDS, file_names, prepare_folder, whole_set
from front3d.output.history import steps_csv
from front3d.output.summary import summary_json
from front3d.output.tables import front_vtp, points_csv
from front3d.results import Evaluation
from front3d.solid import Solid

if TYPE_CHECKING:
    from matplotlib.figure import Figure

Progress = Callable[[str, float], None]


@dataclass(frozen=True, slots=True)
class Written:
    """Names of the files written into a folder, and sentences on what could not be."""

    folder: Path
    files: tuple[str, ...]
    notes: tuple[str, ...] = ()


def write_results(
    evaluation: Evaluation,
    solid: Solid,
    folder: Path,
    *,
    inputs: Sequence[Path] = (),
    case_file: str = "",
    pictures: bool = True,
    progress: Progress | None = None,
) -> Written:
    """Write tables, charts and pictures of `evaluation`, and `summary.json`, which lists them.

    `inputs` are the files that were read, for their hashes; `case_file` is the text of a case file
    that repeats the evaluation. Pictures of an earlier run that this
    one does not write again are removed, so that no old picture stands beside new numbers.
    Raises WriteError; then every file is what it was before.
    """
    prepare_folder(folder)
    earlier = _earlier_files(folder)
    makers: dict[str, Callable[[], bytes]] = {
        "points.csv": lambda: points_csv(evaluation),
        "front.vtp": lambda: front_vtp(evaluation),
    }
    if len({front.step for front in evaluation.fronts}) > 1:
        makers["steps.csv"] = lambda: steps_csv(evaluation)
    notes: list[str] = []
    if pictures and evaluation.fronts:
        drawn, notes = _pictures(evaluation, solid)
        makers |= drawn
    files = (*makers, "summary.json")
    with whole_set() as write:
        for done, (name, make) in enumerate(makers.items()):
            if progress is not None:
                progress(f"writing {name}", done / len(makers))
            write(folder / name, make())
        write(folder / "summary.json", summary_json(evaluation, inputs, files, case_file))
    for name in earlier - set(files):
        (folder / name).unlink(missing_ok=True)
    if progress is not None:
        progress("results written", 1.0)
    return Written(folder, files, tuple(notes))


def _pictures(
    evaluation: Evaluation, solid: Solid
) -> tuple[dict[str, Callable[[], bytes]], list[str]]:
    """Charts, skin and scenes, and why there are no scenes; what draws is only loaded here."""
    from front3d.output.rendering import why_no_pictures
    from front3d.output.skin import skin_vtp
    from front3d.steps import with_combinations

    combine: Any = evaluation.options.get("combine") or ()
    solid = with_combinations(solid, combine)
    makers = _charts(evaluation)
    makers["skin.vtp"] = lambda: skin_vtp(solid, evaluation.fronts)
    reason = why_no_pictures()
    if reason is not None:
        return makers, [reason]
    return makers | _scenes(evaluation, solid), []


def _charts(evaluation: Evaluation) -> dict[str, Callable[[], bytes]]:
    """Each chart as PNG and as SVG, drawn once."""
    from front3d.output.charts import charts_of
    from front3d.output.charts.style import png, svg

    makers: dict[str, Callable[[], bytes]] = {}
    for name, draw in charts_of(evaluation).items():
        drawn = cache(draw)
        makers[f"{name}.png"] = partial(_saved, drawn, png)
        makers[f"{name}.svg"] = partial(_saved, drawn, svg)
    return makers


def _saved(draw: "Callable[[], Figure]", save: "Callable[[Figure], bytes]") -> bytes:
    return save(draw())


def _scenes(evaluation: Evaluation, solid: Solid) -> dict[str, Callable[[], bytes]]:
    """`scene.png`, or one per step."""
    from front3d.output.scene import scene_png

    steps = list(dict.fromkeys(front.step for front in evaluation.fronts))
    names = file_names(steps)

    def maker(step: str) -> Callable[[], bytes]:
        chosen = tuple(front for front in evaluation.fronts if front.step == step)
        return lambda: scene_png(solid, chosen, evaluation.units)

    if len(steps) == 1:
        return {"scene.png": maker(steps[0])}
    return {f"scene_{names[step]}.png": maker(step) for step in steps}


def _earlier_files(folder: Path) -> set[str]:
    """Pictures, and the table of steps, that an earlier run's summary says it wrote here."""
    try:
        files = json.loads((folder / "summary.json").read_text(encoding="utf-8"))["files"]
        kinds = "|".join((*KINDS, "scene"))
        picture = rf"({kinds})[\w.+-]*\.(png|svg)"
        return {name for name in files if re.fullmatch(rf"{picture}|steps\.csv", name)}
    except (OSError, ValueError, KeyError, TypeError):
        return set()
