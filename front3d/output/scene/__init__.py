"""The picture of a cracked solid: what is drawn, from where it is seen, and its words."""

from front3d.output.scene.camera import View, best_view
from front3d.output.scene.drawing import add_solid
from front3d.output.scene.geometry import Box, clipped, close_up
from front3d.output.scene.quantity import Scale, colour_scale, colours
from front3d.output.scene.still import scene_png
from front3d.output.scene.surface import Skin, as_surface, skin

__all__ = [
    "Box",
    "Scale",
    "Skin",
    "View",
    "add_solid",
    "as_surface",
    "best_view",
    "clipped",
    "close_up",
    "colour_scale",
    "colours",
    "scene_png",
    "skin",
]
