"""What plates with a straight through crack have in common: fineness, thickness, sides, ends."""

import numpy as np

from front3d.arrays import BoolArray, FloatArray
from front3d.samples import grading
from front3d.samples.fineness import density
from front3d.samples.sample import Load, Parameter, Values, acting, on_ends
from front3d.samples.section import Grid, graded_lines, through_thickness
from front3d.samples.tube import Tube

_GROWTH = {0: 2.2, 1: 1.7, 2: 1.4}
_LAYERS_HELD = {0: 1, 1: 2, 2: 3}
_LAYERS_FREE = {0: 4, 1: 6, 2: 8}
_THINNER = 1.5
"""Ratio of neighbouring layers towards a free face."""


def free_sides_parameter(default: float) -> Parameter:
    """Whether the side faces are free."""
    return Parameter(
        "side faces: 0 symmetry planes (plane strain), 1 free", default, 0, 1, whole=True
    )


def tube_for(cells: str, refine: float) -> Tube:
    """The cross-section around the front."""
    return density(cells, refine, 1.0, closed=True).tube


def growth_for(refine: float) -> float:
    """Ratio of neighbouring cells away from the front."""
    return _GROWTH[int(refine)]


def plate_grid(
    tip: float, radius: float, x: tuple[float, float], height: float, tube: Tube, growth: float
) -> Grid:
    """Lines graded from the tube to the edges x of the plate and to its height."""

    def lines(length: float) -> FloatArray:
        return graded_lines(length, tube, radius, growth)

    left, right = tip - radius - x[0], x[1] - tip - radius
    return Grid(tip, radius, lines(left), lines(right), lines(height - radius))


def layers(thickness: float, free: bool, refine: float, size: float) -> FloatArray:
    """Node positions over half the thickness, from mid-thickness y = 0.

    Between symmetry planes nothing changes along y, and a few equal layers do.  Towards free
    faces layers shrink; the last is at most a tenth of `size`, the crack's or the ligament's,
    because K falls within a fraction of it.
    """
    half, level = thickness / 2.0, int(refine)
    if not free:
        return through_thickness(half, _LAYERS_HELD[level], 1.0)
    number = grading.count(half, 0.1 * size * 2.0 ** (1 - level), _THINNER)
    return through_thickness(half, max(_LAYERS_FREE[level], number), _THINNER)


def hold(points: FloatArray, half_extents: dict[int, float]) -> BoolArray:
    """(n, 3) the normal component on the planes x_axis = +- half extent."""
    out = np.zeros(points.shape, dtype=bool)
    for axis, half in half_extents.items():
        out[:, axis] = np.abs(np.abs(points[:, axis]) - half) < 1e-9 * half
    return out


def end_tension(sample: str, values: Values) -> tuple[Load, ...]:
    """The tension of `values` on the ends of the plate."""

    def tension(points: FloatArray, normals: FloatArray) -> FloatArray:
        return values["tension"] * normals

    load = Load("tension", tension, on_ends(values["half_height"]))
    return acting(sample, {"tension": (values["tension"], load)})
