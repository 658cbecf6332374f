"""A semi-elliptical surface crack in a plate, under tension and bending."""

from collections.abc import Mapping

from front3d.samples.cells import cracked_solid
from front3d.samples.ellipse import smallest_radius
from front3d.samples.fineness import density
from front3d.samples.mirror import Unfolded
from front3d.samples.octant import octant
from front3d.samples.parts import SURFACE_PARTS
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
    "depth": Parameter("depth of the crack, a", 6.0, 1e-9, 1e9, "length"),
    "half_length": Parameter("half of its length on the surface, c", 10.0, 1e-9, 1e9, "length"),
    "thickness": Parameter("thickness of the plate, t", 15.0, 1e-9, 1e10, "length"),
    "half_width": Parameter(
        "half of its width (default 10 times the larger of a and c)", None, 1e-9, 1e10, "length"
    ),
    "half_height": Parameter(
        "half of its height (default the half width)", None, 1e-9, 1e10, "length"
    ),
    **load_parameters(),
    **common_parameters(),
}


def _complete(given: Mapping[str, float | None]) -> Values:
    values = {k: v for k, v in given.items() if v is not None}
    a, c = required(given, "depth"), required(given, "half_length")
    values.setdefault("half_width", 10.0 * max(a, c))
    values.setdefault("half_height", values["half_width"])
    name = "surface-crack"
    check_ratio(name, "depth / half_length", a / c, 0.2, 2.0)
    check_ratio(name, "depth / thickness", a / values["thickness"], 0.1, 0.8)
    check_ratio(name, "half_width / half_length", values["half_width"] / c, 2.0, 50.0)
    size = max(a, c)
    check_ratio(name, "half_height / larger of depth and half_length",
                values["half_height"] / size, 2.0, 50.0)  # fmt: skip
    return values


def _mesh(values: Values, cells: str) -> Unfolded:
    a, c, t = values["depth"], values["half_length"], values["thickness"]
    radius = min(0.25 * a, 0.25 * c, 0.5 * smallest_radius(a, c), 0.4 * (t - a))
    shape = Quarter(a, c, radius, width=values["half_width"], depth=t)
    fine = density(cells, values["refine"], max(a, c) / min(a, c), closed=False)
    return cracked_solid(octant(shape, fine, values["half_height"]), (0,), cells, "surface-crack")


def _loads(values: Values) -> tuple[Load, ...]:
    return plate_loads("surface-crack", values, on_ends(values["half_height"]))


SURFACE_CRACK = SampleSpec(
    "surface-crack",
    "semi-elliptical surface crack in a plate, tension and bending",
    _PARAMETERS,
    _complete,
    _mesh,
    _loads,
    SURFACE_PARTS,
)
