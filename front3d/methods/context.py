"""What every method is given: one front of a cracked solid, with material, options and steps."""

from dataclasses import dataclass, field

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
    displacement : (n_steps, n_points, 3) of the steps to evaluate
    cells : what surrounds the front
    """

    solid: Solid
    model: CrackModel
    patch: Patch
    front: Front
    material: Material
    options: Options
    displacement: FloatArray
    cells: FrontCells = field(init=False)

    def __post_init__(self) -> None:
        around = cells_of_front(self.solid, self.front, self.model.same)
        object.__setattr__(self, "cells", around)
        object.__setattr__(self, "displacement", frozen_floats(self.displacement))
