"""What every method is given: one front of a cracked solid, with material, options and steps."""

from dataclasses import dataclass, field

import numpy as np

from front3d.arrays import FloatArray, frozen_floats
from front3d.crack import CrackModel, Front, Patch
from front3d.crack.cells import FrontCells, cells_of_front
from front3d.options import Options
from front3d.solid import Material, Solid


@dataclass(frozen=True, slots=True, eq=False)
class FrontContext:
    """One front and all that is known about it.

    Attributes
    ----------
    solid, model : the result, and the cracks found in it
    patch, front : the crack surface and the front on it
    material, options : elastic constants, and the user's choices
    displacement : (n_steps, n_points, 3) of the steps to compute
    rows : (n_results, n_steps) factors by which results combine steps; None: a result per step
    cells : what surrounds the front
    """

    solid: Solid
    model: CrackModel
    patch: Patch
    front: Front
    material: Material
    options: Options
    displacement: FloatArray
    rows: FloatArray | None = None
    cells: FrontCells = field(init=False)

    def __post_init__(self) -> None:
        around = cells_of_front(self.solid, self.front, self.model.same)
        object.__setattr__(self, "cells", around)
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
