"""A quarter-elliptical corner crack in a plate, under tension and bending."""

from collections.abc import Mapping

from front3d.samples.cells import cracked_solid
from front3d.samples.ellipse import smallest_radius
from front3d.samples.fineness import density
from front3d.samples.mirror import Unfolded
from front3d.samples.octant import octant
from front3d.samples.parts import CORNER_PARTS
from front3d.samples.plate_loads import load_parameters, plate_loads
from front3d.samples.sample import (
    Load,
    Parameter,
    SampleSpec,
    Values,
    check_ratio,
    common_parameters,
    on_ends,
    required,
)
from front3d.samples.sheet import Quarter

_PARAMETERS = {
    "depth": Parameter("depth of the crack along the thickness, a", 6.0, 1e-9, 1e9, "length"),
    "length": Parameter("length of the crack along the width, c", 10.0, 1e-9, 1e9, "length"),
    "thickness": Parameter("thickness of the plate, t", 15.0, 1e-9, 1e10, "length"),
    "width": Parameter(
        "width of the plate (default 10 times the larger of a and c)", None, 1e-9, 1e10, "length"
    ),
    "half_height": Parameter(
        "half of its height (default the larger of its width and twice its thickness)",
        None, 1e-9, 1e10, "length",
    ),
    **load_parameters(),
    **common_parameters(),
}  # fmt: skip


def _complete(given: Mapping[str, float | None]) -> Values:
    values = {k: v for k, v in given.items() if v is not None}
    a, c = required(given, "depth"), required(given, "length")
    values.setdefault("width", 10.0 * max(a, c))
    values.setdefault("half_height", max(values["width"], 2.0 * values["thickness"]))
    name = "corner-crack"
    check_ratio(name, "depth / length", a / c, 0.2, 2.0)
    check_ratio(name, "depth / thickness", a / values["thickness"], 0.1, 0.8)
    check_ratio(name, "width / length", values["width"] / c, 2.0, 50.0)
    size = max(a, c)
    check_ratio(name, "half_height / larger of depth and length",
                values["half_height"] / size, 2.0, 50.0)  # fmt: skip
    return values


def _mesh(values: Values, cells: str) -> Unfolded:
    a, c, t = values["depth"], values["length"], values["thickness"]
    radius = min(0.25 * a, 0.25 * c, 0.5 * smallest_radius(a, c), 0.4 * (t - a))
    shape = Quarter(a, c, radius, width=values["width"], depth=t)
    fine = density(cells, values["refine"], max(a, c) / min(a, c), closed=False)
    return cracked_solid(octant(shape, fine, values["half_height"]), (), cells, "corner-crack")


def _loads(values: Values) -> tuple[Load, ...]:
    return plate_loads("corner-crack", values, on_ends(values["half_height"]))


CORNER_CRACK = SampleSpec(
    "corner-crack",
    "quarter-elliptical corner crack in a plate, tension and bending",
    _PARAMETERS,
    _complete,
    _mesh,
    _loads,
    CORNER_PARTS,
)
