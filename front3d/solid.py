"""The loaded model: points, cells, steps and material, with their shapes checked in one place."""

from collections.abc import Mapping
from dataclasses import dataclass, field
from math import isfinite

import numpy as np

from front3d.arrays import FloatArray, IntArray, frozen_floats, frozen_ints
from front3d.elements import ElementType, element_type
from front3d.errors import CaseError, MeshError


@dataclass(frozen=True, slots=True, eq=False)
class CellBlock:
    """Cells of one element type.

    Attributes
    ----------
    kind : name of the element type, a key of `front3d.elements.ELEMENTS`
    nodes : (n_cells, n_nodes) rows into `Solid.points`, in VTK order
    """

    kind: str
    nodes: IntArray

    def __post_init__(self) -> None:
        object.__setattr__(self, "nodes", frozen_ints(self.nodes))
        expected = len(self.element.nodes)
        if self.nodes.ndim != 2 or self.nodes.shape[1] != expected:
            raise MeshError(
                f"cell block {self.kind}: found connectivity of shape {self.nodes.shape}, "
                f"expected (cells, {expected})"
            )

    @property
    def element(self) -> ElementType:
        return element_type(self.kind)

    def __len__(self) -> int:
        return len(self.nodes)


@dataclass(frozen=True, slots=True, eq=False)
class Step:
    """One load case or time of a result: a name, a time and (n_points, 3) displacements.

    Further arrays that loads refer to: `point_arrays`, (n_points, components), and `cell_arrays`,
    (n_cells, components) for each block, by name.
    """

    name: str
    displacement: FloatArray
    time: float = 0.0
    point_arrays: Mapping[str, FloatArray] = field(default_factory=dict)
    cell_arrays: Mapping[str, tuple[FloatArray, ...]] = field(default_factory=dict)

    def __post_init__(self) -> None:
        object.__setattr__(self, "displacement", frozen_floats(self.displacement))
        if self.displacement.ndim != 2 or self.displacement.shape[1] != 3:
            raise MeshError(
                f"step {self.name}: found displacements of shape {self.displacement.shape}, "
                "expected (points, 3)"
            )
        points = {name: _columns(values) for name, values in self.point_arrays.items()}
        object.__setattr__(self, "point_arrays", points)
        for name, values in points.items():
            if len(values) != len(self.displacement):
                raise MeshError(
                    f"step {self.name}: found {len(values)} values of {name!r} for "
                    f"{len(self.displacement)} points"
                )
        cells = {name: tuple(map(_columns, parts)) for name, parts in self.cell_arrays.items()}
        object.__setattr__(self, "cell_arrays", cells)


def _columns(values: FloatArray) -> FloatArray:
    """(n, components), read-only."""
    return frozen_floats(np.reshape(values, (len(values), -1)))


@dataclass(frozen=True, slots=True)
class Material:
    """Isotropic linear elasticity: Young's modulus (stress) and Poisson's ratio."""

    young: float
    poisson: float

    def __post_init__(self) -> None:
        if not (isfinite(self.young) and self.young > 0):
            raise CaseError(
                f"Young's modulus: found {self.young:g}, expected a positive number in the "
                "stress unit of the model"
            )
        if not (isfinite(self.poisson) and -1.0 < self.poisson < 0.5):
            raise CaseError(
                f"Poisson's ratio: found {self.poisson:g}, expected a number above -1 and below "
                "0.5 (for a nearly incompressible material give 0.499)"
            )

    @property
    def shear_modulus(self) -> float:
        return self.young / (2.0 * (1.0 + self.poisson))

    @property
    def lame(self) -> float:
        """Lame's first constant."""
        return self.young * self.poisson / ((1.0 + self.poisson) * (1.0 - 2.0 * self.poisson))

    @property
    def plane_strain_modulus(self) -> float:
        """E' = E / (1 - nu^2)."""
        return self.young / (1.0 - self.poisson**2)

    def at(self, station: int) -> "Material":
        """The constants at a station, which are the same at all."""
        return self


@dataclass(frozen=True, slots=True, eq=False)
class LocalMaterial:
    """Young's modulus and Poisson's ratio, (n,), at each station of a front."""

    young: FloatArray
    poisson: FloatArray

    @property
    def shear_modulus(self) -> FloatArray:
        return self.young / (2.0 * (1.0 + self.poisson))

    @property
    def plane_strain_modulus(self) -> FloatArray:
        return self.young / (1.0 - self.poisson**2)

    def at(self, station: int) -> Material:
        return Material(float(self.young[station]), float(self.poisson[station]))


Constants = Material | LocalMaterial
"""The constants along a front: the same everywhere, or its own at each station."""


@dataclass(frozen=True, slots=True, eq=False)
class Solid:
    """A finite-element result: what every later stage works on.

    Attributes
    ----------
    points : (n_points, 3) coordinates
    blocks : cell blocks; surface and line cells of the file are not kept
    steps : the displacements of each load case or time
    source : file name or a description, for messages and for the record
    point_spacing : distance between neighbouring representable coordinates in the file (0 if
        double precision): coincidence cannot be judged more finely than this
    groups : numbers of the named groups in the cell array PHYSICAL_GROUP
    """

    points: FloatArray
    blocks: tuple[CellBlock, ...]
    steps: tuple[Step, ...] = ()
    source: str = "model"
    point_spacing: float = 0.0
    notes: tuple[str, ...] = field(default=())
    groups: Mapping[str, int] = field(default_factory=dict)

    def __post_init__(self) -> None:
        object.__setattr__(self, "points", frozen_floats(self.points))
        object.__setattr__(self, "blocks", tuple(self.blocks))
        object.__setattr__(self, "steps", tuple(self.steps))
        if self.points.ndim != 2 or self.points.shape[1] != 3:
            raise MeshError(
                f"{self.source}: found points of shape {self.points.shape}, expected (points, 3)"
            )
        n_points = len(self.points)
        for block in self.blocks:
            outside = np.flatnonzero((block.nodes < 0) | (block.nodes >= n_points))
            if len(outside):
                cell, place = divmod(int(outside[0]), block.nodes.shape[1])
                raise MeshError(
                    f"{self.source}: {block.kind} cell {cell} names node "
                    f"{block.nodes[cell, place]}, but the file has {n_points} points "
                    f"(numbered from 0)"
                )
        for step in self.steps:
            if len(step.displacement) != n_points:
                raise MeshError(
                    f"{self.source}: step {step.name} has {len(step.displacement)} displacements "
                    f"for {n_points} points"
                )
            for name, parts in step.cell_arrays.items():
                if [len(part) for part in parts] != [len(block) for block in self.blocks]:
                    raise MeshError(
                        f"{self.source}: step {step.name} does not have one value of {name!r} for "
                        "every cell of every block"
                    )
        self._require_finite()

    def _require_finite(self) -> None:
        """Nodes of no cell may hold anything: nobody reads them."""
        values = {"": self.points} | {f"step {s.name}: ": s.displacement for s in self.steps}
        bad = {where: ~np.isfinite(v).all(axis=1) for where, v in values.items()}
        if not any(rows.any() for rows in bad.values()):
            return
        used = np.zeros(len(self.points), dtype=bool)
        for block in self.blocks:
            used[block.nodes.ravel()] = True
        for where, rows in bad.items():
            broken = np.flatnonzero(rows & used)
            if len(broken):
                what = "displacement" if where else "coordinates"
                raise MeshError(
                    f"{self.source}: {where}node {broken[0]} has the {what} "
                    f"{values[where][broken[0]]}, expected finite numbers ({len(broken)} such "
                    "nodes; nodes numbered from 0)"
                )

    @property
    def n_cells(self) -> int:
        return sum(len(block) for block in self.blocks)
