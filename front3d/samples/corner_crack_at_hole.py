"""Quarter-elliptical corner cracks at a circular hole in a plate, under tension and bending.

The cylinder as outer boundary is there to compare with tables in tension; its large curved cells
are too stiff in bending (measured: 3 to 4 % in K, on bricks only with refine = 0).
"""

from collections.abc import Mapping
from dataclasses import replace

import numpy as np

from front3d.arrays import BoolArray, FloatArray
from front3d.samples.cells import cracked_solid, half_cracked_solid
from front3d.samples.ellipse import smallest_radius
from front3d.samples.fineness import density
from front3d.samples.hole import Hole
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

_NAME = "corner-crack-at-hole"
_PARAMETERS = {
    "depth": Parameter("depth of the crack along the thickness, a", 6.0, 1e-9, 1e9, "length"),
    "length": Parameter("length of the crack from the hole, c", 6.0, 1e-9, 1e9, "length"),
    "thickness": Parameter("thickness of the plate, t", 12.0, 1e-9, 1e10, "length"),
    "hole_radius": Parameter("radius of the hole, r", 12.0, 1e-9, 1e9, "length"),
    "cracks": Parameter("1, or 2 symmetric ones on either side of the hole", 2, 1, 2, whole=True),
    "half_width": Parameter(
        "half of the plate's width (default r + 12 times the larger of r and c)",
        None, 1e-9, 1e10, "length",
    ),
    "half_height": Parameter(
        "half of its height (default the half width)", None, 1e-9, 1e10, "length"
    ),
    "cylinder": Parameter(
        "1 makes the outer boundary a cylinder of radius `half_width` about the hole, loaded "
        "all around; 0 a plate, loaded at its ends",
        0, 0, 1, whole=True,
    ),
    **load_parameters(),
    **common_parameters(),
}  # fmt: skip


def _complete(given: Mapping[str, float | None]) -> Values:
    values = {k: v for k, v in given.items() if v is not None}
    a, c, r = (required(given, name) for name in ("depth", "length", "hole_radius"))
    values.setdefault("half_width", r + 12.0 * max(r, c))
    values.setdefault("half_height", values["half_width"])
    check_ratio(_NAME, "depth / length", a / c, 0.2, 2.0)
    check_ratio(_NAME, "depth / thickness", a / values["thickness"], 0.1, 0.8)
    check_ratio(_NAME, "hole_radius / length", r / c, 0.5, 10.0)
    check_ratio(_NAME, "hole_radius / thickness", r / values["thickness"], 0.25, 5.0)
    check_ratio(_NAME, "half_width / (hole_radius + length)",
                values["half_width"] / (r + c), 2.0, 50.0)  # fmt: skip
    check_ratio(_NAME, "half_height / half_width",
                values["half_height"] / values["half_width"], 1.0, 3.0)  # fmt: skip
    return values


def _mesh(values: Values, cells: str) -> Unfolded:
    a, c, t, r = (values[name] for name in ("depth", "length", "thickness", "hole_radius"))
    height = None if values["cylinder"] else values["half_height"]
    hole = Hole(r, values["half_width"], height)
    radius = min(0.25 * a, 0.25 * c, 0.5 * smallest_radius(a, c), 0.4 * (t - a), 0.25 * r)
    shape = Quarter(a, c, radius, width=hole.half_width - r, depth=t)
    fine = density(cells, values["refine"], max(a, c) / min(a, c), closed=False)
    if a > 0.6 * t:  # K climbs steeply towards the bore: 1.6 % there with the usual cells
        fine = replace(fine, along=fine.along + 2)
    lattice = hole.bend(octant(shape, fine, *hole.heights))
    if values["cracks"] == 1:
        return half_cracked_solid(lattice, cells, _NAME)
    return cracked_solid(lattice, (0,), cells, _NAME)


def _loads(values: Values) -> tuple[Load, ...]:
    radius = values["half_width"]

    def rim(faces: FloatArray) -> BoolArray:
        gap: FloatArray = np.abs(np.hypot(faces[:, :, 0], faces[:, :, 2]) - radius).max(axis=1)
        return gap < 1e-9 * radius

    return plate_loads(_NAME, values, rim if values["cylinder"] else on_ends(values["half_height"]))


CORNER_CRACK_AT_HOLE = SampleSpec(
    _NAME,
    "one or two quarter-elliptical corner cracks at a hole in a plate, tension and bending",
    _PARAMETERS,
    _complete,
    _mesh,
    _loads,
    SURFACE_PARTS,
)
