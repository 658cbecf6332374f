"""What the scene in the window is made of, from the folder of an evaluation and a `Shown`."""

from dataclasses import dataclass, replace

import numpy as np

from front3d.output.saved import Saved
from front3d.output.scene.camera import View, best_view, box_corners
from front3d.output.scene.drawing import Extras, Place
from front3d.output.scene.geometry import (
    Box,
    clipped,
    close_up,
    moved,
    opened,
    opening_factor,
    size_of,
    widest_opening,
)
from front3d.output.scene.labels import Mark, words_of
from front3d.output.scene.quantity import Scale, colour_scale, extremes
from front3d.output.scene.still import RIBBON_WORDS, RING_WORDS, opening_words, title_words
from front3d.output.scene.surface import Skin, steps_of
from front3d.output.skin import read_skin
from front3d.output.window.state import Shown, fronts_of
from front3d.results import Evaluation, FrontResult

SKIN = "skin.vtp"
WORDS = (100, 320)
"""Pixels of the scene's width and height that are left to title, scale and caution."""

ALONE = f"the front alone: this evaluation left no {SKIN} to draw the solid from"


@dataclass(frozen=True, slots=True, eq=False)
class Model:
    """The evaluation moved to the origin, the solid's skin if there is one, and its widest opening
    in each step.
    """

    evaluation: Evaluation
    parts: Skin | None
    box: Box
    widest: tuple[float, ...] = ()

    def view(self, shown: Shown, size: tuple[int, int]) -> View:
        """Where the crack is looked at from, in a picture of `size` (width, height) pixels."""
        fronts = fronts_of(self.evaluation, shown.step)
        width, height = size[0] - WORDS[0], size[1] - WORDS[1]
        view = best_view(fronts[0], box_corners(*self.box), width / height)
        return replace(view, half_height=view.half_height * size[1] / height)


@dataclass(frozen=True, slots=True, eq=False)
class Drawn:
    """What a `Shown` comes to: everything that the scene draws beside the body."""

    fronts: tuple[FrontResult, ...]
    scale: Scale
    extras: Extras
    marks: tuple[Mark, ...]
    arrows: tuple[Place, ...]
    title: str
    notes: tuple[str, ...]


def model_of(saved: Saved) -> Model:
    """Read the skin; graphics work in single precision, so all is moved to the origin."""
    evaluation = saved.evaluation
    positions = np.concatenate([front.positions for front in evaluation.fronts])
    centre = positions.mean(axis=0)
    fronts = moved(evaluation.fronts, -centre)
    near = Evaluation(
        evaluation.source, evaluation.material, evaluation.units, fronts, evaluation.options
    )
    if SKIN not in saved.files:
        size = np.full(3, 0.3 * size_of(fronts))
        low, high = (positions - centre).min(axis=0), (positions - centre).max(axis=0)
        return Model(near, None, close_up(positions - centre, np.array([low - size, high + size])))
    parts, box = read_skin(saved.folder / SKIN)
    for surface in (parts.outside, parts.crack):
        if surface.n_cells:
            surface.points = np.asarray(surface.points, np.float64) - centre
    box = (box[0] - centre, box[1] - centre)
    parts = clipped(parts, box)
    widest = tuple(widest_opening(parts, k) for k in range(len(steps_of(fronts))))
    return Model(near, parts, box, widest)


def body_of(shown: Shown) -> tuple[int, float]:
    """All that the drawn body depends on."""
    return shown.step, round(shown.opening, 2)


def _factor(model: Model, shown: Shown) -> float:
    """How many times the opening is enlarged: with steps on the slider, a round number."""
    fronts = fronts_of(model.evaluation, shown.step)
    return opening_factor(model.widest[shown.step], size_of(fronts)) * round(shown.opening, 2)


def opened_parts(model: Model, shown: Shown) -> Skin | None:
    if model.parts is None:
        return None
    return opened(model.parts, shown.step, _factor(model, shown))


def drawn_of(model: Model, shown: Shown) -> Drawn:
    evaluation = model.evaluation
    fronts, units = fronts_of(evaluation, shown.step), evaluation.units
    scale = colour_scale(fronts, shown.quantity)
    picked = (shown.front, shown.station)
    marks = [
        Mark(picked, words_of("picked", fronts[shown.front], shown.station, scale, units), True)
    ]
    marks += [
        Mark((number, i), words_of(word, fronts[number], i, scale, units, short=True))
        for word, number, i in extremes(fronts, scale)
        if (number, i) != picked
    ]
    notes = [ALONE]
    if model.parts is not None:
        notes = [opening_words(_factor(model, shown), model.widest[shown.step])]
    notes += [RIBBON_WORDS] if shown.ribbon else []
    notes += [RING_WORDS] if shown.rings else []
    extras = Extras((picked,) if shown.rings else (), shown.ribbon)
    return Drawn(
        fronts, scale, extras, tuple(marks), (picked,), title_words(fronts, scale),
        tuple(notes),
    )  # fmt: skip
