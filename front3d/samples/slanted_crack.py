"""A through crack in a large plate, under tension along an axis inclined against its normal."""

from collections.abc import Mapping
from math import cos, radians, sin

import numpy as np

from front3d.arrays import BoolArray, FloatArray
from front3d.samples.cells import cracked_solid
from front3d.samples.mirror import Unfolded
from front3d.samples.plates import growth_for, hold, layers, plate_grid, tube_for
from front3d.samples.sample import (
    Load,
    Parameter,
    SampleSpec,
    Values,
    acting,
    check_ratio,
    common_parameters,
    outside,
    required,
    uniform,
)
from front3d.samples.section import drawn, plate_pieces

_NAME = "slanted-crack"
_PARAMETERS = {
    "half_length": Parameter("half of the length of the crack, a", 10.0, 1e-9, 1e9, "length"),
    "angle": Parameter(
        "angle between the load axis and the crack normal, turned towards x",
        45.0, 0, 90, "degrees",
    ),
    "body": Parameter(
        "half of the width and of the height of the plate (default 40 half lengths)",
        None, 1e-9, 1e10, "length",
    ),
    "thickness": Parameter("thickness of the slice", 5.0, 1e-9, 1e10, "length"),
    "tension": Parameter("stress along the load axis", 100.0, -1e12, 1e12, "stress"),
    **common_parameters(),
}  # fmt: skip


def _complete(given: Mapping[str, float | None]) -> Values:
    values = {k: v for k, v in given.items() if v is not None}
    a = required(given, "half_length")
    values.setdefault("body", 40.0 * a)
    check_ratio(_NAME, "body / half_length", values["body"] / a, 2.0, 100.0)
    check_ratio(_NAME, "thickness / half_length", values["thickness"] / a, 0.05, 20.0)
    return values


def _mesh(values: Values, cells: str) -> Unfolded:
    a, body, refine = values["half_length"], values["body"], values["refine"]
    tube = tube_for(cells, refine)
    grid = plate_grid(a, 0.3 * a, (0.0, body), body, tube, growth_for(refine))
    y = layers(values["thickness"], False, refine, a)
    return cracked_solid(drawn(plate_pieces(grid, tube), y), (0, 1), cells, _NAME)


def _loads(values: Values) -> tuple[Load, ...]:
    angle = radians(values["angle"])
    axis = np.array([sin(angle), 0.0, cos(angle)])
    stress = values["tension"] * np.outer(axis, axis)
    load = Load("tension", uniform(stress), outside)
    return acting(_NAME, {"tension": (values["tension"], load)})


def _held(values: Values, points: FloatArray) -> BoolArray:
    return hold(points, {1: values["thickness"] / 2.0})


SLANTED_CRACK = SampleSpec(
    _NAME,
    "through crack in a large plate, plane strain, tension along an axis inclined by `angle`",
    _PARAMETERS,
    _complete,
    _mesh,
    _loads,
    held=_held,
)
