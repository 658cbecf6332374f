"""What was found of cracks and fronts, as plain data for a reader."""

from collections.abc import Mapping

import numpy as np

from front3d.crack.coincidence import Coincidence
from front3d.crack.front import Front, on_front_mask
from front3d.crack.model import find_cracks
from front3d.crack.patches import Patch
from front3d.options import Options
from front3d.solid import Solid

Row = Mapping[str, object]


def describe(solid: Solid, options: Options | None = None) -> dict[str, list[Row]]:
    """Crack surfaces, fronts, and coincident faces left alone, a row of numbers and words each."""
    model = find_cracks(solid, options)
    fronts: list[Row] = [
        {"crack": number, **_front(solid, front, model.same)}
        for number, group in enumerate(model.fronts)
        for front in group
    ]
    found: dict[str, list[Row]] = {
        "cracks": [_patch(patch) for patch in model.patches],
        "fronts": fronts,
        "coincident_faces_left_alone": [_patch(patch) for patch in model.unopened],
    }
    if said := (*model.warnings, *model.notes):
        found["notes"] = [{"note": note} for note in said]
    return found


def _patch(patch: Patch) -> Row:
    return {
        "faces": len(patch.upper),
        "modelled": "upper side only" if patch.half else "both sides",
        "largest opening": patch.opening,
    }


def _front(solid: Solid, front: Front, same: Coincidence) -> Row:
    lengths = np.linalg.norm(
        solid.points[front.edges[:, 1]] - solid.points[front.edges[:, 0]], axis=1
    )
    return {
        "shape": "closed" if front.closed else "open",
        "ends": " and ".join(front.ends) or "none",
        "length": front.length,
        "edges": len(front.edges),
        "shortest edge": float(lengths.min()),
        "median edge": float(np.median(lengths)),
        "longest edge": float(lengths.max()),
        "cells at front": _cells_at_front(solid, front, same),
    }


def _cells_at_front(solid: Solid, front: Front, same: Coincidence) -> str:
    """Number of cells of each type that touch the front, as text."""
    on_front = on_front_mask(front, same)
    counts: dict[str, int] = {}
    for block in solid.blocks:
        touching = int(on_front[block.nodes].any(axis=1).sum())
        if touching:
            counts[block.kind] = counts.get(block.kind, 0) + touching
    return ", ".join(f"{count} {kind}" for kind, count in counts.items())
