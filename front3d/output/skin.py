"""`skin.vtp`: the boundary of the solid around its cracks, for pictures that are made later.

Written with the results, so that a picture needs neither the result file nor the time to read it;
the crack's opening in every step is part of it.
"""

from pathlib import Path
from typing import Any

import numpy as np

from front3d.output.scene import Box, Skin, as_surface, clipped, close_up, skin
from front3d.results import FrontResult
from front3d.solid import Solid

PART = "crack"
"""Cell array: 1 on crack faces, 0 elsewhere."""

BOX = "box"
"""Field array: lowest and highest corner of the box that the outside is cut to."""


def skin_vtp(solid: Solid, fronts: tuple[FrontResult, ...]) -> bytes:
    """The skin cut to the box that the picture of the solid shows."""
    import pyvista as pv
    from vtkmodules.vtkIOXML import vtkXMLPolyDataWriter

    positions = np.concatenate([front.positions for front in fronts])
    box = close_up(positions, solid.points)
    parts = clipped(skin(solid, fronts), box)
    pieces = []
    for number, surface in enumerate((parts.outside, parts.crack)):
        if surface.n_cells:
            piece = pv.PolyData(surface.points, surface.faces)
            for name in surface.point_data:
                if name.startswith("opening_"):
                    piece.point_data[name] = surface.point_data[name]
            piece.cell_data[PART] = np.full(piece.n_cells, number, dtype=np.uint8)
            pieces.append(piece)
    writer = vtkXMLPolyDataWriter()
    whole: Any = pv.merge(pieces, merge_points=False)
    whole.field_data[BOX] = np.concatenate(box)
    writer.SetInputData(whole)
    writer.SetDataModeToBinary()
    writer.WriteToOutputStringOn()
    writer.Write()
    return str(writer.GetOutputString()).encode()


def read_skin(path: Path) -> tuple[Skin, Box]:
    """The parts of a skin that `skin_vtp` wrote, and the box that they were cut to."""
    import pyvista as pv

    surface: Any = pv.read(path)
    crack = np.asarray(surface.cell_data[PART]) == 1
    low, high = np.asarray(surface.field_data[BOX], np.float64).reshape(2, 3)
    outside, inside = (as_surface(surface.extract_cells(cells)) for cells in (~crack, crack))
    return Skin(outside, inside), (low, high)
