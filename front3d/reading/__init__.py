"""Reading a result file: any supported format in, one normalised `Solid` out.

Libraries for single formats are imported only when such a file is read, to keep start-up short.
"""

import os
from collections.abc import Sequence
from dataclasses import replace
from pathlib import Path

import numpy as np

from front3d.errors import Front3DError, ReadError
from front3d.reading.fields import Arrays, DisplacementFinder
from front3d.reading.files import FORMATS, identify
from front3d.reading.nodal_csv import read_nodal_csv
from front3d.reading.normalise import normalise_nodes
from front3d.reading.pieces import join_pieces
from front3d.reading.raw import RawModel
from front3d.solid import CellBlock, Solid, Step

__all__ = ["FORMATS", "load"]

# Displacement in parts of the solid's size.  A unit load on a soft material may give much, so this
# only keeps away what overflows.
_ABSURD = 1e30


def load(
    path: str | os.PathLike[str],
    *,
    displacement: str | Sequence[str] | None = None,
    arrays: Sequence[str] = (),
    displacement_file: str | os.PathLike[str] | None = None,
    need_displacement: bool = True,
) -> Solid:
    """Read a finite-element result.

    Parameters
    ----------
    path : a file of one of the formats in `FORMATS`; the suffix names the format
    displacement : name of the point array that holds the displacement, or three names of scalars
        separated by commas; several such names for several load cases, each a step of that name;
        None finds it by usual names
    arrays : names of further arrays, by point or by cell, to keep in the steps
    displacement_file : table of nodal displacements (see front3d.reading.nodal_csv) to take in
        place of those in the file
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
    if displacement is not None and not isinstance(displacement, str):
        displacement = tuple(displacement) if len(displacement) > 1 else displacement[0]
    if displacement_file is not None and isinstance(displacement, tuple):
        raise ReadError(
            f"{displacement_file}: found {len(displacement)} names of displacements for a table, "
            "expected one; its column step tells load cases apart"
        )
    column = displacement if isinstance(displacement, str) else None
    finder = DisplacementFinder(displacement if displacement_file is None else None, tuple(arrays))
    try:
        raw = _read(path, form.reader, finder)
        # Absurd coordinates overflow in the checks and are refused by them.
        with np.errstate(over="ignore", invalid="ignore"):
            raw.check()
            if displacement_file is None:
                named = finder.steps(need_displacement)
            else:
                named = read_nodal_csv(Path(displacement_file), raw, column)
                finder.notes = []
            kept = finder.kept(len(named))
            named = [
                replace(step, point_arrays=of_step.points)
                for step, of_step in zip(named, kept, strict=True)
            ]
            return _solid(path, raw, named, [k.cells for k in kept], finder.notes)
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


def _solid(
    path: Path, raw: RawModel, named: list[Step], cells: list[Arrays], remarks: list[str]
) -> Solid:
    for step in named:
        _check_length(step, len(raw.points))
    raw, named = join_pieces(raw, named)
    raw.check_cells()
    points = np.asarray(raw.points, dtype=np.float64)
    used = raw.used()
    notes = list(raw.notes) + raw.ignored_cells()
    points = _clean_points(points, used, notes)
    spacing = raw.point_spacing(used)
    blocks = []
    for block in raw.blocks:
        nodes, mended = normalise_nodes(points, block, spacing)
        blocks.append(CellBlock(block.kind, nodes))
        notes += mended
    extent = float(np.ptp(points[used], axis=0).max())
    steps = tuple(
        Step(
            s.name,
            _clean_displacement(s, used, extent),
            s.time,
            s.point_arrays,
            _by_block(arrays, raw),
        )
        for s, arrays in zip(named, cells, strict=True)
    )
    notes += remarks
    return Solid(points, tuple(blocks), steps, path.name, spacing, tuple(notes), raw.groups)


def _by_block(arrays: Arrays, raw: RawModel) -> dict[str, tuple[np.ndarray, ...]]:
    """Cell arrays, one array per block; those without a value for every cell are left out."""
    largest = max(int(block.numbers.max(initial=-1)) for block in raw.blocks)
    return {
        name: tuple(values[block.numbers] for block in raw.blocks)
        for name, values in arrays.items()
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


def _check_length(step: Step, n_points: int) -> None:
    if len(step.displacement) != n_points:
        raise ReadError(
            f"step {step.name}: found {len(step.displacement)} displacements for {n_points} "
            "points, expected one per point; export them on the nodes"
        )


def _clean_displacement(step: Step, used: np.ndarray, extent: float) -> np.ndarray:
    values = step.displacement
    bad = ~np.isfinite(values).all(axis=1)
    broken = np.flatnonzero(bad & used)
    if len(broken):
        node = int(broken[0])
        raise ReadError(
            f"step {step.name}: node {node} has the displacement {values[node]}, expected finite "
            f"numbers ({len(broken)} such nodes; nodes numbered from 0); was the result written "
            "for every node of the solid?"
        )
    largest = np.abs(values[used]).max(axis=1)
    if (largest > _ABSURD * extent).any():
        node = int(np.flatnonzero(used)[np.argmax(largest)])
        raise ReadError(
            f"step {step.name}: node {node} has the displacement {values[node]} in a solid of size "
            f"{extent:.3g} (nodes numbered from 0): no result has this; the file is damaged"
        )
    if bad.any():
        values = values.copy()
        values[bad] = 0.0
    return values
