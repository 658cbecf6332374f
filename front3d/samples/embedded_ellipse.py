"""An elliptical crack in the middle of a large block, or of a plate, under tension and shear."""

from collections.abc import Mapping

import numpy as np

from front3d.samples.cells import cracked_solid
from front3d.samples.ellipse import smallest_radius
from front3d.samples.fineness import density
from front3d.samples.mirror import Unfolded
from front3d.samples.octant import octant
from front3d.samples.parts import INNER_PARTS
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
from front3d.samples.sheet import Quarter

_NAME = "embedded-ellipse"
_STRESSES = {"tension": (2, 2), "shear_x": (0, 2), "shear_y": (1, 2)}
_PARAMETERS = {
    "semi_x": Parameter("semi-axis of the crack along x, c", 10.0, 1e-9, 1e9, "length"),
    "semi_y": Parameter("semi-axis along y, a", 5.0, 1e-9, 1e9, "length"),
    "body": Parameter(
        "half the edge of the block along x and z (default 10 times the larger semi-axis)",
        None, 1e-9, 1e10, "length",
    ),
    "thickness": Parameter(
        "whole extent along y, of a plate with the crack in its middle (default twice `body`)",
        None, 1e-9, 1e10, "length",
    ),
    "tension": Parameter("stress s_zz", 100.0, -1e12, 1e12, "stress"),
    "shear_x": Parameter("stress s_xz", 0.0, -1e12, 1e12, "stress"),
    "shear_y": Parameter("stress s_yz", 0.0, -1e12, 1e12, "stress"),
    **common_parameters(),
}  # fmt: skip


def _complete(given: Mapping[str, float | None]) -> Values:
    values = {k: v for k, v in given.items() if v is not None}
    c, a = required(given, "semi_x"), required(given, "semi_y")
    values.setdefault("body", 10.0 * max(a, c))
    values.setdefault("thickness", 2.0 * values["body"])
    check_ratio(_NAME, "semi_y / semi_x", a / c, 0.2, 5.0)
    check_ratio(_NAME, "body / larger semi-axis", values["body"] / max(a, c), 2.0, 50.0)
    check_ratio(_NAME, "2 semi_y / thickness", 2.0 * a / values["thickness"], 0.02, 0.8)
    return values


def _mesh(values: Values, cells: str) -> Unfolded:
    c, a, body = values["semi_x"], values["semi_y"], values["body"]
    depth = values["thickness"] / 2.0
    radius = min(0.25 * a, 0.25 * c, 0.5 * smallest_radius(a, c), 0.4 * (depth - a))
    shape = Quarter(a, c, radius, width=body, depth=depth)
    fine = density(cells, values["refine"], max(a, c) / min(a, c), closed=True)
    return cracked_solid(octant(shape, fine, body), (0, 1), cells, _NAME)


def _loads(values: Values) -> tuple[Load, ...]:
    loads = {}
    for name, (i, j) in _STRESSES.items():
        stress = np.zeros((3, 3))
        stress[i, j] = stress[j, i] = values[name]
        loads[name] = (values[name], Load(name, uniform(stress), outside))
    return acting(_NAME, loads)


EMBEDDED_ELLIPSE = SampleSpec(
    _NAME,
    "elliptical crack in a large block or plate, one step for each of tension and shear not zero",
    _PARAMETERS,
    _complete,
    _mesh,
    _loads,
    INNER_PARTS,
)
