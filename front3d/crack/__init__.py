"""Finding cracks and their fronts in a solid without being told where they are."""

from front3d.crack.description import describe
from front3d.crack.front import Front
from front3d.crack.model import CrackModel, find_cracks
from front3d.crack.patches import Patch

__all__ = ["CrackModel", "Front", "Patch", "describe", "find_cracks"]
