"""What every method is given: one front of a cracked solid, with material, options and steps."""

from dataclasses import dataclass

from front3d.arrays import FloatArray, frozen_floats
from front3d.crack import CrackModel, Front, Patch
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
    """

    solid: Solid
    model: CrackModel
    patch: Patch
    front: Front
    material: Material
    options: Options
    displacement: FloatArray

    def __post_init__(self) -> None:
        object.__setattr__(self, "displacement", frozen_floats(self.displacement))
