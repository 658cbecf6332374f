"""`skin.vtp`: the boundary of the solid around its cracks, for pictures that are made later."""

from typing import Any

import numpy as np

from front3d.output.scene import clipped, close_up
from front3d.output.view import Skin, as_surface, skin
from front3d.results import FrontResult
from front3d.solid import Solid

PART = "crack"
"""Cell array: 1 on crack faces, 0 elsewhere."""


def skin_vtp(solid: Solid, fronts: tuple[FrontResult, ...]) -> bytes:
    """The skin cut to the box that the picture of the solid shows."""
    import pyvista as pv
    from vtkmodules.vtkIOXML import vtkXMLPolyDataWriter

    positions = np.concatenate([front.positions for front in fronts])
    parts = clipped(skin(solid, fronts), close_up(positions, solid.points))
    pieces = []
    for number, surface in enumerate((parts.outside, parts.crack)):
        if surface.n_cells:
            piece = pv.PolyData(surface.points, surface.faces)
            piece.cell_data[PART] = np.full(piece.n_cells, number, dtype=np.uint8)
            pieces.append(piece)
    writer = vtkXMLPolyDataWriter()
    writer.SetInputData(pv.merge(pieces, merge_points=False))
    writer.SetDataModeToBinary()
    writer.WriteToOutputStringOn()
    writer.Write()
    return str(writer.GetOutputString()).encode()


def read_skin(path: Any) -> Skin:
    """The parts of a skin that `skin_vtp` wrote."""
    import pyvista as pv

    surface: Any = pv.read(path)
    crack = np.asarray(surface.cell_data[PART]) == 1
    return Skin(as_surface(surface.extract_cells(~crack)), as_surface(surface.extract_cells(crack)))
