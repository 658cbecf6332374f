"""A semi-elliptical crack at the bore of a thick-walled cylinder, in an axial plane."""

from collections.abc import Mapping

import numpy as np

from front3d.arrays import BoolArray, FloatArray
from front3d.errors import CaseError
from front3d.samples.bent import bent, heights
from front3d.samples.cells import cracked_solid
from front3d.samples.ellipse import smallest_radius
from front3d.samples.fineness import density
from front3d.samples.mirror import Unfolded
from front3d.samples.octant import octant
from front3d.samples.sample import (
    Load,
    Parameter,
    SampleSpec,
    Values,
    check_ratio,
    common_parameters,
    required,
)
from front3d.samples.sheet import Quarter

_NAME = "cylinder-crack"
_PARAMETERS = {
    "depth": Parameter("depth of the crack, a", 6.0, 1e-9, 1e9, "length"),
    "half_length": Parameter("half of its length along the bore, c", 10.0, 1e-9, 1e9, "length"),
    "bore": Parameter("radius of the bore", 20.0, 1e-9, 1e10, "length"),
    "thickness": Parameter("thickness of the wall, t", 15.0, 1e-9, 1e10, "length"),
    "half_height": Parameter(
        "half of the cylinder's length (default 4 times the larger of c and the bore)",
        None, 1e-9, 1e10, "length",
    ),
    "bore_pressure": Parameter("pressure in the bore", 100.0, -1e12, 1e12, "stress"),
    "face_pressure": Parameter("pressure on the crack faces", 0.0, -1e12, 1e12, "stress"),
    **common_parameters(),
}  # fmt: skip


def _complete(given: Mapping[str, float | None]) -> Values:
    values = {k: v for k, v in given.items() if v is not None}
    a, c = required(given, "depth"), required(given, "half_length")
    bore, t = required(given, "bore"), required(given, "thickness")
    values.setdefault("half_height", 4.0 * max(c, bore))
    check_ratio(_NAME, "depth / half_length", a / c, 0.2, 2.0)
    check_ratio(_NAME, "depth / thickness", a / t, 0.1, 0.8)
    check_ratio(_NAME, "bore / thickness", bore / t, 0.75, 25.0)
    check_ratio(_NAME, "half_height / half_length", values["half_height"] / c, 2.0, 500.0)
    return values


def _mesh(values: Values, cells: str) -> Unfolded:
    a, c, t = values["depth"], values["half_length"], values["thickness"]
    bore = values["bore"]
    radius = min(0.25 * a, 0.25 * c, 0.5 * smallest_radius(a, c), 0.4 * (t - a))
    shape = Quarter(a, c, radius, width=values["half_height"], depth=t)
    fine = density(cells, values["refine"], max(a, c) / min(a, c), closed=False)
    plate = octant(shape, fine, *heights(bore, t))
    return cracked_solid(bent(plate, bore, t), (0,), cells, _NAME)


def _loads(values: Values) -> tuple[Load, ...]:
    bore, inside, on_crack = values["bore"], values["bore_pressure"], values["face_pressure"]
    if inside == 0.0 and on_crack == 0.0:
        raise CaseError(
            f"sample {_NAME}: found no load, expected bore_pressure or face_pressure other than "
            "zero"
        )

    def wetted(faces: FloatArray) -> BoolArray:
        gap = np.abs(np.hypot(faces[:, :, 1] + bore, faces[:, :, 2]) - bore).max(axis=1)
        crack = np.abs(faces[:, :, 2]).max(axis=1) == 0.0
        out: BoolArray = crack | (gap < 1e-6 * bore)
        return out

    def pressure(points: FloatArray, normals: FloatArray) -> FloatArray:
        return -np.where(points[:, 2:] == 0.0, on_crack, inside) * normals

    return (Load("pressure", pressure, wetted),)


def _options(values: Values) -> Mapping[str, object]:
    pressures = {
        "face_pressure": values["face_pressure"],
        "surface_pressure": values["bore_pressure"],
    }
    return {name: pressure for name, pressure in pressures.items() if pressure}


CYLINDER_CRACK = SampleSpec(
    _NAME,
    "semi-elliptical crack at the bore of a thick-walled cylinder, axial plane, pressure",
    _PARAMETERS,
    _complete,
    _mesh,
    _loads,
    options=_options,
)
