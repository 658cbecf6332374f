"""Several result files of one mesh: the steps of all of them in one solid."""

import os
from collections.abc import Sequence
from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np

from front3d.errors import ReadError
from front3d.reading import load
from front3d.solid import Solid

_DIGITS = 4
"""Units of the coarser file's precision by which coordinates may differ."""


def load_all(paths: Sequence[str | os.PathLike[str]], **how: Any) -> Solid:
    """Read one or more files as `front3d.reading.load` does; `how` are its options.

    Returns
    -------
    Solid : mesh of the first file, and the steps of all of them.  Of several files a step is called
        after its file, followed by its own name where the file has more than one.

    Raises
    ------
    ReadError : as `load`; the mesh of a file differs from that of the first
    """
    files = [Path(path) for path in paths]
    if len(files) > 1 and how.get("displacement_file") is not None:
        raise ReadError(
            f"{how['displacement_file']}: found a table of displacements with {len(files)} files, "
            "expected one of a mesh; the table's column step tells load cases apart"
        )
    solids = [load(path, **how) for path in files]
    if len(solids) == 1:
        return solids[0]
    steps, notes = [], []
    for path, name, solid in zip(files, _names(files), solids, strict=True):
        reason = _difference(solids[0], solid)
        if reason:
            raise ReadError(
                f"{path}: {reason}; expected the mesh of {files[0]} in every file, with the same "
                "node numbers and undeformed; evaluate results of different meshes one by one"
            )
        for step in solid.steps:
            own = f"{name} {step.name}" if len(solid.steps) > 1 else name
            steps.append(replace(step, name=own))
        notes += [f"{path.name}: {note}" for note in solid.notes]
    source = ", ".join(path.name for path in files)
    return replace(solids[0], steps=tuple(steps), notes=tuple(notes), source=source)


def _names(files: list[Path]) -> list[str]:
    """Names of files without suffix; with as many folders before them as tell all apart."""
    whole = [path.resolve() for path in files]
    for path in whole:
        if whole.count(path) > 1:
            raise ReadError(f"{path}: named twice, expected different files")
    for depth in range(1, max(len(path.parts) for path in whole)):
        names = ["/".join((*path.parts[-depth:-1], path.stem)) for path in whole]
        if len(set(names)) == len(names):
            return names
    return [path.name if len({p.stem for p in whole}) < len(whole) else path.stem for path in whole]


def _difference(first: Solid, other: Solid) -> str:
    """In what the meshes differ; empty where they do not."""
    if len(first.points) != len(other.points):
        return f"found {len(other.points)} points, the first file has {len(first.points)}"
    tolerance = _DIGITS * max(first.point_spacing, other.point_spacing)
    apart = np.abs(first.points - other.points).max(axis=1)
    if (apart > tolerance).any():
        node = int(apart.argmax())
        place = ", ".join(f"{x:.6g}" for x in other.points[node])
        return f"found node {node} at ({place}), {apart[node]:.3g} from its place in the first file"
    mine, theirs = ({block.kind: block.nodes for block in s.blocks} for s in (first, other))
    if mine.keys() != theirs.keys():
        return f"found {', '.join(theirs)} cells, the first file has {', '.join(mine)}"
    for kind, nodes in mine.items():
        if not np.array_equal(nodes, theirs[kind]):
            return f"found {kind} cells with other nodes than in the first file"
    return ""
