"""What was found of cracks and fronts, as plain data for a reader."""

from typing import Any

import numpy as np

from front3d.crack import CrackModel, find_cracks
from front3d.crack.coincidence import Coincidence
from front3d.crack.front import Front
from front3d.crack.patches import Patch
from front3d.options import Options
from front3d.solid import Solid


def describe(solid: Solid, options: Options | None = None) -> dict[str, Any]:
    """Patches and fronts of a solid, as numbers and words.

    Returns
    -------
    {"patches": [{"faces", "half", "opens", "opening", "fronts": [...]}], "unopened": [...]}, each
    front with its length, number of edges, closed, ends, cells around it, and edge lengths.
    """
    model = find_cracks(solid, options)
    return {
        "patches": [
            _patch(patch) | {"fronts": [_front(solid, front, model) for front in fronts]}
            for patch, fronts in zip(model.patches, model.fronts, strict=True)
        ],
        "unopened": [_patch(patch) for patch in model.unopened],
    }


def _patch(patch: Patch) -> dict[str, Any]:
    return {
        "faces": len(patch.upper),
        "half": patch.half,
        "opens": patch.opens,
        "opening": patch.opening,
    }


def _front(solid: Solid, front: Front, model: CrackModel) -> dict[str, Any]:
    lengths = np.linalg.norm(
        solid.points[front.edges[:, 1]] - solid.points[front.edges[:, 0]], axis=1
    )
    first, middle = front.curve.frames(np.array([0.0, front.length / 2]))[0]
    return {
        "closed": front.closed,
        "ends": list(front.ends),
        "length": front.length,
        "edges": len(front.edges),
        "edge_length": {
            "shortest": float(lengths.min()),
            "median": float(np.median(lengths)),
            "longest": float(lengths.max()),
        },
        "cells_at_front": _cells_at_front(solid, front, model.same),
        "start": first.tolist(),
        "middle": middle.tolist(),
    }


def _cells_at_front(solid: Solid, front: Front, same: Coincidence) -> dict[str, int]:
    """Number of cells of each type that touch the front."""
    on_front = np.isin(same.entity, same.entity[front.nodes])
    counts: dict[str, int] = {}
    for block in solid.blocks:
        touching = int(on_front[block.nodes].any(axis=1).sum())
        if touching:
            counts[block.kind] = counts.get(block.kind, 0) + touching
    return counts
