"""The compact specimen of ASTM E399, pulled by pins in its two holes.

Proportions by the standard, from memory: length 1.25 W, height 1.2 W, holes of diameter 0.25 W at
0.275 W from the crack plane; the crack a and the width W are measured from the load line.  The
slot is left out: its faces are the crack's.
"""

from collections.abc import Mapping

import numpy as np

from front3d.arrays import BoolArray, FloatArray
from front3d.samples.cells import cracked_solid
from front3d.samples.holed_grid import with_hole
from front3d.samples.mirror import Unfolded
from front3d.samples.plates import free_sides_parameter, growth_for, hold, layers, tube_for
from front3d.samples.sample import (
    Load,
    Parameter,
    SampleSpec,
    Values,
    acting,
    check_ratio,
    common_parameters,
    required,
)
from front3d.samples.section import Grid, drawn, even_lines, graded_lines, join_lines, tip_pieces

_NAME = "compact-specimen"
_BEHIND, _HEIGHT, _HOLE, _OFFSET = 0.25, 0.6, 0.125, 0.275
_WINDOW = 0.18
"""Half of the square around a hole that is meshed in rings, over W."""
_PARAMETERS = {
    "width": Parameter("width from the load line to the back, W", 50.0, 1e-9, 1e10, "length"),
    "crack": Parameter(
        "length of the crack from the load line, a (default W / 2)", None, 1e-9, 1e10, "length"
    ),
    "thickness": Parameter("thickness, B (default W / 2)", None, 1e-9, 1e10, "length"),
    "free_sides": free_sides_parameter(1),
    "force": Parameter("force of the pins, P", 10e3, -1e15, 1e15, "force"),
    **common_parameters(),
}


def _complete(given: Mapping[str, float | None]) -> Values:
    values = {k: v for k, v in given.items() if v is not None}
    width = required(given, "width")
    values.setdefault("crack", width / 2.0)
    values.setdefault("thickness", width / 2.0)
    check_ratio(_NAME, "crack / width", values["crack"] / width, 0.3, 0.75)
    check_ratio(_NAME, "thickness / width", values["thickness"] / width, 0.02, 4.0)
    return values


def _mesh(values: Values, cells: str) -> Unfolded:
    width, a, refine = values["width"], values["crack"], values["refine"]
    radius = min(0.07 * width, 0.3 * (width - a))
    tube, growth = tube_for(cells, refine), growth_for(refine)
    around, rings = 4 + 2 * int(refine), 2 + int(refine)

    def lines(length: float) -> FloatArray:
        return graded_lines(length, tube, radius, growth)

    window = even_lines(2.0 * _WINDOW * width, around)
    behind = even_lines((_BEHIND - _WINDOW) * width, 1)
    over = even_lines((_HEIGHT - _OFFSET - _WINDOW) * width, 1 + int(refine))
    to_window = lines(a - radius - _WINDOW * width)
    up_to_window = lines((_OFFSET - _WINDOW) * width - radius)
    grid = Grid(
        a,
        radius,
        left=join_lines(to_window, window, behind),
        right=lines(width - a - radius),
        above=join_lines(up_to_window, window, over),
    )
    columns = slice(len(behind) - 1, len(behind) - 1 + len(window))
    rows = slice(len(up_to_window) - 1, len(up_to_window) - 1 + len(window))
    pieces = tip_pieces(grid, tube) + with_hole(
        grid.columns(tube),
        grid.rows(),
        (columns, rows),
        (0.0, _OFFSET * width),
        _HOLE * width,
        rings,
    )
    y = layers(values["thickness"], bool(values["free_sides"]), refine, min(a, width - a))
    return cracked_solid(drawn(pieces, y), (1,), cells, _NAME)


def _loads(values: Values) -> tuple[Load, ...]:
    width = values["width"]
    centre, radius = _OFFSET * width, _HOLE * width
    # A cosine over the half of the hole that the pin pulls: its resultant is force / thickness.
    highest = 2.0 * values["force"] / (np.pi * radius * values["thickness"])

    def in_hole(faces: FloatArray) -> BoolArray:
        gap = np.hypot(faces[:, :, 0], np.abs(faces[:, :, 2]) - centre) - radius
        out: BoolArray = np.abs(gap).max(axis=1) < 0.02 * radius
        return out

    def pin(points: FloatArray, normals: FloatArray) -> FloatArray:
        cosine = (np.abs(points[:, 2:]) - centre) / radius
        return -highest * np.maximum(cosine, 0.0) * normals

    return acting(_NAME, {"force": (values["force"], Load("pin force", pin, in_hole))})


def _held(values: Values, points: FloatArray) -> BoolArray:
    return hold(points, {} if values["free_sides"] else {1: values["thickness"] / 2.0})


COMPACT_SPECIMEN = SampleSpec(
    _NAME,
    "compact specimen of ASTM E399, pulled by pins",
    _PARAMETERS,
    _complete,
    _mesh,
    _loads,
    held=_held,
)
