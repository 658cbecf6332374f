"""A round bar with a crack all around it, in tension and in torsion."""

from collections.abc import Mapping

import numpy as np

from front3d.arrays import FloatArray
from front3d.samples.cells import cracked_solid, is_tetra
from front3d.samples.fineness import density
from front3d.samples.mirror import Unfolded
from front3d.samples.octant import octant
from front3d.samples.sample import (
    Load,
    Parameter,
    SampleSpec,
    Values,
    acting,
    check_ratio,
    common_parameters,
    on_ends,
    required,
)
from front3d.samples.sheet import Quarter

_NAME = "round-bar"
_PARAMETERS = {
    "ligament": Parameter("radius of the ligament, a", 10.0, 1e-9, 1e9, "length"),
    "radius": Parameter("radius of the bar, b", 20.0, 1e-9, 1e10, "length"),
    "half_length": Parameter("half of the bar's length (default 4 b)", None, 1e-9, 1e10, "length"),
    "tension": Parameter("stress on the ends, force / (pi b^2)", 100.0, -1e12, 1e12, "stress"),
    "torsion": Parameter(
        "shear stress at the rim of the ends, 2 torque / (pi b^3)", 100.0, -1e12, 1e12, "stress"
    ),
    **common_parameters(),
}


def _complete(given: Mapping[str, float | None]) -> Values:
    values = {k: v for k, v in given.items() if v is not None}
    a, b = required(given, "ligament"), required(given, "radius")
    values.setdefault("half_length", 4.0 * b)
    check_ratio(_NAME, "ligament / radius", a / b, 0.2, 0.9)
    check_ratio(_NAME, "half_length / radius", values["half_length"] / b, 1.0, 20.0)
    return values


def _mesh(values: Values, cells: str) -> Unfolded:
    a, b = values["ligament"], values["radius"]
    # Without quarter-points the error in K_III goes with the size of the cells over the radius.
    radius = min((0.12 if is_tetra(cells) else 0.25) * a, 0.4 * (b - a))
    shape = Quarter(a, a, radius, width=b, depth=b, round=True, outside=True)
    fine = density(cells, values["refine"], 1.0, closed=True)
    return cracked_solid(octant(shape, fine, values["half_length"]), (0, 1), cells, _NAME)


def _loads(values: Values) -> tuple[Load, ...]:
    ends = on_ends(values["half_length"])

    def tension(points: FloatArray, normals: FloatArray) -> FloatArray:
        return values["tension"] * normals

    def torsion(points: FloatArray, normals: FloatArray) -> FloatArray:
        rate = values["torsion"] / values["radius"]  # Saint-Venant: the shear grows from the axis
        return rate * np.cross(normals, points * (1.0, 1.0, 0.0))

    return acting(
        _NAME,
        {
            "tension": (values["tension"], Load("tension", tension, ends)),
            "torsion": (values["torsion"], Load("torsion", torsion, ends)),
        },
    )


ROUND_BAR = SampleSpec(
    _NAME,
    "crack all around a round bar, tension and torsion",
    _PARAMETERS,
    _complete,
    _mesh,
    _loads,
)
