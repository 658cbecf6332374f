"""How fine each kind of mesh is, by the parameter `refine`."""

from math import ceil

from front3d.samples.cells import has_quarter_points, is_tetra
from front3d.samples.sheet import Density
from front3d.samples.tube import Tube

_BRICKS = {
    0: (3, 1, 3.0, Tube(sectors=4, rings=4)),
    1: (6, 2, 2.2, Tube(sectors=8, rings=5)),
    2: (9, 3, 1.8, Tube(sectors=8, rings=6)),
}
# Without quarter-points nothing is gained by very small cells at the front.
_TETRA = {
    0: (4, 1, 3.0, Tube(sectors=4, rings=3, power=1.0, quarter_points=False)),
    1: (8, 2, 2.5, Tube(sectors=4, rings=4, power=1.2, quarter_points=False)),
    2: (11, 2, 2.0, Tube(sectors=8, rings=5, power=1.2, quarter_points=False)),
}


def density(cells: str, refine: float, elongation: float, closed: bool) -> Density:
    """Fineness of a mesh around an ellipse.

    Parameters
    ----------
    elongation : larger over smaller semi-axis; a longer front gets more cells
    closed : the front is the whole ellipse; a shorter one affords more cells
    """
    along, layers, growth, tube = (_TETRA if is_tetra(cells) else _BRICKS)[int(refine)]
    along += ceil(0.5 * (elongation - 1.0)) + (0 if closed else 1)
    if not has_quarter_points(cells):
        tube = Tube(tube.sectors, tube.rings, tube.power, quarter_points=False)
    return Density(along, layers, growth, tube)
