"""Reading a result file: any supported format in, one normalised `Solid` out.

Libraries for single formats are imported only when such a file is read, to keep start-up short.
"""

import os
from collections.abc import Sequence
from pathlib import Path

import numpy as np

from front3d.errors import Front3DError, ReadError
from front3d.reading.fields import DisplacementFinder, Kept
from front3d.reading.files import FORMATS, identify
from front3d.reading.normalise import normalise_nodes
from front3d.reading.raw import RawModel
from front3d.solid import CellBlock, Solid, Step

__all__ = ["FORMATS", "load"]


def load(
    path: str | os.PathLike[str],
    *,
    displacement: str | None = None,
    arrays: Sequence[str] = (),
    need_displacement: bool = True,
) -> Solid:
    """Read a finite-element result.

    Parameters
    ----------
    path : a file of one of the formats in `FORMATS`; the suffix names the format
    displacement : name of the point array that holds the displacement, or three names of scalars
        separated by commas; None finds it by usual names
    arrays : names of further arrays, by point or by cell, to keep in the steps
    need_displacement : with False a file without displacements gives a solid without steps

    Returns
    -------
    Solid : one block per element type, nodes in VTK order with a positive Jacobian; one step per
        time or load case; `notes` says what was mended or ignored

    Raises
    ------
    ReadError : the file cannot be read, or holds no solid cells or no usable displacement
    """
    path = Path(path)
    form = identify(path)
    finder = DisplacementFinder(displacement, tuple(arrays))
    try:
        raw = _read(path, form.reader, finder)
        # Absurd coordinates overflow in the checks and are refused by them.
        with np.errstate(over="ignore", invalid="ignore"):
            return _solid(path, raw, finder, need_displacement)
    except Front3DError as error:
        said = str(error)
        raise ReadError(said if said.startswith(str(path)) else f"{path}: {said}") from error


def _read(path: Path, reader: str, finder: DisplacementFinder) -> RawModel:
    if reader == "msh":
        from front3d.reading.msh import read_msh

        return read_msh(path, finder)
    if reader in ("med", "xdmf"):
        from front3d.reading import meshio_family

        return meshio_family.READERS[reader](path, finder)
    from front3d.reading import vtk_family

    return vtk_family.READERS[reader](path, finder)


def _solid(path: Path, raw: RawModel, finder: DisplacementFinder, need: bool) -> Solid:
    raw.check()
    points = np.asarray(raw.points, dtype=np.float64)
    used = np.zeros(len(points), dtype=bool)
    for block in raw.blocks:
        used[block.nodes.ravel()] = True
    notes = list(raw.notes) + raw.ignored_cells()
    points = _clean_points(points, used, notes)
    spacing = raw.point_spacing(used)
    blocks = []
    for block in raw.blocks:
        nodes, mended = normalise_nodes(points, block, spacing)
        blocks.append(CellBlock(block.kind, nodes))
        notes += mended
    named = finder.steps(need)
    steps = tuple(
        Step(s.name, _clean_displacement(s, used), s.time, kept.points, _by_block(kept, raw))
        for s, kept in zip(named, finder.kept(), strict=False)
    )
    notes += finder.notes
    return Solid(points, tuple(blocks), steps, path.name, spacing, tuple(notes), raw.groups)


def _by_block(kept: Kept, raw: RawModel) -> dict[str, tuple[np.ndarray, ...]]:
    """Cell arrays, one array per block; those without a value for every cell are left out."""
    largest = max(int(block.numbers.max(initial=-1)) for block in raw.blocks)
    return {
        name: tuple(values[block.numbers] for block in raw.blocks)
        for name, values in kept.cells.items()
        if len(values) > largest
    }


def _clean_points(points: np.ndarray, used: np.ndarray, notes: list[str]) -> np.ndarray:
    bad = ~np.isfinite(points).all(axis=1)
    broken = np.flatnonzero(bad & used)
    if len(broken):
        node = int(broken[0])
        raise ReadError(
            f"node {node} has the coordinates {points[node]}, expected finite numbers "
            f"({len(broken)} such nodes; nodes numbered from 0); export the mesh again"
        )
    if bad.any():
        # No cell refers to them; a place among the used nodes keeps later bounding boxes right.
        points = points.copy()
        points[bad] = points[used].mean(axis=0)
        notes.append(f"{bad.sum()} unused nodes without finite coordinates moved to the centre")
    unused = len(used) - int(used.sum())
    if unused:
        notes.append(f"{unused} nodes belong to no solid cell and play no part")
    return points


def _clean_displacement(step: Step, used: np.ndarray) -> np.ndarray:
    values = step.displacement
    if len(values) != len(used):
        raise ReadError(
            f"step {step.name}: found {len(values)} displacements for {len(used)} points, "
            "expected one per point; export them on the nodes"
        )
    bad = ~np.isfinite(values).all(axis=1)
    broken = np.flatnonzero(bad & used)
    if len(broken):
        node = int(broken[0])
        raise ReadError(
            f"step {step.name}: node {node} has the displacement {values[node]}, expected finite "
            f"numbers ({len(broken)} such nodes; nodes numbered from 0); was the result written "
            "for every node of the solid?"
        )
    if bad.any():
        values = values.copy()
        values[bad] = 0.0
    return values
