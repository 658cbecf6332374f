"""What every method is given: one front of a cracked solid, with material, options and steps."""

from dataclasses import dataclass, field
from typing import TYPE_CHECKING

import numpy as np

from front3d.arrays import BoolArray, FloatArray, frozen_floats
from front3d.crack import CrackModel, Front, Patch
from front3d.crack.cells import FrontCells, cells_of_front
from front3d.crack.front import on_front_mask
from front3d.loads import Loads
from front3d.options import Options
from front3d.solid import Material, Solid, Step

if TYPE_CHECKING:
    from front3d.methods.tube import Tube


@dataclass(frozen=True, slots=True, eq=False)
class FrontContext:
    """One front and all that is known about it.

    Attributes
    ----------
    solid, model : the result, and the cracks found in it
    patch, front : the crack surface and the front on it
    material, options : elastic constants at the front, and the user's choices
    displacement : (n_steps, n_points, 3) of the steps to compute
    rows : (n_results, n_steps) factors by which results combine steps; None: a result per step
    steps : the steps to compute, whose arrays loads refer to; by default all of the solid
    loads : those of the options, with what belongs to the front's own material; by default they
    foreign : per block, the cells of another material; by default there are none
    cells : what surrounds the front
    on_front : (n_points,) which nodes stand for a node of the front
    tubes : those built so far, by their reach; `build_tube` fills it
    """

    solid: Solid
    model: CrackModel
    patch: Patch
    front: Front
    material: Material
    options: Options
    displacement: FloatArray
    rows: FloatArray | None = None
    steps: tuple[Step, ...] = ()
    loads: Loads = field(default_factory=Loads)
    foreign: tuple[BoolArray, ...] = ()
    cells: FrontCells = field(init=False)
    on_front: BoolArray = field(init=False)
    tubes: "dict[float, Tube]" = field(init=False, default_factory=dict)

    def __post_init__(self) -> None:
        same, near = self.model.same, self.model.near
        object.__setattr__(self, "cells", cells_of_front(self.solid, self.front, same, near))
        object.__setattr__(self, "on_front", on_front_mask(self.front, same, near.nodes))
        if not self.steps:
            object.__setattr__(self, "steps", self.solid.steps)
        if self.loads == Loads():
            object.__setattr__(self, "loads", self.options.loads)
        object.__setattr__(self, "displacement", frozen_floats(self.displacement))

    def combined(self, values: FloatArray) -> FloatArray:
        """(n_results, ...) combinations of a quantity, (n_steps, ...), that is linear in the loads.

        Everything linear is computed once per step and combined here, loads and all.
        """
        if self.rows is None:
            return values
        total: FloatArray = np.tensordot(self.rows, values, axes=1)
        return total

    def combined_squares(self, values: FloatArray) -> FloatArray:
        """(n_results, ...) of a quantity, (n_steps, ...), that goes with the square of the loads:
        NaN where steps are added, since it does not follow from theirs.
        """
        if self.rows is None:
            return values
        alone = (self.rows != 0.0).sum(axis=1) == 1
        total: FloatArray = np.tensordot(self.rows**2, values, axes=1)
        total[~alone] = np.nan
        return total
