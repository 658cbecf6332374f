"""A penny crack in the middle of a cylinder, under tension along an inclined axis."""

from collections.abc import Mapping
from math import cos, radians, sin

import numpy as np

from front3d.arrays import BoolArray, FloatArray
from front3d.samples.cells import cracked_solid
from front3d.samples.fineness import density
from front3d.samples.mirror import Unfolded
from front3d.samples.octant import octant
from front3d.samples.parts import PENNY_PARTS
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
)
from front3d.samples.sheet import Quarter

_PARAMETERS = {
    "radius": Parameter("radius of the crack", 10.0, 1e-9, 1e9, "length"),
    "tension": Parameter("stress along the load axis", 100.0, -1e12, 1e12, "stress"),
    "tilt": Parameter(
        "angle between the load axis and the crack normal, turned towards x", 0, 0, 90, "degrees"
    ),
    "face_pressure": Parameter("pressure on the crack faces", 0.0, -1e12, 1e12, "stress"),
    "body": Parameter(
        "radius and half-height of the cylinder (default 10 radii)", None, 1e-9, 1e10, "length"
    ),
    **common_parameters(),
}


def _complete(given: Mapping[str, float | None]) -> Values:
    values = {k: v for k, v in given.items() if v is not None}
    values.setdefault("body", 10.0 * required(given, "radius"))
    check_ratio("penny", "body / radius", values["body"] / values["radius"], 2.0, 50.0)
    return values


def _mesh(values: Values, cells: str) -> Unfolded:
    a, body = values["radius"], values["body"]
    shape = Quarter(a, a, radius=0.25 * a, width=body, depth=body, round=True)
    fine = density(cells, values["refine"], 1.0, closed=True)
    return cracked_solid(octant(shape, fine, body), (0, 1), cells, "penny")


def _loads(values: Values) -> tuple[Load, ...]:
    tilt, inside = radians(values["tilt"]), values["face_pressure"]
    axis = np.array([sin(tilt), 0.0, cos(tilt)])
    stress = values["tension"] * np.outer(axis, axis)

    def traction(points: FloatArray, normals: FloatArray) -> FloatArray:
        return np.where(points[:, 2:] == 0.0, -inside * normals, normals @ stress)

    def loaded(faces: FloatArray) -> BoolArray:
        return outside(faces) | (inside != 0.0)

    load = Load("tension" if values["tension"] else "pressure", traction, loaded)
    return acting("penny", {"tension": (abs(values["tension"]) + abs(inside), load)})


def _options(values: Values) -> Mapping[str, object]:
    return {"face_pressure": values["face_pressure"]} if values["face_pressure"] else {}


PENNY = SampleSpec(
    "penny",
    "penny crack in a large cylinder, tension along an axis inclined by `tilt`",
    _PARAMETERS,
    _complete,
    _mesh,
    _loads,
    PENNY_PARTS,
    options=_options,
)
