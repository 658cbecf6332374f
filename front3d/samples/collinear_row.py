"""A row of collinear through cracks in a plate under tension: one crack between symmetry planes."""

from collections.abc import Mapping

from front3d.arrays import BoolArray, FloatArray
from front3d.samples.cells import cracked_solid
from front3d.samples.mirror import Unfolded
from front3d.samples.plates import end_tension, growth_for, hold, layers, plate_grid, tube_for
from front3d.samples.sample import (
    Load,
    Parameter,
    SampleSpec,
    Values,
    check_ratio,
    common_parameters,
    required,
)
from front3d.samples.section import drawn, plate_pieces

_NAME = "collinear-row"
_PARAMETERS = {
    "half_length": Parameter("half of the length of each crack, a", 10.0, 1e-9, 1e9, "length"),
    "half_period": Parameter(
        "half of the distance between the middles of neighbours, b", 20.0, 1e-9, 1e10, "length"
    ),
    "half_height": Parameter(
        "half of the plate's height (default 4 b)", None, 1e-9, 1e10, "length"
    ),
    "thickness": Parameter("thickness of the slice", 5.0, 1e-9, 1e10, "length"),
    "tension": Parameter("remote tension", 100.0, -1e12, 1e12, "stress"),
    **common_parameters(),
}


def _complete(given: Mapping[str, float | None]) -> Values:
    values = {k: v for k, v in given.items() if v is not None}
    a, b = required(given, "half_length"), required(given, "half_period")
    values.setdefault("half_height", 4.0 * b)
    check_ratio(_NAME, "half_length / half_period", a / b, 0.05, 0.9)
    check_ratio(_NAME, "half_height / half_period", values["half_height"] / b, 2.0, 20.0)
    check_ratio(_NAME, "thickness / half_length", values["thickness"] / a, 0.05, 20.0)
    return values


def _mesh(values: Values, cells: str) -> Unfolded:
    a, b, refine = values["half_length"], values["half_period"], values["refine"]
    tube = tube_for(cells, refine)
    radius = 0.3 * min(a, b - a)
    grid = plate_grid(a, radius, (0.0, b), values["half_height"], tube, growth_for(refine))
    y = layers(values["thickness"], False, refine, a)
    return cracked_solid(drawn(plate_pieces(grid, tube), y), (0, 1), cells, _NAME)


def _loads(values: Values) -> tuple[Load, ...]:
    return end_tension(_NAME, values)


def _held(values: Values, points: FloatArray) -> BoolArray:
    return hold(points, {0: values["half_period"], 1: values["thickness"] / 2.0})


COLLINEAR_ROW = SampleSpec(
    _NAME,
    "row of collinear through cracks, plane strain, tension",
    _PARAMETERS,
    _complete,
    _mesh,
    _loads,
    held=_held,
)
