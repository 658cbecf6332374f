"""A straight through crack in a plate under tension, in the middle or at an edge."""

from collections.abc import Mapping

from front3d.arrays import BoolArray, FloatArray
from front3d.samples.cells import cracked_solid
from front3d.samples.mirror import Unfolded
from front3d.samples.plates import (
    end_tension,
    free_sides_parameter,
    growth_for,
    hold,
    layers,
    plate_grid,
    tube_for,
)
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

_NAME = "through-crack"
_PARAMETERS = {
    "crack": Parameter(
        "half of its length in the middle, all of it at an edge, a", 10.0, 1e-9, 1e9, "length"
    ),
    "width": Parameter(
        "half of the plate's width where the crack is in its middle, all of it where the crack is "
        "at an edge, b",
        50.0, 1e-9, 1e10, "length",
    ),
    "half_height": Parameter("half of its height (default 3 b)", None, 1e-9, 1e10, "length"),
    "thickness": Parameter("thickness of the plate", 10.0, 1e-9, 1e10, "length"),
    "edge": Parameter("place of the crack: 0 middle, 1 edge", 0, 0, 1, whole=True),
    "free_sides": free_sides_parameter(0),
    "tension": Parameter("remote tension", 100.0, -1e12, 1e12, "stress"),
    **common_parameters(),
}  # fmt: skip


def _complete(given: Mapping[str, float | None]) -> Values:
    values = {k: v for k, v in given.items() if v is not None}
    a, b = required(given, "crack"), required(given, "width")
    values.setdefault("half_height", 3.0 * b)
    check_ratio(_NAME, "crack / width", a / b, 0.01, 0.9)
    check_ratio(_NAME, "half_height / width", values["half_height"] / b, 1.0, 20.0)
    check_ratio(_NAME, "thickness / crack", values["thickness"] / a, 0.05, 20.0)
    return values


def _mesh(values: Values, cells: str) -> Unfolded:
    a, b, refine = values["crack"], values["width"], values["refine"]
    size = min(a, b - a)
    tube = tube_for(cells, refine)
    grid = plate_grid(a, 0.3 * size, (0.0, b), values["half_height"], tube, growth_for(refine))
    y = layers(values["thickness"], bool(values["free_sides"]), refine, size)
    axes = (1,) if values["edge"] else (0, 1)
    return cracked_solid(drawn(plate_pieces(grid, tube), y), axes, cells, _NAME)


def _loads(values: Values) -> tuple[Load, ...]:
    return end_tension(_NAME, values)


def _held(values: Values, points: FloatArray) -> BoolArray:
    return hold(points, {} if values["free_sides"] else {1: values["thickness"] / 2.0})


THROUGH_CRACK = SampleSpec(
    _NAME,
    "straight through crack in a plate, in its middle or at an edge, tension",
    _PARAMETERS,
    _complete,
    _mesh,
    _loads,
    held=_held,
)
