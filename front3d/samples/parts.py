"""Parts of a solved solid that end at its symmetry planes, as an analyst would model them.

A part carries the whole's displacements: with loads that are symmetric about the planes it is cut
at, the problem on the part with its planes held is the same problem.
"""

from collections.abc import Mapping, Sequence
from types import MappingProxyType

import numpy as np

from front3d.arrays import BoolArray, FloatArray
from front3d.errors import CaseError
from front3d.samples.mirror import Unfolded, load_classes
from front3d.solid import CellBlock, Solid

WHOLE = "full"

Parts = Mapping[str, tuple[int, ...]]
"""Name of a part -> axes of the planes through the origin that it is cut at."""

SURFACE_PARTS: Parts = MappingProxyType({"half": (0,), "upper": (2,), "quarter": (0, 2)})
INNER_PARTS: Parts = MappingProxyType({**SURFACE_PARTS, "eighth": (0, 1, 2)})
PENNY_PARTS: Parts = MappingProxyType(
    {"half": (1,), "upper": (2,), "quarter": (1, 2), "eighth": (0, 1, 2)}
)
"""A tilt towards x keeps y = 0 a plane of symmetry."""
CORNER_PARTS: Parts = MappingProxyType({"upper": (2,)})

CRACK_AXIS = 2
"""Samples have their crack in z = 0: a part cut there has one crack face only."""

_NAMES = "xyz"


def part_axes(sample: str, parts: Parts, part: str) -> tuple[int, ...]:
    """Axes of the planes that `part` of a sample is cut at; CaseError if there is no such part."""
    if part == WHOLE:
        return ()
    try:
        return parts[part]
    except KeyError:
        raise CaseError(
            f"sample {sample}, part: found {part!r}, expected one of {', '.join((WHOLE, *parts))}"
        ) from None


def check_symmetry(
    sample: str, model: Unfolded, axes: Sequence[int], forces: FloatArray, names: Sequence[str]
) -> None:
    """CaseError if a load is not symmetric about a plane that a part is cut at.

    forces : (n_loads, n_points, 3) nodal forces on the whole; names : (n_loads,)
    """
    for axis in set(axes) - {plane.axis for plane in model.planes}:
        raise CaseError(
            f"sample {sample}: found a part cut at {_NAMES[axis]} = 0, but with these parameters "
            "the solid is not symmetric about that plane; choose another part"
        )
    for group in load_classes(model, forces) if axes else ():
        for plane, sign in zip(model.planes, group.parity, strict=True):
            if sign == 1 or plane.axis not in axes:
                continue
            name = names[int(np.argmax(np.abs(group.loads).max(axis=(1, 2))))]
            raise CaseError(
                f"sample {sample}: found load {name!r}, which is not symmetric about the plane "
                f"{_NAMES[plane.axis]} = 0, expected symmetric loads on a part that is cut there; "
                "choose another part, or leave that load out"
            )


def take_part(
    model: Unfolded, axes: Sequence[int], displacement: FloatArray
) -> tuple[Solid, FloatArray]:
    """The solid on the positive sides of the planes, and its share of (n_loads, n_points, 3)."""
    solid = model.solid
    if not axes:
        return solid, displacement
    inside: BoolArray = np.all(model.signs[:, list(axes)] > 0.0, axis=1)
    number = np.cumsum(inside) - 1
    blocks = tuple(
        CellBlock(b.kind, number[b.nodes[inside[b.nodes].all(axis=1)]]) for b in solid.blocks
    )
    return Solid(solid.points[inside], blocks, source=solid.source), displacement[:, inside]
