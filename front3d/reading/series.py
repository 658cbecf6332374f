"""Several times of one mesh, collected from grids that come one time after another."""

from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from front3d.errors import ReadError
from front3d.reading.fields import DisplacementFinder
from front3d.reading.raw import RawModel
from front3d.reading.vtk_grid import cell_arrays, point_arrays, to_model


class Series:
    """The mesh of the first time; later times must have the same one."""

    def __init__(self, path: Path, finder: DisplacementFinder) -> None:
        self.path, self.finder = path, finder
        self.model: RawModel | None = None

    def add(self, grids: list[Any], time: float | None) -> None:
        """Take the displacements of one time; `grids` are the pieces of the solid."""
        model = to_model(grids, self.path)
        if self.model is None:
            self.model = model
        elif not _same_mesh(self.model, model):
            raise ReadError(
                f"{self.path}: the mesh at time {time} differs from the first one, expected the "
                "same undeformed mesh at every time; export without remeshing or deformed points"
            )
        self.finder.offer(point_arrays(grids), time, cell_arrays(grids))

    def result(self) -> RawModel:
        if self.model is None:
            raise ReadError(f"{self.path}: found no times in it, expected at least one")
        return self.model


def _same_mesh(a: RawModel, b: RawModel) -> bool:
    def same(one: NDArray[Any], other: NDArray[Any]) -> bool:
        return one.shape == other.shape and bool((one == other).all())

    return (
        a.points.shape == b.points.shape
        and np.array_equal(a.points, b.points, equal_nan=True)
        and len(a.blocks) == len(b.blocks)
        and all(
            p.kind == q.kind and same(p.nodes, q.nodes)
            for p, q in zip(a.blocks, b.blocks, strict=True)
        )
    )
